"""Small field books for tests, written as a user would write them."""

import csv
from collections.abc import Mapping, Sequence
from pathlib import Path

import openpyxl

Table = Sequence[Sequence[object]]

SIMPLE: Mapping[str, Table] = {
    "members": [["member", "length [m]", "EI [kN m2]", "tolerance [%]"], ["B1", 6.0, 20000, 10]],
    "loads": [["member", "load case", "from [m]", "force [kN]"], ["B1", "P", 3.0, 50]],
    "readings": [
        ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"],
        ["B1", "P", 1.5, 8.4, 0.1],
        ["B1", "P", 3.0, 12.3, 0.1],
        ["B1", "P", 4.5, 8.5, 0.1],
    ],
}


def write_book(folder: Path, tables: Mapping[str, Table]) -> Path:
    """Write tables (heading first) as a folder of CSV files."""
    folder.mkdir(parents=True, exist_ok=True)
    for name, rows in tables.items():
        with (folder / f"{name}.csv").open("w", newline="", encoding="utf-8", errors="replace") as file:
            csv.writer(file).writerows(rows)
    return folder


def write_workbook(file: Path, tables: Mapping[str, Table]) -> Path:
    """Write tables (heading first) as the sheets of one workbook, blank cells left empty."""
    book = openpyxl.Workbook()
    book.remove(book.worksheets[0])
    for name, rows in tables.items():
        sheet = book.create_sheet(name)
        for row in rows:
            sheet.append([None if cell == "" else cell for cell in row])
    book.save(file)
    return file
