"""Unknowns: what a fit may change, free of dimension, and how each stands for a quantity of the member."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array, Stiffness, recorded
from fieldfit.observe import Asked, Subject

__all__ = ["Unknown", "stiffness_at", "unknowns_of"]

OUTLANDISH = np.log(1e3)  # an EI a thousand times the record is no finding


@dataclass(frozen=True, slots=True, kw_only=True)
class Unknown:
    """One number of a fit, with its bounds; ``zones`` are the zones (0: the rest) whose log EI ratio it is."""

    quantity: str
    where: str
    zones: tuple[int, ...]
    lower: float
    upper: float
    start: float


def unknowns_of(subject: Subject) -> tuple[Unknown, ...]:
    """Unknowns of a fit, in the order the book asks for them."""
    own_zone = {row.where for row in subject.asked if row.quantity == "EI" and row.where}
    rest = tuple(number for number, zone in enumerate((None, *subject.zones)) if zone not in own_zone)
    return tuple(_EI(row, subject.zones, rest) for row in subject.asked if row.quantity == "EI")


def _EI(row: Asked, zones: Sequence[str], rest: tuple[int, ...]) -> Unknown:
    lower = -OUTLANDISH if row.low is None else float(np.log(row.low))
    upper = OUTLANDISH if row.high is None else float(np.log(row.high))
    own = rest if row.where is None else (1 + zones.index(row.where),)
    return Unknown(
        quantity="EI",
        where=row.where or "whole",
        zones=own,
        lower=lower,
        upper=upper,
        start=float(np.clip(0.0, lower, upper)),
    )


def stiffness_at(subject: Subject, unknowns: Sequence[Unknown], values: Array) -> Stiffness:
    """The stiffness of the member when its unknowns have these values (p,)."""
    on_record = recorded(subject.member)
    ratio = on_record.EI_ratio.copy()
    for unknown, value in zip(unknowns, values, strict=True):
        ratio[0, list(unknown.zones)] = np.exp(value)
    return on_record._replace(EI_ratio=ratio)
