"""Damaged level books: refused by name or adjusted, and every sight and height accounted for."""

import copy
import random
from pathlib import Path

import pytest

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import Book, read_book
from fieldfit.observe import Subject, observe
from tests.books import SIMPLE, write_book
from tests.observe.test_levelling import HEADINGS, loop

SOUND: dict[str, list[list[object]]] = {
    "stages": [["member", "stage", "load case", "role"], ["B1", "zero", "", "zero"], ["B1", "P", "P", "load"]],
    "gauges": [["member", "gauge", "at [m]", "measures"], *(["B1", f"L{n}", 1.5 * n, "level"] for n in (1, 2, 3))],
    "levels": [HEADINGS, *loop("zero"), *loop("P", fall=0.01)],
    "levelling": [["stage", "u [mm]", "u per km [mm]", "allowed per km [mm]"], ["", 0.1, "", 4], ["P", 0.1, 0.3, ""]],
    "benchmarks": [["benchmark", "height [m]", "u [mm]"], ["BM", 50.0, ""], ["BM2", "", ""]],
}
JUNK = [
    "",
    "*",
    "n/a",
    "B1",
    "L2",
    "BM",
    "BM2",
    "zero",
    "no",
    "-1",
    "0",
    "1e999",
    "x",
    "foresight",
    "intermediate",
    "2",
]


def damaged(seed: int) -> dict[str, list[list[object]]]:
    """The sound book with one to three cells, rows or tables spoiled; one in four is left sound but for a sight."""
    chance, tables = random.Random(seed), copy.deepcopy(SOUND)
    if seed % 4 == 0:
        chance.choice(tables["levels"][1:])[7] = "no"
        return tables
    for _ in range(chance.randint(1, 3)):
        rows = tables[chance.choice(["levels"] * 4 + ["levelling", "benchmarks", "gauges", "stages"])]
        what = chance.random()
        if what < 0.2 and len(rows) > 2:
            del rows[chance.randrange(1, len(rows))]
        elif what < 0.3:
            rows.append([*rows[-1]])
        else:
            row = rows[chance.randrange(1, len(rows))]
            row[chance.randrange(len(row))] = chance.choice(JUNK)
    return tables


@pytest.mark.parametrize("seed", range(60))
def test_a_damaged_level_book_is_refused_or_adds_up(seed: int, tmp_path: Path) -> None:
    tables = {**SIMPLE, **damaged(seed)}
    del tables["readings"]
    path = write_book(tmp_path / "book", tables)
    try:
        book = read_book(path)
        (subject,) = observe(book)
    except FieldBookError as refused:
        strange = {fault.table for fault in refused.faults} - {*tables, "book"}
    else:
        strange = set()
        adds_up(book, subject)
    assert strange == set()


def adds_up(book: Book, subject: Subject) -> None:
    given, found = book.tables["levels"], subject.levelled
    assert found is not None
    assert len(found.sights) == len(given)
    assert found.sights["residual"].notna().sum() == given["use"].sum()
    points = given[given["use"] & given["member"].notna()].drop_duplicates(["stage", "point"])
    assert len(subject.observations) == len(points) == len(found.heights)
    assert found.sights["redundancy"].sum() <= found.misfit.spare + 1e-6
