"""A CSV file as cells: separator, encoding and quoting found out.

Columns of plain numbers are read as numbers below their headings; every other column stays text.
"""

import csv
import io
from collections.abc import Callable
from dataclasses import replace
from functools import cache, lru_cache, partial
from typing import Any

import numpy as np
import pandas as pd

from fieldfit.errors import Fault
from fieldfit.fieldbook.declare import Table
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.layout import TITLE_ROWS, heading_row, named
from fieldfit.fieldbook.sheet import BLANKS, Cells, Sheet, Texts, plain_name
from fieldfit.fieldbook.tables import TABLES

__all__ = ["MOST_CELLS", "WIDEST", "read_csv"]

MOST_CELLS = 40_000_000
WIDEST = 2_000
_SEPARATORS = ",;\t"
_SHORT = 20_000  # bytes up to which a file is read cell by cell
_EARLY, _LOOK = 50_000, 60  # bytes and lines looked at to find the separator


class _TooManyCellsError(Exception):
    """A table wider or larger than is read."""


def read_csv(table: str, content: bytes) -> tuple[Sheet | None, list[Fault], list[str]]:
    """The cells of one CSV file, or the fault that keeps it from being read, and notes on how it was read."""
    content, encoding = _as_utf8(content)
    if not encoding:
        return None, [fault("not text", table, "a text file in UTF-8, UTF-16 or Windows-1252 (Latin-1)")], []
    notes = [f"{table}: the file is not UTF-8 and was read as Windows-1252"] if encoding == "cp1252" else []
    separator = _separator(table, content)
    try:
        by_cell = len(content) < _SHORT or b'"' in content
        columns = _by_cell(content, separator) if by_cell else _by_column(table, content, separator)
    except _TooManyCellsError:
        return None, [fault("too many cells", table, f"at most {WIDEST} columns and {MOST_CELLS} cells")], notes
    except (csv.Error, pd.errors.ParserError) as error:
        expected = "cells separated alike, a cell in quotes ending with its quote"
        return None, [fault("broken quotes", table, expected, hint=str(error))], notes
    return replace(_sheet(table, columns), by_comma=separator == ","), [], notes


def _sheet(table: str, columns: tuple[Cells, ...]) -> Sheet:
    return Sheet(table=table, columns=columns, rows=np.arange(1, 1 + (len(columns[0]) if columns else 0)))


def _as_utf8(content: bytes) -> tuple[bytes, str]:
    """The text as UTF-8 and its encoding: by its byte-order mark, else UTF-8, else Windows-1252; none if no text."""
    marked = content[:2] in {b"\xff\xfe", b"\xfe\xff"}
    for encoding in ("utf-16",) if marked else ("utf-8-sig", "cp1252"):
        try:
            utf8 = content if content.isascii() else content.decode(encoding).encode()
        except UnicodeError:
            continue
        return utf8, "" if b"\0" in utf8 else encoding
    return b"", ""


def _separator(table: str, content: bytes) -> str:
    """The separator under which some early line holds most of the table's headings."""
    declared = {plain_name(name) for name in TABLES[table].names}
    lines = content[:_EARLY].decode(errors="ignore").splitlines()[:_LOOK]

    def score(separator: str) -> int:
        cells = ([*map(_as_heading, line.split(separator))] for line in lines)
        return max((sum(map(declared.__contains__, names)) for names in cells), default=0)

    return max(_SEPARATORS, key=score)


@lru_cache(maxsize=4096)  # the early lines are looked at for each separator, and their cells mostly repeat
def _as_heading(cell: str) -> str:
    return plain_name(cell.strip().strip('"').split("[")[0])


def _width(content: bytes, separator: str) -> tuple[int, int]:
    """Most separators on a line, and one; number of lines."""
    others = bytes(set(range(256)) - {ord(separator), ord("\n")})
    parting = np.frombuffer(content.translate(None, delete=others), dtype=np.uint8)
    ends = np.flatnonzero(parting == ord("\n"))
    return int(np.diff(ends, prepend=-1, append=len(parting)).max()), len(ends) + 1


def _lone_returns(content: bytes) -> bool:
    """Whether some carriage return stands without a line feed after it."""
    codes = np.frombuffer(content + b" ", dtype=np.uint8)
    return bool((codes[np.flatnonzero(codes == ord("\r")) + 1] != ord("\n")).any())


def _bounded(width: int, height: int) -> int:
    """The width of a table that is not too large."""
    if width > WIDEST or width * height > MOST_CELLS:
        raise _TooManyCellsError
    return width


