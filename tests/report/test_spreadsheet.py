"""The workbook of results: an appendix that a spreadsheet shows and never works out."""

from collections.abc import Callable
from dataclasses import replace
from datetime import UTC, datetime
from io import BytesIO

import pandas as pd
from openpyxl import load_workbook

from fieldfit import Book, reconcile
from fieldfit.report.actions import every_action
from fieldfit.report.spreadsheet import spreadsheet
from fieldfit.report.workbook import Cell, Sheet, workbook


def test_the_workbook_holds_every_table_with_headings_that_repeat(book_of: Callable[..., Book]) -> None:
    plain = book_of()
    job = pd.DataFrame({"item": ["structure", "note"], "value": ["=1+1", "bell \x07 rings"]})
    book = replace(plain, tables={**plain.tables, "job": job})  # read_book itself refuses both
    verdicts = reconcile(book).verdicts
    made = load_workbook(BytesIO(spreadsheet(book, verdicts, every_action(verdicts), datetime.now(UTC))))
    names = ["Answers", "Estimates", "Checks", "Reactions and moments", "Readings", "Assumptions", "Job", "Made from"]
    assert made.sheetnames == names
    for sheet in made.worksheets:
        assert sheet.freeze_panes == "B2"
        assert sheet.print_title_rows == "$1:$1"
        assert all(cell.data_type != "f" for row in sheet.iter_rows() for cell in row)
    assert made["Job"]["B2"].value == "'=1+1"
    assert made["Job"]["B3"].value == "bell \N{REPLACEMENT CHARACTER} rings"
    readings = made["Readings"]
    columns = [cell.value for cell in readings[1]]
    measured = readings.cell(row=2, column=columns.index("measured") + 1)
    assert (measured.value, measured.number_format) == (8.4, "0.00")  # two digits of u = 0.10 mm


def test_a_workbook_is_read_back_as_it_was_given() -> None:
    rows = [["a & <b>", Cell(1.5, "0.00"), 3, None], ["x " * 80, Cell(-2e-9, "0.0000"), True, ""]]
    heads = [f"column {number}" for number in range(4)]
    sheets = [Sheet(title=title, foot="24 & more", headings=heads, rows=rows) for title in ("First", "Second one")]
    read = load_workbook(BytesIO(workbook(sheets, datetime.now(UTC))))
    assert read.sheetnames == ["First", "Second one"]
    for sheet in read.worksheets:
        assert [cell.value for cell in sheet[1]] == heads
        assert [cell.value for cell in sheet[2]] == ["a & <b>", 1.5, 3, None]
        assert [cell.value for cell in sheet[3]] == ["x " * 80, -2e-9, 1, None]
        assert [cell.number_format for cell in sheet["B"]][1:] == ["0.00", "0.0000"]
        assert sheet["A1"].font.b
        assert sheet["A3"].alignment.wrap_text
        assert sheet.row_dimensions[3].height > 2 * (sheet.row_dimensions[2].height or 0)
        assert sheet.auto_filter.ref == "A1:D3"
        assert sheet.oddFooter.left.text == "24 && more"


def test_columns_are_narrowed_to_a_page_and_rows_are_as_tall_as_their_texts() -> None:
    rows = [[f"name {number}", Cell(1234.5, "0.0"), "a reason in many words " * 20] for number in range(3)]
    sheet = Sheet(title="Wide", foot="", headings=["member", "value", "why"], rows=rows)
    read = load_workbook(BytesIO(workbook([sheet], datetime.now(UTC))))["Wide"]
    widths = {name: column.width for name, column in read.column_dimensions.items()}
    assert sum(widths.values()) <= 180.0
    assert widths["B"] >= len("1234.5")
    lines = len("a reason in many words " * 20) / widths["C"]
    assert read.row_dimensions[2].height >= 12.0 * lines  # points: a line of 11 point type
    assert read.page_setup.orientation == "landscape"
    assert read["B1"].alignment.horizontal == "right"  # over numbers
