"""Small load tests for tests: one beam, its readings by stage, and the rule asked of it."""

import tempfile
from collections.abc import Mapping, Sequence
from pathlib import Path
from types import MappingProxyType

from fieldfit.fieldbook import Book, read_book
from fieldfit.fit import reconcile_member
from fieldfit.judge.rules import Outcome, Record, load_test_of, record_of
from fieldfit.judge.rules.load_test import LoadTest
from fieldfit.observe import observe
from tests.books import Table, write_book

#: name, role, cycle, load in shares of the full one, start, end
Stages = Sequence[tuple[str, str, str, float, str, str]]

ONE: Stages = [
    ("zero", "zero", "1", 0.0, "2024-05-01T08:00", ""),
    ("full", "load", "1", 1.0, "2024-05-01T09:00", ""),
    ("held", "hold", "1", 1.0, "2024-05-02T09:00", ""),
    ("off", "unload", "1", 0.0, "2024-05-02T10:00", ""),
    ("day after", "recovery", "1", 0.0, "2024-05-03T10:00", ""),
]
TWO: Stages = [
    *ONE,
    ("zero again", "zero", "2", 0.0, "2024-05-05T09:30", ""),
    ("full again", "load", "2", 1.0, "2024-05-05T10:00", ""),
    ("held again", "hold", "2", 1.0, "2024-05-06T10:00", ""),
    ("day after that", "recovery", "2", 0.0, "2024-05-07T10:00", ""),
]
SOUND = {"crushing or spalling": "no", "sign of failure": "no"}


def book_of(
    readings: Mapping[str, float],
    stages: Stages = ONE,
    *,
    limits: Sequence[Sequence[object]] = (),
    findings: Mapping[str, str] = SOUND,
    u: float | str = 0.05,
    length: float = 6.0,
    depth: float | str = 450,
    **tables: Table,
) -> Book:
    """A simple beam with one gauge, G, at midspan: readings (mm) by stage; a stage left out was not read."""
    rows: dict[str, Table] = {
        "members": [["member", "length [m]", "EI [kN m2]", "depth [mm]"], ["B", length, 20000, depth]],
        "loads": [["member", "load case", "from [m]", "force [kN]"], ["B", "P", length / 2, 20]],
        "stages": [
            ["member", "stage", "load case", "factor", "role", "cycle", "start", "end"],
            *(["B", n, "P" if f else "", f or "", role, c, start, end] for n, role, c, f, start, end in stages),
        ],
        "gauges": [["member", "gauge", "at [m]", "u [mm]"], ["B", "G", length / 2, u]],
        "readings": [
            ["member", "stage", "gauge", "deflection [mm]"],
            *(["B", stage, "G", value] for stage, value in readings.items()),
        ],
        "limits": [["member", "limit", "where", "stage", "at least", "at most"], *(["B", *row] for row in limits)],
        "inspections": [["member", "finding", "found"], *(["B", name, said] for name, said in findings.items())],
        **{name.removesuffix("_table"): rows for name, rows in tables.items()},
    }
    with tempfile.TemporaryDirectory() as folder:
        return read_book(write_book(Path(folder) / "test", rows))


def strained(
    readings: Sequence[Sequence[object]],
    *,
    limits: Sequence[Sequence[object]] = (),
    findings: Mapping[str, str] = MappingProxyType({"behaviour extrapolates to 1.33 W": "yes"}),
    u: float | str = 1.0,
    **tables: Table,
) -> Book:
    """A simple beam with strain gauges 200 mm below its axis, G at midspan, H at 1.5 m; readings of stage and gauge.

    20 kN at the middle of 6 m with EI = 60000 kN m2 bend G by 100 microstrain and H by 50; placed 1 m before the middle
    (stage V2) they bend both by 66.7.
    """
    usual: dict[str, Table] = {
        "members": [["member", "length [m]", "EI [kN m2]"], ["B", 6.0, 60000]],
        "stages_table": [
            ["member", "stage", "load case", "offset [m]", "role"],
            ["B", "zero", "", "", "zero"],
            ["B", "V1", "P", "", "load"],
            ["B", "V2", "P", -1.0, "load"],
        ],
        "gauges": [
            ["member", "gauge", "at [m]", "measures", "below neutral axis [mm]", "u [microstrain]"],
            ["B", "G", 3.0, "strain", 200, u],
            ["B", "H", 1.5, "strain", 200, u],
        ],
        "readings_table": [["member", "stage", "gauge", "strain [microstrain]"], *(["B", *row] for row in readings)],
    }
    return book_of(
        {},
        limits=[["AASHTO MBE factor K", "", "", "", ""], *(["AASHTO MBE factor K", *row, ""] for row in limits)],
        findings=findings,
        **{**usual, **tables},
    )


def load_test(book: Book) -> LoadTest:
    """The load test of the one member of a book."""
    (subject,) = observe(book)
    found = load_test_of(reconcile_member(subject))
    assert found is not None
    return found


def record(book: Book) -> Record:
    """The record of the one member of a book."""
    (subject,) = observe(book)
    found = record_of(reconcile_member(subject))
    assert found is not None
    return found


def judged(rule: str, readings: Mapping[str, float], stages: Stages = (), **more: object) -> Outcome:
    """The outcome of one rule."""
    limits = [[rule, "", "", "", ""], *more.pop("limits", [])]  # type: ignore[misc]
    stages = stages or (TWO if "full again" in readings else ONE)
    (outcome,) = load_test(book_of(readings, stages, limits=limits, **more)).outcomes  # type: ignore[arg-type]
    return outcome


def one(most: float, left: float | None) -> dict[str, float]:
    """Readings (mm) of one loading: the maximum, and what was left a day after (None: not read)."""
    readings = {"zero": 0.0, "full": most, "held": most, "off": most / 2}
    return readings if left is None else {**readings, "day after": left}


def two(most: float, left: float, again: float, left_again: float | None) -> dict[str, float]:
    """Readings (mm) of a test and its repeat, each counted from its own start."""
    readings = {**one(most, left), "zero again": left, "full again": left + again, "held again": left + again}
    return readings if left_again is None else {**readings, "day after that": left + left_again}


def cyclic(peaks: Sequence[tuple[float, float, float | None]]) -> tuple[dict[str, float], Stages]:
    """Readings (mm) and stages of cycles A, B, ...: share of the load, maximum and residual, each from its own start.

    The last residual is read a day after.
    """
    readings, stages, rest = {"zero": 0.0}, [("zero", "zero", "A", 0.0, "2024-05-01T08:00", "")], 0.0
    for number, (share, most, left) in enumerate(peaks):
        name = "ABCDEF"[number]
        last = number == len(peaks) - 1
        stages.append((f"peak {name}", "load", name, share, f"2024-05-01T{9 + number:02d}:00", ""))
        readings[f"peak {name}"] = rest + most
        role, begun = ("recovery", "2024-05-02T20:00") if last else ("unload", f"2024-05-01T{9 + number:02d}:30")
        stages.append((f"trough {name}", role, name, 0.0, begun, ""))
        if left is not None:
            readings[f"trough {name}"] = rest + left
            rest += left
    return readings, stages