def _by_column(table: str, content: bytes, separator: str) -> tuple[Cells, ...]:
    """Cells of a long file without quotes."""
    if _lone_returns(content):  # pandas skips a byte too many after one
        content = content.replace(b"\r\n", b"\n").replace(b"\r", b"\n")
    width = _bounded(*_width(content, separator))
    raw = cache(partial(_read, content, separator, width, dtype=object, na_filter=False))
    head = _early_cells(content, separator, width)
    top = heading_row(_sheet(table, tuple(map(Cells.of, head))), TABLES[table])
    if top is None:
        return tuple(Cells.of(raw()[place].to_numpy(dtype=object)) for place in raw())
    numeric = [place for place in range(width) if _takes_numbers(TABLES[table], head[place][top])]
    read = _read(
        content,
        separator,
        width,
        skiprows=top + 1,
        dtype={place: _text_type(head[place][top]) for place in range(width) if place not in numeric},
        na_values=dict.fromkeys(numeric, sorted(BLANKS)),
    )
    return tuple(_cells(head[place][: top + 1], read[place], partial(_column, raw, place)) for place in range(width))


def _early_cells(content: bytes, separator: str, width: int) -> list[Texts]:
    """The columns of the rows in which headings are looked for."""
    lines = b"\n".join(content.split(b"\n", TITLE_ROWS)[:TITLE_ROWS]).decode().split("\n")
    grid = np.full((len(lines), width), "", dtype=object)
    for row, line in enumerate(lines):
        cells = line.removesuffix("\r").split(separator)
        grid[row, : len(cells)] = cells
    return [*grid.T]


def _takes_numbers(table: Table, heading: str) -> bool:
    """Whether a column is declared as numbers; a gauge of its own has a unit."""
    name, unit = named(heading)
    declared = [column for column in table.columns if plain_name(column.name) == plain_name(name)]
    return declared[0].is_number if declared else unit is not None


def _text_type(heading: str) -> str:
    """Times mostly differ, so that to read them as categories takes longer than to make these of them afterwards."""
    return "object" if plain_name(named(heading)[0]) == "time" else "category"


def _cells(head: Texts, below: "pd.Series[Any]", written: Callable[[], Texts]) -> Cells:
    """A column from its first cells, which are texts, and those below, read as categories or as numbers."""
    if below.dtype == object and pd.api.types.is_string_dtype(below):  # pandas keeps huge integers as objects too
        return Cells.of(np.concatenate([head, below.to_numpy(dtype=object)]))
    codes, distinct = pd.factorize(head)
    if isinstance(below.dtype, pd.CategoricalDtype) and pd.api.types.is_string_dtype(below.cat.categories):
        every = np.concatenate([distinct, below.cat.categories.to_numpy(dtype=object)])
        return Cells(
            codes=np.concatenate([codes, below.cat.codes.to_numpy(dtype=np.intp) + len(distinct)]), distinct=every
        )
    if below.dtype not in {np.dtype(np.int64), np.dtype(np.float64)} or np.isinf(below).any():
        return Cells.of(written())  # also where pandas made numbers of names such as 007
    numbers = np.concatenate([np.full(len(head), np.nan), below.to_numpy(dtype=np.float64)])
    places = ~np.arange(len(head), len(numbers))
    return Cells(codes=np.concatenate([codes, places]), distinct=distinct, numbers=numbers, written=written)


def _column(read: Callable[[], pd.DataFrame], place: int) -> Texts:
    return read()[place].to_numpy(dtype=object)


def _read(content: bytes, separator: str, width: int, **how: Any) -> pd.DataFrame:
    """Every line a row, every cell kept; columns by their place."""
    return pd.read_csv(
        io.BytesIO(content),
        sep=separator,
        header=None,
        names=range(width),
        index_col=False,
        keep_default_na=False,
        skip_blank_lines=False,
        quoting=csv.QUOTE_NONE,
        low_memory=False,
        **how,
    )


def _by_cell(content: bytes, separator: str) -> tuple[Cells, ...]:
    """Cells of a short file, or of one with quotes, which may hold separators and line ends."""
    records = list(csv.reader(io.StringIO(content.decode(), newline=""), delimiter=separator, strict=True))
    width = _bounded(max(map(len, records), default=0), len(records))  # a cell in quotes may join many lines
    grid = np.full((len(records), width), "", dtype=object)
    for row, record in enumerate(records):
        grid[row, : len(record)] = record
    return tuple(map(Cells.of, grid.T))
