"""Stations: a member solved along its whole length, at every place where its moment may peak."""

import numpy as np

from fieldfit.beam import Array, Flags, Loads, Members, Response, Stiffness, combine, integrate, solve

__all__ = ["solved_along", "solved_at", "stations_along"]

GRID = 201  # stations between which a largest moment may hide, beside those of the loads


def stations_along(member: Members, *loads: Loads) -> tuple[Array, Flags]:
    """Stations (S,), m, where the moment under any of the loads may peak, each from its left and from its right."""
    length = float(member.length[0])
    places = [place for one in loads for place in (one.force_at[0], one.couple_at[0])]
    at = np.unique(np.concatenate([np.linspace(0.0, length, GRID), member.support_at[0], *places]))
    at = at[(at >= 0) & (at <= length)]
    return np.repeat(at, 2), np.tile([True, False], len(at))


def solved_at(member: Members, loads: Loads, factors: Array, stiffness: Stiffness, at: Array, left: Flags) -> Response:
    """The response at stations (S,), from their left or right, to so much of the loads (T, C)."""
    return solve(integrate(member, combine(loads, factors[None]), at[None], left[None]), stiffness)


def solved_along(member: Members, loads: Loads, factors: Array, stiffness: Stiffness) -> tuple[Array, Response]:
    """Stations (S,), m, each from its left and its right, and the response there to so much of the loads (T, C)."""
    at, left = stations_along(member, loads)
    return at, solved_at(member, loads, factors, stiffness, at, left)
