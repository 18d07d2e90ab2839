"""Loads: what acts on members, case by case, with the same leading member axis.

Forces and intensities are upward positive, couples anticlockwise, imposed curvature positive concave up,
support movements upward. Rows that a member does not have stand at NaN.
"""

from collections.abc import Sequence
from dataclasses import dataclass, fields, replace
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam.member import SAME_PLACE, Array, Members, joined, refuse

__all__ = [
    "Bend",
    "Couple",
    "Force",
    "Loads",
    "Movement",
    "Spread",
    "combine",
    "loads",
    "parked",
    "shift",
    "side_by_side",
    "stack_loads",
]

Cases = NDArray[np.intp]

PARKING = {
    ("force_at",): ("force",),
    ("couple_at",): ("couple",),
    ("spread_from", "spread_to"): ("spread_start", "spread_end"),
    ("bend_from", "bend_to"): ("bend",),
}


class Force(NamedTuple):
    """A force (N, up) at ``at`` (m)."""

    at: float
    force: float
    case: int = 0


class Spread(NamedTuple):
    """A load spread from ``start`` to ``end`` (m), of intensity (N/m, up) running linearly to ``intensity_end``."""

    start: float
    end: float
    intensity: float
    intensity_end: float | None = None
    case: int = 0


class Couple(NamedTuple):
    """An applied moment (N m, anticlockwise) at ``at`` (m)."""

    at: float
    moment: float
    case: int = 0


class Bend(NamedTuple):
    """A curvature (1/m, concave up) imposed from ``start`` to ``end`` (m): initial, or by temperature."""

    start: float
    end: float
    curvature: float
    case: int = 0


class Movement(NamedTuple):
    """An upward movement (m) of support number ``support``; a settlement is negative."""

    support: int
    up: float
    case: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Loads:
    """C load cases on M members; rows of shape (M, padded), NaN stations where there is none.

    ``support_up`` has shape (M, C, J): the upward movement (m) of each support in each case.
    """

    force_at: Array
    force: Array
    force_case: Cases
    spread_from: Array
    spread_to: Array
    spread_start: Array
    spread_end: Array
    spread_case: Cases
    couple_at: Array
    couple: Array
    couple_case: Cases
    bend_from: Array
    bend_to: Array
    bend: Array
    bend_case: Cases
    support_up: Array

    @property
    def cases(self) -> int:
        """The number of load cases C."""
        return int(self.support_up.shape[1])

    def block(self, rows: slice) -> "Loads":
        """Return the loads of some of the members, padded as before."""
        return Loads(**{field.name: getattr(self, field.name)[rows] for field in fields(self)})

    def take(self, number: int, supports: int) -> "Loads":
        """Return the loads of member ``number``, which has so many supports, as a stack of one without padding."""
        arrays: dict[str, Any] = {"support_up": self.support_up[number : number + 1, :, :supports]}
        for places, sizes in PARKING.items():
            real = ~np.isnan(getattr(self, places[0])[number])
            names = (*places, *sizes, places[0].split("_")[0] + "_case")
            arrays |= {name: getattr(self, name)[number : number + 1, real] for name in names}
        return Loads(**arrays)


def loads(
    members: Members,
    *,
    forces: Sequence[Force] = (),
    spreads: Sequence[Spread] = (),
    couples: Sequence[Couple] = (),
    bends: Sequence[Bend] = (),
    movements: Sequence[Movement] = (),
) -> Loads:
    """Load cases on one member, numbered from 0; rows are given as the small tuples of this module."""
    cases = 1 + max(int(rows.max(initial=0)) for rows in map(_case, (forces, spreads, couples, bends, movements)))
    support_up = np.zeros((1, cases, members.support_at.shape[1]))
    for row in movements:
        support_up[0, row.case, row.support] += row.up
    ends = [row.intensity if row.intensity_end is None else row.intensity_end for row in spreads]
    return Loads(
        force_at=_row([row.at for row in forces]),
        force=_row([row.force for row in forces]),
        force_case=_case(forces),
        spread_from=_row([row.start for row in spreads]),
        spread_to=_row([row.end for row in spreads]),
        spread_start=_row([row.intensity for row in spreads]),
        spread_end=_row(ends),
        spread_case=_case(spreads),
        couple_at=_row([row.at for row in couples]),
        couple=_row([row.moment for row in couples]),
        couple_case=_case(couples),
        bend_from=_row([row.start for row in bends]),
        bend_to=_row([row.end for row in bends]),
        bend=_row([row.curvature for row in bends]),
        bend_case=_case(bends),
        support_up=support_up,
    )


def _row(values: Sequence[float]) -> Array:
    return np.array([list(values)], dtype=float)


