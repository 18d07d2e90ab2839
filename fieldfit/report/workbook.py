"""Workbook: tables as the sheets of one .xlsx file.

Every sheet has a heading row that stays in sight, repeats on each printed page and filters; it prints landscape, as
wide as the paper, its title and page number at the foot. Nothing is a formula: texts are texts and numbers numbers.
"""

import io
from collections.abc import Iterator, Sequence
from copy import copy
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any

from openpyxl import Workbook
from openpyxl.cell import WriteOnlyCell
from openpyxl.cell.cell import ILLEGAL_CHARACTERS_RE
from openpyxl.styles import Alignment, Border, Font, PatternFill, Side
from openpyxl.utils import get_column_letter

__all__ = ["Cell", "Sheet", "workbook"]

FOOT = 100  # characters: a spreadsheet refuses a foot longer than 255, signs doubled and codes among them
WRAPPED = Alignment(vertical="top", wrap_text=True)


@dataclass(frozen=True, slots=True)
class Cell:
    """A number that is shown in a format (``0.00``) and keeps every digit."""

    value: float
    shown: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """One table: rows under headings; ``widths`` in characters, ``foot`` is printed under each page."""

    title: str
    foot: str
    headings: Sequence[str]
    rows: Sequence[Sequence[str | Cell | int | bool | None]]
    widths: Sequence[float]
    longest: float


def workbook(sheets: Sequence[Sheet], time: datetime) -> bytes:
    """The sheets as the bytes of an .xlsx file."""
    made = Workbook(write_only=True)  # rows go out as they come: quick, and small in memory
    made.properties.creator = "fieldfit"
    made.properties.created = made.properties.modified = time.astimezone(UTC).replace(tzinfo=None)
    for sheet in sheets:
        _write(made.create_sheet(sheet.title), sheet)
    out = io.BytesIO()
    made.save(out)
    return out.getvalue()


def _write(page: Any, sheet: Sheet) -> None:
    for number, width in enumerate(sheet.widths, start=1):
        page.column_dimensions[get_column_letter(number)].width = width
    page.freeze_panes = "B2"
    page.print_title_rows = "1:1"
    page.auto_filter.ref = f"A1:{get_column_letter(len(sheet.headings))}{len(sheet.rows) + 1}"
    page.page_setup.orientation, page.page_setup.fitToHeight = "landscape", 0
    page.sheet_properties.pageSetUpPr.fitToPage = True
    page.oddFooter.left.text, page.oddFooter.right.text = sheet.foot[:FOOT].replace("&", "&&"), "&P of &N"
    page.append([_heading(page, name) for name in sheet.headings])
    styles: dict[str, Any] = {}
    for row in sheet.rows:
        page.append([*_cells(page, row, sheet.longest, styles)])


def _heading(page: Any, name: str) -> Any:
    cell = WriteOnlyCell(page, _text(name))
    cell.font, cell.alignment = Font(bold=True), WRAPPED
    cell.fill, cell.border = PatternFill("solid", fgColor="F0F1F3"), Border(bottom=Side(style="thin"))
    return cell


def _cells(page: Any, row: Sequence[Any], longest: float, styles: dict[str, Any]) -> Iterator[Any]:
    """The cells of a row; ``styles`` keeps one cell of each number format, as making a style takes long."""
    for value in row:
        if isinstance(value, Cell):
            if value.shown not in styles:
                styles[value.shown] = WriteOnlyCell(page)
                styles[value.shown].number_format = value.shown
            cell = copy(styles[value.shown])
            cell.value = value.value
            yield cell
        elif isinstance(value, str):
            cell = WriteOnlyCell(page, _text(value))
            cell.data_type = "s"  # never a formula
            if len(value) > longest:
                cell.alignment = WRAPPED
            yield cell
        else:
            yield None if value is None else int(value)


def _text(text: str) -> str:
    """Text with what XML does not know replaced."""
    return ILLEGAL_CHARACTERS_RE.sub("\N{REPLACEMENT CHARACTER}", text)
