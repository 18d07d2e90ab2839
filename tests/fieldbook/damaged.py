"""Books damaged in every way: cells, headings, rows, the bytes of files and of workbooks.

One book is small and full; the other sparse: unlike members, most tables, few of the readings it could hold.
"""

import copy
from collections.abc import Callable
from pathlib import Path
from typing import Any

from hypothesis import strategies as st

from tests.books import SIMPLE, write_book, write_workbook

__all__ = ["DAMAGE", "SMALL", "SPARSE", "Damaged"]

Tables = dict[str, Any]

SMALL: Tables = {
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
SPARSE: Tables = {
    "job": [["item", "value"], ["structure", "three unlike beams"]],
    "members": [
        ["member", "length [m]", "EI [kN m2]", "E [GPa]", "I [cm4]", "depth [mm]", "tolerance [%]", "load share"],
        ["M1", 12, 20000, "", "", 400, 10, ""],
        ["M2", 8, "", 210, 20000, 400, 15, 0.5],
        ["M3", 6, 20000, "", "", 300, 10, ""],
    ],
    "supports": [
        ["member", "support", "at [m]", "vertical", "bearing stiffness [kN/mm]", "rotation"],
        ["M1", "A", 0, "rigid", "", "free"],
        ["M1", "B", 6, "spring", 40, "free"],
        ["M1", "C", 12, "rigid", "", "free"],
        ["M2", "A", 0, "rigid", "", "fixed"],
        ["M2", "B", 8, "rigid", "", "fixed"],
    ],
    "hinges": [["member", "at [m]"], ["M2", 5]],
    "zones": [["member", "zone", "from [m]", "to [m]", "EI [kN m2]"], ["M1", "soft", 2, 4, 15000]],
    "loads": [
        ["member", "load case", "from [m]", "to [m]", "force [kN]", "intensity [kN/m]", "u [%]", "nature"],
        ["M1", "P", 3, "", 50, "", 2, ""],
        ["M2", "P", 4, "", 30, "", "", ""],
        ["M3", "P", 0, 6, "", 8, "", "live"],
    ],
    "stages": [
        ["member", "stage", "load case", "factor", "role", "cycle", "start", "end"],
        ["*", "z", "", "", "zero", "", "", ""],
        ["*", "half", "P", 0.5, "load", "", "", ""],
        ["*", "full", "P", 1, "load", "", "", ""],
        ["*", "back", "", "", "recovery", "", "", ""],
        ["M3", "z", "", "", "zero", 1, "2024-05-14T08:00", "2024-05-14T08:30"],
        ["M3", "full", "P", 1, "load", 1, "2024-05-14T09:00", "2024-05-15T09:30"],
        ["M3", "back", "", "", "recovery", 1, "2024-05-15T10:00", "2024-05-16T12:00"],
    ],
    "imposed": [
        ["member", "stage", "support", "settlement [mm]", "top minus bottom [K]", "expansion [1/K]"],
        ["M1", "full", "B", 0.5, "", ""],
        ["M1", "full", "", "", 4, 1.2e-5],
    ],
    "gauges": [
        [
            "member",
            "gauge",
            "at [m]",
            "measures",
            "below neutral axis [mm]",
            "u [mm]",
            "u [microstrain]",
            "scale u [%]",
        ],
        ["M1", "D1", 3, "deflection", "", 0.1, "", ""],
        ["M1", "D2", 9, "deflection", "", 0.1, "", 1],
        ["M1", "DB", 6, "deflection", "", 0.1, "", ""],
        ["M2", "S1", 2, "strain", 180, "", 5, ""],
        ["M2", "S2", 2, "strain", -180, "", 5, ""],
        ["M2", "D1", 4, "deflection", "", 0.1, "", ""],
        ["M3", "D1", 3, "deflection", "", 0.05, "", ""],
    ],
    "readings": [
        ["member", "stage", "gauge", "deflection [mm]", "strain [microstrain]", "time", "reset", "use"],
        ["M1", "z", "D1", 0.0, "", "", "", ""],
        ["M1", "full", "D1", 9.6, "", "", "", ""],
        ["M1", "full", "D1", 9.7, "", "", "", ""],
        ["M1", "z", "D2", 0.1, "", "", "", ""],
        ["M1", "full", "D2", -2.3, "", "", "", ""],
        ["M1", "full", "DB", 1.1, "", "", "", "no"],
        ["M2", "half", "S1", "", 21, "", "", ""],
        ["M2", "half", "S2", "", -18, "", "", ""],
        ["M2", "full", "S1", "", 40, "", "", ""],
        ["M2", "full", "D1", 2.1, "", "", "yes", ""],
        ["M3", "z", "D1", 0.02, "", "2024-05-14T08:10", "", ""],
        ["M3", "full", "D1", 6.8, "", "2024-05-15T09:10", "", ""],
        ["M3", "", "D1", 0.6, "", "2024-05-16T10:00", "", ""],
    ],
    "benchmarks": [["benchmark", "height [m]", "u [mm]"], ["BM1", 10, ""]],
    "unknowns": [
        ["member", "unknown", "where", "stage", "low", "high", "expected", "expected u"],
        ["M1", "EI", "", "", 0.2, 3, "", ""],
        ["M1", "settlement", "B", "full", "", "", "", ""],
        ["M2", "EI", "", "", "", "", "", ""],
        ["M2", "rotational restraint", "A", "", "", "", "", ""],
        ["M3", "EI", "", "", "", "", "", ""],
        ["M3", "load", "P", "", "", "", 1, 0.03],
    ],
    "limits": [
        ["member", "limit", "where", "stage", "at least", "at most"],
        ["M1", "span/n", "1", "full", 250, ""],
        ["M2", "fixity", "A", "", 0.2, ""],
        ["M3", "ACI 318-19", "", "", "", ""],
        ["*", "EI ratio", "", "", 0.8, ""],
    ],
    "inspections": [["member", "finding", "found"], ["M3", "sign of failure", "no"]],
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
NUMBERS = st.one_of(st.sampled_from([0.0, -1.0, 1e-9, 1e9, 3.0, 5.9999]), st.floats(0.5, 20), st.floats(-1e6, 1e6))
ENDS = st.sampled_from([b"", b"\xff\xfe", b"\x00", b"\xef\xbb\xbf", b"a,b\n", b'"', b"\xe9", b";;;\n", b"\r\r\n"])

Damaged = Callable[[Path], Path]  # writes a damaged book into a folder and says where
Place = tuple[str, int, int]  # table, row, column


def damaged_at(
    tables: Tables, places: list[Place], cells: st.SearchStrategy[Any], rows: int = 0
) -> st.SearchStrategy[Damaged]:
    """Some cells changed, and up to so many rows said twice or left out."""
    all_rows = [(name, row) for name, lines in tables.items() for row in range(len(lines))]
    changes = st.lists(st.tuples(st.sampled_from(places), cells), min_size=1, max_size=3)
    again = st.lists(st.tuples(st.sampled_from(all_rows), st.integers(0, 2)), max_size=rows)

    def written(changes: list[Any], again: list[Any]) -> Damaged:
        spoilt = copy.deepcopy(tables)
        for (name, row, column), cell in changes:
            spoilt[name][row][column] = cell
        for (name, row), count in again:
            spoilt[name][row : row + 1] = [spoilt[name][row]] * count
        return lambda folder: write_book(folder / "book", spoilt)

    return st.builds(written, changes, again)


def damaged_files(tables: Tables) -> st.SearchStrategy[Damaged]:
    """Bytes put into one file, or the file cut off."""

    def written(name: str, front: bytes, middle: bytes, back: bytes, where: float, lost: int) -> Damaged:
        def write(folder: Path) -> Path:
            book = write_book(folder / "book", tables)
            spoil(book / f"{name}.csv", front, middle, back, where, lost)
            return book

        return write

    spots = st.floats(0, 1), st.sampled_from([0, 0, 1, 7])
    return st.builds(written, st.sampled_from(sorted(tables)), ENDS, st.binary(max_size=20), ENDS, *spots)


def damaged_workbooks(tables: Tables) -> st.SearchStrategy[Damaged]:
    """Bytes put into a workbook, or the workbook cut off."""

    def written(middle: bytes, where: float, lost: int) -> Damaged:
        def write(folder: Path) -> Path:
            book = write_workbook(folder / "book.xlsx", tables)
            spoil(book, b"", middle, b"", where, lost)
            return book

        return write

    return st.builds(written, st.binary(max_size=20), st.floats(0, 1), st.sampled_from([0, 0, 1, 200, 4000]))


def spoil(file: Path, front: bytes, middle: bytes, back: bytes, where: float, lost: int) -> None:
    content = file.read_bytes()
    cut = int(where * len(content))
    file.write_bytes(front + content[:cut] + middle + content[cut + lost :] + back)


def kinds(tables: Tables) -> dict[str, st.SearchStrategy[Damaged]]:
    """Every kind of damage to a book."""
    places = [
        (name, row, at) for name, lines in tables.items() for row in range(len(lines)) for at in range(len(lines[0]))
    ]
    below = [place for place in places if place[1]]
    amounts = [(name, row, at) for name, row, at in below if isinstance(tables[name][row][at], int | float)]
    return {
        "numbers": damaged_at(tables, amounts, NUMBERS),
        "cells": damaged_at(tables, below, CELLS, rows=1),
        "headings": damaged_at(tables, [place for place in places if not place[1]], CELLS),
        "files": damaged_files(tables),
        "workbooks": damaged_workbooks(tables),
    }


#: Kinds of damage, each with how many of two thousand books have it.
DAMAGE = {
    f"{book}, {kind}": (damage, count)
    for book, tables, counts in (("small", SMALL, (450, 560, 340, 340, 90)), ("sparse", SPARSE, (40, 90, 40, 40, 10)))
    for (kind, damage), count in zip(kinds(tables).items(), counts, strict=True)
}
