"""A long file is read column by column; it says the same as one read cell by cell."""

from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from fieldfit.fieldbook import csv_files, read_book
from fieldfit.fieldbook.cells import type_numbers
from fieldfit.fieldbook.csv_files import read_csv
from tests.books import SIMPLE, write_book

NUMBERS = st.one_of(
    st.floats(allow_nan=False, allow_infinity=False).map(repr),
    st.integers(-(10**20), 10**20).map(str),
    st.sampled_from(["", "-", "n/a", " 5", "5 ", "+5", ".5", "5.", "1e5", "0", "-0.0", "007"]),
)
ODD = st.sampled_from(["nan", "NaN", "inf", "1e999", "1_000", "0x10", "TRUE", "1 000", "5,5", "−5", "12 mm", "x", "\t"])
NAMES = st.sampled_from(["B1", "007", "7", "7.0", "TRUE", "", "n/a", "NaN", " B1 ", "é"])
ROWS = st.lists(st.tuples(NAMES, NUMBERS, st.one_of(NUMBERS, ODD), NAMES), max_size=12)


@settings(max_examples=150, deadline=None, derandomize=True)
@given(ROWS, st.integers(0, 2), st.sampled_from("\n\r"))
def test_both_ways_of_reading_agree(rows: list[tuple[str, ...]], above: int, end: str) -> None:
    lines = [*["survey of May"] * above, "member;at [m];deflection [mm];remark", *map(";".join, rows)]
    content = end.join(lines).encode()
    found = []
    for short in (0, 10**9):
        with pytest.MonkeyPatch.context() as patch:
            patch.setattr(csv_files, "_SHORT", short)
            sheet, faults, _ = read_csv("readings", content)
        assert sheet is not None
        assert not faults
        found.append(sheet.columns)
    for by_column, by_cell in zip(*found, strict=True):
        assert [by_column[row] for row in range(len(by_cell))] == [by_cell[row] for row in range(len(by_cell))]
        below = [column.take(slice(above + 1, None)) for column in (by_column, by_cell)]
        np.testing.assert_array_equal(below[0].blank, below[1].blank)
        (values, refused), (expected, also) = map(type_numbers, below)
        np.testing.assert_array_equal(values, expected)
        assert refused == also


def test_a_long_file_of_numbers_is_read_as_numbers() -> None:
    rows = [f"B1,P,{place / 1000},{place / 100}" for place in range(2000)]
    sheet, _, _ = read_csv("readings", "\n".join(["member,stage,at [m],deflection [mm]", *rows]).encode())
    assert sheet is not None
    assert [column.numbers is not None for column in sheet.columns] == [False, False, True, True]
    assert sheet.columns[2][1500] == "1.499"


def test_names_that_are_numbers_stay_as_written(tmp_path: Path) -> None:
    names = [f"{number:03}" for number in range(2000)]
    members = [["member", "length [m]", "EI [kN m2]"], *([name, 6, 20000] for name in names)]
    loads = [["member", "load case", "from [m]", "force [kN]"], ["*", "P", 3, 50]]
    readings = [["member", "stage", "at [m]", "deflection [mm]"], *([name, "P", 3, 1.0] for name in names)]
    path = write_book(tmp_path, {**SIMPLE, "members": members, "loads": loads, "readings": readings})
    assert read_book(path).tables["readings"]["member"].tolist() == names
