"""Any damage to a book ends in an answer or in faults in words, and every reading is in the ledger.

Two thousand damaged books are read here; ``python -m tests.benchmarks.fuzz`` takes ten thousand others.
"""

import copy
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st
from typer.testing import CliRunner

from fieldfit.cli import app
from fieldfit.errors import FieldBookError, ModelError
from fieldfit.fieldbook import read_book
from fieldfit.work import reconcile
from tests.books import SIMPLE, write_book, write_workbook

BOOK: dict[str, Any] = {
    **SIMPLE,
    "supports": [["member", "support", "at [m]", "vertical"], ["B1", "A", 0, "rigid"], ["B1", "B", 6, "rigid"]],
    "stages": [
        ["member", "stage", "load case", "factor", "role"],
        ["B1", "P", "P", 1, "load"],
        ["B1", "z", "", "", "zero"],
    ],
    "gauges": [["member", "gauge", "at [m]", "measures", "u [mm]"], ["*", "D", 3.0, "deflection", 0.1]],
    "readings": [
        ["member", "stage", "gauge", "deflection [mm]", "use"],
        ["B1", "z", "D", 0.1, "yes"],
        ["B1", "P", "D", 11.3, "yes"],
    ],
    "unknowns": [["member", "unknown", "where", "low", "high"], ["B1", "EI", "", 0.2, 3]],
    "limits": [["member", "limit", "where", "at least", "at most"], ["B1", "EI ratio", "", 0.8, ""]],
}
CELLS = st.one_of(
    st.sampled_from(["", "-", "n/a", "*", "B1", "P", "D", "0", "-1", "1e309", "nan", "inf", "1,5", "1.234,5", "1 000"]),
    st.sampled_from(
        ["6", "yes", "rigid", "deflection", "deflection [mm]", "at [m]", "member", "u [mrad]", "=1+1", "{0}"]
    ),
    st.sampled_from(["%s", "__import__('os')", "\u00a05", "2024-05-14", "spring", "zero", "EI", "load", "\x00", "[m"]),
    st.sampled_from(['"', "é", "D [mm]", "12 mm", "1/0", "\n"]),
    st.text(max_size=12),
    st.integers(-(10**20), 10**20).map(str),
    st.floats().map(str),
)
ROWS = [(name, row) for name, rows in BOOK.items() for row in range(len(rows))]
HEADINGS = [(name, 0, column) for name, rows in BOOK.items() for column in range(len(rows[0]))]
BELOW = [(name, row, column) for name, row in ROWS if row for column in range(len(BOOK[name][row]))]
AMOUNTS = [place for place in BELOW if isinstance(BOOK[place[0]][place[1]][place[2]], int | float)]
NUMBERS = st.one_of(st.sampled_from([0.0, -1.0, 1e-9, 1e9, 3.0, 5.9999]), st.floats(0.5, 20), st.floats(-1e6, 1e6))
ENDS = st.sampled_from([b"", b"\xff\xfe", b"\x00", b"\xef\xbb\xbf", b"a,b\n", b'"', b"\xe9", b";;;\n", b"\r\r\n"])

Damaged = Callable[[Path], Path]  # writes a damaged book into a folder and says where


def damaged_at(
    places: list[tuple[str, int, int]], cells: st.SearchStrategy[Any], rows: int = 0
) -> st.SearchStrategy[Damaged]:
    """Some cells changed, and up to so many rows said twice or left out."""
    changes = st.lists(st.tuples(st.sampled_from(places), cells), min_size=1, max_size=3)
    again = st.lists(st.tuples(st.sampled_from(ROWS), st.integers(0, 2)), max_size=rows)

    def written(changes: list[Any], again: list[Any]) -> Damaged:
        tables = copy.deepcopy(BOOK)
        for (name, row, column), cell in changes:
            tables[name][row][column] = cell
        for (name, row), count in again:
            tables[name][row : row + 1] = [tables[name][row]] * count
        return lambda folder: write_book(folder / "book", tables)

    return st.builds(written, changes, again)


def damaged_files() -> st.SearchStrategy[Damaged]:
    """Bytes put into one file, or the file cut off."""

    def written(name: str, front: bytes, middle: bytes, back: bytes, where: float, lost: int) -> Damaged:
        def write(folder: Path) -> Path:
            book = write_book(folder / "book", BOOK)
            spoil(book / f"{name}.csv", front, middle, back, where, lost)
            return book

        return write

    spots = st.floats(0, 1), st.sampled_from([0, 0, 1, 7])
    return st.builds(written, st.sampled_from(sorted(BOOK)), ENDS, st.binary(max_size=20), ENDS, *spots)


