"""Books that mean harm, or that no machine should swallow, end in a clear fault; no text of a book is ever run."""

import io
import zipfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import openpyxl
import pint
import pytest

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import read_book
from fieldfit.fieldbook.units import DESIGN_UNITS, UnitError, scale_of
from tests.books import SIMPLE, write_book


def refusal(path: Path) -> FieldBookError:
    with pytest.raises(FieldBookError) as refused:
        read_book(path)
    return refused.value


HOSTILE = [
    "__import__('os')",
    "m**9**9**9",
    "m^9^9^9",
    "m" * 5000,
    "m " * 5000,
    "(lambda: 1)()",
    "m; import os",
    "m\nimport os",
    "kN m2 %s {0}",
    "{0.__class__}",
    "£",
    "",
    " ",
    "1/0",
    "m/0",
    "m99",
    "10^999",
    "m.__class__",
    "registry",
    "dimensionless",
]


@pytest.mark.parametrize("unit", HOSTILE)
@pytest.mark.parametrize("table", ["members", "gauges"])
def test_hostile_units_are_refused_and_never_parsed(
    unit: str, table: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def parsed(*_: object, **__: object) -> None:
        raise AssertionError("the parser of pint was called")

    for name in ("parse_expression", "parse_units", "__call__"):
        monkeypatch.setattr(pint.UnitRegistry, name, parsed)
    tables: dict[str, Any] = {
        "members": [["member", f"length [{unit}]", "EI [kN m2]"], ["B1", 6, 20000]],
        "gauges": [["member", "gauge", "at [m]", f"u [{unit}]"], ["B1", "D", 3, 0.1]],
    }
    error = refusal(write_book(tmp_path / "book", {**SIMPLE, table: tables[table]}))
    (fault,) = error.faults
    assert (fault.kind, fault.table, fault.row) in {
        ("unknown unit", table, 1),
        ("unit of another kind", table, 1),
        ("unit missing", table, 1),
    }
    assert len(str(error)) < 20_000


@pytest.mark.parametrize("unit", HOSTILE)
def test_hostile_units_are_of_no_kind(unit: str) -> None:
    for kind in DESIGN_UNITS:
        with pytest.raises(UnitError):
            scale_of(kind, unit)


TEXTS = [
    "{0.__class__}",
    "%s%n",
    "=cmd|'/c calc'!A1",
    "../../etc/passwd",
    "__import__('os').abort()",
    "<script>",
    "`id`",
]


def said_of(folder: Path) -> list[str]:
    """All texts of a book, or its faults."""
    try:
        frames = read_book(folder).tables
    except FieldBookError as refused:
        return [f"{fault.kind}: {fault}" for fault in refused.faults]
    return [str(cell) for frame in frames.values() for cell in frame.to_numpy(dtype=object).ravel()]


@pytest.mark.parametrize("text", TEXTS)
def test_texts_of_a_book_stay_texts(text: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """As a name, a text, a heading, a word and a number: kept as written or refused as written, and no file is made."""

    def run(*_: object, **__: object) -> None:
        raise AssertionError("a text was run")

    for name in ("eval", "exec"):
        monkeypatch.setattr(f"builtins.{name}", run)
    for table, column in (("members", 0), ("members", 1), ("readings", 1), ("readings", 3), ("loads", 1)):
        for row in (0, 1):
            tables: dict[str, Any] = {name: [list(cells) for cells in rows] for name, rows in SIMPLE.items()}
            tables[table][row][column] = text
            folder = write_book(tmp_path / f"{table} {row} {column}", tables)
            assert any(text[:5] in said or "missing" in said for said in said_of(folder))
    assert all(path.suffix == ".csv" for path in tmp_path.rglob("*") if path.is_file())


def packed(parts: dict[str, bytes]) -> bytes:
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in parts.items():
            archive.writestr(name, content)
    return out.getvalue()


def sound() -> dict[str, bytes]:
    """The parts of a small workbook."""
    book = openpyxl.Workbook()
    book.worksheets[0].title = "members"
    book["members"].append(["member", "length [m]", "EI [kN m2]"])
    out = io.BytesIO()
    book.save(out)
    with zipfile.ZipFile(out) as archive:
        return {part.filename: archive.read(part) for part in archive.infolist()}


SHEET = "xl/worksheets/sheet1.xml"


def with_sheet(change: Callable[[bytes], bytes]) -> bytes:
    parts = sound()
    return packed({**parts, SHEET: change(parts[SHEET])})


def deep() -> bytes:
    return with_sheet(lambda xml: xml.replace(b"</sheetData>", b"</sheetData>" + b"<a>" * 5000 + b"</a>" * 5000))


def laughs() -> bytes:
    entities = b'<!DOCTYPE x [<!ENTITY a "ha"><!ENTITY b "&a;&a;&a;&a;">]>'
    return with_sheet(lambda xml: entities + xml)


def outside() -> bytes:
    entity = b'<!DOCTYPE x [<!ENTITY a SYSTEM "file:///etc/hostname">]>'
    return with_sheet(lambda xml: entity + xml)


def wide_merge() -> bytes:
    merge = b'</sheetData><mergeCells><mergeCell ref="A1:XFD1048576"/></mergeCells>'
    return with_sheet(lambda xml: xml.replace(b"</sheetData>", merge))


def many_parts() -> bytes:
    return packed(sound() | {f"xl/media/{number}": b"" for number in range(2_001)})


def many_cells() -> bytes:
    cells = b"<c/>" * 5_000_001
    noise = b"".join(b"<!-- %d -->" % number for number in range(60_000))  # so that it does not pack too well
    return with_sheet(lambda xml: xml.replace(b"</sheetData>", noise + b"<row>" + cells + b"</row></sheetData>"))


UNSAFE: dict[str, tuple[Callable[[], bytes], str]] = {
    "packed": (lambda: packed(sound() | {"xl/worksheets/sheet1.xml": b" " * 5_000_000}), "packed more than 200 to 1"),
    "nested": (deep, "nested more than 60 deep"),
    "entities": (laughs, "declares a document type"),
    "an entity outside": (outside, "declares a document type"),
    "merged": (wide_merge, "more than 5000000 cells"),
    "parts": (many_parts, "more than 2000 parts"),
    "cells": (many_cells, "more than 5000000 cells"),
}


@pytest.mark.parametrize("make", UNSAFE)
def test_an_unsafe_workbook_is_refused_unopened(make: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(openpyxl, "load_workbook", lambda *_, **__: pytest.fail("the workbook was opened"))
    build, why = UNSAFE[make]
    (tmp_path / "book.xlsx").write_bytes(build())
    (fault,) = refusal(tmp_path / "book.xlsx").faults
    assert fault.kind == "unsafe workbook"
    assert why in str(fault)


def test_a_stray_cell_far_out_does_not_make_a_sheet_huge(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    book.worksheets[0].title = "members"
    book["members"]["XFD1048576"] = "oops"
    book.save(tmp_path / "book.xlsx")
    faults = refusal(tmp_path / "book.xlsx").faults
    assert [fault.kind for fault in faults] == ["too many cells"]
    assert "a stray cell in row 1048576 or column 16384 makes the sheet huge" in str(faults[0])


def test_a_damaged_workbook_of_any_kind_is_refused(tmp_path: Path) -> None:
    whole = packed(sound())
    for cut in range(0, len(whole), 97):
        (tmp_path / "book.xlsx").write_bytes(whole[:cut])
        assert refusal(tmp_path / "book.xlsx").faults
    for missing in sound():
        parts = sound()
        del parts[missing]
        (tmp_path / "book.xlsx").write_bytes(packed(parts))
        assert refusal(tmp_path / "book.xlsx").faults


def test_one_quoted_record_of_many_lines_does_not_make_a_table_huge(tmp_path: Path) -> None:
    folder = write_book(tmp_path / "book", SIMPLE)
    line = b'"a\n"' + b"," * 1900
    (folder / "members.csv").write_bytes(b'"' + b",\n" * 3000 + b'",' + line * 3000)
    assert "too many cells" in {fault.kind for fault in refusal(folder).faults}


def test_a_very_long_cell_in_quotes_is_refused(tmp_path: Path) -> None:
    folder = write_book(tmp_path / "book", SIMPLE)
    (folder / "members.csv").write_bytes(b'member,length [m],EI [kN m2]\n"' + b"x" * 200_000 + b'",6,20000\n')
    assert {fault.kind for fault in refusal(folder).faults} == {"broken quotes"}
