"""Stations: a member solved along its whole length, at every place where its moment may peak."""

import numpy as np

from fieldfit.beam import Array, Loads, Members, Response, Stiffness, combine, integrate, solve

__all__ = ["solved_along"]

GRID = 201  # stations between which a largest moment may hide, beside those of the loads


def solved_along(member: Members, loads: Loads, factors: Array, stiffness: Stiffness) -> tuple[Array, Response]:
    """Stations (S,), m, each from its left and its right, and the response there to so much of the loads (T, C)."""
    places = [np.linspace(0.0, float(member.length[0]), GRID), loads.force_at[0], loads.couple_at[0]]
    at = np.unique(np.concatenate([*places, member.support_at[0]]))
    at, left = np.repeat(at, 2), np.tile([True, False], len(at))
    return at, solve(integrate(member, combine(loads, factors[None]), at[None], left[None]), stiffness)
