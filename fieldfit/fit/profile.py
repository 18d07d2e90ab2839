"""Profile intervals: how far one unknown can go before the best fit of all the others is worse by a given drop."""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from scipy.optimize import brentq, least_squares

from fieldfit.beam import Array
from fieldfit.fit.least_squares import Minimum, Problem
from fieldfit.fit.noise import LEVEL, Noise
from fieldfit.fit.threshold import bounded_drop, near_bounds

__all__ = ["End", "Ends", "Interval", "Profile"]

Ends = Literal["found", "bound", "flat", "expected"]
FAR = 40.0  # standard uncertainties after which a profile that has not risen is flat
CLOSE = 1e-6  # of a standard uncertainty: where an end is near enough


@dataclass(frozen=True, slots=True, kw_only=True)
class End:
    """One side of an interval: its value, why it ends there, all unknowns (p,) there, and the rise that ended it.

    ``bounded`` says that the rise was taken from the bounded problem, a bound being near.
    """

    value: float
    ends: Ends
    unknowns: Array
    drop: float
    bounded: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Interval:
    """Both sides of a profile interval, in the unit of the unknown."""

    low: End
    high: End


@dataclass(frozen=True, slots=True, kw_only=True)
class Profile:
    """A fitted problem that can be asked how well its unknowns are known."""

    problem: Problem
    minimum: Minimum
    noise: Noise

    def interval(self, which: int, level: float = LEVEL) -> Interval:
        """Interval of unknown ``which`` on which the least sum of squares stays within reach of the minimum."""
        return Interval(low=self._end(which, -1.0, level), high=self._end(which, 1.0, level))

    def probability_below(self, which: int, value: float) -> float:
        """Probability that unknown ``which`` is below ``value`` (its own unit), by the signed root of the profile."""
        return self.noise.probability(self.signed_root(which, value))

    def signed_root(self, which: int, value: float) -> float:
        """Root of the rise at ``value``, below zero on the low side; in the unit of the weighted residual."""
        inside = float(np.clip(value, self.problem.lower[which], self.problem.upper[which]))
        rise, _ = self.rise(which, inside, self.minimum.unknowns)
        return float(np.sign(value - self.minimum.unknowns[which])) * float(np.sqrt(max(rise, 0.0)))

    def rise(self, which: int, value: float, near: Array) -> tuple[float, Array]:
        """Rise of the least sum of squares when unknown ``which`` is held at ``value``, and all unknowns there.

        The others start from where they are in ``near`` (p,).
        """
        unknowns = near.copy()
        unknowns[which] = value
        others = np.arange(len(unknowns)) != which
        if others.any():
            unknowns = _refit(self.problem, unknowns, others)
        residual = self.problem.residual(unknowns)
        return float(residual @ residual) - self.minimum.sum_of_squares, unknowns

    def _end(self, which: int, side: float, level: float) -> End:
        """End of one side: by the usual rise first, then by that of the bounded problem where a bound is near."""
        end = self._end_at(which, side, self.noise.drop(level))
        u = np.sqrt(np.diag(self.minimum.covariance) * self.noise.variance)
        bounds = self.problem.lower, self.problem.upper
        near = near_bounds(end.unknowns, u, *bounds) | near_bounds(self.minimum.unknowns, u, *bounds)
        if end.ends == "flat" or not near.any() or not np.isfinite(u).all():
            return end
        slopes = self.problem.jacobian(end.unknowns) / np.sqrt(self.noise.variance)
        triangle = np.asarray(np.linalg.qr(slopes, mode="r"))
        drop = self.noise.variance * bounded_drop(
            triangle, end.unknowns, bounds, which, level, self.noise.degrees_of_freedom
        )
        return self._end_at(which, side, drop, bounded=True)

    def _end_at(self, which: int, side: float, drop: float, bounded: bool = False) -> End:
        best = self.minimum.unknowns
        bound = float((self.problem.lower if side < 0 else self.problem.upper)[which])
        room = abs(bound - float(best[which]))
        u = float(np.sqrt(self.minimum.covariance[which, which]))
        target = float(np.sqrt(drop))
        reached = {"at": best}

        def short(away: float) -> float:
            rise, reached["at"] = self.rise(which, float(best[which]) + side * away, reached["at"])
            return float(np.sign(rise) * np.sqrt(abs(rise))) - target

        inner, outer = 0.0, min(room, target * u) if np.isfinite(target * u) else min(room, 1.0)
        while room > 0 and short(outer) < 0:
            if outer >= room or (np.isfinite(u) and outer > FAR * u) or outer > 1e6:
                why: Ends = "bound" if outer >= room else "flat"
                return End(value=bound, ends=why, unknowns=reached["at"], drop=drop, bounded=bounded)
            inner, outer = outer, min(1.5 * outer, room)
        if room == 0:
            return End(value=bound, ends="bound", unknowns=best, drop=drop, bounded=bounded)
        away = float(brentq(short, inner, outer, xtol=CLOSE * outer, rtol=1e-9)) if outer > 0 else 0.0
        value = float(best[which]) + side * away
        return End(value=value, ends="found", unknowns=reached["at"], drop=drop, bounded=bounded)


def _refit(problem: Problem, start: Array, others: Array) -> Array:
    """All unknowns with the others at their best, the one held."""
    lower, upper = problem.lower[others], problem.upper[others]

    def full(free: Array) -> Array:
        values = start.copy()
        values[others] = free
        return values

    fitted = least_squares(
        lambda free: problem.residual(full(free)),
        np.clip(start[others], lower, upper),
        jac=lambda free: problem.jacobian(full(free))[:, others],
        bounds=(lower, upper),
        method="dogbox",
        x_scale="jac",
        ftol=1e-10,
        xtol=1e-10,
        gtol=1e-10,
    )
    return full(np.clip(fitted.x, lower, upper))
