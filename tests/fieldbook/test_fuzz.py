"""Any damage to a book ends in an answer or in faults in words, and every reading is in the ledger."""

import copy
import tempfile
from pathlib import Path
from typing import Any

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fieldfit.errors import FieldBookError, ModelError
from fieldfit.fieldbook import read_book
from fieldfit.observe import observe
from tests.books import SIMPLE, write_book

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
ENDS = st.sampled_from([b"", b"\xff\xfe", b"\x00", b"\xef\xbb\xbf", b"a,b\n", b'"', b"\xe9", b";;;\n", b"\r\r\n"])


def damage(places: list[tuple[str, int, int]]) -> st.SearchStrategy[list[tuple[tuple[str, int, int], str]]]:
    return st.lists(st.tuples(st.sampled_from(places), CELLS), min_size=1, max_size=4)


def outcome(folder: Path) -> int | None:
    """How many readings a book holds by its ledger; None where it is refused."""
    try:
        book = read_book(folder)
        subjects = observe(book)
    except (FieldBookError, ModelError):
        return None
    count = sum(len(subject.observations) for subject in subjects)
    assert count == len(book.tables["readings"])
    return count


def after(damage: list[tuple[tuple[str, int, int], str]]) -> int | None:
    tables = copy.deepcopy(BOOK)
    for (name, row, column), cell in damage:
        tables[name][row][column] = cell
    with tempfile.TemporaryDirectory() as folder:
        return outcome(write_book(Path(folder) / "book", tables))


@settings(max_examples=200, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(damage(BELOW))
def test_damaged_cells(damage: list[tuple[tuple[str, int, int], str]]) -> None:
    after(damage)


@settings(max_examples=120, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(damage(HEADINGS))
def test_damaged_headings(damage: list[tuple[tuple[str, int, int], str]]) -> None:
    after(damage)


@settings(max_examples=120, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(st.sampled_from(sorted(BOOK)), ENDS, ENDS, st.binary(max_size=20), st.floats(0, 1))
def test_damaged_files(name: str, front: bytes, back: bytes, middle: bytes, where: float) -> None:
    with tempfile.TemporaryDirectory() as folder:
        book = write_book(Path(folder) / "book", BOOK)
        file = book / f"{name}.csv"
        content = file.read_bytes()
        cut = int(where * len(content))
        file.write_bytes(front + content[:cut] + middle + content[cut:] + back)
        outcome(book)


def test_the_undamaged_book_is_read_whole() -> None:
    with tempfile.TemporaryDirectory() as folder:
        assert outcome(write_book(Path(folder) / "book", BOOK)) == 2
