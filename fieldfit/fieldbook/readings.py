"""Readings in one long form, whether they were written a row a reading or a column a gauge.

After this every row holds one value of one quantity, SI, with the heading it stood under.
"""

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.fieldbook.cells import as_categories
from fieldfit.fieldbook.declare import GAUGE_KINDS, Column
from fieldfit.fieldbook.layout import QUOTES
from fieldfit.fieldbook.pairs import places_of
from fieldfit.fieldbook.sheet import Block, Heading
from fieldfit.fieldbook.tables import TABLES
from fieldfit.fieldbook.typed import Typed, by_kind, type_block

__all__ = ["READING_COLUMNS", "type_readings"]

READING_COLUMNS = (
    "member",
    "stage",
    "gauge",
    "at",
    "quantity",
    "value",
    "u",
    "plus or minus",
    "resolution",
    "reset",
    "time",
    "temperature",
    "use",
    "remark",
    "row",
    "column",
)
_TEXTS = ("member", "stage", "gauge", "quantity", "time", "remark", "column")
_SURE = ("u", "plus or minus", "resolution")
_LONG_ONLY = ("gauge", "at", *GAUGE_KINDS, *_SURE)


def type_readings(block: Block, gauges: pd.DataFrame) -> Typed:
    """The readings table typed and in long form; `gauges` is the typed gauges table, one row a gauge.

    The frame's last column, ``gauge row``, is the index of each reading's gauge there, -1 for none.
    """
    names = set(gauges["gauge"])
    wide = [heading for heading in block.headings if heading.column is None and heading.name in names]
    typed = type_block(block)
    if wide:
        _refuse_long(typed, wide)
        typed.frame = _from_wide(typed, wide, gauges)
    else:
        typed.frame = _from_long(typed, gauges)
    return typed


def _gauge_rows(readings: pd.DataFrame, gauges: pd.DataFrame) -> npt.NDArray[np.intp]:
    """For each reading the index of its gauge in `gauges`, -1 where there is none."""
    found = places_of(readings["member"], readings["gauge"], (gauges["member"].tolist(), gauges["gauge"].tolist()))
    return np.append(gauges.index.to_numpy(dtype=np.intp), -1)[found]


def _from_long(typed: Typed, gauges: pd.DataFrame) -> pd.DataFrame:
    """Rows of one value each."""
    frame = typed.frame
    written = [word for word in GAUGE_KINDS if typed.block.of(word)] or ["deflection"]
    count = np.zeros(len(frame), dtype=np.int64)
    which, value = np.full(len(frame), -1, dtype=np.intp), np.full(len(frame), np.nan)
    for code, word in reversed([*enumerate(written)]):  # of several values the first stands
        given = typed.given(word)
        count += given
        which[given], value[given] = code, frame[word].to_numpy(dtype=np.float64)[given]
    _refuse_none(typed, written[0], count == 0)
    _refuse_several(typed, written, count > 1)
    headings = [pairs[0][0].text if (pairs := typed.block.of(word)) else word for word in written]
    for name, words, codes in (("quantity", written, which), ("column", headings, np.maximum(which, 0))):
        frame[name] = as_categories(np.array([*words, None], dtype=object), codes)
    frame["value"] = value
    return _finished(typed, gauges)


def _refuse_none(typed: Typed, name: str, without: npt.NDArray[np.bool_]) -> None:
    """A used row has a value."""
    for row in typed.block.rows[without & typed.frame["use"].to_numpy()]:
        typed.refuse("no value", int(row), name, "a value", "or write no in the column use")


def _refuse_several(typed: Typed, written: list[str], several: npt.NDArray[np.bool_]) -> None:
    """No row has two values, nor one that a decimal comma has parted."""
    given = {word: typed.given(word) for word in written} if several.any() else {}
    for place in np.flatnonzero(several):
        row = int(typed.block.rows[place])
        *others, last = (word for word in written if given[word][place])
        stated = [typed.block.place(row, word) for word in (*others, last)]
        also = ", ".join(f"{text!r} stands below {heading.text}" for heading, text in stated[:-1] if heading)
        hint = (
            f"write {_joined(stated)} in one cell: {QUOTES}" if _parted(typed, stated) else "write a row for each value"
        )
        typed.refuse("several values", row, last, "one value a row", f"{also}; {hint}")


