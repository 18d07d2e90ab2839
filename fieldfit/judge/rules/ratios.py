"""Ratios of deflections that share their zero reading: value, interval, and the probability of meeting a limit.

Numerator T and denominator B are functions of the same readings, linear or nearly so, and their variances and
covariance come from those readings (JCGM 100:2008, F.1.2.3, equation F-2). Then

    u² = (Var T - 2 R Cov + R² Var B) / B²                  the usual propagation (5.1.2)
    P(R <= c) = Phi(-(T - c B) / sqrt(Var T - 2 c Cov + c² Var B))     as T - c B is Gaussian and B > 0

and the interval holds every c that the second keeps (Fieller 1954). Where B is within two of its own u of nothing, the
ratio means nothing: ``below measurable range``. All arrays run over gauges (G,).
"""

from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array, Flags
from fieldfit.fit import Noise

__all__ = ["CLEAR", "Ratio", "normal"]

CLEAR = 2.0  # a denominator nearer to nothing than so many of its u carries no ratio
Moments = tuple[Array, Array]  # values (G,) and their gradient by stage (G, S)


@dataclass(frozen=True, slots=True, kw_only=True)
class Ratio:
    """``top`` over ``bottom`` (SI), with the variances of both and their covariance; NaN where a reading is missing."""

    top: Array
    bottom: Array
    top_variance: Array
    bottom_variance: Array
    covariance: Array
    noise: Noise | None = None

    @property
    def value(self) -> Array:
        """The ratio."""
        with np.errstate(divide="ignore", invalid="ignore"):
            return self.top / self.bottom

    @property
    def u(self) -> Array:
        """Standard uncertainty by linear propagation."""
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.sqrt(self._spread(self.value)) / np.abs(self.bottom)

    @property
    def is_measurable(self) -> Flags:
        """Whether the denominator is clear of nothing; one without any uncertainty is."""
        clear: Flags = ~(np.abs(self.bottom) <= CLEAR * np.sqrt(np.nan_to_num(self.bottom_variance)))
        return clear & (self.bottom != 0)

    def below(self, limit: Array | float) -> Array:
        """Probability that the true ratio is at most ``limit``; NaN where no uncertainty is known."""
        return self._chance(np.asarray(limit * self.bottom - self.top) * np.sign(self.bottom), limit)

    def top_below(self, limit: Array | float) -> Array:
        """Probability that the true top is at most ``limit`` of the true bottom, which need not be clear of nothing."""
        return self._chance(np.asarray(limit * self.bottom - self.top), limit)

    def clearly_above(self, limit: Array | float) -> Flags:
        """Where the top is clear of ``limit`` of the bottom, whether or not that is clear of nothing."""
        clear: Flags = self.top - limit * self.bottom > CLEAR * np.sqrt(self._spread(limit))
        return clear

    def _chance(self, away: Array, limit: Array | float) -> Array:
        """Probability of less than so far above T - limit B."""
        spread = np.sqrt(self._spread(limit))
        with np.errstate(divide="ignore", invalid="ignore"):
            root = np.where(spread > 0, away / spread, np.where(spread == 0, np.copysign(np.inf, away), np.nan))
        return np.array([np.nan if np.isnan(one) else normal(self.noise, float(one)) for one in np.atleast_1d(root)])

    def interval(self) -> tuple[Array, Array]:
        """Ends of the 95 % interval; infinite where it is open, NaN where no uncertainty is known."""
        reach = 1.959963984540054 if self.noise is None else float(np.sqrt(self.noise.drop() / self.noise.variance))
        square = reach**2
        a = self.bottom**2 - square * self.bottom_variance
        b = self.top * self.bottom - square * self.covariance
        c = self.top**2 - square * self.top_variance
        with np.errstate(divide="ignore", invalid="ignore"):
            half = np.sqrt(np.maximum(b**2 - a * c, 0.0)) / a
            low, high = b / a - half, b / a + half
        bounded = a > 0
        unknown = np.isnan(a + b + c)
        low = np.where(unknown, np.nan, np.where(bounded, low, -np.inf))
        return low, np.where(unknown, np.nan, np.where(bounded, high, np.inf))

    def _spread(self, ratio: Array | float) -> Array:
        """Variance of T - R B."""
        spread: Array = self.top_variance - 2 * ratio * self.covariance + ratio**2 * self.bottom_variance
        return np.where(spread < 0, 0.0, spread)


def normal(noise: Noise | None, root: float) -> float:
    """Probability below so many standard uncertainties; Student's where the uncertainty is itself from scatter."""
    if noise is None:
        noise = Noise(source="given", variance=1.0, degrees_of_freedom=None, chi_square=None, spare=0, p=None)
    return noise.probability(root * float(np.sqrt(noise.variance)))
