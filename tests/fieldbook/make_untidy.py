"""An untidy workbook as it comes off a desk: python -m tests.fieldbook.make_untidy writes untidy.xlsx beside this file.

Every oddity that the reference page says is read stands in it at least once.
"""

import io
import re
import zipfile
from datetime import datetime
from pathlib import Path
from typing import Any

import openpyxl
from openpyxl.styles import Font

HERE = Path(__file__).with_name("untidy.xlsx")
STORED = {"=25*2": "50", "=AVERAGE(0.82,0.84)": "0.83"}  # formula: the value a spreadsheet would store beside it
NBSP = "\u00a0"


def fill(sheet: Any, rows: dict[int, list[object]], first: int = 1) -> None:
    """Write rows by their number, from a column on; None leaves a cell alone."""
    for row, cells in rows.items():
        for place, value in enumerate(cells, start=first):
            if value is not None:
                sheet.cell(row=row, column=place, value=value)


def members(book: openpyxl.Workbook) -> None:
    """Titles above, a blank column left and one amid, decimal commas as text, a percentage, notes below."""
    sheet = book.create_sheet("Members")
    sheet["B1"] = "Mill Lane, first floor"
    sheet["B1"].font = Font(bold=True, size=14)
    sheet["B2"] = "survey of 14 May 2024"
    headings: list[object] = ["Member", " LENGTH  [m] ", None, "e [GPa]", "I [cm4]", "Tolerance [%]", "Note"]
    fill(sheet, {4: headings}, first=2)
    fill(sheet, {5: ["F1", "6,10", None, 200, f"5{NBSP}123,5", 0.15, "n/a"]}, first=2)
    fill(sheet, {7: ["F2", "7,5", None, 200, "12 340,0", 12, f" by{NBSP}the  window "]}, first=2)
    fill(sheet, {9: ["I from drawing 7"], 10: ["checked by nobody yet"]}, first=2)
    sheet["G5"].number_format = "0%"
    for row in range(4, 12):  # formatted but empty: trailing columns and rows
        sheet.cell(row=row, column=12).font = Font(italic=True)


def loads(book: openpyxl.Workbook) -> None:
    """A load case merged downwards, a formula with its stored value, thousands parted by apostrophes."""
    sheet = book.create_sheet("LOADS")
    rows: dict[int, list[object]] = {
        1: ["member", "Load_Case", "from [m]", "To [m]", "force [N]", "u [%]"],
        2: ["*", "P", 2, "-", "20'000", "1"],
        3: ["*", None, "3.05", "–", "1'500.5", "2 %"],
        4: ["*", "kit", 4, "N/A", None, None],
    }
    fill(sheet, rows)
    sheet["E4"] = "=25*2"
    sheet.merge_cells("B2:B3")


def stages(book: openpyxl.Workbook) -> None:
    """A hidden sheet; dates and times as a spreadsheet keeps them and as text."""
    sheet = book.create_sheet("stages")
    rows: dict[int, list[object]] = {
        2: ["member", "stage", "load case", "factor", "role", "start"],
        3: ["*", "before", None, None, "ZERO", datetime(2024, 5, 14)],
        4: ["*", "full", "P", "1", "Load", datetime(2024, 5, 14, 10, 30)],
        5: ["*", "full", "kit", "50%", None, "2024-05-14 10:30"],
    }
    fill(sheet, rows)
    for row in (3, 4):
        sheet.cell(row=row, column=6).number_format = "yyyy-mm-dd" if row == 3 else "yyyy-mm-dd hh:mm"
    sheet.sheet_state = "hidden"


def gauges(book: openpyxl.Workbook) -> None:
    """Numbers stored as text, a hidden row, points and thousands commas told apart by the column."""
    sheet = book.create_sheet("gauges")
    rows: dict[int, list[object]] = {
        1: ["member", "gauge", "at [mm]", "measures", "u [mm]", "Positive sense"],
        2: ["*", "D1", "1,525", "deflection", "0.05", "-"],
        3: ["*", "D2", "3,050.0", "Deflection", 0.05, "DOWN"],
    }
    fill(sheet, rows)
    sheet.row_dimensions[3].hidden = True


def readings(book: openpyxl.Workbook) -> None:
    """A column a gauge; blank cells said in several ways, a minus sign of the printer's, an average kept as formula."""
    sheet = book.create_sheet("Readings ")
    rows: dict[int, list[object]] = {
        1: ["Readings as taken"],
        3: ["member", "stage", None, "D1 [mm]", "D2 [cm]", "temperature [degC]", "remark"],
        4: ["F1", "before", None, "−0.02", "n.a.", 17.5, "n/a"],
        5: ["F1", "full", None, 5.25, None, f"18{NBSP}", None],
        7: ["F2", "before", None, 0, 0.01, "-", None],
        8: ["F2", "full", None, " 7.125 ", 1.0625, 18, "wind"],
        10: ["read by two"],
    }
    fill(sheet, rows)
    sheet["E5"] = "=AVERAGE(0.82,0.84)"


def others(book: openpyxl.Workbook) -> None:
    """Sheets that are no tables."""
    book.create_sheet("Photos")["A1"] = "photo 12: bearing at A"
    book.create_sheet("scrap")["A1"] = "=1/0"
    book["scrap"].sheet_state = "hidden"


def with_stored_values(workbook: bytes) -> bytes:
    """The same workbook with the values of its formulas beside them, as a spreadsheet program leaves them."""
    out = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(workbook)) as old, zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as new:
        for part in old.infolist():
            text = old.read(part)
            for formula, value in STORED.items():
                pattern = rb"<f>" + re.escape(formula[1:].encode()) + rb"</f><v ?/?>(</v>)?"
                text = re.sub(pattern, b"<f>%s</f><v>%s</v>" % (formula[1:].encode(), value.encode()), text)
            new.writestr(part.filename, text)
    return out.getvalue()


def untidy() -> bytes:
    """The whole workbook."""
    book = openpyxl.Workbook()
    book.remove(book.worksheets[0])
    for make in (members, loads, stages, others, gauges, readings):
        make(book)
    out = io.BytesIO()
    book.save(out)
    return with_stored_values(out.getvalue())


if __name__ == "__main__":
    HERE.write_bytes(untidy())
