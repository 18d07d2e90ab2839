"""Nuisances: unknowns whose columns never change, taken out of the residual before the fit.

A gauge's zero is one: it adds the same to all its readings. One rank-revealing QR projects them out (Golub and
Pereyra, 1973, variable projection) and brings them back afterwards with their uncertainty.
"""

from dataclasses import dataclass

import numpy as np
from scipy.linalg import qr

from fieldfit.beam import Array
from fieldfit.observe import Subject

__all__ = ["Nuisances", "Projection", "nuisances_of", "projection"]

INDEPENDENT = 1e-10


@dataclass(frozen=True, slots=True, kw_only=True)
class Nuisances:
    """Constant columns (n, k) in the unit of the readings, and what each is."""

    names: tuple[str, ...]
    columns: Array


def nuisances_of(subject: Subject) -> Nuisances:
    """A zero for each gauge where there is a zero stage; none where readings are changes from unloaded."""
    seen = subject.observations
    zeros = any(stage.role == "zero" for stage in subject.stages)
    gauges = sorted(set(seen.gauge)) if zeros else []
    columns = [(seen.gauge == gauge).astype(float) for gauge in gauges]
    return Nuisances(
        names=tuple(f"zero of {gauge}" for gauge in gauges),
        columns=np.array(columns).reshape(len(gauges), len(seen)).T,
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Projection:
    """An orthonormal ``basis`` (n, r) of the weighted nuisance columns."""

    basis: Array

    def apply(self, rows: Array) -> Array:
        """Take out of (n,) or (n, p) what nuisances can explain."""
        remaining: Array = rows - self.basis @ (self.basis.T @ rows)
        return remaining

    @property
    def rank(self) -> int:
        """How many readings the nuisances use up."""
        return int(self.basis.shape[1])


def projection(columns: Array) -> Projection:
    """Make the projection that takes out weighted nuisance columns (n, k)."""
    if not columns.size:
        return Projection(basis=np.zeros((len(columns), 0)))
    basis, triangle, _ = qr(columns, mode="economic", pivoting=True)
    size = np.abs(np.diag(triangle))
    return Projection(basis=basis[:, size > INDEPENDENT * size[0]])
