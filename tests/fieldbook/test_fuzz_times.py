"""Damage to times, windows and logger's files ends in an answer or in faults in words, and the ledger adds up."""

import copy
import tempfile
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from fieldfit.errors import FieldBookError, ModelError
from fieldfit.fieldbook import read_book
from fieldfit.observe import observe
from tests.books import SIMPLE, write_book

DAY = "2024-05-14T"
STAGES = [
    ["member", "stage", "load case", "role", "start", "end"],
    ["B1", "z", "", "zero", f"{DAY}08:00:00", f"{DAY}08:10:00"],
    ["B1", "P", "P", "load", f"{DAY}08:10:00", f"{DAY}08:20:00"],
    ["B1", "y", "", "zero", f"{DAY}08:20:00", f"{DAY}08:30:00"],
]
GAUGES = [
    ["member", "gauge", "at [m]", "u [mm]", "resolution [mm]", "temperature coefficient [mm/K]"],
    ["B1", "D", 3.0, 0.1, 0.01, ""],
    ["B1", "E", 2.0, "", 0.01, ""],
]
TIMES = [f"{DAY}08:{minute:02}:00" for minute in range(0, 36, 3)]
LOG = [["time", "D [mm]", "E [mm]", "temperature [degC]", "use"]]
LOG += [[at, 0.1 * n, 0.2 * n, 15 + n, "yes"] for n, at in enumerate(TIMES)]
LONG = [["member", "gauge", "time", "deflection [mm]", "stage"]]
LONG += [["B1", gauge, at, 0.1 * n, ""] for n, at in enumerate(TIMES) for gauge in "DE"]
BOOKS: dict[str, dict[str, Any]] = {
    form: {**SIMPLE, "stages": STAGES, "gauges": GAUGES, "readings": rows}
    for form, rows in (("log", LOG), ("long", LONG))
}
CELLS = st.one_of(
    st.sampled_from(["", "-", "B1", "D", "z", "yes", "no", "5", "1e9", "-1", "12 mm", "1,5", "nan", "member", "stage"]),
    st.sampled_from([f"{DAY}08:05:00", f"{DAY}07:00", f"{DAY}08:15:00Z", f"{DAY}08:15:00+02:00", "08:15"]),
    st.sampled_from([f"{DAY}25:00:00", "2024-02-30T08:00:00", "2024-05-14 08:09:00", "time", "CH1 [mm]", "D [mrad]"]),
    st.text(max_size=8),
)


def outcome(tables: dict[str, Any]) -> bool:
    """Whether a book is read; then its ledger adds up."""
    with tempfile.TemporaryDirectory() as folder:
        try:
            book = read_book(write_book(Path(folder) / "book", tables))
            subjects = observe(book)
        except (FieldBookError, ModelError):
            return False
    count = len(book.tables["readings"]) + (book.log.count if book.log else 0)
    assert sum(subject.observations.count.sum() for subject in subjects) == count
    return True


@pytest.mark.parametrize("form", BOOKS)
def test_the_undamaged_book_is_read_whole(form: str) -> None:
    assert outcome(BOOKS[form])


@pytest.mark.parametrize("form", BOOKS)
@settings(max_examples=120, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(st.data())
def test_damaged_times(form: str, data: st.DataObject) -> None:
    tables = copy.deepcopy({name: [list(row) for row in rows] for name, rows in BOOKS[form].items()})
    for _ in range(data.draw(st.integers(1, 3))):
        name = data.draw(st.sampled_from(["stages", "gauges", "readings", "readings"]))
        row = data.draw(st.integers(0, len(tables[name]) - 1))
        column = data.draw(st.integers(0, len(tables[name][row]) - 1))
        tables[name][row][column] = data.draw(CELLS)
    outcome(tables)
