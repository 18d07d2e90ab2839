"""An Excel workbook as text cells, looked over before it is opened.

The archive's own directory and one pass over its XML come first: size, compression, nesting, number of cells and
document types are held to limits before openpyxl builds anything. Values are the stored ones: no formula is ever
worked out, and one without a stored value is a fault.
"""

import io
import warnings
import zipfile
from collections.abc import Iterator, Mapping
from contextlib import suppress
from datetime import date, datetime, time
from typing import Any
from xml.parsers import expat

import numpy as np
import openpyxl
from openpyxl.utils import range_boundaries

from fieldfit.errors import Fault
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.naming import sort_names
from fieldfit.fieldbook.sheet import Cells, Merge, Sheet

__all__ = ["read_workbook"]

LARGEST_UNPACKED = 500_000_000  # bytes
MOST_PACKED = 200  # unpacked size over packed size, of parts worth the name
MOST_PARTS = 2_000
MOST_SHEETS = 200
MOST_CELLS = 5_000_000  # written cells, and cells of the grid that spans them
DEEPEST = 60
_EXACT = 1e15  # below this a float that is whole shows as an integer
_SMALL = 1_000_000  # bytes; below this no ratio is suspicious


class _UnsafeError(Exception):
    """A part of the workbook that will not be opened; the text says why."""


def read_workbook(content: bytes) -> tuple[list[Sheet], list[Fault], list[str]]:
    """The sheets of a workbook that are tables, faults and notes."""
    try:
        formulas = _look_over(content)
        shown = _opened(content, data_only=True)
        written = _opened(content, data_only=False) if formulas else None
    except _UnsafeError as error:
        return [], [fault("unsafe workbook", "book", "a workbook of ordinary size and make", hint=str(error))], []
    except Exception as error:
        hint = f"it cannot be opened ({type(error).__name__})"
        return [], [fault("broken workbook", "book", "an .xlsx workbook", hint=hint)], []
    return _tables(shown, written)


def _opened(content: bytes, *, data_only: bool) -> Any:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # openpyxl warns of decoration it does not know; cells are not concerned
        return openpyxl.load_workbook(io.BytesIO(content), data_only=data_only, keep_links=False)


def _look_over(content: bytes) -> bool:
    """Hold the archive to its limits; whether any sheet has formulas."""
    with zipfile.ZipFile(io.BytesIO(content)) as archive:
        parts = archive.infolist()
        if len(parts) > MOST_PARTS:
            raise _UnsafeError(f"it has more than {MOST_PARTS} parts")
        if sum(part.file_size for part in parts) > LARGEST_UNPACKED:
            raise _UnsafeError(f"it unpacks to more than {LARGEST_UNPACKED // 1_000_000} MB")
        if any(part.file_size > max(_SMALL, MOST_PACKED * part.compress_size) for part in parts):
            raise _UnsafeError(f"a part is packed more than {MOST_PACKED} to 1")
        scan = _Scan()
        for part in parts:
            scan.read(archive, part)
        return scan.formulas > 0


class _Scan:
    """One pass over the XML of a workbook: nesting, document types, cells and formulas."""

    def __init__(self) -> None:
        self.cells = 0
        self.formulas = 0
        self.depth = 0

    def read(self, archive: zipfile.ZipFile, part: zipfile.ZipInfo) -> None:
        """Parse one part without building anything; pictures and the like are no XML and end at once."""
        self.depth = 0
        parser = expat.ParserCreate()
        parser.StartElementHandler = self._start
        parser.EndElementHandler = self._end
        parser.StartDoctypeDeclHandler = self._doctype
        with archive.open(part) as stream, suppress(expat.ExpatError):
            parser.ParseFile(stream)

    def _start(self, name: str, attributes: Mapping[str, str]) -> None:
        self.depth += 1
        local = name.rpartition(":")[2]
        self.cells += _area(attributes.get("ref", "")) if local == "mergeCell" else local == "c"
        self.formulas += local == "f"
        if self.depth > DEEPEST:
            raise _UnsafeError(f"its XML is nested more than {DEEPEST} deep")
        if self.cells > MOST_CELLS:
            raise _UnsafeError(f"it has more than {MOST_CELLS} cells")

    def _end(self, _: str) -> None:
        self.depth -= 1

    def _doctype(self, *_: object) -> None:
        raise _UnsafeError("its XML declares a document type")


