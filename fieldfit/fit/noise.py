"""Noise: how sure the readings are of themselves, and what that makes of a rise in the sum of squares."""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from scipy import special

from fieldfit.observe import Subject
from fieldfit.observe.levelling import Misfit

__all__ = ["LEVEL", "ROUNDING", "Noise", "Source", "noise_of", "p_of", "sights_of", "source_of"]

LEVEL = 0.95  # of every interval
ROUNDING = 1e-20  # share of the sum of squares of the readings that is rounding
NO_SIGHTS = Misfit()
Source = Literal["given", "scatter", "resolution"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Noise:
    """Where the uncertainty of the readings comes from, and what the fit says of it.

    ``variance`` is that of a weighted residual (1 where u is believed, or was found before the fit and stands in its
    ``factor`` on the u of readings) and ``degrees_of_freedom`` what it rests on, None where it is not estimated.
    ``chi_square`` is what the fit leaves, with ``spare`` degrees of freedom, and ``sights`` what the levelling behind
    its heights does. ``p`` tests the model by both; it and ``chi_square`` are None where u is from scatter.
    """

    source: Source
    variance: float
    degrees_of_freedom: float | None
    chi_square: float | None
    spare: int
    p: float | None
    factor: float = 1.0
    sights: Misfit = NO_SIGHTS

    @property
    def raised(self) -> float:
        """What the u of a reading, 1 where the book gives none, is multiplied with in all."""
        return self.factor * float(np.sqrt(self.variance))

    def drop(self, level: float = LEVEL) -> float:
        """Rise of the sum of squares at which a profile interval of this level ends."""
        share, spare = (1 + level) / 2, self.degrees_of_freedom
        return self.variance * float(special.ndtri(share) if spare is None else special.stdtrit(spare, share)) ** 2

    def probability(self, signed_root: float) -> float:
        """Probability that the truth lies below a value whose profile has risen by the square of this root."""
        root, spare = signed_root / np.sqrt(self.variance), self.degrees_of_freedom
        return float(special.ndtr(root) if spare is None else special.stdtr(spare, root))

    @property
    def tested(self) -> Misfit | None:
        """What the model is tested by: the fit and the sights behind it; None where u is from scatter."""
        return None if self.chi_square is None else Misfit(self.chi_square, self.spare) + self.sights

    @property
    def explains_readings(self) -> bool | None:
        """Whether the model explains the readings at their stated uncertainty (p at least 0.01)."""
        return None if self.p is None else self.p >= 0.01


def source_of(subject: Subject) -> Source:
    """Where the uncertainty of a subject's readings comes from."""
    seen = subject.observations
    origins = set(seen.u_from[seen.used_for == "fit"])
    if "none" in origins:
        return "scatter"
    return "given" if "given" in origins else "resolution"


def sights_of(subject: Subject) -> Misfit:
    """What the sights of the level book leave in the parts of the net that hold heights in the fit.

    Sights adjusted first, and their heights then fitted with their covariance, leave together what one least squares
    of sights and model would. Members that share a part each count all of it: each rests on those sights.
    """
    found, seen = subject.levelled, subject.observations
    if found is None:
        return NO_SIGHTS
    fitted = seen.together[seen.used_for[seen.together] == "fit"]
    places = {(subject.stage_name(seen.stage[row]), seen.gauge[row]) for row in fitted}
    own = found.heights[found.heights["member"] == subject.name]
    return found.misfit_behind(own[[place in places for place in zip(own["stage"], own["point"], strict=True)]])


def noise_of(
    source: Source, sum_of_squares: float, spare: int, size: float, sights: Misfit = NO_SIGHTS
) -> Noise | None:
    """Judge the scatter left by a fit with ``spare`` degrees of freedom; None where nothing can be said.

    ``size`` is the sum of squares of the weighted readings themselves: readings that agree with the model to their
    last digit have no scatter that could stand in for an uncertainty. ``sights`` is what the levelling behind them
    leaves.

    Resolution alone is a floor: scatter may raise the uncertainty above it, never lower it.
    """
    if source == "scatter" and (spare < 1 or sum_of_squares <= ROUNDING * size):
        return None
    scatter = sum_of_squares / spare if spare else 0.0
    raised = source == "scatter" or (source == "resolution" and scatter > 1.0)
    return Noise(
        source=source,
        variance=scatter if raised else 1.0,
        degrees_of_freedom=spare if raised else None,
        chi_square=None if source == "scatter" else sum_of_squares,
        spare=spare,
        p=None if raised else p_of(sum_of_squares + sights.chi_square, spare + sights.spare),
        sights=sights,
    )


def p_of(chi_square: float, spare: int) -> float | None:
    """Probability that sound readings stray as far or farther; None where none is left over to test the model by."""
    return float(special.chdtrc(spare, chi_square)) if spare > 0 else None
