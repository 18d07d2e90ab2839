"""A logger's file: a column of times and a column a channel, up to a million rows, kept as columns.

Written out a row a reading it would be tens of millions of rows, so it stays as it was recorded: one array a channel.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.fieldbook.cells import Floats, full_times, type_times
from fieldfit.fieldbook.clock import forms_of, moments
from fieldfit.fieldbook.declare import GAUGE_KINDS
from fieldfit.fieldbook.layout import heading_row, named
from fieldfit.fieldbook.sheet import Block, Cells, Heading, Sheet, plain_name
from fieldfit.fieldbook.tables import TABLES
from fieldfit.fieldbook.typed import Typed, of_kind, type_block

__all__ = ["Channel", "Log", "channel_names", "is_log", "type_log"]

BESIDE = ("time", "temperature", "use", "remark")  # declared columns that a logger's file may have


@dataclass(frozen=True, slots=True, kw_only=True)
class Channel:
    """One channel: the gauge it is, by its row in the gauges table, and what it read (n,), SI, NaN where blank."""

    heading: str
    gauge_row: int
    values: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class Log:
    """What a logger recorded, in the order of its rows, never back in time: ``time`` (n,), s, and a value a channel.

    ``row`` (n,) is the row of the file, ``forms`` the ways in which times are written, each with the first row written
    so; ``temperature`` (n,) is in degC, NaN where blank; ``use`` (n,) is False where the book sets a row aside.
    """

    row: npt.NDArray[np.int64]
    time: Floats
    forms: Mapping[str, int]
    temperature: Floats
    use: npt.NDArray[np.bool_]
    channels: tuple[Channel, ...]

    @property
    def count(self) -> int:
        """How many readings there are: cells that are not blank."""
        return sum(int(np.isfinite(channel.values).sum()) for channel in self.channels)


def is_log(sheet: Sheet) -> bool:
    """Whether a sheet of readings is a logger's: times, and neither members nor stages, gauges or quantities."""
    top = heading_row(sheet, TABLES["readings"])
    if top is None:
        return False
    names = {plain_name(named(column[top])[0]) for column in sheet.columns}
    return "time" in names and not names & {"member", "stage", "gauge", "at", *GAUGE_KINDS}


def channel_names(gauges: pd.DataFrame) -> list[str]:
    """What a logger's columns may be called: a channel of the gauges table, or the gauge itself."""
    return [*dict.fromkeys([*gauges["channel"].dropna(), *gauges["gauge"].dropna()])]


def type_log(block: Block, gauges: pd.DataFrame) -> tuple[Typed, Log]:
    """A logger's file typed: what stands beside the channels as a table, the channels in the log."""
    timeless = [place for place, heading in enumerate(block.headings) if heading.name != "time"]
    headings, cells = (tuple(block.headings[n] for n in timeless), tuple(block.cells[n] for n in timeless))
    typed = type_block(replace(block, headings=headings, cells=cells))
    frame, typed.block = typed.frame, block
    time, forms = _times(typed)
    for heading in block.headings:
        if heading.column is not None and heading.name not in BESIDE:
            expected = "a logger's file: time, a column a channel, temperature, use and remark"
            hint = "resets of single gauges stand in the table resets" if heading.name == "reset" else None
            typed.refuse_heading("two forms of readings", heading, expected, hint)
    log = Log(
        row=block.rows,
        time=time,
        forms=forms,
        temperature=frame["temperature"].to_numpy(dtype=np.float64),
        use=frame["use"].to_numpy(dtype=bool),
        channels=tuple(_channels(typed, gauges)),
    )
    return typed, log


def _times(typed: Typed) -> tuple[Floats, dict[str, int]]:
    """The time of every row, s, and the first row of each way of writing times; a row without is refused."""
    (heading, cells), *more = typed.block.of("time")
    rows = typed.block.rows
    for other, _ in more:
        typed.refuse_heading("column twice", other, "one column time")
    plain = full_times(cells.distinct[cells.codes]) if len(cells) and (cells.codes >= 0).all() else None
    if plain is not None:
        return plain.astype(np.int64).astype(np.float64), {"local": int(rows[0])}
    words, found = type_times(cells)
    typed.refuse_all(found, heading, cells)
    for row in rows[words.codes < 0]:
        typed.refuse("blank cell", int(row), "time", "a time, in every row of a logger's file")
    texts = words.categories.to_numpy(dtype=object)
    forms = np.append(forms_of(texts), np.array([None], dtype=object))
    first = {form: int(rows[np.argmax((forms == form)[words.codes])]) for form in pd.unique(forms[:-1])}
    return np.append(moments(texts), np.nan)[words.codes], first


def _channels(typed: Typed, gauges: pd.DataFrame) -> list[Channel]:
    """The channels with their gauges; a heading that is that of several gauges, or repeated, is refused."""
    block = typed.block
    found: dict[int, Channel] = {}
    for heading, cells in zip(block.headings, block.cells, strict=True):
        rows = _gauges_of(heading, gauges)
        if heading.column is not None or not len(rows):
            continue  # declared, or already told to be unknown
        if len(rows) > 1:
            names = ", ".join(gauges["member"][rows].head(3))
            hint = f"it is a gauge of {names}; give each a channel of its own in gauges"
            typed.refuse_heading("channel of several gauges", heading, "a column of one gauge", hint)
        elif int(rows[0]) in found:
            typed.refuse_heading("column twice", heading, f"one column of {heading.name}")
        else:
            found[int(rows[0])] = _channel(typed, heading, cells, gauges, int(rows[0]))
    return list(found.values())


def _gauges_of(heading: Heading, gauges: pd.DataFrame) -> npt.NDArray[np.intp]:
    """Rows of the gauges table that a heading names: as their channel, else by their own name."""
    by_channel = gauges.index[(gauges["channel"] == heading.name).to_numpy(dtype=bool)]
    named_so = by_channel if len(by_channel) else gauges.index[(gauges["gauge"] == heading.name).to_numpy(dtype=bool)]
    return named_so.to_numpy(dtype=np.intp)


def _channel(typed: Typed, heading: Heading, cells: Cells, gauges: pd.DataFrame, row: int) -> Channel:
    measures = gauges["measures"][row]
    values = of_kind(typed, heading, cells, measures) if measures else np.full(len(cells), np.nan)
    return Channel(heading=heading.text, gauge_row=row, values=values)
