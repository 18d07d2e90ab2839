"""The blank book: valid as it is, and with what a person needs to fill it in."""

from pathlib import Path

import openpyxl
import pytest

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import TABLES, read_book, write_blank
from fieldfit.fieldbook.blank import heading, note
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
    assert [sheet.title for sheet in workbook if sheet.sheet_state == "visible"] == list(TABLES)
    assert workbook.active.title == "job"
    for name, table in TABLES.items():
        cells = workbook[name][1]
        assert [cell.value for cell in cells] == [heading(column) for column in table.columns]
        assert [cell.comment.text for cell in cells] == [note(column) for column in table.columns]


def chosen_from(workbook: openpyxl.Workbook, formula: str) -> list[str]:
    """The words that a drop-down list offers: within the rule itself or in cells of another sheet."""
    if formula.startswith('"'):
        return formula.strip('"').split(",")
    sheet, _, cells = formula.rpartition("!")
    return [cell.value for row in workbook[sheet.strip("'")][cells.replace("$", "")] for cell in row]


def test_allowed_words_are_drop_down_lists_every_word_as_it_is(workbook: openpyxl.Workbook) -> None:
    for name, table in TABLES.items():
        lists = {str(rule.sqref): rule.formula1 for rule in workbook[name].data_validations.dataValidation}
        expected = {
            f"{cell.column_letter}2:{cell.column_letter}1000": list(column.words)
            for cell, column in zip(workbook[name][1], table.columns, strict=True)
            if column.words
        }
        assert {place: chosen_from(workbook, formula) for place, formula in lists.items()} == expected
        assert all(len(words) <= 257 for words in lists.values())  # a spreadsheet takes 255 characters


def test_what_a_blank_book_has_beside_its_tables_is_not_told_as_strange(tmp_path: Path) -> None:
    for name in ("blank", "blank.xlsx"):
        write_blank(tmp_path / name)
        (note,) = read_book(tmp_path / name).notes
        assert note.startswith("members: the example rows of the blank book are still there (row 2)")
        assert note.endswith("example counts as a member like any other")


@pytest.mark.parametrize("name", ["book.xls", "book.csv", "book.XLSM", "new folder/book.ods"])
def test_a_name_of_another_kind_of_file_is_refused(name: str, tmp_path: Path) -> None:
    with pytest.raises(FieldBookError, match=r"a new folder of CSV files, or of a new file that ends in \.xlsx"):
        write_blank(tmp_path / name)
    assert not list(tmp_path.iterdir())


def test_the_example_row_says_what_it_is(workbook: openpyxl.Workbook) -> None:
    assert workbook["members"]["A2"].value == "example"
    assert workbook["members"]["A2"].font.italic
