"""Books as they come off a desk: an untidy workbook cell by cell, and CSV files of many makes."""

import math
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import Book, read_book
from tests.books import SIMPLE, write_book
from tests.fieldbook.make_untidy import HERE, NBSP, untidy

#: sheet, cell, what stands in it; table, member, column of the table, what is read (SI)
CELLS: list[tuple[str, str, object, str, str, str, object]] = [
    ("Members", "B5", "F1", "members", "F1", "member", "F1"),
    ("Members", "C5", "6,10", "members", "F1", "length", 6.10),
    ("Members", "C7", "7,5", "members", "F2", "length", 7.5),
    ("Members", "E5", 200, "members", "F1", "E", 200e9),
    ("Members", "F5", f"5{NBSP}123,5", "members", "F1", "I", 5123.5e-8),
    ("Members", "F7", "12 340,0", "members", "F2", "I", 12340e-8),
    ("Members", "G5", 0.15, "members", "F1", "tolerance", 0.15),  # shown as 15%
    ("Members", "G7", 12, "members", "F2", "tolerance", 0.12),
    ("Members", "H5", "n/a", "members", "F1", "note", None),
    ("Members", "H7", f" by{NBSP}the  window ", "members", "F2", "note", "by the window"),
]
#: sheet, cell, what stands in it; table, spreadsheet row, column of the table, what is read for F1
STARS: list[tuple[str, str, object, str, int, str, object]] = [
    ("LOADS", "B2", "P", "loads", 2, "load case", "P"),
    ("LOADS", "B3", None, "loads", 3, "load case", "P"),  # merged with the cell above
    ("LOADS", "D2", "-", "loads", 2, "to", math.nan),
    ("LOADS", "D3", "–", "loads", 3, "to", math.nan),
    ("LOADS", "C3", "3.05", "loads", 3, "from", 3.05),
    ("LOADS", "E2", "20'000", "loads", 2, "force", 20000.0),
    ("LOADS", "E3", "1'500.5", "loads", 3, "force", 1500.5),
    ("LOADS", "E4", "=25*2", "loads", 4, "force", 50.0),  # by its stored value
    ("LOADS", "F2", "1", "loads", 2, "u", 0.01),
    ("LOADS", "F3", "2 %", "loads", 3, "u", 0.02),
    ("stages", "E3", "ZERO", "stages", 3, "role", "zero"),
    ("stages", "F3", "2024-05-14 00:00:00", "stages", 3, "start", "2024-05-14"),
    ("stages", "F4", "2024-05-14 10:30:00", "stages", 4, "start", "2024-05-14T10:30:00"),
    ("stages", "F5", "2024-05-14 10:30", "stages", 5, "start", "2024-05-14T10:30:00"),
    ("stages", "D4", "1", "stages", 4, "factor", 1.0),
    ("stages", "D5", "50%", "stages", 5, "factor", 0.5),
    ("gauges", "C2", "1,525", "gauges", 2, "at", 1.525),  # the next cell shows that the comma parts thousands
    ("gauges", "C3", "3,050.0", "gauges", 3, "at", 3.05),
    ("gauges", "E2", "0.05", "gauges", 2, "u", 0.05e-3),
    ("gauges", "F2", "-", "gauges", 2, "positive sense", "down"),
    ("gauges", "F3", "DOWN", "gauges", 3, "positive sense", "down"),
]
#: cell, what stands in it; member, stage, gauge, value read (m), None for no reading
READINGS: list[tuple[str, object, str, str, str, float | None]] = [
    ("D4", "−0.02", "F1", "before", "D1", -0.02e-3),
    ("E4", "n.a.", "F1", "before", "D2", None),
    ("D5", 5.25, "F1", "full", "D1", 5.25e-3),
    ("E5", "=AVERAGE(0.82,0.84)", "F1", "full", "D2", 8.3e-3),
    ("D7", 0, "F2", "before", "D1", 0.0),
    ("E7", 0.01, "F2", "before", "D2", 0.1e-3),
    ("D8", " 7.125 ", "F2", "full", "D1", 7.125e-3),
    ("E8", 1.0625, "F2", "full", "D2", 10.625e-3),
]
SHEETS = openpyxl.load_workbook(HERE)


