"""What a field book may look like, and that every way of writing the same book reads the same."""

import random
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

import pytest

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import display, read_book
from fieldfit.report.actions import every_action
from fieldfit.report.results import result_record
from fieldfit.work import reconcile
from tests.books import SIMPLE, Table, write_book, write_workbook

Tables = Mapping[str, Table]
SI: Tables = {
    "members": [
        ["member", "length [m]", "EI [kN m2]", "tolerance [%]"],
        ["B1", 6.096, 20000, 10],
        ["B2", 7.62, 30000, 10],
    ],
    "loads": [
        ["member", "load case", "from [m]", "force [kN]", "intensity [kN/m]", "to [m]"],
        ["*", "P", 3.048, 40, "", ""],
        ["*", "q", 0, "", 5, 6.096],
    ],
    "stages": [
        ["member", "stage", "load case", "factor", "role"],
        ["*", "before", "", "", "zero"],
        ["*", "half", "P", 0.5, ""],
        ["*", "full", "P", 1, ""],
        ["*", "full", "q", 1, ""],
    ],
    "gauges": [
        ["member", "gauge", "at [m]", "measures", "u [mm]"],
        ["*", "D1", 1.524, "deflection", 0.127],
        ["*", "D2", 3.048, "deflection", 0.127],
    ],
    "readings": [
        ["member", "stage", "gauge", "deflection [mm]"],
        *(
            [member, stage, gauge, 25.4 * value]
            for member, scale in (("B1", 1.0), ("B2", 1.3))
            for stage, gauge, value in (
                ("before", "D1", 0.02),
                ("before", "D2", 0.05),
                ("half", "D1", 0.02 + 0.11 * scale),
                ("half", "D2", 0.05 + 0.16 * scale),
                ("full", "D1", 0.02 + 0.38 * scale),
                ("full", "D2", 0.05 + 0.55 * scale),
            )
        ),
    ],
}


def as_csv(folder: Path) -> Path:
    return write_book(folder / "csv", SI)


def as_workbook(folder: Path) -> Path:
    return write_workbook(folder / "book.xlsx", SI)


def with_a_column_a_gauge(folder: Path) -> Path:
    wide: dict[tuple[Any, Any], dict[Any, Any]] = {}
    for member, stage, gauge, value in SI["readings"][1:]:
        wide.setdefault((member, stage), {})[gauge] = value
    rows = [[*key, values["D1"], values["D2"]] for key, values in wide.items()]
    return write_book(folder / "wide", {**SI, "readings": [["member", "stage", "D1 [mm]", "D2 [mm]"], *rows]})


def shuffled(folder: Path) -> Path:
    mixed = {}
    for name, (heading, *rows) in SI.items():
        order = list(rows)
        if name not in ("members", "stages"):  # the order of these is that of the results
            random.Random(3).shuffle(order)
        mixed[name] = [heading, *order]
    return write_book(folder / "shuffled", mixed)


#: unit, its US counterpart, and how many of the first make one of the second (exact definitions of ft, in and lbf)
US = {
    "m": ("ft", 0.3048),
    "mm": ("in", 25.4),
    "kN": ("lbf", 0.0044482216152605),
    "kN/m": ("lbf/ft", 0.0044482216152605 / 0.3048),
    "kN m2": ("lbf ft2", 0.0044482216152605 * 0.3048**2),
}


def in_us_units(folder: Path) -> Path:
    return write_book(folder / "us", {name: _converted(rows) for name, rows in SI.items()})


def _converted(rows: Table) -> Table:
    units = [str(heading).partition("[")[2].rstrip("]") for heading in rows[0]]
    names = [
        str(h).replace(f"[{unit}]", f"[{US[unit][0]}]") if unit in US else h
        for h, unit in zip(rows[0], units, strict=True)
    ]
    return [
        names,
        *(
            [cell / US[unit][1] if unit in US and cell != "" else cell for cell, unit in zip(row, units, strict=True)]
            for row in rows[1:]
        ),
    ]


@pytest.mark.parametrize("written", [as_workbook, with_a_column_a_gauge, shuffled, in_us_units])
def test_every_way_of_writing_a_book_gives_the_same_results(written: Callable[[Path], Path], tmp_path: Path) -> None:
    expected, found = (_record(read(tmp_path)) for read in (as_csv, written))
    _agree(expected, found)


@pytest.mark.parametrize("written", [as_workbook, with_a_column_a_gauge, shuffled, in_us_units])
def test_every_way_of_writing_a_book_gives_the_same_frames(written: Callable[[Path], Path], tmp_path: Path) -> None:
    expected, found = (read_book(write(tmp_path)).tables for write in (as_csv, written))
    for name, frame in expected.items():
        assert list(found[name]) == list(frame)
        _agree(_records(frame), _records(found[name]))


def _records(frame: Any) -> list[list[Any]]:
    """Rows without where they stood, blanks as None, in an order of their own."""
    bare = frame.drop(columns=["row", "column", "gauge row"], errors="ignore")
    rows = [[None if cell != cell else cell for cell in row] for row in bare.to_numpy(dtype=object).tolist()]
    return sorted(rows, key=lambda row: [f"{cell:.9g}" if isinstance(cell, float) else str(cell) for cell in row])


def _record(path: Path) -> Any:
    book = read_book(path)
    findings = reconcile(book)
    record = result_record(book, findings.verdicts, every_action(findings.verdicts))
    del record["book"]
    for member in record["members"]:
        member["readings"].sort(key=lambda reading: (reading["stage"], reading["gauge"]))
    return record


