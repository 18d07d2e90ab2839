"""Subject: one member with its loads, its stages and what was observed on it, ready to be reconciled."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
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
from fieldfit.observe.readings import observed
from fieldfit.observe.refusals import unusable_readings
from fieldfit.observe.structure import recorded_members, supports_of

__all__ = ["Observations", "Stage", "Subject", "observe"]


NUMBERS = ("at", "value", "sign", "usual", "lever", "u", "scale_u")


@dataclass(frozen=True, slots=True, kw_only=True)
class Stage:
    """One stage: its name, its role, and how much of each placed load case it carries, ``factors`` (C,)."""

    name: str
    role: str
    factors: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Observations:
    """The readings of one member, arrays of shape (n,), SI in each gauge's own sense; nothing is left out.

    ``stage`` numbers the stage; ``sign`` turns the model's sign into the gauge's, ``usual`` into that which its
    kind of gauge usually has; ``lever`` (m) of a strain gauge is its distance below the neutral axis, 1 elsewhere;
    ``u`` is NaN where the book gives no uncertainty, ``u_from`` says given, resolution or none; ``scale_u`` is
    that of the gauge's scale, a fraction; ``used_for`` is fit, rule or none.
    """

    stage: NDArray[np.intp]
    gauge: NDArray[np.object_]
    at: Array
    quantity: NDArray[np.object_]
    value: Array
    sign: Array
    usual: Array
    lever: Array
    u: Array
    scale_u: Array
    u_from: NDArray[np.object_]
    used_for: NDArray[np.object_]
    why: NDArray[np.object_]

    def __len__(self) -> int:
        """Return the number of readings."""
        return len(self.value)


@dataclass(frozen=True, slots=True, kw_only=True)
class Subject:
    """A recorded member (a stack of one), its loads and stages, and the observations on it.

    ``load_cases`` names the load case of each placed case (None: imposed in one stage), ``load_u`` the standard
    uncertainty of each load case as a fraction (0: taken as exact), ``share_u`` that of the member's share of all.
    ``supports`` and ``zones`` are names in the order of the member's arrays; ``tolerance`` is a fraction of the
    recorded EI, NaN if none.
    """

    name: str
    member: Members
    loads: Loads
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
    readings = observed(book, loading.stages)
    faults = unusable_readings(readings, members, loading.loads)
    if faults:
        raise FieldBookError(book.name, faults)
    return tuple(_subjects(book, members, loading, readings))


def _subjects(book: Book, members: Members, loading: Loading, readings: pd.DataFrame) -> Iterator[Subject]:
    table = book.tables["members"].set_index("member")
    tables = {"stages": loading.stages, "placed": loading.placed, "readings": readings}
    tables |= {"supports": supports_of(book), "zones": book.tables["zones"]}
    tables |= {name: book.tables[name] for name in ("loads", "unknowns", "limits")}
    of_member = {name: dict(iter(frame.groupby("member", sort=False))) for name, frame in tables.items()}
    for number, name in enumerate(members.name):
        own: dict[str, pd.DataFrame] = {key: parts.get(name, tables[key][:0]) for key, parts in of_member.items()}
        factors = loading.factors[number]
        stages = zip(own["stages"]["stage"], own["stages"]["role"], factors, strict=False)
        cases: list[str | None] = [*own["placed"]["load case"]]
        yield Subject(
            name=name,
            member=members.take(number),
            loads=loading.loads.take(number, len(own["supports"])),
            load_cases=tuple(cases + [None] * (loading.loads.cases - len(cases))),
            load_u=MappingProxyType(_load_u(own["loads"])),
            share_u=float(table["load share u"].fillna(0.0).loc[name]),
            stages=tuple(Stage(name=stage, role=role, factors=row) for stage, role, row in stages),
            supports=tuple(own["supports"]["support"]),
            zones=tuple(own["zones"]["zone"]),
            observations=_observations(own["readings"]),
            asked=asked(own["unknowns"]),
            limits=limits(own["limits"]),
            tolerance=float(table["tolerance"].loc[name]),
        )


def _observations(rows: pd.DataFrame) -> Observations:
    text: dict[str, Any] = {
        name: rows[name].to_numpy(dtype=object) for name in ("gauge", "quantity", "u_from", "used_for", "why")
    }
    numbers: dict[str, Any] = {name: rows[name].to_numpy(dtype=float) for name in NUMBERS}
    return Observations(stage=rows["number"].to_numpy(dtype=np.intp), **text, **numbers)


def _load_u(rows: pd.DataFrame) -> dict[str, float]:
    """Standard uncertainty of each load case as a fraction of it.

    The loads of a case are weighed one by one, so that their uncertainties add as squares, each by its share.
    """
    if rows["u"].isna().all():
        return dict.fromkeys(rows["load case"], 0.0)
    size = rows["force"].abs().fillna(rows["intensity"].abs() * (rows["to"] - rows["from"]))
    size = size.fillna(rows["moment"].abs())
    square = (size * rows["u"].fillna(0.0)) ** 2
    total = size.groupby(rows["load case"]).sum()
    return (np.sqrt(square.groupby(rows["load case"]).sum()) / total).fillna(0.0).to_dict()