@pytest.fixture(scope="module")
def book() -> Book:
    return read_book(HERE)


def alike(found: Any, expected: object) -> bool:
    if isinstance(expected, float):
        return found == pytest.approx(expected, rel=1e-12, nan_ok=True)
    return bool(found == expected)


def written(sheet: str, cell: str) -> object:
    value = SHEETS[sheet][cell].value
    return str(value) if hasattr(value, "year") else value


@pytest.mark.parametrize(("sheet", "cell", "text", "table", "member", "column", "value"), CELLS)
def test_cells_of_one_member(
    sheet: str, cell: str, text: object, table: str, member: str, column: str, value: object, book: Book
) -> None:
    frame = book.tables[table]
    (row,) = frame[frame["member"] == member].to_dict("records")
    assert written(sheet, cell) == text
    assert alike(row[column], value)


@pytest.mark.parametrize(("sheet", "cell", "text", "table", "number", "column", "value"), STARS)
def test_cells_of_star_rows(
    sheet: str, cell: str, text: object, table: str, number: int, column: str, value: object, book: Book
) -> None:
    frame = book.tables[table]
    assert written(sheet, cell) == text
    for member in ("F1", "F2"):
        (row,) = frame[(frame["member"] == member) & (frame["row"] == number)].to_dict("records")
        assert alike(row[column], value)


@pytest.mark.parametrize(("cell", "text", "member", "stage", "gauge", "value"), READINGS)
def test_wide_readings(
    cell: str, text: object, member: str, stage: str, gauge: str, value: float | None, book: Book
) -> None:
    frame = book.tables["readings"]
    own = (frame["member"] == member) & (frame["stage"] == stage) & (frame["gauge"] == gauge)
    assert written("Readings ", cell) == text
    assert frame["value"][own].tolist() == ([] if value is None else [pytest.approx(value, rel=1e-12)])


def test_nothing_beside_these_cells_was_read(book: Book) -> None:
    sizes = {name: len(frame) for name, frame in book.tables.items() if len(frame)}
    assert sizes == {"members": 2, "loads": 6, "stages": 6, "gauges": 4, "readings": 7}
    assert book.tables["readings"]["temperature"].tolist() == pytest.approx(
        [17.5, 18, 18, math.nan, math.nan, 18, 18], nan_ok=True
    )
    assert book.tables["readings"]["remark"].dropna().to_dict() == {5: "wind", 6: "wind"}


def test_what_was_set_apart_is_said(book: Book) -> None:
    assert list(book.notes) == [
        '"Photos" is no table of the book and was not read',
        '"scrap" is no table of the book and was not read',
        "stages: the sheet is hidden and was read",
        "gauges: 1 hidden row(s) were read like the others",
        'members: 2 row(s) above the table were taken as text, not records ("Mill Lane, first floor")',
        'members: 2 row(s) below the table were taken as text, not records ("I from drawing 7")',
        'readings: 1 row(s) above the table were taken as text, not records ("Readings as taken")',
        'readings: 1 row(s) below the table were taken as text, not records ("read by two")',
        "stages: row 4 gives a date with a time of day, other times are a date alone; times were not compared",
    ]


def test_the_committed_workbook_is_what_its_script_makes(tmp_path: Path, book: Book) -> None:
    (tmp_path / "untidy.xlsx").write_bytes(untidy())
    made = read_book(tmp_path / "untidy.xlsx")
    assert made.notes == book.notes
    for name, frame in book.tables.items():
        assert made.tables[name].equals(frame)


