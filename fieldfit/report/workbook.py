"""Workbook: tables as the sheets of one .xlsx file.

Every sheet has a heading row that stays in sight, repeats on each printed page and filters; it prints on A4 landscape,
as wide as the paper, its title and page number at the foot. Nothing is a formula: texts are texts and numbers numbers.
Texts wrap, and the height of their rows is written down, as not every program works it out on opening.
"""

import io
from collections.abc import Iterator, Sequence
from copy import copy
from dataclasses import dataclass
from datetime import UTC, datetime
from textwrap import wrap
from typing import Any

from openpyxl import Workbook
from openpyxl.cell import WriteOnlyCell
from openpyxl.cell.cell import ILLEGAL_CHARACTERS_RE
from openpyxl.styles import Alignment, Border, Font, PatternFill, Side
from openpyxl.utils import get_column_letter

__all__ = ["Cell", "Sheet", "workbook"]

FOOT = 100  # characters: a spreadsheet refuses a foot longer than 255, signs doubled and codes among them
ROOM = 180.0  # characters across A4 landscape, at four fifths of full size
LEAST, MOST = 8.0, 100.0  # characters of a column
LINE = 14.5  # points, of a line of text
A4 = 9  # its number among the sizes of paper
FONT = "Calibri"
NUMBERS, TEXTS = Alignment(vertical="top"), Alignment(vertical="top", wrap_text=True, horizontal="left", indent=1)
OVER_NUMBERS = Alignment(vertical="top", wrap_text=True, horizontal="right")


@dataclass(frozen=True, slots=True)
class Cell:
    """A number that is shown in a format (``0.00``) and keeps every digit."""

    value: float
    shown: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """One table: rows under headings; ``foot`` is printed under each page."""

    title: str
    foot: str
    headings: Sequence[str]
    rows: Sequence[Sequence[str | Cell | int | bool | None]]


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
    widths = _widths(sheet)
    for number, width in enumerate(widths, start=1):
        page.column_dimensions[get_column_letter(number)].width = width
    for number, row in enumerate([sheet.headings, *sheet.rows], start=1):
        lines = max(map(_lines, row, widths), default=1)
        if lines > 1:
            page.row_dimensions[number].height = LINE * lines
    page.freeze_panes = "B2"
    page.print_title_rows = "1:1"
    page.auto_filter.ref = f"A1:{get_column_letter(len(sheet.headings))}{len(sheet.rows) + 1}"
    page.page_setup.orientation, page.page_setup.paperSize, page.page_setup.fitToHeight = "landscape", A4, 0
    page.page_margins.left = page.page_margins.right = 0.5  # inches
    page.sheet_properties.pageSetUpPr.fitToPage = True
    page.oddFooter.left.text, page.oddFooter.right.text = sheet.foot[:FOOT].replace("&", "&&"), "&P of &N"
    first = sheet.rows[0] if sheet.rows else [None] * len(sheet.headings)
    numeric = [any(isinstance(row[place], Cell) for row in sheet.rows) for place in range(len(first))]
    page.append([_heading(page, name, over) for name, over in zip(sheet.headings, numeric, strict=True)])
    styles: dict[str, Any] = {}
    for row in sheet.rows:
        page.append([*_cells(page, row, styles)])


def _widths(sheet: Sheet) -> list[float]:
    """Characters of each column: what its texts need, the widest narrowed to one width until all fit across a page."""
    columns = list(zip(*sheet.rows, strict=True)) or [()] * len(sheet.headings)
    words = [max(map(len, name.split()), default=0) + 4.0 for name in sheet.headings]
    texts = [max(map(_length, column), default=0) + 3.0 for column in columns]
    least = [max(LEAST, word, min(text, 12.0)) for word, text in zip(words, texts, strict=True)]
    wanted = [min(max(low, text), MOST) for low, text in zip(least, texts, strict=True)]
    cap = MOST
    while cap > LEAST and sum(_capped(wanted, least, cap)) > ROOM:
        cap -= 1.0
    return _capped(wanted, least, cap)


def _capped(wanted: Sequence[float], least: Sequence[float], cap: float) -> list[float]:
    return [max(low, min(want, cap)) for want, low in zip(wanted, least, strict=True)]


def _length(value: Any) -> int:
    """Characters that a value takes as it is shown."""
    if isinstance(value, Cell):
        return len(f"{value.value:.{value.shown.count('0') - 1}f}")
    return 0 if value is None else len(str(value))


def _lines(value: Any, width: float) -> int:
    """Lines that a text takes in a column, words kept whole."""
    if not isinstance(value, str) or len(value) < width:
        return 1
    return len(wrap(value, int(width)))


def _heading(page: Any, name: str, over_numbers: bool) -> Any:
    cell = WriteOnlyCell(page, _text(name))
    cell.font, cell.alignment = Font(name=FONT, size=11, bold=True), OVER_NUMBERS if over_numbers else TEXTS
    cell.fill, cell.border = PatternFill("solid", fgColor="F0F1F3"), Border(bottom=Side(style="thin"))
    return cell


def _cells(page: Any, row: Sequence[Any], styles: dict[str, Any]) -> Iterator[Any]:
    """The cells of a row; ``styles`` keeps one cell of each look, as making a style takes long."""
    for value in row:
        look = value.shown if isinstance(value, Cell) else "@" if isinstance(value, str) else "0"
        if look not in styles:
            styles[look] = WriteOnlyCell(page)
            styles[look].alignment = TEXTS if look == "@" else NUMBERS
            styles[look].number_format = look.replace("@", "General")
        cell = copy(styles[look])
        match value:
            case Cell():
                cell.value = value.value
            case str():
                cell.value = _text(value)
                cell.data_type = "s"  # never a formula
            case _:
                cell.value = None if value is None else int(value)
        yield cell


def _text(text: str) -> str:
    """Text with what XML does not know replaced."""
    return ILLEGAL_CHARACTERS_RE.sub("\N{REPLACEMENT CHARACTER}", text)
