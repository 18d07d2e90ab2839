"""Profile intervals: how far one unknown can go before the best fit of all the others is worse by a given drop."""

from dataclasses import dataclass, replace
from typing import Literal, NamedTuple

import numpy as np

from fieldfit.beam import Array
from fieldfit.fit.least_squares import Minimum, Problem, descend, weights_of
from fieldfit.fit.noise import LEVEL, Noise
from fieldfit.fit.threshold import bounded_drop, near_bounds

__all__ = ["BetterMinimum", "End", "Ends", "Interval", "Profile"]

Ends = Literal["found", "bound", "flat", "expected"]
FAR = 40.0  # standard uncertainties after which a profile that has not risen is flat
FARTHEST = 1e6  # where nothing says how far is far
CLOSE = 1e-5  # of the distance: where an end is near enough
STEPS = 60
LEAST_SHARE = 1e-3  # of readings in a variance, below which it makes no difference
BETTER = 1e-3  # a fall of the sum of squares, in variances of a residual, that is no rounding
SAME = 1e-9  # of a bound, at least of one: a value so near to it is at it
OPEN = (-np.inf, np.inf)


class BetterMinimum(Exception):  # noqa: N818
    """A profile came upon ``unknowns`` (p,) that fit better than the minimum it started from."""

    def __init__(self, unknowns: Array) -> None:
        self.unknowns = unknowns
        super().__init__("a profile came upon a better minimum")


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
    """A fitted problem that can be asked how well its unknowns are known.

    The first rows of its residual are ``readings``, those after them what is known beforehand.
    """

    problem: Problem
    minimum: Minimum
    noise: Noise
    readings: int

    def resting(self, weights: Array) -> Noise:
        """The noise with the degrees of freedom of what has these ``weights`` on the rows of the residual.

        Only as far as readings determine it does it rest on their scatter (Welch-Satterthwaite; JCGM 100:2008, G.4.1).
        """
        spare, whole = self.noise.degrees_of_freedom, float((weights**2).sum())
        if spare is None or self.readings == len(weights) or not whole:
            return self.noise
        share = float((weights[: self.readings] ** 2).sum()) / whole
        return replace(self.noise, degrees_of_freedom=spare / max(share, LEAST_SHARE) ** 2)

    def interval(self, which: int, level: float = LEVEL) -> Interval:
        """Interval of unknown ``which`` on which the least sum of squares stays within reach of the minimum.

        Raises BetterMinimum where it finds that the minimum is none.
        """
        return Interval(low=self._end(which, -1.0, level), high=self._end(which, 1.0, level))

    def probability_below(self, which: int, value: float, within: tuple[float, float] = OPEN) -> float:
        """Probability that unknown ``which`` is below ``value`` (its own unit), by the signed root of the profile.

        ``within`` are bounds that the truth keeps to: it is never below the lower one.
        """
        low, high = within
        if value <= low or _at(value, low):
            return 0.0
        return 1.0 if value > high and not _at(value, high) else self._at_root(which, value)

    def probability_up_to(self, which: int, value: float, within: tuple[float, float] = OPEN) -> float:
        """Probability that unknown ``which`` is ``value`` or less, which may differ where it can stand at a bound."""
        low, high = within
        if value >= high or _at(value, high):
            return 1.0
        return 0.0 if value < low and not _at(value, low) else self._at_root(which, value)

    def _at_root(self, which: int, value: float) -> float:
        return self._noise_of(which).probability(self.signed_root(which, value))

    def _noise_of(self, which: int) -> Noise:
        return self.resting(weights_of(self.minimum.jacobian)[which])

    def signed_root(self, which: int, value: float) -> float:
        """Root of the rise at ``value``, below zero on the low side; in the unit of the weighted residual."""
        inside = float(np.clip(value, self.problem.lower[which], self.problem.upper[which]))
        rise = self._held(which, inside, self._along(which, inside)).rise
        return float(np.sign(value - self.minimum.unknowns[which])) * float(np.sqrt(max(rise, 0.0)))

    def _held(self, which: int, value: float, near: Array) -> "_Held":
        """Best fit with unknown ``which`` held at ``value``, the others looked for from ``near`` (p,)."""
        held = np.arange(len(near)) == which
        unknowns, residual, jacobian = descend(self.problem, np.where(held, value, near), held)
        # The others are at their best, so that the sum of squares changes as if they stood still.
        rise = float(residual @ residual) - self.minimum.sum_of_squares
        return _Held(unknowns, rise, 2 * float(jacobian[:, which] @ residual))

    def _along(self, which: int, value: float) -> Array:
        """Where the other unknowns would go with ``which`` if the problem were linear, (p,)."""
        best, row = self.minimum.unknowns, self.minimum.covariance[which]
        if not np.isfinite(row[which]) or row[which] == 0:
            return best
        return best + np.where(np.isfinite(row), row, 0.0) / row[which] * (value - best[which])

    def _end(self, which: int, side: float, level: float) -> End:
        """End of one side: by the usual rise first, then by that of the bounded problem where a bound is near."""
        u = np.sqrt(np.diag(self.minimum.covariance) * self.noise.variance)
        noise = self._noise_of(which)
        drop = noise.drop(level)
        end = self._end_at(which, side, drop, float(np.sqrt(drop * self.minimum.covariance[which, which])))
        bounds = self.problem.lower, self.problem.upper
        near = near_bounds(end.unknowns, u, *bounds) | near_bounds(self.minimum.unknowns, u, *bounds)
        if end.ends == "flat" or not near.any() or not np.isfinite(u).all():
            return end
        slopes = self.problem.evaluate(end.unknowns)[1] / np.sqrt(self.noise.variance)
        triangle = np.asarray(np.linalg.qr(slopes, mode="r"))
        truth = end.unknowns, bounds
        minded = self.noise.variance * bounded_drop(triangle, *truth, which, level, noise.degrees_of_freedom)
        away = abs(end.value - float(self.minimum.unknowns[which])) * float(np.sqrt(minded / drop))
        return replace(self._end_at(which, side, minded, away), bounded=True)

    def _end_at(self, which: int, side: float, drop: float, away: float) -> End:
        """Where the profile has risen by ``drop`` on one side, looked for from a distance ``away`` on.

        Newton steps on the root of the rise, which is nearly a straight line of the distance, kept between the
        nearest distances known to fall short and to overshoot.
        """
        best = float(self.minimum.unknowns[which])
        bound = float((self.problem.lower if side < 0 else self.problem.upper)[which])
        room, target = abs(bound - best), float(np.sqrt(drop))
        known = np.isfinite(away) and away > 0
        far = FAR * away if known else FARTHEST
        distance, short, over = min(room, away if known else 1.0), 0.0, np.inf
        held = _Held(self.minimum.unknowns, 0.0, 0.0)
        for _ in range(STEPS):
            value = best + side * distance
            held = self._held(which, value, self._along(which, value) if known else held.unknowns)
            if held.rise < -BETTER * self.noise.variance:
                raise BetterMinimum(held.unknowns)
            root = float(np.sqrt(max(held.rise, 0.0)))
            if abs(root - target) <= CLOSE * target or over - short <= CLOSE * distance:
                return End(value=value, ends="found", unknowns=held.unknowns, drop=drop)
            if root < target and distance >= min(room, far):
                return End(value=bound, ends="bound" if distance >= room else "flat", unknowns=held.unknowns, drop=drop)
            short, over = (distance, over) if root < target else (short, distance)
            slope = side * held.slope / (2 * root) if root > 0 else 0.0
            further = distance + (target - root) / slope if slope > 0 else np.inf
            if not short < further < over:
                further = (short + over) / 2 if np.isfinite(over) else 4 * distance
            distance = min(further, room, max(far, short))
        return End(value=bound, ends="flat", unknowns=held.unknowns, drop=drop)


def _at(value: float, bound: float) -> bool:
    return bool(abs(value - bound) <= SAME * max(1.0, abs(bound))) if np.isfinite(bound) else value == bound


class _Held(NamedTuple):
    """A best fit with one unknown held: all unknowns (p,), the rise of the sum of squares and its slope."""

    unknowns: Array
    rise: float
    slope: float
