"""A blank field book: every table with its headings, what each column means, and example rows that make it valid."""

from collections.abc import Sequence
from pathlib import Path
from typing import Any

import openpyxl
from openpyxl.comments import Comment
from openpyxl.styles import Font, PatternFill
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.datavalidation import DataValidation

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook.declare import Column, Table
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.naming import HOW, WORDS
from fieldfit.fieldbook.tables import TABLES
from fieldfit.fieldbook.units import DESIGN_UNITS

__all__ = ["write_blank"]

_ROWS = 1_000  # rows with drop-down lists
_LONGEST_LIST = 255  # characters of a drop-down list that stands in its own cell rule
_OTHER_FILES = (".csv", ".tsv", ".txt", ".xls", ".xlsm", ".xlsb", ".ods")
_BOLD = Font(bold=True)
_GREY = PatternFill("solid", fgColor="DDDDDD")
_EXAMPLE = Font(italic=True, color="777777")


def write_blank(path: str | Path) -> None:
    """Write a blank field book: an .xlsx workbook if the name ends so, else a folder of CSV files.

    FieldBookError where something is there already, or the name is that of a file of another kind.
    """
    target = Path(path)
    if target.suffix.lower() in _OTHER_FILES and not target.exists():
        expected = "the name of a new folder of CSV files, or of a new file that ends in .xlsx"
        raise FieldBookError(target.name, [fault("not a book", "book", expected, value=target.name)])
    if target.exists() and not (target.is_dir() and not any(target.iterdir())):
        expected = "a path where nothing is yet, or an empty folder"
        raise FieldBookError(target.name, [fault("already there", "book", expected, value=target.name)])
    if target.suffix.lower() == ".xlsx":
        target.parent.mkdir(parents=True, exist_ok=True)
        _workbook().save(target)
    else:
        _write_folder(target)


def heading(column: Column) -> str:
    """A column's heading with the design's own unit."""
    if column.by:
        unit = DESIGN_UNITS[next(iter(column.kinds.values()))]
        return column.name if column.bare else f"{column.name} [{unit}]"
    return column.name if column.bare or not column.is_number else f"{column.name} [{DESIGN_UNITS[column.kind]}]"


def note(column: Column) -> str:
    """What a column means and takes, in a line or two."""
    parts = [column.meaning]
    if column.words:
        parts.append(f"One of: {', '.join(column.words)}.")
    if column.default is not None:
        parts.append(f"Blank: {column.default}.")
    if column.by and column.bare:
        units = (f"{word} [{DESIGN_UNITS[kind]}]" for word, kind in column.kinds.items() if kind != "ratio")
        parts.append(f"Without a unit: a plain number, but {', '.join(units)}.")
    elif column.by:
        parts.append(
            f"In a unit of what is measured: {', '.join(DESIGN_UNITS[kind] for kind in column.kinds.values())}."
        )
    return " ".join([*parts, "Required." if column.required else "May be left out."])


def _records(table: Table) -> list[list[str]]:
    """The example rows, each a cell a column."""
    headings = [heading(column) for column in table.columns]
    return [[example.get(name, "") for name in headings] for example in table.example]


def _write_folder(target: Path) -> None:
    target.mkdir(parents=True, exist_ok=True)
    for table in TABLES.values():
        lines = [[heading(column) for column in table.columns], *_records(table)]
        text = "\n".join(",".join(line) for line in lines) + "\n"
        (target / f"{table.name}.csv").write_text(text, encoding="utf-8")
    (target / HOW).write_text("\n\n".join(map(_how, TABLES.values())) + "\n", encoding="utf-8")


def _how(table: Table) -> str:
    """One table of the text that goes with the CSV files."""
    out = f" Left out: {table.left_out}" if table.left_out else ""
    lines = [f"{table.name}.csv: {table.meaning}{out}"]
    return "\n".join([*lines, *(f"  {heading(column)}: {note(column)}" for column in table.columns)])


def _workbook() -> openpyxl.Workbook:
    book = openpyxl.Workbook()
    lists = book.worksheets[0]
    lists.title, lists.sheet_state = WORDS, "hidden"
    for table in TABLES.values():
        sheet = book.create_sheet(table.name)
        for place, column in enumerate(table.columns, start=1):
            _fill_column(sheet, place, column, lists)
        for row, record in enumerate(_records(table), start=2):
            _fill_row(sheet, row, record, table)
        sheet.freeze_panes = "A2"
    book.move_sheet(lists, len(TABLES))
    book.active = 0
    return book


def _fill_column(sheet: Any, place: int, column: Column, lists: Any) -> None:
    """Heading, note and drop-down list of one column."""
    cell = sheet.cell(row=1, column=place, value=heading(column))
    cell.font, cell.fill = _BOLD, _GREY
    cell.comment = Comment(note(column), "fieldfit", width=320, height=140)
    letter = get_column_letter(place)
    sheet.column_dimensions[letter].width = max(12, len(heading(column)) + 3)
    if column.words:
        choice = DataValidation(type="list", formula1=_drop_down(column.words, lists), allow_blank=True)
        choice.add(f"{letter}2:{letter}{_ROWS}")
        sheet.add_data_validation(choice)


def _drop_down(words: Sequence[str], lists: Any) -> str:
    """A list of words as a spreadsheet takes it; one too long, or with commas, in a column of the sheet ``lists``."""
    inline = ",".join(words)
    if len(inline) <= _LONGEST_LIST and inline.count(",") == len(words) - 1:
        return f'"{inline}"'
    place = lists.max_column + 1 if lists.cell(row=1, column=1).value else 1
    for row, word in enumerate(words, start=1):
        lists.cell(row=row, column=place, value=word)
    letter = get_column_letter(place)
    return f"'{lists.title}'!${letter}$1:${letter}${len(words)}"


def _fill_row(sheet: Any, row: int, record: list[str], table: Table) -> None:
    """One example row, grey and slanted; numbers as numbers."""
    for place, (text, column) in enumerate(zip(record, table.columns, strict=True), start=1):
        if text:
            cell = sheet.cell(row=row, column=place, value=float(text) if column.is_number else text)
            cell.font = _EXAMPLE
