"""A CSV file as text cells: separator, encoding and quoting found out, nothing typed."""

import csv
import io

import numpy as np
import pandas as pd

from fieldfit.errors import Fault
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.sheet import Sheet, plain_name
from fieldfit.fieldbook.tables import TABLES

__all__ = ["MOST_CELLS", "WIDEST", "read_csv"]

MOST_CELLS = 20_000_000
WIDEST = 2_000
_SEPARATORS = ",;\t"
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
        width = _bounded(*_width(content, separator))
        frame = _quoted(content, separator) if b'"' in content else _plain(content, separator, width)
    except _TooManyCellsError:
        return None, [fault("too many cells", table, f"at most {WIDEST} columns and {MOST_CELLS} cells")], notes
    except (csv.Error, pd.errors.ParserError) as error:
        expected = "cells separated alike, a cell in quotes ending with its quote"
        return None, [fault("broken quotes", table, expected, hint=str(error))], notes
    columns = tuple(frame[name].to_numpy(dtype=object) for name in frame)
    return Sheet(table=table, columns=columns, rows=np.arange(1, len(frame) + 1)), [], notes


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
        return max((_headings_in(line, separator, declared) for line in lines), default=0)

    return max(_SEPARATORS, key=score)


def _headings_in(line: str, separator: str, declared: set[str]) -> int:
    cells = (plain_name(cell.strip().strip('"').split("[")[0]) for cell in line.split(separator))
    return sum(cell in declared for cell in cells)


def _width(content: bytes, separator: str) -> tuple[int, int]:
    """Most separators on a line, and one; number of lines."""
    codes = np.frombuffer(content, dtype=np.uint8)
    ends = np.flatnonzero((codes == ord("\n")) | (codes == ord("\r")))
    marks = np.flatnonzero(codes == ord(separator))
    before = np.searchsorted(marks, np.concatenate([[0], ends, [len(codes)]]))
    return int(np.diff(before).max()) + 1, len(ends) + 1


def _bounded(width: int, height: int) -> int:
    """The width of a table that is not too large."""
    if width > WIDEST or width * height > MOST_CELLS:
        raise _TooManyCellsError
    return width


def _plain(content: bytes, separator: str, width: int) -> pd.DataFrame:
    """Cells of a file without quotes."""
    if not content:
        return pd.DataFrame()
    return pd.read_csv(
        io.BytesIO(content),
        sep=separator,
        header=None,
        names=range(width),
        index_col=False,
        dtype=object,
        na_filter=False,
        keep_default_na=False,
        skip_blank_lines=False,
        quoting=csv.QUOTE_NONE,
    )


def _quoted(content: bytes, separator: str) -> pd.DataFrame:
    """Cells of a file with quotes, which may hold separators and line ends."""
    records = list(csv.reader(io.StringIO(content.decode(), newline=""), delimiter=separator, strict=True))
    width = _bounded(max(map(len, records), default=0), len(records))  # a cell in quotes may join many lines
    return pd.DataFrame([record + [""] * (width - len(record)) for record in records], dtype=object)
