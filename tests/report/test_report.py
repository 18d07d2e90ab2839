"""The result folder: whole, safe to open, and never over somebody else's files."""

import csv
import json
from collections.abc import Callable
from pathlib import Path

import pandas as pd
import pytest

from fieldfit.fieldbook import Book
from fieldfit.report import OutputError
from fieldfit.report.results import safe_cells
from fieldfit.report.words import number, percent, plain, span_of
from fieldfit.work import reconcile

BookOf = Callable[..., Book]
HOSTILE = "<script>alert(1)</script>"


def written(book: Book, out: Path) -> Path:
    reconcile(book).write(out)
    return out


def test_the_folder_holds_every_result(book_of: BookOf, tmp_path: Path) -> None:
    out = written(book_of(), tmp_path / "out")
    names = ["figures", "members.csv", "readings.csv", "report.html", "results.json", "results.xlsx"]
    assert sorted(path.name for path in out.iterdir()) == names
    record = json.loads((out / "results.json").read_text(encoding="utf-8"))
    (member,) = record["members"]
    assert record["format"] == 1
    assert member["verdict"] == "within"
    assert member["estimates"][0]["unit"] == "kN m2"
    assert [reading["used_for"] for reading in member["readings"]] == ["fit"] * 3
    assert member["readings"][1]["as_recorded"] == pytest.approx(11.25)  # mm, P l3 / 48 EI


def test_nothing_but_time_differs_between_two_runs(book_of: BookOf, tmp_path: Path) -> None:
    book = book_of()
    first, second = written(book, tmp_path / "a"), written(book, tmp_path / "b")
    for name in ("members.csv", "readings.csv", "results.json"):
        assert (first / name).read_bytes() == (second / name).read_bytes()
    pages = [(out / "report.html").read_text(encoding="utf-8").splitlines() for out in (first, second)]
    assert all("<footer" in a for a, b in zip(*pages, strict=True) if a != b)


def test_text_of_the_book_is_text_on_the_page(book_of: BookOf, tmp_path: Path) -> None:
    book = book_of(
        members=[["member", "length [m]", "EI [kN m2]"], [HOSTILE, 6.0, 20000]],
        loads=[["member", "load case", "from [m]", "force [kN]"], [HOSTILE, HOSTILE, 3.0, 50]],
        readings=[
            ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"],
            [HOSTILE, HOSTILE, 3.0, 11.0, 0.1],
        ],
    )
    page = (written(book, tmp_path / "out") / "report.html").read_text(encoding="utf-8")
    assert HOSTILE not in page
    assert "&lt;script&gt;" in page


def test_cells_that_would_be_formulas_are_made_text(tmp_path: Path) -> None:
    table = pd.DataFrame({"text": ["=1+1", "@x", "plain", "-", ""], "number": [-1.0, 2.0, 3.0, 4.0, 5.0]})
    safe_cells(table).to_csv(tmp_path / "t.csv", index=False)
    rows = list(csv.reader((tmp_path / "t.csv").read_text(encoding="utf-8").splitlines()))
    assert [row[0] for row in rows[1:]] == ["'=1+1", "'@x", "plain", "'-", ""]
    assert rows[1][1] == "-1.0"


def test_an_earlier_result_is_replaced_whole(book_of: BookOf, tmp_path: Path) -> None:
    out = written(book_of(), tmp_path / "out")
    (out / "extra.txt").write_text("left over")
    written(book_of(), out)
    assert not (out / "extra.txt").exists()
    assert [path.name for path in tmp_path.iterdir() if path.name.startswith(".")] == []


def test_foreign_folders_are_left_alone(book_of: BookOf, tmp_path: Path) -> None:
    foreign = tmp_path / "holiday"
    foreign.mkdir()
    (foreign / "photo.jpg").write_bytes(b"x")
    with pytest.raises(OutputError, match="did not write"):
        written(book_of(), foreign)
    (tmp_path / "file").write_text("x")
    with pytest.raises(OutputError, match="is a file"):
        written(book_of(), tmp_path / "file")
    assert [path.name for path in foreign.iterdir()] == ["photo.jpg"]


def test_numbers_keep_the_digits_their_uncertainty_supports() -> None:
    assert number(0.91496, 0.0053) == "0.9150"
    assert number(46707.3, 78.1) == "46\u202f707"
    assert number(46707.3, 780.0) == "46\u202f710"
    assert number(-1e-9, 0.001) == "0.0000"
    assert number(1.0, None) == "–"
    assert plain(0.0) == "0"
    assert plain(11.25, 3) == "11.2"
    assert percent(0.99999) == "> 99.9 %"
    assert percent(0.5) == "50.0 %"
    assert span_of(0.91, None, 0.01) == "at least 0.910"
    assert span_of(None, 1.0, 0.01) == "at most 1.000"
