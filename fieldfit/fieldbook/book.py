"""A field book read whole: every fault at once, or a frame a table in SI."""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from types import MappingProxyType

import numpy as np
import pandas as pd

from fieldfit.errors import Fault, FieldBookError
from fieldfit.fieldbook.complete import complete, expand_star
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.files import Sheets, read_sheets
from fieldfit.fieldbook.layout import find_block
from fieldfit.fieldbook.levels import check_levels
from fieldfit.fieldbook.links import check_links
from fieldfit.fieldbook.log import Log, channel_names, is_log, type_log
from fieldfit.fieldbook.offsets import note_moved_off
from fieldfit.fieldbook.readings import type_readings
from fieldfit.fieldbook.records import check_records
from fieldfit.fieldbook.sheet import Sheet
from fieldfit.fieldbook.stations import check_stations
from fieldfit.fieldbook.tables import TABLES
from fieldfit.fieldbook.times import check_times
from fieldfit.fieldbook.typed import Typed, type_block
from fieldfit.fieldbook.units import DESIGN_UNITS, us_units

__all__ = ["Book", "read_book"]


#: Faults after which a table lacks names.
_UNREAD = {"cannot be opened", "file too large", "too many cells", "not text", "broken quotes", "no headings"}
_UNREAD |= {"column missing"}
#: Faults that say no more than that a table lacks names.
_FOLLOWS: Mapping[str, tuple[str, ...]] = {
    "members": ("unknown member",),
    "loads": ("unknown load case", "unknown stage"),
    "stages": ("unknown stage", "no window"),
    "supports": ("unknown support", "unknown span"),
    "zones": ("unknown zone",),
    "gauges": ("unknown gauge", "strain without gauge"),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Book:
    """A field book.

    ``tables`` holds a frame for each declared table (empty where left out): numbers are float64 in SI and NaN
    where blank, text is object and None where blank, ``row`` is the spreadsheet's row. Signs are as written. Of the
    readings, which may be many, texts are categories, and ``gauge row`` numbers the row of gauges, -1 for none.
    Where the readings are a logger's file their table is empty and ``log`` holds them.
    ``units`` maps each kind of quantity to the unit the book writes it in, ``notes`` say how it was read.
    """

    name: str
    sha256: str
    tables: Mapping[str, pd.DataFrame]
    log: Log | None
    units: Mapping[str, str]
    notes: tuple[str, ...]

    def __repr__(self) -> str:
        count = len(self.tables["members"])
        return f"Book({self.name}: {count} member{'' if count == 1 else 's'})"


def read_book(path: str | Path) -> Book:
    """A folder of CSV files or one .xlsx workbook as a Book; FieldBookError with every fault it has."""
    sheets = read_sheets(Path(path))
    faults = list(sheets.faults)
    if not sheets.sheets:
        raise FieldBookError(sheets.name, faults)
    tables, log, found, notes = _type_all(sheets)
    faults.extend(found)
    complete(tables)
    check_records(tables)
    check_stations(tables, _units(tables))
    note_moved_off(tables)
    check_times(tables, log)
    _note_examples(tables["members"])
    if tables["members"].frame["member"].notna().any():
        check_links(tables)
        check_levels(tables)
    faults.extend(each for typed in tables.values() for each in typed.faults)
    if faults:
        raise FieldBookError(sheets.name, _in_order(_without_echoes(faults)))
    return Book(
        name=sheets.name,
        sha256=sheets.sha256,
        tables=MappingProxyType({name: _settled(typed.frame) for name, typed in tables.items()}),
        log=log,
        units=MappingProxyType(_units(tables)),
        notes=(*sheets.notes, *notes, *(note for typed in tables.values() for note in typed.notes)),
    )


def _type_all(sheets: Sheets) -> tuple[dict[str, Typed], Log | None, list[Fault], list[str]]:
    """Every table typed; gauges before readings, as they say what the columns of wide readings are."""
    tables: dict[str, Typed] = {}
    faults: list[Fault] = []
    notes: list[str] = []
    if "members" not in sheets.sheets and not any(each.table == "members" for each in sheets.faults):
        faults.append(fault("table missing", "members", "a table of the members with length and stiffness"))
    for name in (table for table in TABLES if table != "readings"):
        block, found, told = find_block(sheets.sheets.get(name) or _no_sheet(name), TABLES[name])
        faults.extend(found)
        notes.extend(told)
        tables[name] = type_block(block)
    if tables["members"].block.headings and tables["members"].frame.empty:
        faults.append(fault("no members", "members", "a row for each member", row=tables["members"].block.top))
    tables["readings"], log, found, told = _readings(sheets.sheets.get("readings") or _no_sheet("readings"), tables)
    return {name: tables[name] for name in TABLES}, log, [*faults, *found], [*notes, *told]


def _note_examples(members: Typed) -> None:
    """Say where the example member of a blank book is still among the members."""
    frame = members.frame
    for example in TABLES["members"].example:
        left = (frame["member"] == example["member"]) & (frame["note"] == example["note"])
        if left.any():
            rows = f"the example rows of the blank book are still there (row {int(frame['row'][left].iloc[0])})"
            members.notes.append(f"members: {rows}: {example['member']} counts as a member like any other")


def _readings(sheet: Sheet, tables: Mapping[str, Typed]) -> tuple[Typed, Log | None, list[Fault], list[str]]:
    """The readings, as a table or as a logger's file."""
    gauges = _all_gauges(tables)
    logged = is_log(sheet)
    others = channel_names(gauges) if logged else list(pd.unique(gauges["gauge"].dropna()))
    block, faults, notes = find_block(sheet, TABLES["readings"], others=others)
    if logged:
        typed, log = type_log(block, gauges)
        bare = replace(block, headings=(), cells=(), rows=block.rows[:0])
        typed.frame = type_readings(bare, gauges).frame  # no row: they are in the log
        return typed, log, [each for each in faults if each.kind != "column missing"], notes
    return type_readings(block, gauges), None, faults, notes


def _no_sheet(table: str) -> Sheet:
    return Sheet(table=table, columns=(), rows=np.empty(0, dtype=np.int64))


def _all_gauges(tables: Mapping[str, Typed]) -> pd.DataFrame:
    """The gauges of every member."""
    expand_star(tables["gauges"], list(pd.unique(tables["members"].frame["member"].dropna())))
    return tables["gauges"].frame


def _settled(frame: pd.DataFrame) -> pd.DataFrame:
    """The same frame with text as objects and None where blank, whatever pandas made of it on the way."""
    if frame.empty:
        return frame
    settled = frame.copy(deep=False)
    for name, kind in frame.dtypes.items():
        if isinstance(kind, pd.CategoricalDtype) or kind.kind in "bif":
            continue
        texts = frame[name].to_numpy(dtype=object)
        blank = pd.isna(texts)
        if not pd.api.types.is_object_dtype(kind) or any(text is not None for text in texts[blank]):
            texts = texts.copy()
            texts[blank] = None
            settled[name] = pd.Series(texts, index=frame.index, dtype=texts.dtype)
    return settled


def _without_echoes(faults: Sequence[Fault]) -> list[Fault]:
    """Faults but for those that only follow from a table that could not be read."""
    unread = {each.table for each in faults if each.kind in _UNREAD}
    echoes = {kind for table in unread for kind in _FOLLOWS.get(table, ())}
    return [each for each in faults if each.kind not in echoes]


def _in_order(faults: Sequence[Fault]) -> list[Fault]:
    """Faults by table, then by row."""
    order = {name: place for place, name in enumerate(["book", *TABLES])}
    return sorted(faults, key=lambda each: (order.get(each.table, 0), each.row or 0))


def _units(tables: Mapping[str, Typed]) -> dict[str, str]:
    """The unit of each kind of quantity: as first written, else one that goes with it, else the design's own."""
    units: dict[str, str] = {}
    for typed in tables.values():
        units = {**typed.units, **units}
    for typed in tables.values():
        units = {**typed.other_units, **units}
    return {**DESIGN_UNITS, **us_units(units), **units}
