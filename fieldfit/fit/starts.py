"""Starts: where a fit begins, and begins again where its surface may have more than one minimum."""

from collections.abc import Iterator, Sequence

import numpy as np
from scipy.stats import qmc

from fieldfit.beam import Array
from fieldfit.fit.design import Design
from fieldfit.fit.unknowns import BEARING, EI, RESTRAINT, Unknown

__all__ = ["starts"]

MORE = 4  # starts beside the record, where restraints, bearings or the EI of several zones are unknown
CURVED = (RESTRAINT, BEARING)


def starts(design: Design) -> Iterator[Array]:
    """Starting values (p,), the record first, each with EI scaled so that the readings fit best in size."""
    unknowns = design.model.unknowns
    first = np.array([unknown.start for unknown in unknowns])
    yield _sized(design, _inside(first, unknowns))
    zones = [number for number, unknown in enumerate(unknowns) if unknown.quantity == EI]
    moved = [n for n, unknown in enumerate(unknowns) if unknown.quantity in CURVED or (n in zones and len(zones) > 1)]
    if moved:
        for share in qmc.Halton(len(unknowns), scramble=False).random(MORE + 1)[1:]:
            point = first.copy()
            point[moved] = [_spread(unknowns[number], share[number]) for number in moved]
            yield _sized(design, _inside(point, unknowns))


def _spread(unknown: Unknown, share: float) -> float:
    """Place a start: EI from a third to three times the record, fixity evenly within its bounds, flexibility where it
    matters, from rigid to about l3/EI.
    """
    if unknown.quantity == EI:
        return float(np.log(3.0)) * (2.0 * share - 1.0)
    high = unknown.upper if unknown.quantity == RESTRAINT else min(unknown.upper, 0.3)
    return unknown.lower + share * max(high - unknown.lower, 0.0)


def _inside(point: Array, unknowns: Sequence[Unknown]) -> Array:
    return np.clip(point, [u.lower for u in unknowns], [u.upper for u in unknowns])


def _sized(design: Design, point: Array) -> Array:
    """The start with its EI such that the response agrees with the readings in size: exact where EI is alone."""
    unknowns = design.model.unknowns
    mine = [number for number, unknown in enumerate(unknowns) if unknown.quantity == EI]
    if not mine:
        return point
    owed = np.append(design.whitening.apply(design.measured), design.owed)
    model, measured = design.projection.apply(design.rows(point) + owed), design.projection.apply(owed)
    size = float(model @ model)
    ratio = float(model @ measured) / size if size > 0 else 1.0
    sized = point.copy()
    sized[mine] -= np.log(ratio) if ratio > 0 else 0.0
    return _inside(sized, unknowns)
