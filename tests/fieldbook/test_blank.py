"""The blank book: valid as it is, and with what a person needs to fill it in."""

from pathlib import Path

import openpyxl
import pytest

from fieldfit.fieldbook import TABLES, read_book, write_blank
from fieldfit.fieldbook.blank import drop_down, heading, note
from fieldfit.observe import observe


@pytest.fixture
def workbook(tmp_path: Path) -> openpyxl.Workbook:
    write_blank(tmp_path / "blank.xlsx")
    return openpyxl.load_workbook(tmp_path / "blank.xlsx")


@pytest.mark.parametrize("name", ["blank", "blank.xlsx", "new folder/blank.xlsx"])
def test_it_is_itself_a_book(name: str, tmp_path: Path) -> None:
    write_blank(tmp_path / name)
    book = read_book(tmp_path / name)
    assert [subject.name for subject in observe(book)] == ["example"]
    assert all(len(book.tables[name]) == len(table.example) for name, table in TABLES.items())


def test_folder_and_workbook_are_the_same_book(tmp_path: Path) -> None:
    for name in ("blank", "blank.xlsx"):
        write_blank(tmp_path / name)
    folder, workbook = (read_book(tmp_path / name).tables for name in ("blank", "blank.xlsx"))
    for name, frame in folder.items():
        assert frame.equals(workbook[name]), name


def test_an_empty_folder_may_be_filled(tmp_path: Path) -> None:
    write_blank(tmp_path)
    assert {path.stem for path in tmp_path.glob("*.csv")} == set(TABLES)
    how = (tmp_path / "how to fill in.txt").read_text(encoding="utf-8")
    assert all(note(column) in how for table in TABLES.values() for column in table.columns)


def test_each_sheet_has_its_headings_with_notes(workbook: openpyxl.Workbook) -> None:
    assert workbook.sheetnames == list(TABLES)
    for name, table in TABLES.items():
        cells = workbook[name][1]
        assert [cell.value for cell in cells] == [heading(column) for column in table.columns]
        assert [cell.comment.text for cell in cells] == [note(column) for column in table.columns]


def test_allowed_words_are_drop_down_lists(workbook: openpyxl.Workbook) -> None:
    for name, table in TABLES.items():
        lists = {str(rule.sqref): rule.formula1 for rule in workbook[name].data_validations.dataValidation}
        expected = {
            f"{cell.column_letter}2:{cell.column_letter}1000": drop_down(column.words)
            for cell, column in zip(workbook[name][1], table.columns, strict=True)
            if column.words
        }
        assert lists == expected
        assert all(len(words) <= 257 for words in lists.values())  # a spreadsheet takes 255 characters


def test_a_list_of_words_too_long_for_a_drop_down_keeps_its_first() -> None:
    assert drop_down(("rigid", "spring")) == '"rigid,spring"'
    assert drop_down(("a" * 200, "b" * 54, "c")) == f'"{"a" * 200},{"b" * 54}"'  # 255 characters: the last that fit


def test_the_example_row_says_what_it_is(workbook: openpyxl.Workbook) -> None:
    assert workbook["members"]["A2"].value == "example"
    assert workbook["members"]["A2"].font.italic