def damaged_workbooks() -> st.SearchStrategy[Damaged]:
    """Bytes put into a workbook, or the workbook cut off."""

    def written(middle: bytes, where: float, lost: int) -> Damaged:
        def write(folder: Path) -> Path:
            book = write_workbook(folder / "book.xlsx", BOOK)
            spoil(book, b"", middle, b"", where, lost)
            return book

        return write

    return st.builds(written, st.binary(max_size=20), st.floats(0, 1), st.sampled_from([0, 0, 1, 200, 4000]))


def spoil(file: Path, front: bytes, middle: bytes, back: bytes, where: float, lost: int) -> None:
    content = file.read_bytes()
    cut = int(where * len(content))
    file.write_bytes(front + content[:cut] + middle + content[cut + lost :] + back)


DAMAGE = {
    "numbers": (damaged_at(AMOUNTS, NUMBERS), 400),
    "cells": (damaged_at(BELOW, CELLS, rows=1), 700),
    "headings": (damaged_at(HEADINGS, CELLS), 400),
    "files": (damaged_files(), 400),
    "workbooks": (damaged_workbooks(), 100),
}
QUIET = settings(deadline=None, suppress_health_check=list(HealthCheck), phases=[Phase.generate, Phase.shrink])


def outcome(book: Path) -> int | None:
    """How many readings a book's ledger holds once it is reconciled; None where it is refused in words."""
    try:
        read = read_book(book)
        findings = reconcile(read)
    except (FieldBookError, ModelError):
        return None
    counts = [verdict.reconciliation.subject.observations.count for verdict in findings.verdicts]
    count = int(sum(one.sum() for one in counts))
    assert count == len(read.tables["readings"]) + (read.log.count if read.log else 0)
    return count


def command(book: Path) -> int:
    """The exit status of the command; a refused book leaves nothing behind, any other a whole result."""
    out = book.parent / "out"
    ended = CliRunner().invoke(app, ["reconcile", str(book), "--out", str(out), "--quiet"])
    assert ended.exception is None or isinstance(ended.exception, SystemExit)
    assert ended.exit_code in {0, 2}
    left = {path.name for path in book.parent.iterdir()} - {book.name}
    assert left == ({"out"} if ended.exit_code == 0 else set())
    assert ended.exit_code == 2 or (out / "results.json").is_file()
    return ended.exit_code


def try_books(damage: st.SearchStrategy[Damaged], count: int, ends: Callable[[Path], object], *, fixed: bool) -> None:
    """Hold so many damaged books to what `ends` asks of them; the same ones each time where `fixed`."""

    @settings(QUIET, max_examples=count, derandomize=fixed)
    @given(damage)
    def held(write: Damaged) -> None:
        with tempfile.TemporaryDirectory() as folder:
            ends(write(Path(folder)))

    held()


@pytest.mark.parametrize("kind", DAMAGE)
def test_a_damaged_book_is_reconciled_or_refused(kind: str) -> None:
    damage, count = DAMAGE[kind]
    try_books(damage, count, outcome, fixed=True)


@pytest.mark.parametrize("kind", DAMAGE)
def test_a_damaged_book_leaves_a_whole_result_or_nothing(kind: str) -> None:
    damage, count = DAMAGE[kind]
    try_books(damage, count // 20, command, fixed=True)


@pytest.mark.parametrize(
    ("table", "row", "column", "cell", "readings"),
    [("readings", 1, 3, 101551882541341.0, 2), ("members", 1, 2, 2e-154, None), ("members", 1, 1, 1e9, 2)],
)
def test_books_that_once_ended_otherwise(
    table: str, row: int, column: int, cell: float, readings: int | None, tmp_path: Path
) -> None:
    tables = copy.deepcopy(BOOK)
    tables[table][row][column] = cell
    assert outcome(write_book(tmp_path / "book", tables)) == readings


def test_the_undamaged_book_is_read_whole(tmp_path: Path) -> None:
    assert outcome(write_book(tmp_path / "book", BOOK)) == 2
    assert outcome(write_workbook(tmp_path / "book.xlsx", BOOK)) == 2
