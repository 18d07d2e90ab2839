"""Whitening: readings turned into rows of unit variance that know nothing of each other.

Most readings are independent, and each is divided by its u. Those that share their errors, as heights from one
levelling net do, are multiplied by the inverse of the Cholesky factor of their covariance (generalised least squares;
Aitken, 1936).
"""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import solve_triangular

from fieldfit.beam import Array, Flags
from fieldfit.errors import ModelError
from fieldfit.observe import Observations

__all__ = ["Whitening", "whitening_of"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Whitening:
    """Standard uncertainties ``u`` (n,) of readings; those at ``together`` (k,) have covariance factor @ factor.T.

    ``factor`` (k, k) is lower triangular.
    """

    u: Array
    together: NDArray[np.intp]
    factor: Array

    def scaled(self, factor: float) -> "Whitening":
        """Whitening of the same readings with every u multiplied."""
        return replace(self, u=self.u * factor, factor=self.factor * factor)

    def apply(self, rows: Array) -> Array:
        """Whiten rows (n,) or (n, p)."""
        out = rows / _column(self.u, rows)
        if self.together.size:
            out[self.together] = solve_triangular(self.factor, rows[self.together], lower=True)
        return out

    def undo(self, rows: Array) -> Array:
        """Turn white rows (n,) or (n, p) back into readings."""
        out = rows * _column(self.u, rows)
        if self.together.size:
            out[self.together] = self.factor @ rows[self.together]
        return out


def _column(u: Array, rows: Array) -> Array:
    return u if rows.ndim == 1 else u[:, None]


def whitening_of(seen: Observations, used: Flags, *, believed: bool) -> Whitening:
    """Whitening of the readings that are ``used`` (n,); with their u not ``believed``, all count alike.

    Raises ModelError where the covariance of readings is none.
    """
    if not believed:
        return Whitening(u=np.ones(int(used.sum())), together=np.zeros(0, dtype=np.intp), factor=np.zeros((0, 0)))
    kept = used[seen.together]
    place = np.cumsum(used) - 1
    try:
        factor = np.linalg.cholesky(seen.covariance[np.ix_(kept, kept)])
    except np.linalg.LinAlgError as problem:
        raise ModelError("readings that share their errors leave a combination that has none") from problem
    return Whitening(u=seen.u[used], together=place[seen.together[kept]], factor=factor)
