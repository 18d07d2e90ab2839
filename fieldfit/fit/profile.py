"""Profile intervals: how far one unknown can go before the best fit of all the others is worse by a given drop."""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from scipy.optimize import brentq, least_squares

from fieldfit.beam import Array
from fieldfit.fit.least_squares import Minimum, Problem

__all__ = ["End", "Interval", "profile", "profiled_drop"]

Ends = Literal["found", "bound", "flat", "expected"]
FAR = 40.0  # standard uncertainties after which a profile that has not risen is flat


@dataclass(frozen=True, slots=True)
class End:
    """One side of an interval: where it ends and why."""

    value: float
    ends: Ends


@dataclass(frozen=True, slots=True)
class Interval:
    """Both sides of a profile interval, in the unit of the unknown."""

    low: End
    high: End


def profile(problem: Problem, minimum: Minimum, which: int, drop: float) -> Interval:
    """Interval of unknown ``which`` on which the least sum of squares stays within ``drop`` of the minimum."""
    return Interval(*(_end(problem, minimum, which, drop, side) for side in (-1.0, 1.0)))


def profiled_drop(problem: Problem, minimum: Minimum, which: int) -> Callable[[float], float]:
    """How much the least sum of squares rises when unknown ``which`` is held at a value."""
    others = np.arange(len(minimum.unknowns)) != which
    last = minimum.unknowns.copy()

    def rise(value: float) -> float:
        last[which] = value
        if others.any():
            last[others] = _refit(problem, last.copy(), others)
        residual = problem.residual(last.copy())
        return float(residual @ residual) - minimum.sum_of_squares

    return rise


def _refit(problem: Problem, start: Array, others: Array) -> Array:
    """Best values of the other unknowns, the one held."""

    def full(free: Array) -> Array:
        values = start.copy()
        values[others] = free
        return values

    lower, upper = problem.lower[others], problem.upper[others]
    inside = np.clip(start[others], lower, upper)
    fitted = least_squares(
        lambda free: problem.residual(full(free)),
        inside,
        jac=lambda free: problem.jacobian(full(free))[:, others],
        bounds=(lower, upper),
        x_scale="jac",
    )
    return np.asarray(fitted.x)


def _end(problem: Problem, minimum: Minimum, which: int, drop: float, side: float) -> End:
    best = float(minimum.unknowns[which])
    bound = float((problem.lower if side < 0 else problem.upper)[which])
    u = float(np.sqrt(minimum.covariance[which, which]))
    room = abs(bound - best)
    if room == 0.0:
        return End(bound, "bound")
    rise = profiled_drop(problem, minimum, which)
    step = min(room, np.sqrt(drop) * u) if np.isfinite(u) else room
    inner, outer = 0.0, step
    while rise(best + side * outer) < drop:
        if outer >= room:
            return End(bound, "bound")
        if np.isfinite(u) and outer > FAR * u:
            return End(bound, "flat")
        inner, outer = outer, min(1.5 * outer, room)
    found = brentq(lambda away: _signed_root(rise(best + side * away)) - np.sqrt(drop), inner, outer, rtol=1e-10)
    return End(best + side * float(found), "found")


def _signed_root(value: float) -> float:
    """Square root that keeps the sign: nearly a straight line of the distance, so roots are found in few steps."""
    return float(np.sign(value) * np.sqrt(abs(value)))


def scaled(interval: Interval, change: Callable[[float], float]) -> Interval:
    """The same interval in another unit."""
    return Interval(*(replace(end, value=change(end.value)) for end in (interval.low, interval.high)))