def _parted(typed: Typed, stated: Sequence[tuple[Heading | None, str | None]]) -> bool:
    """Whether two cells side by side may be one number whose decimal comma has parted it."""
    (left, whole), (right, decimals) = stated[-2:]
    beside = left is not None and right is not None and right.place == left.place + 1
    digits = (whole or "").lstrip("+-").isdigit() and (decimals or "").isdigit()
    return typed.block.by_comma and len(stated) == 2 and beside and digits


def _joined(stated: Sequence[tuple[Heading | None, str | None]]) -> str:
    return ".".join(text or "" for _, text in stated)


def _finished(typed: Typed, gauges: pd.DataFrame) -> pd.DataFrame:
    """Uncertainties by quantity, stations from the gauges, and the columns in their order."""
    frame = typed.frame
    for name in _TEXTS:
        if not isinstance(frame[name].dtype, pd.CategoricalDtype):
            codes, names = pd.factorize(frame[name])
            frame[name] = as_categories(np.array([*names, None], dtype=object), codes)
    columns = {column.name: column for column in TABLES["readings"].columns}
    for name in _SURE:
        if typed.block.of(name):
            frame[name] = by_kind(typed, columns[name], frame["quantity"].array)
    frame["gauge row"] = _gauge_rows(frame, gauges)
    at = frame["at"].to_numpy()
    frame["at"] = np.where(np.isnan(at), np.append(gauges["at"].to_numpy(dtype=float), np.nan)[frame["gauge row"]], at)
    return frame[[*READING_COLUMNS, "gauge row"]]


def _refuse_long(typed: Typed, wide: list[Heading]) -> None:
    """With a column a gauge there can be no columns that say which gauge a row is of."""
    for heading in typed.block.headings:
        if heading.name in _LONG_ONLY:
            hint = f"{wide[0].text} is a column of one gauge; use one form or the other"
            typed.refuse_heading("two forms of readings", heading, "a row a reading or a column a gauge", hint)


def _from_wide(typed: Typed, wide: list[Heading], gauges: pd.DataFrame) -> pd.DataFrame:
    """A column a gauge becomes a row a reading; a blank cell is no reading."""
    frame = typed.frame
    names = list(dict.fromkeys(heading.name for heading in wide))
    parts = [_one_gauge(typed, name, [h for h in wide if h.name == name], gauges) for name in names]
    read = pd.concat(parts, keys=range(len(parts)), names=["place"]).reset_index(level="place")
    long = read[read["value"].notna()].sort_values(["row", "place"], kind="stable", ignore_index=True)
    empty = sorted({*frame["row"]} - {*read["row"][read["value"].notna()]} - {row for row, _ in typed.bad})
    if empty:
        shown = ", ".join(map(str, empty[:5])) + (", ..." if len(empty) > 5 else "")
        typed.notes.append(f"readings: {len(empty)} row(s) hold no reading (row {shown})")
    typed.frame = long
    return _finished(typed, gauges)


def _one_gauge(typed: Typed, name: str, headings: list[Heading], gauges: pd.DataFrame) -> pd.DataFrame:
    """The cells of one gauge's columns, a row a stage; NaN where there is no reading."""
    column = Column(name=name, by="measures", kinds=GAUGE_KINDS, meaning="")
    part = typed.frame.copy()
    part["gauge"] = as_categories(np.array([name], dtype=object), np.zeros(len(part), dtype=np.intp))
    found = _gauge_rows(part, gauges)
    measures = as_categories(np.array([*gauges["measures"], None], dtype=object), found)
    part["quantity"] = measures
    part["value"] = by_kind(typed, column, measures)
    part["column"] = headings[0].text
    for heading in headings[1:]:
        part.loc[~typed.block.cells[typed.block.headings.index(heading)].blank, "column"] = heading.text
    for row in part["row"][(found < 0) & _written(typed, name)]:
        typed.refuse("unknown gauge", int(row), name, f"a blank cell, as this member has no gauge {name}")
    return part


def _written(typed: Typed, name: str) -> npt.NDArray[np.bool_]:
    """Which rows hold anything below a heading of that name."""
    cells = [~cells.blank for _, cells in typed.block.of(name)]
    return np.logical_or.reduce([np.zeros(len(typed.block.rows), dtype=bool), *cells])
