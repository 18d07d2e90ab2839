"""Actions: the shear and moment that the loads of a panel cause in it by statics alone, and imposed curvature.

Small axes stand first here, cases (C) and loads (L), so that arithmetic runs along members and places (M, X).
"""

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam.loads import Loads
from fieldfit.beam.member import Array, Flags

__all__ = ["imposed_curvature", "intensity", "load_actions"]


def load_actions(loads: Loads, start: Array, x: Array, left: Flags) -> tuple[Array, Array]:
    """Shear (N) and moment (N m) at x (M, X) from the loads between ``start`` (M, X) and x alone, (C, M, X).

    A load that stands at x counts, unless it is read just ``left`` (M, X) of it.
    """
    shear, moment = np.zeros((2, loads.cases, *x.shape))
    if loads.force.shape[1]:
        push = _by_case(loads.force, loads.force_case, loads.cases)
        lever, counts = _arm(loads.force_at, start, x, left)
        shear += _summed(push, counts)
        moment += _summed(push, lever)
    if loads.couple.shape[1]:
        turn = _by_case(loads.couple, loads.couple_case, loads.cases)
        moment -= _summed(turn, _arm(loads.couple_at, start, x, left)[1])
    if loads.spread_from.shape[1]:
        by_case = _by_case(np.ones_like(loads.spread_from), loads.spread_case, loads.cases)
        spread_shear, spread_moment = _spread_actions(loads, start, x)
        shear += _summed(by_case, spread_shear)
        moment += _summed(by_case, spread_moment)
    return shear, moment


def _arm(at: Array, start: Array, x: Array, left: Flags) -> tuple[Array, Array]:
    """Distance (m) from each load to x, and whether it acts there (L, M, X)."""
    at = at.T[..., None]
    distance = x - at
    acts = (at >= start) & ((distance > 0) | (~left & (distance == 0)))
    return distance * acts, acts.astype(float)


def _spread_actions(loads: Loads, start: Array, x: Array) -> tuple[Array, Array]:
    """Shear (N) and moment (N m) at x from the part of each spread load between ``start`` and x (L, M, X)."""
    first, last, gradient = loads.spread_from.T[..., None], loads.spread_to.T[..., None], _gradient(loads)
    begin = np.maximum(first, start)
    run = np.maximum(np.minimum(last, x) - begin, 0.0)
    intensity, rise = loads.spread_start.T[..., None] + gradient * (begin - first), gradient * run
    lever = x - begin
    moment = run * (lever * (intensity + rise / 2) - run * (intensity / 2 + rise / 3))
    return run * (intensity + rise / 2), moment


def intensity(loads: Loads, first: Array, second: Array) -> tuple[Array, Array]:
    """Intensity of spread loads (N/m) at the left end of each cell (M, X) and its gradient (N/m2), (C, M, X)."""
    begin, end, gradient = loads.spread_from.T[..., None], loads.spread_to.T[..., None], _gradient(loads)
    middle = (first + second) / 2
    on = (middle > begin) & (middle < end)
    start = loads.spread_start.T[..., None] + gradient * (first - begin)
    by_case = _by_case(np.ones_like(loads.spread_from), loads.spread_case, loads.cases)
    return _summed(by_case, on * start), _summed(by_case, on * gradient)


def _gradient(loads: Loads) -> Array:
    run = loads.spread_to - loads.spread_from
    gradient: Array = (loads.spread_end - loads.spread_start) / np.where(run > 0, run, 1.0)
    return gradient.T[..., None]


def imposed_curvature(loads: Loads, x: Array, left: Flags) -> Array:
    """Imposed curvature (1/m) at x (M, X) in each case, (C, M, X)."""
    if not loads.bend.shape[1]:
        return np.zeros((loads.cases, *x.shape))
    start, end = loads.bend_from.T[..., None], loads.bend_to.T[..., None]
    on = np.where(left, (start < x) & (x <= end), (start <= x) & (x < end))
    return _summed(_by_case(loads.bend, loads.bend_case, loads.cases), on)


def _by_case(size: Array, case: NDArray[np.intp], cases: int) -> Array:
    """Sizes of loads (M, L) laid out by their case, (C, L, M)."""
    by_case: Array = size.T * (np.arange(cases)[:, None, None] == case.T)
    return by_case


def _summed(by_case: Array, per_load: Array | Flags) -> Array:
    """Sum over the loads of what each does for one of its size (L, M, X), times its size in each case, (C, M, X)."""
    return np.einsum("clm,lmx->cmx", by_case, per_load)
