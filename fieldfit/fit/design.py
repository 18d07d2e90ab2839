"""Design: one least-squares problem of readings, nuisances and what is known beforehand.

Rows are the readings in the fit, whitened, then a row for each nuisance of which something is expected, then one for
each such unknown. Nuisances are projected out of all but the last.
"""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import Array
from fieldfit.fit.least_squares import Problem
from fieldfit.fit.model import Model
from fieldfit.fit.nuisance import INDEPENDENT, Nuisance, Projection, projection
from fieldfit.fit.whitening import Whitening

__all__ = ["Design", "basis_of", "design_of"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Design:
    """The whitened rows of a fit, as functions of the unknowns (p,); picklable, fresh arrays at every call.

    ``nuisances`` (n + k, m) are whitened columns over readings and nuisance expectations, ``owed`` (k,) what these
    expect over their u; ``expected`` and ``expected_u`` (p,) are NaN for an unknown of which nothing is known.
    """

    model: Model
    measured: Array
    whitening: Whitening
    nuisances: Array
    owed: Array
    projection: Projection
    expected: Array
    expected_u: Array

    @property
    def prior(self) -> NDArray[np.intp]:
        """Numbers of the unknowns that have a row of their own."""
        return np.flatnonzero(np.isfinite(self.expected_u))

    def rows(self, values: Array) -> Array:
        """Residual rows (n + k,) of readings and nuisance expectations, nuisances not yet taken out."""
        return np.concatenate([self.whitening.apply(self.model.predicted(values) - self.measured), -self.owed])

    def evaluate(self, values: Array) -> tuple[Array, Array]:
        """Residual of the whole problem and its Jacobian."""
        predicted, slopes = self.model.evaluate(values)
        rows = np.concatenate([self.whitening.apply(predicted - self.measured), -self.owed])
        padded = np.concatenate([self.whitening.apply(slopes), np.zeros((len(self.owed), slopes.shape[1]))])
        prior = self.prior
        known = np.zeros((len(prior), slopes.shape[1]))
        known[np.arange(len(prior)), prior] = 1.0 / self.expected_u[prior]
        missed = (values[prior] - self.expected[prior]) / self.expected_u[prior]
        project = self.projection.apply
        return np.concatenate([project(rows), missed]), np.concatenate([project(padded), known])

    @property
    def is_alone(self) -> bool:
        """Whether the readings stand alone, nothing being known beforehand."""
        return not (len(self.owed) or len(self.prior))

    def scaled(self, factor: float) -> "Design":
        """The same design with the u of every reading multiplied."""
        count = len(self.measured)
        nuisances = np.concatenate([self.nuisances[:count] / factor, self.nuisances[count:]])
        return replace(
            self, whitening=self.whitening.scaled(factor), nuisances=nuisances, projection=projection(nuisances)
        )

    def followed(self, values: Array, *, alone: bool = False) -> Array:
        """Share (n,) of the variance of each white reading that the fit follows, unknowns and nuisances all free;
        ``alone``: were nothing known beforehand.
        """
        count = len(self.measured)
        whole = self.whole_jacobian(values)
        return np.asarray((basis_of(whole[:count] if alone else whole)[:count] ** 2).sum(axis=1))

    def whole_jacobian(self, values: Array) -> Array:
        """Jacobian of unknowns and nuisances together, no nuisance taken out, (n + k + prior, p + m)."""
        count = len(values)
        slopes = self.whitening.apply(self.model.evaluate(values)[1])
        rows, prior = len(slopes) + len(self.owed), self.prior
        whole = np.zeros((rows + len(prior), count + self.nuisances.shape[1]))
        whole[: len(slopes), :count] = slopes
        whole[:rows, count:] = self.nuisances
        whole[rows + np.arange(len(prior)), prior] = 1.0 / self.expected_u[prior]
        return whole

    def problem(self) -> Problem:
        """The design as a problem with the bounds of its unknowns."""
        unknowns = self.model.unknowns
        return Problem(
            evaluate=self.evaluate,
            lower=np.array([unknown.lower for unknown in unknowns]),
            upper=np.array([unknown.upper for unknown in unknowns]),
        )


def basis_of(columns: Array) -> Array:
    """Orthonormal basis (n, r) of what columns (n, k) of any size span."""
    length = np.linalg.norm(columns, axis=0)
    basis, size, _ = np.linalg.svd(columns / np.where(length > 0, length, 1.0), full_matrices=False)
    return np.asarray(basis[:, size > INDEPENDENT * size.max(initial=0.0)])


def design_of(model: Model, measured: Array, whitening: Whitening, nuisances: tuple[Nuisance, ...]) -> Design:
    """Whiten the rows of a fit; nuisance columns are those of the readings in the fit already."""
    count = len(measured)
    columns = np.array([nuisance.column for nuisance in nuisances]).reshape(len(nuisances), count).T
    known = [number for number, nuisance in enumerate(nuisances) if nuisance.is_expected]
    below = np.zeros((len(known), len(nuisances)))
    below[np.arange(len(known)), known] = [1.0 / nuisances[number].expected_u for number in known]
    weighted = np.concatenate([whitening.apply(columns), below])
    return Design(
        model=model,
        measured=measured,
        whitening=whitening,
        nuisances=weighted,
        owed=np.array([nuisances[number].expected / nuisances[number].expected_u for number in known]),
        projection=projection(weighted),
        expected=np.array([unknown.expected for unknown in model.unknowns]),
        expected_u=np.array([unknown.expected_u for unknown in model.unknowns]),
    )
