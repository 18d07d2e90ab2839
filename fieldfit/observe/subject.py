"""Subject: one member with its loads, its stages and what was observed on it, ready to be reconciled."""

from collections import defaultdict
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property
from types import MappingProxyType
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array, Loads, Members
from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import Book
from fieldfit.observe.asked import Asked, Limit, asked, limits
from fieldfit.observe.loading import Loading, recorded_loading
from fieldfit.observe.readings import Ledger, Observations, observed
from fieldfit.observe.refusals import unusable_readings
from fieldfit.observe.structure import recorded_members, supports_of

__all__ = ["Observations", "Stage", "Subject", "observe"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Stage:
    """One stage: its name, its role, and how much of each placed load case it carries, ``factors`` (C,)."""

    name: str
    role: str
    factors: Array


@dataclass(frozen=True, kw_only=True)
class Subject:
    """A recorded member, its loads and stages, and the observations on it.

    ``members`` and ``every_load`` are the whole book's, of which this is ``number``.
    ``load_cases`` names the load case of each placed case (None: imposed in one stage), ``load_u`` the standard
    uncertainty of each load case as a fraction (0: taken as exact), ``share_u`` that of the member's share of all.
    ``supports`` and ``zones`` are names in the order of the member's arrays; ``tolerance`` is a fraction of the
    recorded EI, NaN if none.
    """

    name: str
    number: int
    members: Members
    every_load: Loads
    load_cases: tuple[str | None, ...]
    load_u: Mapping[str, float]
    share_u: float
    stages: tuple[Stage, ...]
    supports: tuple[str, ...]
    zones: tuple[str, ...]
    observations: Observations
    asked: tuple[Asked, ...]
    limits: tuple[Limit, ...]
    tolerance: float

    @cached_property
    def member(self) -> Members:
        """The member as a stack of one."""
        return self.members.take(self.number)

    @cached_property
    def loads(self) -> Loads:
        """Its loads as a stack of one."""
        return self.every_load.take(self.number, len(self.supports))

    @property
    def zero(self) -> int | None:
        """Number of the reference zero stage, None where readings are changes from unloaded."""
        return next((number for number, stage in enumerate(self.stages) if stage.role == "zero"), None)

    @property
    def is_shape_survey(self) -> bool:
        """Whether loaded stages were read as levels with no zero stage: the built shape is then in the readings."""
        seen = self.observations
        return self.zero is None and bool(np.any((seen.quantity == "level") & (seen.used_for == "fit")))


def observe(book: Book) -> tuple[Subject, ...]:
    """Turn a field book into its members with their observations.

    Raises ModelError for a mechanism, FieldBookError for readings that cannot be held against the model.
    """
    members = recorded_members(book)
    loading = recorded_loading(book, members)
    ledger = observed(book, {name: number for number, name in enumerate(members.name)}, loading.stages)
    faults = unusable_readings(book, ledger, members, loading.loads)
    if faults:
        raise FieldBookError(book.name, faults)
    return tuple(_subjects(book, members, loading, ledger))


def _subjects(book: Book, members: Members, loading: Loading, ledger: Ledger) -> Iterator[Subject]:
    table = book.tables["members"]
    stages, placed = _by_member(loading.stages), _by_member(loading.placed)
    supports, zones, loads = _by_member(supports_of(book)), _by_member(book.tables["zones"]), _load_u(book)
    unknowns, limited = _by_member(book.tables["unknowns"]), _by_member(book.tables["limits"])
    ends = np.searchsorted(ledger.owner, np.arange(len(members) + 1)).tolist()
    shares, tolerances = table["load share u"].fillna(0.0).tolist(), table["tolerance"].tolist()
    for number, name in enumerate(members.name):
        cases: list[str | None] = [row["load case"] for row in placed[name]]
        yield Subject(
            name=name,
            number=number,
            members=members,
            every_load=loading.loads,
            load_cases=tuple(cases + [None] * (loading.loads.cases - len(cases))),
            load_u=MappingProxyType(loads[name]),
            share_u=shares[number],
            stages=tuple(
                Stage(name=row["stage"], role=row["role"], factors=factors)
                for row, factors in zip(stages[name], loading.factors[number], strict=False)
            ),
            supports=tuple(row["support"] for row in supports[name]),
            zones=tuple(row["zone"] for row in zones[name]),
            observations=ledger.readings.take(slice(ends[number], ends[number + 1])),
            asked=asked(unknowns[name]),
            limits=limits(limited[name]),
            tolerance=tolerances[number],
        )


def _by_member(frame: pd.DataFrame) -> Mapping[str, list[dict[str, Any]]]:
    """The records of each member."""
    found: dict[str, list[dict[str, Any]]] = defaultdict(list)
    for row in frame.to_dict("records"):
        found[row["member"]].append({str(name): value for name, value in row.items()})
    return found


def _load_u(book: Book) -> Mapping[str, dict[str, float]]:
    """Standard uncertainty of each load case of each member as a fraction of it.

    The loads of a case are weighed one by one, so that their uncertainties add as squares, each by its share.
    """
    rows = book.tables["loads"]
    size = rows["force"].abs().fillna(rows["intensity"].abs() * (rows["to"] - rows["from"]))
    size = size.fillna(rows["moment"].abs())
    parts = rows[["member", "load case"]].assign(size=size, square=(size * rows["u"].fillna(0.0)) ** 2)
    total = parts.groupby(["member", "load case"], sort=False).sum()
    share = (np.sqrt(total["square"]) / total["size"]).fillna(0.0)
    found: dict[str, dict[str, float]] = defaultdict(dict)
    for (member, case), u in share.items():
        found[member][case] = u
    return found
