"""The loads of a book, case by case, and the stages that put them on the members.

A load case that stages place at several offsets is several *placed cases*; whatever is imposed in one stage alone
(a settlement, a temperature difference) is a placed case of that stage.
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array, Loads, Members, pad, shift, within
from fieldfit.fieldbook import Book, first_rows, numbered
from fieldfit.observe.structure import Owners, laid_out, owner_of, supports_of

__all__ = ["KEY", "Gradient", "Loading", "gradients", "placed_loads", "recorded_loading"]

KEY = ["member", "load case", "offset"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Loading:
    """Loads of all members as one stack, and what the stages make of them.

    ``placed`` has a row a placed case (member, load case, offset m, case number within the member; load case None
    for what is imposed), ``stages`` a row a stage (member, stage, role, cycle, start, end, number within the member),
    ``factors`` (M, stages, C) how much of each placed case a stage carries.
    """

    loads: Loads
    placed: pd.DataFrame
    stages: pd.DataFrame
    factors: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Gradient:
    """A temperature difference over the depth, top minus bottom (K), as the book gives it, with its ``u`` (0: exact).

    It bends the member by ``bend`` (1/m a kelvin) from ``start`` to ``end`` (m) in its ``stage``, where that is None in
    every one. ``where`` names it among those of its stage.
    """

    stage: str | None
    where: str
    difference: float
    u: float
    bend: float
    start: float
    end: float


def gradients(book: Book) -> Mapping[str, list[Gradient]]:
    """The temperature differences of each member that has any."""
    rows = book.tables["imposed"]
    rows = rows[rows["top minus bottom"].notna()]
    if rows.empty:
        return {}
    rows = _stretched(book, rows)
    alike = rows.groupby(["member", "stage"], dropna=False)
    number, count = alike.cumcount() + 1, alike["member"].transform("size")
    found: dict[str, list[Gradient]] = {}
    for row, place, every in zip(rows.to_dict("records"), number, count, strict=True):
        one = Gradient(
            stage=None if pd.isna(row["stage"]) else row["stage"],
            where="whole" if row["is whole"] and every == 1 else f"part {place}",
            difference=float(row["top minus bottom"]),
            u=0.0 if pd.isna(row["top minus bottom u"]) else float(row["top minus bottom u"]),
            bend=float(-row["expansion"] / row["depth"]),
            start=float(row["from"]),
            end=float(row["to"]),
        )
        found.setdefault(row["member"], []).append(one)
    return found


def recorded_loading(book: Book, members: Members) -> Loading:
    """Loads and stages of all members (SI, upward and anticlockwise positive)."""
    owners = {name: number for number, name in enumerate(members.name)}
    rows = _stage_rows(book)
    stage, stages = _distinct(rows, ["member", "stage"], ["member", "stage", "role", "cycle", "start", "end"])
    stages = stages.assign(number=within(owner_of(stages, owners), len(owners)), cycle=_cycles(stages))
    carried = rows["load case"].notna().to_numpy()
    case, placed = _distinct(rows[carried], KEY, KEY)
    placed = placed.assign(case=within(owner_of(placed, owners), len(owners)))
    imposed = _imposed_cases(book, placed)
    loads = placed_loads(book, placed, imposed, owners, members)
    share = book.tables["members"]["load share"].fillna(1.0).to_numpy(dtype=float)
    factors = np.zeros((len(members), int(stages["number"].max()) + 1, loads.cases))
    owner = owner_of(rows[carried], owners)
    where = (owner, stages["number"].to_numpy()[stage[carried]], placed["case"].to_numpy()[case])
    np.add.at(factors, where, rows["factor"].to_numpy(dtype=float)[carried] * share[owner])
    if len(imposed):
        always = imposed.merge(stages, on="member", suffixes=("", " of"))
        always = always[always["stage"].isna() | (always["stage"] == always["stage of"])]
        factors[owner_of(always, owners), always["number"], always["case"]] = 1.0
    return Loading(loads=loads, placed=placed, stages=stages, factors=factors)


def _cycles(stages: pd.DataFrame) -> "pd.Series[Any]":
    """The cycle of each stage: where the book leaves it blank that of the stage before, at first that of the next."""
    if stages["cycle"].isna().all():
        return pd.Series([None] * len(stages), index=stages.index, dtype=object)
    by = stages["member"]
    told = stages["cycle"].groupby(by).ffill().groupby(by).bfill().astype(object)
    return told.where(told.notna(), None)


def _distinct(rows: pd.DataFrame, key: list[str], names: list[str]) -> tuple[NDArray[np.intp], pd.DataFrame]:
    """The rows that differ by their key, the first of each, and for every row its place among them."""
    place, _ = pd.factorize(numbered(*(pd.factorize(rows[name])[0] for name in key)))
    return place, rows[names].iloc[first_rows(place)].reset_index(drop=True)


def _stage_rows(book: Book) -> pd.DataFrame:
    """The stages table; where a member has none, each of its load cases is a stage of its own name."""
    given, loads = book.tables["stages"], book.tables["loads"]
    bare = loads[~loads["member"].isin(given["member"])].drop_duplicates(["member", "load case"])
    own = bare[["member", "load case"]].assign(stage=bare["load case"], role="load")
    parts = [part for part in (given, own) if len(part)] or [given]
    every = given if bare.empty else pd.concat(parts, ignore_index=True).reindex(columns=given.columns)
    numbers = {"factor": every["factor"].astype(float).fillna(1.0), "offset": every["offset"].astype(float).fillna(0.0)}
    return every.assign(**numbers)


def _imposed_cases(book: Book, placed: pd.DataFrame) -> pd.DataFrame:
    """A case for each stage in which something is imposed, numbered within the member after the placed ones."""
    imposed = book.tables["imposed"][["member", "stage"]]
    if imposed.empty:
        return imposed.assign(case=0)
    imposed = imposed.drop_duplicates()
    first = imposed["member"].map(placed.groupby("member").size()).fillna(0).astype(int)
    return imposed.assign(case=first + imposed.groupby("member").cumcount())


def placed_loads(book: Book, placed: pd.DataFrame, imposed: pd.DataFrame, owners: Owners, members: Members) -> Loads:
    """Every load of the cases that ``placed`` and ``imposed`` number, SI."""
    rows = book.tables["loads"].merge(placed, on=["member", "load case"])
    force, intense, couples, ends = (rows[name].notna() for name in ("force", "intensity", "moment", "to"))
    point, couple, spread = rows[force & ~ends], rows[couples], rows[ends & (force | intense)]
    intensity = spread["intensity"].fillna(spread["force"] / (spread["to"] - spread["from"]))
    bends = _bends(book, imposed)
    cases = 1 + max((int(each.max()) for each in (placed["case"], imposed["case"]) if len(each)), default=0)
    loads = Loads(
        **laid_out(point, owners, force_at=point["from"], force=-point["force"]),
        force_case=_cases(point, owners),
        **laid_out(
            spread,
            owners,
            spread_from=spread["from"],
            spread_to=spread["to"],
            spread_start=-intensity,
            spread_end=-spread["intensity end"].fillna(intensity),
        ),
        spread_case=_cases(spread, owners),
        **laid_out(couple, owners, couple_at=couple["from"], couple=couple["moment"]),
        couple_case=_cases(couple, owners),
        **laid_out(bends, owners, bend_from=bends["from"], bend_to=bends["to"], bend=bends["curvature"]),
        bend_case=_cases(bends, owners),
        support_up=_support_movements(book, imposed, owners, (*members.support_at.shape, cases)),
    )
    offset = np.zeros((len(members), cases))
    offset[owner_of(placed, owners), placed["case"]] = placed["offset"]
    return shift(loads, members, offset)


def _cases(rows: pd.DataFrame, owners: Owners) -> NDArray[np.intp]:
    return pad(owner_of(rows, owners), len(owners), rows["case"].to_numpy(dtype=float), fill=0.0).astype(np.intp)


def _bends(book: Book, imposed: pd.DataFrame) -> pd.DataFrame:
    """Imposed curvature by row (1/m): given, or -alpha dT / depth for a top hotter than the bottom by dT."""
    if imposed.empty:
        return book.tables["imposed"].assign(case=0)
    rows = _stretched(book, book.tables["imposed"].merge(imposed, on=["member", "stage"]))
    curvature = rows["curvature"].fillna(-rows["expansion"] * rows["top minus bottom"] / rows["depth"])
    return rows.assign(curvature=curvature)[curvature.notna()]


def _stretched(book: Book, rows: pd.DataFrame) -> pd.DataFrame:
    """Imposed rows with the depth (m) of their member; a blank stretch is the whole member."""
    members = book.tables["members"].set_index("member")
    to = rows["to"].fillna(rows["member"].map(members["length"]))
    whole, depth = rows["from"].isna() & rows["to"].isna(), rows["member"].map(members["depth"])
    return rows.assign(**{"is whole": whole, "from": rows["from"].fillna(0.0), "to": to, "depth": depth})


def _support_movements(book: Book, imposed: pd.DataFrame, owners: Owners, shape: tuple[int, int, int]) -> Array:
    """Upward movement (m) of each support in each placed case, (M, C, J)."""
    count, places, cases = shape
    up = np.zeros((count, cases, places))
    if imposed.empty:
        return up
    supports = supports_of(book)
    supports = supports.assign(place=supports.groupby("member").cumcount())[["member", "support", "place"]]
    rows = book.tables["imposed"].merge(imposed, on=["member", "stage"]).dropna(subset="settlement")
    rows = rows.merge(supports, on=["member", "support"])
    where = tuple(rows[name].to_numpy(dtype=np.intp) for name in ("case", "place"))
    np.add.at(up, (owner_of(rows, owners), *where), -rows["settlement"].to_numpy(dtype=float))
    return up
