"""The workbook of results: an appendix that a spreadsheet shows and never works out."""

from collections.abc import Callable
from dataclasses import replace
from datetime import UTC, datetime
from io import BytesIO

import pandas as pd
from openpyxl import load_workbook

from fieldfit import Book, reconcile
from fieldfit.report.spreadsheet import spreadsheet


def test_the_workbook_holds_every_table_with_headings_that_repeat(book_of: Callable[..., Book]) -> None:
    plain = book_of()
    job = pd.DataFrame({"item": ["structure", "note"], "value": ["=1+1", "bell \x07 rings"]})
    book = replace(plain, tables={**plain.tables, "job": job})  # read_book itself refuses both
    workbook = load_workbook(BytesIO(spreadsheet(book, reconcile(book).verdicts, datetime.now(UTC))))
    names = ["Answers", "Estimates", "Checks", "Reactions and moments", "Readings", "Assumptions", "Job", "Made from"]
    assert workbook.sheetnames == names
    for sheet in workbook.worksheets:
        assert sheet.freeze_panes == "B2"
        assert sheet.print_title_rows == "$1:$1"
        assert all(cell.data_type != "f" for row in sheet.iter_rows() for cell in row)
    assert workbook["Job"]["B2"].value == "'=1+1"
    assert workbook["Job"]["B3"].value == "bell \N{REPLACEMENT CHARACTER} rings"
    readings = workbook["Readings"]
    columns = [cell.value for cell in readings[1]]
    measured = readings.cell(row=2, column=columns.index("measured") + 1)
    assert (measured.value, measured.number_format) == (8.4, "0.00")  # two digits of u = 0.10 mm