def _agree(expected: Any, found: Any) -> None:
    """The same to 1e-9, but for residuals, which are small differences of large readings."""
    if isinstance(expected, dict):
        assert expected.keys() == found.keys()
        for key in expected:
            _agree(expected[key], found[key])
    elif isinstance(expected, list):
        assert len(expected) == len(found)
        for pair in zip(expected, found, strict=True):
            _agree(*pair)
    elif isinstance(expected, float):
        assert found == pytest.approx(expected, rel=1e-9, abs=1e-9)
    else:
        assert found == expected


def test_a_member_with_rows_of_its_own_takes_none_of_the_star(tmp_path: Path) -> None:
    loads = [["member", "load case", "from [m]", "force [kN]"], ["*", "P", 3.0, 50], ["B1", "P", 2.0, 70]]
    book = read_book(write_book(tmp_path / "book", {**SIMPLE, "loads": loads}))
    assert book.tables["loads"][["from", "force"]].to_numpy().tolist() == [[2.0, 70e3]]


@pytest.mark.parametrize(
    ("text", "why"),
    [
        ("﻿member,length [m],EI [kN m2]\nB1,6,20000\n", "byte-order mark"),
        ("member;length [m];EI [kN m2]\nB1;6,0;20000,5\n", "semicolons with decimal commas"),
        ("member\tlength [m]\tEI [kN m2]\nB1\t6\t20000\n", "tabs"),
        ("Survey of 2024,,\n,,\nMember , LENGTH [m],EI [kN m2],\nB1,6,20 000,\n,,,\n", "a title and blank rows"),
    ],
)
def test_files_as_they_come_are_read_rightly(text: str, why: str, tmp_path: Path) -> None:
    folder = write_book(tmp_path / "book", SIMPLE)
    (folder / "members.csv").write_text(text, encoding="utf-8")
    members = read_book(folder).tables["members"]
    assert members["length"].tolist() == [6.0], why
    assert members["EI"].tolist() == [pytest.approx(20e6, rel=1e-4)], why


@pytest.mark.parametrize("name", ["nowhere", "text.txt", "empty", "broken.xlsx"])
def test_what_is_no_book_is_refused_in_words(name: str, tmp_path: Path) -> None:
    (tmp_path / "text.txt").write_text("dear")
    (tmp_path / "empty").mkdir()
    (tmp_path / "broken.xlsx").write_bytes(b"PK\x03\x04 not a workbook")
    with pytest.raises(FieldBookError) as refused:
        read_book(tmp_path / name)
    assert len(refused.value.faults) == 1


def test_a_book_in_us_units_is_shown_in_them_throughout(tmp_path: Path) -> None:
    members = [["member", "length [in]", "E [psi]", "I [in4]"], ["B1", 240, 29e6, 100]]
    loads = [["member", "load case", "from [in]", "force [lb]"], ["B1", "P", 120, 1000]]
    readings = [["member", "stage", "at [in]", "deflection [in]", "u [in]"], ["B1", "P", 120, 0.1, 0.001]]
    book = read_book(write_book(tmp_path / "book", {"members": members, "loads": loads, "readings": readings}))
    shown = {kind: display(book.units, kind, 1.0)[1] for kind in ("EI", "moment", "bearing stiffness", "settlement")}
    assert shown == {"EI": "lbf in2", "moment": "lbf in", "bearing stiffness": "lbf/in", "settlement": "in"}
    assert display(book.units, "EI", book.tables["members"]["EI"][0])[0] == pytest.approx(29e6 * 100, rel=1e-9)


def test_a_metric_book_keeps_the_design_units(tmp_path: Path) -> None:
    book = read_book(write_book(tmp_path / "book", SIMPLE))
    assert {kind: book.units[kind] for kind in ("EI", "bearing stiffness", "rotation")} == {
        "EI": "kN m2",
        "bearing stiffness": "kN/mm",
        "rotation": "mrad",
    }


def test_ten_faults_are_ten_lines(tmp_path: Path) -> None:
    with pytest.raises(FieldBookError) as refused:
        read_book(
            write_book(
                tmp_path / "book",
                {
                    "members": [
                        ["member", "length [m]", "EI [kN m2]"],
                        ["B1", 6.0, 20000],
                        ["B2", "long", 20000],
                        ["B3", 5.0, -1],
                    ],
                    "supports": [
                        ["member", "support", "at [m]", "vertical"],
                        ["B1", "A", 0, "stiff"],
                        ["B1", "B", 9, ""],
                    ],
                    "loads": [
                        ["member", "load case", "from [m]", "force [kN]"],
                        ["B1", "P", 3.0, "heavy"],
                        ["B9", "P", 3.0, 50],
                        ["B1", "Q", 7.0, 50],
                    ],
                    "readings": [
                        ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"],
                        ["B1", "R", 3.0, 8.4, 0.1],
                        ["B1", "P", 8.0, 8.4, 0.1],
                        ["B1", "P", 3.0, 8.4, 0],
                    ],
                },
            )
        )
    found = [(fault.table, fault.row, str(fault.column).partition(" [")[0]) for fault in refused.value.faults]
    assert found == [
        ("members", 3, "length"),
        ("members", 4, "EI"),
        ("supports", 2, "vertical"),
        ("supports", 3, "at"),
        ("loads", 2, "force"),
        ("loads", 3, "member"),
        ("loads", 4, "from"),
        ("readings", 2, "stage"),
        ("readings", 3, "at"),
        ("readings", 4, "u"),
    ]
