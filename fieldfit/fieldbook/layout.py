"""Where the records of a sheet are: the heading row, title rows above it, blank rows, notes below, merged cells.

What is set apart is told in a note; what cannot be placed is a fault.
"""

import re
from collections.abc import Sequence
from dataclasses import replace
from functools import lru_cache

import numpy as np
import numpy.typing as npt

from fieldfit.errors import Fault
from fieldfit.fieldbook.declare import Table
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.sheet import Block, Cells, Heading, Sheet, clean, is_blank, letters, nearest, plain_name

__all__ = ["QUOTES", "TITLE_ROWS", "find_block", "heading_row", "named"]

QUOTES = "in a CSV file a cell that holds a comma needs quotes"
TITLE_ROWS = 50  # headings stand within these first rows
_HEADING = re.compile(r"(?P<name>[^\[\]]*?) ?(?:\[(?P<unit>[^\[\]]*)\])?")


def find_block(sheet: Sheet, table: Table, *, others: Sequence[str] = ()) -> tuple[Block, list[Fault], list[str]]:
    """The records of a sheet, with the faults of its headings and notes on rows set apart.

    `others` are further headings that may stand beside the declared ones (the gauges of wide readings).
    """
    top = heading_row(sheet, table)
    if top is None:
        return _nothing(sheet, table)
    headings = _headings(sheet, table, top, others)
    sheet, merged = _parted(sheet, table, headings, top)
    filled, notes_from = _filled(sheet, top, headings)
    keep = np.flatnonzero(filled[:notes_from]) + top + 1
    whole = slice(top + 1, top + 1 + notes_from) if len(keep) == notes_from else keep
    kept = tuple(sheet.columns[heading.place].take(whole) for heading in headings)
    rows, number = sheet.rows[keep], int(sheet.rows[top])
    block = Block(table=table, headings=headings, cells=kept, rows=rows, top=number, by_comma=sheet.by_comma)
    faults = [*_heading_faults(block, others), *merged, *_stray_cells(sheet, table, headings, keep)]
    tail = np.flatnonzero(filled[notes_from:]) + top + 1 + notes_from
    return block, faults, [*_aside(sheet, range(top), "above"), *_aside(sheet, tail.tolist(), "below")]


def _nothing(sheet: Sheet, table: Table) -> tuple[Block, list[Fault], list[str]]:
    """A sheet without headings: no records, and a fault unless it is empty."""
    block = Block(table=table, headings=(), cells=(), rows=np.empty(0, dtype=np.int64), top=1)
    names = ", ".join(table.names[:4])
    missing = fault("no headings", table.name, f"a row of headings such as {names} in the first {TITLE_ROWS} rows")
    written = any(clean(text) for column in sheet.columns for text in column.distinct)
    return block, [missing] if written else [], []


def named(text: str) -> tuple[str, str | None]:
    """Name and unit of a heading; a heading with odd brackets is all name."""
    tidy = clean(text)
    match = _HEADING.fullmatch(tidy)
    return (match["name"], match["unit"]) if match else (tidy, None)


@lru_cache(maxsize=4096)  # every early row is looked at for headings, and their cells mostly repeat
def _said(text: str) -> str:
    """A cell reduced to what is compared with declared names."""
    return plain_name(named(text)[0])


def heading_row(sheet: Sheet, table: Table) -> int | None:
    """The first row with the most declared headings, as an index."""
    declared = {plain_name(name) for name in table.names}
    early = zip(*(column.words(TITLE_ROWS) for column in sheet.columns), strict=True)
    scores = [sum(map(declared.__contains__, map(_said, row))) for row in early]
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
        name, unit = named(text)
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

    Columns are looked at until no row is left open, those of plain numbers first: they tell at once.
    """
    first = sheet.columns[headings[0].place]
    filled = np.zeros(len(first) - top - 1, dtype=bool)
    for column in sorted([first, *sheet.columns], key=lambda column: column.numbers is None):
        if filled.all():
            break
        filled |= ~column.take(slice(top + 1, None)).blank
    return filled, _notes_from(sheet, top, filled)


def _notes_from(sheet: Sheet, top: int, filled: npt.NDArray[np.bool_]) -> int:
    """Notes are the rows of a single cell at the very end, after a blank row."""
    first = len(filled)
    for row in range(len(filled) - 1, -1, -1):
        if filled[row] and not _alone(sheet, top + 1 + row):
            break
        if not filled[row]:
            first = row
    return first


def _parted(sheet: Sheet, table: Table, headings: Sequence[Heading], top: int) -> tuple[Sheet, list[Fault]]:
    """Merged cells below the headings taken apart.

    Text merged downwards holds for every row. What a number merged downwards means for each row is not known, nor
    which column a cell merged across belongs to: these are refused, but for a row of notes, which is all one cell.
    """
    if not sheet.merged:
        return sheet, []
    columns = {heading.place: heading for heading in headings}
    grid = [column.distinct[column.codes] for column in sheet.columns]
    faults = []
    for first, left, last, right in sheet.merged:
        heading = columns.get(left)
        text = grid[left][first] if first > top and left < len(grid) else ""
        if is_blank(text) or heading is None or (right > left and _alone(sheet, first)):
            continue
        grid[left][first : last + 1] = text  # also where it is refused: its other cells are not blank
        if right == left and heading.column is not None and not heading.column.is_number:
            continue
        row, expected = int(sheet.rows[first]), "a cell of its own for every value"
        faults.append(fault("merged cells", table.name, expected, row=row, column=heading.text, value=text))
    return replace(sheet, columns=tuple(map(Cells.of, grid))), faults


def _alone(sheet: Sheet, row: int) -> bool:
    """Whether a row holds one cell only."""
    return sum(not column.is_blank(row) for column in sheet.columns) == 1


def _stray_cells(sheet: Sheet, table: Table, headings: Sequence[Heading], keep: npt.NDArray[np.int64]) -> list[Fault]:
    """The first cell of every column that has cells but no heading."""
    headed = {heading.place for heading in headings}
    faults = []
    for place, column in enumerate(sheet.columns):
        stray = keep[:0] if place in headed else keep[~column.take(keep).blank]
        if not len(stray):
            continue
        row = int(stray[0])
        expected, hint = f"a heading over column {letters(place)}", QUOTES if sheet.by_comma else None
        number, value = int(sheet.rows[row]), column[row]
        faults.append(fault("value without heading", table.name, expected, row=number, value=value, hint=hint))
    return faults


def _aside(sheet: Sheet, rows: Sequence[int], where: str) -> list[str]:
    """A note on rows that were taken for a title or for notes."""
    texts = [" ".join(clean(column[row]) for column in sheet.columns).strip() for row in rows]
    told = [text for text in texts if text]
    if not told:
        return []
    shown = told[0] if len(told[0]) <= 40 else told[0][:37] + "..."
    return [f'{sheet.table}: {len(told)} row(s) {where} the table were taken as text, not records ("{shown}")']
