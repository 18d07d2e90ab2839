"""One table as it lies in the file: cells as text, each with the row number its spreadsheet shows.

Nothing is typed here. The heading row is found; title rows above it and notes below the records are set apart, and
the book says so.
"""

import re
from collections.abc import Sequence
from dataclasses import dataclass
from difflib import get_close_matches

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.errors import Fault
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.tables import Column, Table

__all__ = [
    "Block",
    "Heading",
    "BLANKS",
    "Sheet",
    "Texts",
    "blank_cells",
    "clean",
    "find_block",
    "is_blank",
    "nearest",
    "plain_name",
]

Texts = npt.NDArray[np.object_]  # one column of cells, shape (rows,), str
Merge = tuple[int, int, int, int]  # first row, first column, last row, last column; indices into the grid

BLANKS = frozenset({"", "-", "–", "—", "n/a", "N/A", "n.a."})
_TITLE_ROWS = 50  # headings stand within these first rows
_HEADING = re.compile(r"(?P<name>[^\[\]]*?) ?(?:\[(?P<unit>[^\[\]]*)\])?")


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """The grid of one table: ``columns`` of equal length, and ``rows``, the spreadsheet's row numbers."""

    table: str
    columns: tuple[Texts, ...]
    rows: npt.NDArray[np.int64]
    merged: tuple[Merge, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Heading:
    """One heading: its place in the grid, the text as written, the declared column (or None) and the unit text."""

    place: int
    text: str
    name: str
    unit: str | None
    column: Column | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Block:
    """The records of a table: cells as text by heading, blank rows left out; ``top`` is the heading's row number."""

    table: Table
    headings: tuple[Heading, ...]
    texts: tuple[Texts, ...]
    rows: npt.NDArray[np.int64]
    top: int

    def of(self, name: str) -> list[tuple[Heading, Texts]]:
        """The headings of one column, each with its cells."""
        pairs = zip(self.headings, self.texts, strict=True)
        return [(heading, texts) for heading, texts in pairs if heading.name == name]

    def place(self, row: int, name: str) -> tuple[Heading | None, str | None]:
        """The heading and the text of the cell of a column in a spreadsheet row; None where there is none."""
        index = int(np.searchsorted(self.rows, row))
        pairs = self.of(name)
        for heading, texts in pairs:
            if clean(texts[index]):
                return heading, clean(texts[index])
        return (pairs[0][0] if pairs else None), None

    def fault(self, kind: str, row: int, name: str, expected: str, hint: str | None = None) -> Fault:
        """A fault of the cell of a declared column in a spreadsheet row."""
        heading, text = self.place(row, name)
        shown = heading.text if heading else name
        return fault(kind, self.table.name, expected, row=row, column=shown, value=text, hint=hint)


def clean(text: str) -> str:
    """Text without outer space, inner white space (no-break space too) as single spaces."""
    return " ".join(text.split())


def blank_cells(texts: Texts) -> npt.NDArray[np.bool_]:
    """Which cells say nothing: only white space, - or n/a; each distinct text is looked at once."""
    codes, distinct = pd.factorize(texts)
    return np.array([is_blank(text) for text in distinct], dtype=bool)[codes]


def is_blank(text: str) -> bool:
    """Whether a cell says that there is nothing to say."""
    return clean(text) in BLANKS


def plain_name(text: str) -> str:
    """A heading or word reduced to what is compared: case, underscores and spacing do not count."""
    return clean(text.replace("_", " ")).casefold()


def nearest(name: str, known: Sequence[str]) -> str | None:
    """A hint naming the nearest known names, or None."""
    plain = {plain_name(candidate): candidate for candidate in known}
    close = get_close_matches(plain_name(name), list(plain), n=2, cutoff=0.6)
    return f"did you mean {' or '.join(plain[match] for match in close)}?" if close else None


def find_block(sheet: Sheet, table: Table, *, others: Sequence[str] = ()) -> tuple[Block, list[Fault], list[str]]:
    """The records of a sheet, with the faults of its headings and notes on rows set apart.

    `others` are further headings that may stand beside the declared ones (the gauges of wide readings).
    """
    top = _heading_row(sheet, table)
    if top is None:
        return _nothing(sheet, table)
    headings = _headings(sheet, table, top, others)
    filled, notes_from = _filled(sheet, top, headings)
    keep = np.flatnonzero(filled[:notes_from]) + top + 1
    kept = tuple(sheet.columns[heading.place][keep] for heading in headings)
    block = Block(table=table, headings=headings, texts=kept, rows=sheet.rows[keep], top=int(sheet.rows[top]))
    faults = [*_heading_faults(block, others), *_stray_cells(sheet, table, headings, keep)]
    tail = np.flatnonzero(filled[notes_from:]) + top + 1 + notes_from
    return block, faults, [*_aside(sheet, range(top), "above"), *_aside(sheet, tail.tolist(), "below")]


def _nothing(sheet: Sheet, table: Table) -> tuple[Block, list[Fault], list[str]]:
    """A sheet without headings: no records, and a fault unless it is empty."""
    block = Block(table=table, headings=(), texts=(), rows=np.empty(0, dtype=np.int64), top=1)
    names = ", ".join(table.names[:4])
    missing = fault("no headings", table.name, f"a row of headings such as {names} in the first {_TITLE_ROWS} rows")
    written = any(clean(text) for column in sheet.columns for text in column)
    return block, [missing] if written else [], []


def _split(text: str) -> tuple[str, str | None]:
    """Name and unit of a heading; a heading with odd brackets is all name."""
    tidy = clean(text)
    match = _HEADING.fullmatch(tidy)
    return (match["name"], match["unit"]) if match else (tidy, None)


def _heading_row(sheet: Sheet, table: Table) -> int | None:
    """The first row with the most declared headings, as an index."""
    declared = {plain_name(name) for name in table.names}
    depth = min(_TITLE_ROWS, len(sheet.rows))
    scores = [sum(plain_name(_split(column[row])[0]) in declared for column in sheet.columns) for row in range(depth)]
    best = max(scores, default=0)
    return scores.index(best) if best else None


def _headings(sheet: Sheet, table: Table, top: int, others: Sequence[str]) -> tuple[Heading, ...]:
    """The headings that are not blank, from the left."""
    declared = {plain_name(column.name): column for column in table.columns}
    beside = {plain_name(name): name for name in others}
    found = []
    for place, cells in enumerate(sheet.columns):
        text = clean(cells[top])
        if not text:
            continue
        name, unit = _split(text)
        column = declared.get(plain_name(name))
        known = column.name if column else beside.get(plain_name(name), name)
        found.append(Heading(place=place, text=text, name=known, unit=unit, column=column))
    return tuple(found)


def _heading_faults(block: Block, others: Sequence[str]) -> list[Fault]:
    """Headings nobody declared, and declared ones that are needed but not there."""
    table = block.table
    present = {heading.name for heading in block.headings}
    unknown = [heading for heading in block.headings if heading.name not in {*table.names, *others}]
    return [
        *(_unknown_heading(block, heading, [*table.names, *others]) for heading in unknown),
        *(
            fault("column missing", table.name, f"a column {column.name}", row=block.top, hint=column.meaning)
            for column in table.columns
            if column.required and column.name not in present
        ),
    ]


def _unknown_heading(block: Block, heading: Heading, known: Sequence[str]) -> Fault:
    bare = re.sub(r"\s*[(\[].*", "", heading.text)
    hint = nearest(bare, known)
    if "(" in heading.text and bare in known:
        hint = "the unit stands in square brackets"
    return fault(
        "unknown column",
        block.table.name,
        f"a column of this table: {', '.join(known)}",
        row=block.top,
        column=heading.text,
        hint=hint,
    )


def _filled(sheet: Sheet, top: int, headings: Sequence[Heading]) -> tuple[npt.NDArray[np.bool_], int]:
    """Which rows below the headings hold anything, and from which of these on there are only notes.

    Only rows that lack their first column are looked at cell by cell.
    """
    filled = ~blank_cells(sheet.columns[headings[0].place][top + 1 :])
    for row in np.flatnonzero(~filled):
        filled[row] = any(clean(column[top + 1 + row]) for column in sheet.columns)
    return filled, _notes_from(sheet, top, filled)


def _notes_from(sheet: Sheet, top: int, filled: npt.NDArray[np.bool_]) -> int:
    """Notes are the rows of a single cell at the very end, after a blank row."""
    first = len(filled)
    for row in range(len(filled) - 1, -1, -1):
        if filled[row] and sum(bool(clean(column[top + 1 + row])) for column in sheet.columns) > 1:
            break
        if not filled[row]:
            first = row
    return first


def _stray_cells(sheet: Sheet, table: Table, headings: Sequence[Heading], keep: npt.NDArray[np.int64]) -> list[Fault]:
    """The first cell of every column that has cells but no heading."""
    headed = {heading.place for heading in headings}
    faults = []
    for place, column in enumerate(sheet.columns):
        stray = np.flatnonzero(~blank_cells(column[keep])) if place not in headed else ()
        if len(stray):
            row = keep[stray[0]]
            faults.append(
                fault(
                    "value without heading",
                    table.name,
                    f"a heading over column {_letters(place)}",
                    row=int(sheet.rows[row]),
                    value=column[row],
                    hint="a comma inside a cell of a CSV file needs quotes around the cell",
                )
            )
    return faults


def _letters(place: int) -> str:
    """A spreadsheet's name of a column: 0 is A, 26 is AA."""
    letters = ""
    place += 1
    while place:
        place, rest = divmod(place - 1, 26)
        letters = chr(ord("A") + rest) + letters
    return letters


def _aside(sheet: Sheet, rows: Sequence[int], where: str) -> list[str]:
    """A note on rows that were taken for a title or for notes."""
    texts = [" ".join(clean(column[row]) for column in sheet.columns).strip() for row in rows]
    told = [text for text in texts if text]
    if not told:
        return []
    shown = told[0] if len(told[0]) <= 40 else told[0][:37] + "..."
    return [f'{sheet.table}: {len(told)} row(s) {where} the table were taken as text, not records ("{shown}")']
