"""Weighing: what readings whose u is not given count beside what is known beforehand.

By themselves such readings weigh each other rightly whatever their common u is, and their scatter tells it after the
fit. Beside a load of known uncertainty, an expected EI or a gauge's scale it has to be known in the fit itself. It is
the u at which the readings leave just the scatter that it foretells, RSS = u² (n - γ), with γ what the fit follows of
the n readings: there the restricted likelihood is stationary (MacKay, 1992, Bayesian interpolation; from memory).
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array
from fieldfit.fit.design import Design
from fieldfit.fit.least_squares import Minimum, best_of, descend
from fieldfit.fit.noise import ROUNDING, Noise, Source, p_of

__all__ = ["Weight", "noise_beside", "weight_of"]

LIGHT = 1e-6  # of the size of readings: the u to begin with, at which they outweigh all else
ROUNDS = 100
SETTLED = 1e-6  # change of u, as a share


@dataclass(frozen=True, slots=True)
class Weight:
    """The factor on the u of readings that their scatter asks for, and the degrees of freedom it rests on; these are
    None where the u is believed.
    """

    factor: float
    degrees_of_freedom: float | None


def weight_of(design: Design, source: Source, points: Sequence[Array]) -> Weight | None:
    """What the scatter of readings says of their u, looked for from starts (p,); None where it says nothing.

    It says nothing where readings are no more than what they alone determine, or agree with the model to their last
    digit; where they have a resolution, that is then believed.
    """
    read = design.whitening.apply(design.measured)
    size, floor = float(read @ read), 1.0 if source == "resolution" else 0.0
    silent = Weight(1.0, None) if floor else None
    factor = max(floor, LIGHT * float(np.sqrt(size / len(read))))
    if not factor:
        return silent
    values = best_of(design.scaled(factor).problem(), points)
    if len(read) - float(design.followed(values, alone=True).sum()) < 0.5:
        return silent
    for _ in range(ROUNDS):
        weighed = design.scaled(factor)
        values, residual, _jacobian = descend(weighed.problem(), values)
        left = factor**2 * float((residual[: len(read)] ** 2).sum())
        if left <= ROUNDING * size:
            return silent
        spare = len(read) - float(weighed.followed(values).sum())
        last, factor = factor, max(floor, float(np.sqrt(left / spare)))
        if abs(factor - last) <= SETTLED * last:
            break
    return silent if factor == floor else Weight(factor, spare)


def noise_beside(weight: Weight, source: Source, minimum: Minimum, readings: int, spare: int) -> Noise:
    """Judge what a fit leaves of so many ``readings``, so weighed, with ``spare`` degrees of freedom in all."""
    squares, rests_on = minimum.residual**2, weight.degrees_of_freedom
    stated = weight.factor**2 * float(squares[:readings].sum()) + float(squares[readings:].sum())
    return Noise(
        source=source,
        variance=1.0,
        degrees_of_freedom=rests_on,
        chi_square=None if source == "scatter" else stated,
        spare=spare,
        p=p_of(stated, spare) if rests_on is None else None,
        factor=weight.factor,
    )
