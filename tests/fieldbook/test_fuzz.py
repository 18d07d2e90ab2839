"""Any damage to a book ends in an answer or in faults in words, and every reading is in the ledger.

Two thousand damaged books are read here; ``python -m tests.benchmarks.fuzz`` takes ten thousand others.
"""

import copy
import tempfile
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st
from typer.testing import CliRunner

from fieldfit.cli import app
from fieldfit.errors import FieldBookError, ModelError
from fieldfit.fieldbook import read_book
from fieldfit.work import reconcile
from tests.books import write_book, write_workbook
from tests.fieldbook.damaged import DAMAGE, SMALL, SPARSE, Damaged

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
    try_books(damage, max(1, count // 20), command, fixed=True)


@pytest.mark.parametrize(
    ("table", "row", "column", "cell", "readings"),
    [("readings", 1, 3, 101551882541341.0, 2), ("members", 1, 2, 2e-154, None), ("members", 1, 1, 1e9, 2)],
)
def test_books_that_once_ended_otherwise(
    table: str, row: int, column: int, cell: float, readings: int | None, tmp_path: Path
) -> None:
    tables = copy.deepcopy(SMALL)
    tables[table][row][column] = cell
    assert outcome(write_book(tmp_path / "book", tables)) == readings


def test_the_undamaged_books_are_read_whole(tmp_path: Path) -> None:
    assert outcome(write_book(tmp_path / "book", SMALL)) == 2
    assert outcome(write_workbook(tmp_path / "book.xlsx", SMALL)) == 2
    assert outcome(write_book(tmp_path / "sparse", SPARSE)) == 13
