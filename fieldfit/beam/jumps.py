"""Jumps: where a reading needs a side, because what it reads is not the same just left and just right of it."""

from typing import NamedTuple

import numpy as np

from fieldfit.beam.loads import Loads
from fieldfit.beam.member import SAME_PLACE, Array, Flags, Members

__all__ = ["Jumps", "jumps"]


class Jumps(NamedTuple):
    """Whether ``curvature`` and ``rotation`` jump at stations, (M, S) each."""

    curvature: Flags
    rotation: Flags


def jumps(members: Members, loads: Loads, at: Array) -> Jumps:
    """Where stations ``at`` (M, S), m, stand on a jump; at the two ends nothing does, they are read from inside.

    Curvature jumps at couples, restrained supports, edges of zones (also of equal EI on record: their ratios may
    part) and of imposed curvature; rotation at hinges. A place counts for every load case. A support whose
    rotation is an unknown of a fit should be recorded with a fixity above zero to count.
    """
    slack = SAME_PLACE * members.length[:, None]
    inside = (at > slack) & (at < members.length[:, None] - slack)
    restrained = np.where(members.support_fixity > 0, members.support_at, np.nan)
    edges = [loads.couple_at, restrained, members.zone_from, members.zone_to, loads.bend_from, loads.bend_to]
    kinked = _stands_on(at, np.concatenate(edges, axis=1), slack)
    return Jumps(inside & kinked, inside & _stands_on(at, members.hinge_at, slack))


def _stands_on(at: Array, places: Array, slack: Array) -> Flags:
    near: Flags = np.abs(at[:, :, None] - places[:, None, :]) <= slack[..., None]
    return np.asarray(near.any(axis=2))
