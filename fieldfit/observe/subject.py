"""Subject: one member with its loads, its stages and what was observed on it, ready to be reconciled."""

from collections import defaultdict
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from types import MappingProxyType
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array, Flags, Loads, Members
from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import Book
from fieldfit.fieldbook.clock import comparable
from fieldfit.observe.asked import Asked, Limit, asked, limits
from fieldfit.observe.averages import averaged
from fieldfit.observe.cycles import after_the_first
from fieldfit.observe.levels import Levelled, levelled, with_heights
from fieldfit.observe.loading import Gradient, Loading, gradients, recorded_loading
from fieldfit.observe.logged import logged
from fieldfit.observe.readings import Ledger, Observations, gauges_of, observed
from fieldfit.observe.refusals import unusable_readings
from fieldfit.observe.service import Service, service_loads
from fieldfit.observe.steady import steady_roles
from fieldfit.observe.structure import owner_of, recorded_members, supports_of
from fieldfit.observe.traces import Trace, traces_of
from fieldfit.observe.windows import windows_of

__all__ = ["Observations", "Stage", "Subject", "observe"]

NEAR = 0.01  # of the length: a gauge this close to a support is at it


@dataclass(frozen=True, slots=True, kw_only=True)
class Stage:
    """One stage: its name, its role, and how much of each placed load case it carries, ``factors`` (C,).

    ``cycle`` names the loading it belongs to, None where all are one; ``start`` and ``end`` are ISO 8601, and
    ``window`` is the two in seconds, NaN where the book gives none that can be compared.
    """

    name: str
    role: str
    factors: Array
    cycle: str | None = None
    start: str | None = None
    end: str | None = None
    window: tuple[float, float] = (np.nan, np.nan)


@dataclass(frozen=True, kw_only=True)
class Subject:
    """A recorded member, its loads and stages, and the observations on it.

    ``members`` and ``every_load`` are the whole book's, of which this is ``number``.
    ``load_cases`` names the load case of each placed case (None: imposed in one stage), ``load_u`` the standard
    uncertainty of each load case as a fraction of it (0: taken as exact), ``share_u`` that of the member's share of
    all, a fraction of that share.
    ``gradients`` are the temperature differences over the depth that the book imposes.
    ``supports`` and ``zones`` are names in the order of the member's arrays; ``tolerance`` is a fraction of the
    recorded EI, NaN if none, ``depth`` (m) NaN where not given. ``service`` holds what the member carries in service,
    None where the book does not say, ``findings`` what was looked for on it and whether it was found. ``gauges`` has
    a row for each gauge of the gauges table, read or not, and ``levelled`` is the adjusted level book of all members,
    None where there is none.
    """

    name: str
    number: int
    members: Members
    every_load: Loads
    load_cases: tuple[str | None, ...]
    load_u: Mapping[str, float]
    share_u: float
    gradients: tuple[Gradient, ...]
    stages: tuple[Stage, ...]
    supports: tuple[str, ...]
    zones: tuple[str, ...]
    observations: Observations
    gauges: Observations
    traces: tuple[Trace, ...]
    asked: tuple[Asked, ...]
    limits: tuple[Limit, ...]
    tolerance: float
    depth: float = np.nan
    service: Service | None = None
    findings: Mapping[str, bool] = field(default_factory=dict)
    levelled: Levelled | None = None

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

    def stage_name(self, number: int) -> str:
        """Name of a stage by its number; empty for a reading in no stage (-1)."""
        return self.stages[number].name if number >= 0 else ""

    @property
    def gauged_supports(self) -> dict[str, Flags]:
        """Supports taken as rigid, nor asked for, each with the observations (n,) of deflection or level at it."""
        asked = {row.where for row in self.asked if row.quantity in ("bearing stiffness", "settlement")}
        rigid = self.member.support_flexibility[0] == 0
        places = zip(self.supports, self.member.support_at[0], rigid, strict=True)
        upright, reach = self.observations.upright, NEAR * float(self.member.length[0])
        return {
            name: upright & (np.abs(self.observations.at - at) <= reach)
            for name, at, held in places
            if held and name not in asked
        }

    @property
    def is_shape_survey(self) -> bool:
        """Whether loaded stages were read as levels with no zero stage: the built shape is then in the readings."""
        seen = self.observations
        return self.zero is None and bool(np.any((seen.quantity == "level") & (seen.used_for == "fit")))


def observe(book: Book) -> tuple[Subject, ...]:
    """Turn a field book into its members with their observations.

    Raises ModelError for a mechanism, FieldBookError for readings that cannot be held against the model.
    """
    supports = supports_of(book)
    members = recorded_members(book, supports)
    loading = recorded_loading(book, members)
    owners = {name: number for number, name in enumerate(members.name)}
    levels, (every, shared) = levelled(book), observed(book, owners, loading.stages)
    ledger = logged(book, owners, loading.stages) or averaged(every, shared, _steady_roles(loading, owners))
    ledger = with_heights(ledger, levels, book, owners, loading.stages)
    ledger = after_the_first(ledger, loading, members)
    gauges = gauges_of(book, owners)
    faults = unusable_readings(book, ledger, gauges, members, loading.loads)
    if faults:
        raise FieldBookError(book.name, faults)
    traces = traces_of(book, every, owners)
    return tuple(_subjects(book, supports, members, loading, ledger, gauges, levels, traces))