def _case(rows: Sequence[Any]) -> Cases:
    return np.array([[row.case for row in rows]], dtype=np.intp)


def stack_loads(several: Sequence[Loads]) -> Loads:
    """The loads of unlike members as one stack; a case a member does not have is empty."""
    arrays: dict[str, Any] = {}
    for field in fields(Loads):
        nothing = 0.0 if field.name == "support_up" or field.name.endswith("_case") else np.nan
        arrays[field.name] = joined([getattr(one, field.name) for one in several], fill=nothing)
    return Loads(**arrays)


def side_by_side(several: Sequence[Loads]) -> Loads:
    """The load cases of the same members, numbered on from one set of loads to the next."""
    first = np.cumsum([0, *(one.cases for one in several)])
    arrays: dict[str, Any] = {}
    for field in fields(Loads):
        parts = [getattr(one, field.name) for one in several]
        if field.name.endswith("_case"):
            parts = [part + start for part, start in zip(parts, first, strict=False)]
        arrays[field.name] = np.concatenate(parts, axis=1)
    return Loads(**arrays)


def combine(given: Loads, factors: Array) -> Loads:
    """Stages as load cases of their own: each carries so much of every given case, ``factors`` (M, T, C)."""
    stages = factors.shape[1]
    arrays: dict[str, Any] = {"support_up": factors @ given.support_up}
    for places, sizes in PARKING.items():
        name = places[0].split("_")[0] + "_case"
        case = getattr(given, name)
        count = case.shape[1]
        share = np.concatenate([_of(factors[:, stage], case) for stage in range(stages)], axis=1)
        arrays |= {place: np.tile(getattr(given, place), stages) for place in places}
        arrays |= {size: np.tile(getattr(given, size), stages) * share for size in sizes}
        arrays[name] = np.broadcast_to(np.repeat(np.arange(stages), count), share.shape).astype(np.intp)
    return Loads(**arrays)


def shift(given: Loads, members: Members, offset: Array) -> Loads:
    """Move every load of a case by ``offset`` (M, C), m; what leaves the beam counts no more.

    A spread load is cut at the ends of the beam, with its intensity there.
    """
    length = members.length[:, None]
    force_at = given.force_at + _of(offset, given.force_case)
    couple_at = given.couple_at + _of(offset, given.couple_case)
    move = _of(offset, given.spread_case)
    start, end = given.spread_from + move, given.spread_to + move
    gradient = (given.spread_end - given.spread_start) / np.where(end > start, end - start, 1.0)
    cut_start, cut_end = np.clip(start, 0.0, length), np.clip(end, 0.0, length)
    gone = cut_end - cut_start <= SAME_PLACE * length
    return replace(
        given,
        force_at=_on_beam(force_at, length),
        couple_at=_on_beam(couple_at, length),
        spread_from=np.where(gone, np.nan, cut_start),
        spread_to=np.where(gone, np.nan, cut_end),
        spread_start=given.spread_start + gradient * (cut_start - start),
        spread_end=given.spread_end + gradient * (cut_end - end),
    )


def _of(per_case: Array, case: Cases) -> Array:
    return np.take_along_axis(per_case, case, axis=1)


def _on_beam(at: Array, length: Array) -> Array:
    slack = SAME_PLACE * length
    on = (at >= -slack) & (at <= length + slack)
    return np.where(on, np.clip(at, 0.0, length), np.nan)


def parked(given: Loads, members: Members) -> Loads:
    """The same loads, with those that a member does not have (NaN) standing idle at its right end.

    A place that rounding has put a hair beyond an end is that end. Raises ModelError for one farther off the beam,
    or a load that ends before it starts.
    """
    end = members.length[:, None]
    _refuse_misplaced(given, members)
    changes: dict[str, Any] = {}
    for places, sizes in PARKING.items():
        idle = np.isnan(getattr(given, places[0]))
        if not idle.size:
            continue
        changes |= {place: np.where(idle, end, np.clip(getattr(given, place), 0.0, end)) for place in places}
        changes |= {size: np.where(idle, 0.0, getattr(given, size)) for size in sizes}
    return replace(given, **changes)


def _refuse_misplaced(given: Loads, members: Members) -> None:
    at = np.concatenate([getattr(given, place) for places in PARKING for place in places], axis=1)
    slack = SAME_PLACE * members.length[:, None]
    refuse(members, (at < -slack) | (at > members.length[:, None] + slack), "a load lies off the beam")
    for start, end in ((given.spread_from, given.spread_to), (given.bend_from, given.bend_to)):
        refuse(members, end < start, "a load must not end before it starts")
