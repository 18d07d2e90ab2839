"""Actions: the shear and moment that the loads of a panel cause in it by statics alone, and imposed curvature."""

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam.loads import Loads
from fieldfit.beam.member import Array, Flags

__all__ = ["imposed_curvature", "intensity", "load_actions"]


def load_actions(loads: Loads, start: Array, x: Array, left: Flags) -> tuple[Array, Array]:
    """Shear (N) and moment (N m) at x (M, X) from the loads between ``start`` (M, X) and x alone, (M, X, C).

    A load that stands at x counts, unless it is read just ``left`` (M, X) of it.
    """
    start, x, left = start[..., None], x[..., None], left[..., None]
    lever, counts = _arm(loads.force_at, start, x, left)
    push = loads.force[..., None] * _by_case(loads.force_case, loads.cases)
    shear, moment = counts @ push, lever @ push
    if loads.couple.shape[1]:
        turn = loads.couple[..., None] * _by_case(loads.couple_case, loads.cases)
        moment -= _arm(loads.couple_at, start, x, left)[1] @ turn
    if loads.spread_from.shape[1]:
        by_case = _by_case(loads.spread_case, loads.cases)
        spread_shear, spread_moment = _spread_actions(loads, start, x)
        shear, moment = shear + spread_shear @ by_case, moment + spread_moment @ by_case
    return shear, moment


def _arm(at: Array, start: Array, x: Array, left: Flags) -> tuple[Array, Array]:
    """Distance (m) from each load to x, and whether it acts there (M, X, loads)."""
    distance = x - at[:, None]
    acts = (at[:, None] >= start) & ((distance > 0) | (~left & (distance == 0)))
    return distance * acts, acts.astype(float)


def _spread_actions(loads: Loads, start: Array, x: Array) -> tuple[Array, Array]:
    """Shear (N) and moment (N m) at x from the part of each spread load between ``start`` and x (M, X, loads)."""
    first, last, gradient = loads.spread_from[:, None], loads.spread_to[:, None], _gradient(loads)
    begin = np.maximum(first, start)
    run = np.maximum(np.minimum(last, x) - begin, 0.0)
    intensity = loads.spread_start[:, None] + gradient * (begin - first)
    lever = x - begin
    moment = run * (intensity * (lever - run / 2) + gradient * run * (lever / 2 - run / 3))
    return run * (intensity + gradient * run / 2), moment


def intensity(loads: Loads, first: Array, second: Array) -> tuple[Array, Array]:
    """Intensity of spread loads (N/m) at the left end of each cell and its gradient (N/m2), (M, E-1, C)."""
    middle = ((first + second) / 2)[..., None]
    gradient = _gradient(loads)
    on = (middle > loads.spread_from[:, None]) & (middle < loads.spread_to[:, None])
    start = loads.spread_start[:, None] + gradient * (first[..., None] - loads.spread_from[:, None])
    by_case = _by_case(loads.spread_case, loads.cases)
    return (on * start) @ by_case, (on * gradient) @ by_case


def _gradient(loads: Loads) -> Array:
    run = loads.spread_to - loads.spread_from
    return ((loads.spread_end - loads.spread_start) / np.where(run > 0, run, 1.0))[:, None]


def imposed_curvature(loads: Loads, x: Array, left: Flags) -> Array:
    """Imposed curvature (1/m) at x (M, X) in each case, (M, X, C)."""
    start, end, x, left = loads.bend_from[:, None], loads.bend_to[:, None], x[..., None], left[..., None]
    on = np.where(left, (start < x) & (x <= end), (start <= x) & (x < end))
    imposed: Array = (on * loads.bend[:, None]) @ _by_case(loads.bend_case, loads.cases)
    return imposed


def _by_case(case: NDArray[np.intp], cases: int) -> Array:
    of_case: Array = (case[..., None] == np.arange(cases)).astype(float)
    return of_case