def _area(reference: str) -> int:
    """Cells in a range such as A1:C3."""
    left, top, right, bottom = (edge or 1 for edge in range_boundaries(reference))
    return (right - left + 1) * (bottom - top + 1)


def _tables(shown: Any, written: Any) -> tuple[list[Sheet], list[Fault], list[str]]:
    """The sheets named for tables; `written` is the same workbook with formulas, None where it has none."""
    titles = [sheet.title for sheet in shown.worksheets]
    if len(titles) > MOST_SHEETS:
        return [], [fault("too many sheets", "book", f"at most {MOST_SHEETS} sheets")], []
    tables, faults, notes = sort_names({title: title for title in titles})
    sheets = []
    for title, table in tables.items():
        sheet, found, told = _one_sheet(shown[title], table, written[title] if written else None)
        faults.extend(found)
        notes.extend(told)
        if sheet is not None:
            sheets.append(sheet)
    return sheets, faults, notes


def _one_sheet(shown: Any, table: str, written: Any) -> tuple[Sheet | None, list[Fault], list[str]]:
    """The cells of one sheet as text; of a formula without a stored value the formula itself, to be refused."""
    height, width = shown.max_row, shown.max_column
    if height * width > MOST_CELLS:
        hint = f"a stray cell in row {height} or column {width} makes the sheet huge"
        return None, [fault("too many cells", table, f"at most {MOST_CELLS} cells", hint=hint)], []
    grid = np.full((height, width), "", dtype=object)
    for cell in _cells(shown):
        grid[cell.row - 1, cell.column - 1] = _text(cell.value, cell.number_format)
    for cell in _cells(written) if written is not None else ():
        if cell.data_type == "f" and not grid[cell.row - 1, cell.column - 1]:
            grid[cell.row - 1, cell.column - 1] = str(getattr(cell.value, "text", cell.value))
    columns = tuple(map(Cells.of, grid.T))
    rows = np.arange(1, height + 1)
    return Sheet(table=table, columns=columns, rows=rows, merged=_merged(shown)), [], _hidden(shown, table)


def _cells(sheet: Any) -> Iterator[Any]:
    """The cells that hold something."""
    return (cell for row in sheet.iter_rows() for cell in row if cell.value is not None)


def _merged(sheet: Any) -> tuple[Merge, ...]:
    areas = sheet.merged_cells.ranges
    return tuple((area.min_row - 1, area.min_col - 1, area.max_row - 1, area.max_col - 1) for area in areas)


def _hidden(sheet: Any, table: str) -> list[str]:
    """Notes on what a spreadsheet does not show: it is read like the rest."""
    rows = sum(bool(row.hidden) for row in sheet.row_dimensions.values())
    columns = sum(bool(column.hidden) for column in sheet.column_dimensions.values())
    told = [f"{table}: {rows} hidden row(s) were read like the others"] if rows else []
    told += [f"{table}: {columns} hidden column(s) were read like the others"] if columns else []
    return [*told, f"{table}: the sheet is hidden and was read"] if sheet.sheet_state != "visible" else told


def _text(value: object, number_format: str) -> str:
    """A cell as its spreadsheet's user means it: 0.1 shown as a percentage is 10%."""
    if isinstance(value, bool):
        return str(value).upper()
    if isinstance(value, int | float) and "%" in number_format:
        return f"{value * 100:.15g}%"
    if isinstance(value, float):
        return f"{value:.0f}" if value.is_integer() and abs(value) < _EXACT else repr(value)
    if isinstance(value, datetime):
        dated = value.time() == time() and "h" not in number_format.lower()
        return value.date().isoformat() if dated else value.isoformat()
    return value.isoformat() if isinstance(value, date | time) else str(value)