def _subjects(
    book: Book,
    every_support: pd.DataFrame,
    members: Members,
    loading: Loading,
    ledger: Ledger,
    gauges: Ledger,
    levels: Levelled | None,
    traces: Mapping[int, tuple[Trace, ...]],
) -> Iterator[Subject]:
    table = book.tables["members"]
    told = ("stage", "role", "cycle", "start", "end")
    columns = [*(loading.stages[name].tolist() for name in told), _windows(book, loading)]
    stages = _by_member(loading.stages["member"], zip(*columns, strict=True))
    placed = _by_member(loading.placed["member"], loading.placed["load case"])
    every_zone = book.tables["zones"]
    supports = _by_member(every_support["member"], every_support["support"])
    zones, loads = _by_member(every_zone["member"], every_zone["zone"]), _load_u(book)
    unknowns, limited = (_records(book.tables[name]) for name in ("unknowns", "limits"))
    service, looked_for = service_loads(book, members), _records(book.tables["inspections"])
    ends, own = (np.searchsorted(rows.owner, np.arange(len(members) + 1)).tolist() for rows in (ledger, gauges))
    warmed = gradients(book)
    shares = (table["load share u"] / table["load share"].fillna(1.0)).fillna(0.0).tolist()
    tolerances = table["tolerance"].tolist()
    depths = table["depth"].tolist()
    for number, name in enumerate(members.name):
        cases: list[str | None] = [*placed[name]]
        yield Subject(
            name=name,
            number=number,
            members=members,
            every_load=loading.loads,
            load_cases=tuple(cases + [None] * (loading.loads.cases - len(cases))),
            load_u=MappingProxyType(loads[name]),
            share_u=shares[number],
            gradients=tuple(warmed.get(name, ())),
            stages=tuple(
                Stage(name=stage, role=role, cycle=cycle, start=start, end=end, window=window, factors=factors)
                for (stage, role, cycle, start, end, window), factors in zip(
                    stages[name], loading.factors[number], strict=False
                )
            ),
            supports=tuple(supports[name]),
            zones=tuple(zones[name]),
            traces=traces.get(number, ()),
            observations=ledger.readings.take(slice(ends[number], ends[number + 1])),
            gauges=gauges.readings.take(slice(own[number], own[number + 1])),
            asked=asked(unknowns[name]),
            limits=limits(limited[name]),
            tolerance=tolerances[number],
            depth=depths[number],
            service=service.get(name),
            findings=MappingProxyType({row["finding"]: row["found"] for row in looked_for[name]}),
            levelled=levels,
        )


def _steady_roles(loading: Loading, owners: dict[str, int]) -> NDArray[np.object_]:
    """The roles of stages (M, T) by which drift within them may be told, blank elsewhere."""
    roles = np.full(loading.factors.shape[:2], "", dtype=object)
    roles[owner_of(loading.stages, owners), loading.stages["number"]] = steady_roles(loading.stages)
    return roles


def _by_member(members: "pd.Series[str]", values: Iterable[Any]) -> Mapping[str, list[Any]]:
    """The values of each member, in their order."""
    found: dict[str, list[Any]] = defaultdict(list)
    for member, value in zip(members.tolist(), values, strict=True):
        found[member].append(value)
    return found


def _windows(book: Book, loading: Loading) -> list[tuple[float, float]]:
    """Start and end (s) of every stage, NaN where the book gives none or its times cannot be compared."""
    if loading.stages["start"].isna().all() or not comparable(book.tables):
        return [(np.nan, np.nan)] * len(loading.stages)
    ends = np.full((len(loading.stages), 2), np.nan)
    windows = windows_of(book, loading.stages)
    ends[windows["place"].to_numpy(dtype=np.intp)] = windows[["start", "end"]]
    return [(start, end) for start, end in ends.tolist()]


def _records(frame: pd.DataFrame) -> Mapping[str, list[Any]]:
    return _by_member(frame["member"], frame.to_dict("records") if len(frame) else [])


def _load_u(book: Book) -> Mapping[str, dict[str, float]]:
    """Standard uncertainty of each load case of each member as a fraction of it.

    The loads of a case are weighed one by one, so that their uncertainties add as squares, each by its share.
    """
    rows = book.tables["loads"]
    found: dict[str, dict[str, float]] = defaultdict(dict)
    if rows["u"].isna().all():
        for member, case in zip(rows["member"], rows["load case"], strict=True):
            found[member][case] = 0.0
        return found
    size = rows["force"].abs().fillna(_spread_size(rows)).fillna(rows["moment"].abs())
    parts = rows[["member", "load case"]].assign(size=size, square=(size * rows["u"].fillna(0.0)) ** 2)
    total = parts.groupby(["member", "load case"], sort=False).sum()
    share = (np.sqrt(total["square"]) / total["size"]).fillna(0.0)
    for (member, case), u in share.items():
        found[member][case] = u
    return found


def _spread_size(rows: pd.DataFrame) -> "pd.Series[float]":
    """What each load of a linear intensity carries (N), up or down, NaN for one of none.

    The integral of |q|: l (|a| + |b|)/2, and l (a2 + b2)/2(|a| + |b|) where it changes its sign on the way.
    """
    start, end = rows["intensity"], rows["intensity end"].fillna(rows["intensity"])
    ends = start.abs() + end.abs()
    turned = (start**2 + end**2) / ends.where(ends > 0, 1.0)
    return (rows["to"] - rows["from"]) / 2 * ends.where(start * end >= 0, turned)
