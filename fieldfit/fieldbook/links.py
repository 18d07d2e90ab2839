"""Checks of names that refer to another table: members, stages, load cases, gauges, supports, zones and spans.

A table left out, wholly or for a member, stands for its plain default: its load cases are the stages, supports A and
B are at the ends.
"""

import re
from collections import defaultdict
from collections.abc import Collection, Iterable, Mapping, Sequence
from itertools import chain, pairwise

import numpy as np
import pandas as pd

from fieldfit.fieldbook.declare import GAUGE_KINDS
from fieldfit.fieldbook.pairs import distinct_pairs, places_of
from fieldfit.fieldbook.published import DEFLECTION_LIMITS, DYNAMIC, FACTORED
from fieldfit.fieldbook.records import refuse
from fieldfit.fieldbook.sheet import nearest
from fieldfit.fieldbook.typed import Typed
from fieldfit.fieldbook.units import UnitError, to_si

__all__ = ["check_links", "refuse_name"]

Names = Mapping[str, Collection[str]]  # the known names of each member

_SUPPORT_WORDS = ("rotational restraint", "bearing stiffness", "settlement", "fixity")
_ZONE_WORDS = ("EI", "EI ratio")
_SPAN_WORDS = ("camber", "deflection", "span/n", *DEFLECTION_LIMITS)
_POSITION = re.compile(r"(-?\d+(?:\.\d+)?) ?([A-Za-z]{1,10})")
_SAME_PLACE = 1e-6  # m


def check_links(tables: Mapping[str, Typed]) -> None:
    """Note every name that leads nowhere, and write the spans and supports of `where` by their names."""
    members = set(tables["members"].frame["member"].dropna())
    for name, typed in tables.items():
        if name != "members" and "member" in typed.block.table.names and len(typed.frame):
            _members(typed, sorted(members))
    cases = _by_member(tables["loads"].frame, "load case")
    stages = {**cases, **_by_member(tables["stages"].frame, "stage")}
    zones = _by_member(tables["zones"].frame, "zone")
    supports = _supports(tables)
    _known(tables["stages"], "load case", cases, members)
    for name in ("readings", "levels", "imposed", "unknowns", "limits"):
        _known(tables[name], "stage", stages, members)
    _known(tables["imposed"], "support", {name: list(places) for name, places in supports.items()}, members)
    if len(tables["readings"].frame):
        _gauges(tables["readings"], tables["gauges"], members)
    if len(tables["resets"].frame):
        _known(tables["resets"], "gauge", _by_member(tables["gauges"].frame, "gauge"), members)
    if len(tables["imposed"].frame):
        _depths(tables["imposed"], tables["members"])
    for name, word in (("unknowns", "unknown"), ("limits", "limit")):
        if len(tables[name].frame):
            _where(tables[name], word, members, cases, zones, _by_member(tables["gauges"].frame, "gauge"), supports)


def _by_member(frame: pd.DataFrame, column: str) -> dict[str, dict[str, None]]:
    """The names in a column for each member, each once."""
    if frame.empty:
        return {}
    names: dict[str, dict[str, None]] = defaultdict(dict)
    for member, name in distinct_pairs(frame["member"], frame[column]):
        if member is not None and name is not None:
            names[member][name] = None
    return dict(names)


def _supports(tables: Mapping[str, Typed]) -> dict[str, dict[str, float]]:
    """Name and position (m) of the supports of each member, from the left."""
    members = tables["members"].frame
    ends = zip(members["member"], members["length"], strict=True)
    supports = {member: {"A": 0.0, "B": length} for member, length in ends if member is not None}
    stated: dict[str, dict[str, float]] = defaultdict(dict)
    frame = tables["supports"].frame.sort_values("at", kind="stable")
    for member, name, at in zip(frame["member"], frame["support"], frame["at"], strict=True):
        stated[member][name] = at
    return {**supports, **stated}


def _members(typed: Typed, members: Sequence[str]) -> None:
    """Note rows of a member that is not in the members table, once a name."""
    frame, known = typed.frame, {*members, "*", None}
    if known.issuperset(frame["member"].dropna().unique()):
        return
    strange = frame[frame["member"].notna() & ~frame["member"].isin(known)]
    for name, rows in strange.groupby("member", observed=True)["row"]:
        hint = nearest(str(name), members) or _some(members)
        typed.refuse("unknown member", int(rows.min()), "member", "a member of the members table", hint)


def _some(names: Iterable[str]) -> str | None:
    """The first few known names, as a hint."""
    known = list(names)
    return f"known: {', '.join(known[:5])}{', ...' if len(known) > 5 else ''}" if known else "none is known"


def _known(typed: Typed, column: str, names: Names, members: set[str]) -> None:
    """Note names unknown to their member, once a member and name."""
    frame = typed.frame
    if frame.empty:
        return
    known = [member for member, each in names.items() for _ in each], [*chain.from_iterable(names.values())]
    lost = places_of(frame["member"], frame[column], known) < 0
    if not lost.any():
        return
    strange = frame[lost & frame["member"].isin(members).to_numpy()]
    for (member, _), rows in strange.groupby(["member", column], observed=True, sort=False)["row"]:
        refuse_name(typed, int(rows.iloc[0]), column, column, names.get(str(member), ()))