PLAIN = "member,length [m],EI [kN m2],note\nB1,6.5,20000,Träger 1\nB2,7,30000,\n"
MAKES: dict[str, tuple[bytes, str]] = {
    "plain": (PLAIN.encode(), ""),
    "byte-order mark": (b"\xef\xbb\xbf" + PLAIN.encode(), ""),
    "Latin-1": (PLAIN.encode("latin-1"), "members: the file is not UTF-8 and was read as Windows-1252"),
    "UTF-16": (PLAIN.encode("utf-16"), ""),
    "semicolons": (PLAIN.replace(",", ";").replace("6.5", "6,5").encode(), ""),
    "tabs": (PLAIN.replace(",", "\t").encode(), ""),
    "Windows line ends": (PLAIN.replace("\n", "\r\n").encode(), ""),
    "old line ends": (PLAIN.replace("\n", "\r").encode(), ""),
    "quotes": (PLAIN.replace("Träger 1", '"Träger 1"').encode(), ""),
    "quoted headings, ragged rows": (PLAIN.replace("member,", '"member",').replace("30000,", "30000").encode(), ""),
    "ragged rows": (PLAIN.replace("30000,", "30000").encode(), ""),
    "trailing empty columns": (PLAIN.replace("\n", ",,,\n").encode(), ""),
    "blank rows": (PLAIN.replace("\n", "\n,,,\n\n").encode(), ""),
    "a blank column": (PLAIN.replace(",EI", ",,EI").replace(",20", ",,20").replace(",30", ",,30").encode(), ""),
    "a title and notes": (
        ("Mill Lane\n\n" + PLAIN + "\nlengths from drawings\n").encode(),
        'members: 1 row(s) above the table were taken as text, not records ("Mill Lane")',
    ),
    "no line end": (PLAIN.rstrip("\n").encode(), ""),
}


@pytest.mark.parametrize("make", MAKES)
def test_a_csv_file_of_any_make_is_the_same_table(make: str, tmp_path: Path) -> None:
    content, note = MAKES[make]
    folder = write_book(tmp_path / "book", SIMPLE)
    (folder / "members.csv").write_bytes(content)
    book = read_book(folder)
    members = book.tables["members"]
    assert members[["member", "length", "EI", "note"]].to_numpy().tolist() == [
        ["B1", 6.5, 20e6, "Träger 1"],
        ["B2", 7.0, 30e6, None],
    ]
    assert note in book.notes if note else not book.notes


def test_a_row_has_the_number_that_its_spreadsheet_shows(tmp_path: Path) -> None:
    folder = write_book(tmp_path / "book", SIMPLE)
    text = 'a title\n\nmember,length [m],EI [kN m2],note\nB1,6,20000,"two\nlines"\n\nB2,six,20000,\n'
    (folder / "members.csv").write_text(text)
    with pytest.raises(FieldBookError) as refused:
        read_book(folder)
    assert [(fault.row, fault.value) for fault in refused.value.faults] == [(6, "six")]


@pytest.mark.parametrize(
    ("cells", "values"),
    [
        (["1,5", "2,25"], [1.5, 2.25]),
        (["1,500", "2,25"], [1.5, 2.25]),
        (["1,500", "2,250.5"], [1500, 2250.5]),
        (["1.500", "2.25"], [1.5, 2.25]),
        (["1 500", "2 250"], [1500, 2250]),
        (["1.234,5", "7"], [1234.5, 7]),
        (["+3", "4.e0"], [3, 4]),
        ([" 5 ", "6\u202f000"], [5, 6000]),
        (["１２", "2"], [12, 2]),  # as some keyboards write digits
        (["1,500", "2,250"], None),
        (["1,5", "2.5"], None),
        (["1_000", "2"], None),
        (["0x10", "2"], None),
        (["1e", "2"], None),
        (["½", "2"], None),
        (["inf", "2"], None),
        (["12,34,567", "2"], None),
        (["1 50", "2"], None),
    ],
)
def test_numbers_are_read_by_the_whole_column_or_refused(
    cells: list[str], values: list[float] | None, tmp_path: Path
) -> None:
    members = [["member", "length [m]", "EI [kN m2]"], ["B1", 6, cells[0]], ["B2", 6, cells[1]]]
    folder = write_book(tmp_path / "book", {**SIMPLE, "members": members})
    if values is None:
        with pytest.raises(FieldBookError) as refused:
            read_book(folder)
        assert {(fault.table, fault.column) for fault in refused.value.faults} == {("members", "EI [kN m2]")}
    else:
        found = read_book(folder).tables["members"]["EI"].tolist()
        assert found == pytest.approx([1000 * value for value in values], rel=1e-12)
