"""Nuisances: unknowns whose columns never change, taken out of the residual before the fit.

A gauge's zero is one: it adds the same to all its readings. One rank-revealing QR projects them out (Golub and
Pereyra, 1973, variable projection); they come back afterwards with their uncertainty. What is known of one beforehand
is a row of its own, counted with the readings.
"""

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from scipy.linalg import qr

from fieldfit.beam import Array
from fieldfit.fit.columns import axial_columns, scale_columns, shift_column, tilt_column, zero_columns
from fieldfit.fit.unknowns import Unknown
from fieldfit.observe import Subject

__all__ = ["INDEPENDENT", "Nuisance", "Projection", "nuisances_of", "projection"]

INDEPENDENT = 1e-10


@dataclass(frozen=True, slots=True, kw_only=True)
class Nuisance:
    """One constant ``column`` (n,), and what is known of its size beforehand (NaN: nothing).

    ``unknown`` is set where the book asked for it, so that it is reported; the others only have a ``name``.
    """

    name: str
    column: Array
    expected: float = np.nan
    expected_u: float = np.nan
    unknown: Unknown | None = None

    @property
    def is_expected(self) -> bool:
        """Whether anything is known of it beforehand."""
        return bool(np.isfinite(self.expected) and np.isfinite(self.expected_u))


def nuisances_of(subject: Subject, asked: Iterable[Unknown]) -> tuple[Nuisance, ...]:
    """All nuisances of a subject: those asked for without bounds, then zeros, axial strains, gauge scales and, in a
    survey of shape, the datum of each stage.
    """
    asked = tuple(asked)
    plain = [
        Nuisance(name=u.name, column=u.column, expected=u.expected, expected_u=u.expected_u, unknown=u) for u in asked
    ]
    plain += [Nuisance(name=name, column=column) for name, column in zero_columns(subject).items()]
    plain += [Nuisance(name=name, column=column) for name, column in axial_columns(subject).items()]
    plain += [
        Nuisance(name=name, column=column, expected=0.0, expected_u=u)
        for name, (column, u) in scale_columns(subject).items()
    ]
    if subject.is_shape_survey:
        plain += _free_datum(subject, {(unknown.quantity, unknown.stage) for unknown in asked})
    return tuple(plain)


def _free_datum(subject: Subject, asked: set[tuple[str, str | None]]) -> list[Nuisance]:
    """Shift and tilt of every stage of a shape survey that the book does not ask for itself."""
    free = []
    for number, stage in enumerate(subject.stages):
        on = np.eye(len(subject.stages))[number]
        for quantity, column in (("datum shift", shift_column), ("datum tilt", tilt_column)):
            if not {(quantity, stage.name), (quantity, None)} & asked:
                free.append(Nuisance(name=f"{quantity} {stage.name}", column=column(subject, on)))
    return free


@dataclass(frozen=True, slots=True, kw_only=True)
class Projection:
    """An orthonormal ``basis`` (n, r) of weighted nuisance columns."""

    basis: Array

    def apply(self, rows: Array) -> Array:
        """Take out of (n,) or (n, p) what nuisances can explain."""
        return rows - self.basis @ (self.basis.T @ rows)

    @property
    def rank(self) -> int:
        """How many readings the nuisances use up."""
        return int(self.basis.shape[1])


def projection(columns: Array) -> Projection:
    """Make the projection that takes out weighted nuisance columns (n, k)."""
    length = np.linalg.norm(columns, axis=0)
    columns = columns[:, length > 0] / length[length > 0]
    if not columns.size:
        return Projection(basis=np.zeros((len(columns), 0)))
    basis, triangle, _ = qr(columns, mode="economic", pivoting=True)
    size = np.abs(np.diag(triangle))
    return Projection(basis=basis[:, size > INDEPENDENT * size[0]])