def refuse_name(
    typed: Typed, row: int, column: str, what: str, known: Collection[str], owner: str = "of this member"
) -> None:
    """Note a name that leads nowhere, with the nearest known one."""
    _, text = typed.block.place(row, column)
    hint = nearest(text or "", list(known)) or _some(known)
    typed.refuse(f"unknown {what}", row, column, f"a {what} {owner}", hint)


def _gauges(readings: Typed, gauges: Typed, members: set[str]) -> None:
    """Readings name a gauge of their member, of the same quantity, at the same station."""
    frame, known = readings.frame, gauges.frame
    found, quantity = frame["gauge row"].to_numpy(), frame["quantity"].array
    has = found >= 0
    if (~has & (frame["gauge"].array.codes >= 0)).any():
        names = _by_member(known, "gauge")
        _known(readings, "gauge", {**_labels(frame, names), **names}, members)
    kinds = pd.Index([*GAUGE_KINDS])
    measures = np.append(kinds.get_indexer(pd.Index(known["measures"])), -1)[found]
    read = np.append(kinds.get_indexer(quantity.categories), -1)[quantity.codes]
    other = (measures >= 0) & (read >= 0) & (read != measures)
    for row, word, measured in zip(frame["row"][other], frame["quantity"][other], kinds[measures[other]], strict=True):
        readings.refuse("gauge of another kind", int(row), word, f"a {measured}, as the gauge measures it")
    strain = (quantity == "strain") & ~has
    if strain.any():
        strain &= frame["member"].isin(members).to_numpy(dtype=bool)
        hint = "its distance below the neutral axis must be known"
        refuse(readings, strain, "strain without gauge", "gauge", "a gauge of the gauges table", hint)


def _labels(frame: pd.DataFrame, names: Names) -> dict[str, dict[str, None]]:
    """Gauges of members without rows in the gauges table: their readings say where they are."""
    return _by_member(frame[~frame["member"].isin(list(names)) & frame["at"].notna()], "gauge")


def _depths(imposed: Typed, members: Typed) -> None:
    """A temperature difference needs the member's depth."""
    deep = set(members.frame["member"][members.given("depth")])
    frame = imposed.frame
    without = imposed.given("top minus bottom") & ~frame["member"].isin(deep).to_numpy()
    refuse(imposed, without, "depth missing", "top minus bottom", "a depth of this member in the members table")


def _where(
    typed: Typed,
    word: str,
    members: set[str],
    cases: Names,
    zones: Names,
    gauges: Names,
    supports: Mapping[str, Mapping[str, float]],
) -> None:
    """Note every where that leads nowhere; write supports and spans by their names."""
    frame = typed.frame
    rows = frame[frame["where"].notna() & frame["member"].isin(members) & frame[word].notna()]
    for index, member, what, where, row in zip(
        rows.index, rows["member"], rows[word], rows["where"], rows["row"], strict=True
    ):
        if what in _SUPPORT_WORDS:
            kind, known, name = "support", list(supports[member]), _support(where, supports[member])
        elif what in FACTORED and where == DYNAMIC:
            continue
        elif what in _SPAN_WORDS:
            kind, known, name = "span", _spans(supports[member]), _span(where, supports[member])
        elif what in _ZONE_WORDS:
            kind, known, name = "zone", list(zones.get(member, ())), where
        elif what == "temperature coefficient":
            kind, known, name = "gauge", list(gauges.get(member, ())), where
        elif what == "load":
            kind, known, name = "load case", list(cases.get(member, ())), where
        else:
            continue
        if name not in known:
            refuse_name(typed, int(row), "where", kind, known)
        frame.loc[index, "where"] = name


def _support(where: str, supports: Mapping[str, float]) -> str:
    """The name of the support at a position such as 4.5 m; any other text as it is."""
    match = _POSITION.fullmatch(where)
    if where in supports or match is None:
        return where
    try:
        at = to_si("length", match[2], float(match[1]))
    except UnitError:
        return where
    return next((name for name, place in supports.items() if abs(place - at) < _SAME_PLACE), where)


def _spans(supports: Mapping[str, float]) -> list[str]:
    """The spans of a member by the names of their supports, from the left: A-B, B-C, ..."""
    names = list(supports)
    return [f"{left}-{right}" for left, right in pairwise(names)]


def _span(where: str, supports: Mapping[str, float]) -> str:
    """The name of the span of a number counted from the left; any other text without spaces at the dash."""
    spans = _spans(supports)
    if where.isascii() and where.isdigit() and 1 <= int(where[:4]) <= len(spans):
        return spans[int(where) - 1]
    return re.sub(r" ?[-–] ?", "-", where)
