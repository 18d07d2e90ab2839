"""Every kind of fault: where it is found, what is said, and that nothing else is said with it."""

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest

import fieldfit
from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import read_book, write_blank
from fieldfit.fieldbook.broken import BROKEN, write_broken
from fieldfit.fieldbook.faults import FAULTS
from fieldfit.observe import observe
from tests.books import SIMPLE, write_book

#: kind of fault: table, row, column, and words of the message
EXPECTED: dict[str, tuple[str, int | None, str | None, str]] = {
    "no such book": ("book", None, None, "a folder of CSV files or one .xlsx workbook"),
    "not a book": ("book", None, None, "got 'letter.txt', expected a folder of CSV files or one .xlsx workbook"),
    "empty book": ("book", None, None, "expected tables named job, members, supports"),
    "table missing": ("members", None, None, "a table of the members with length and stiffness"),
    "no members": ("members", 1, None, "a row for each member"),
    "table twice": ("loads", None, None, "got 'loads.tsv', expected one file or sheet for each table"),
    "unknown table": ("book", None, None, "got 'support.csv', expected a name of a table (did you mean supports?)"),
    "file too large": ("loads", None, None, "got 'loads.csv', expected a file of at most 400 MB"),
    "too many files": ("book", None, None, "a folder of at most 1000 files"),
    "too many sheets": ("book", None, None, "at most 200 sheets"),
    "too many cells": ("loads", None, None, "at most 2000 columns and 40000000 cells"),
    "broken workbook": ("book", None, None, "an .xlsx workbook (it cannot be opened (BadZipFile))"),
    "unsafe workbook": ("book", None, None, "of ordinary size and make (a part is packed more than 200 to 1)"),
    "not text": ("loads", None, None, "a text file in UTF-8, UTF-16 or Windows-1252 (Latin-1)"),
    "broken quotes": ("members", None, None, "a cell in quotes ending with its quote (unexpected end of data)"),
    "no headings": ("loads", None, None, "a row of headings such as member, load case, from, to in the first 50 rows"),
    "unknown column": ("members", 1, "lenght [m]", "a column of this table: member, length, EI"),
    "column missing": ("members", 1, None, "a column length (Length of the member, end to end.)"),
    "column twice": ("members", 1, "length [ft]", "one column length"),
    "two forms of readings": ("readings", 1, "gauge", "D [mm] is a column of one gauge; use one form or the other"),
    "value without heading": ("members", 2, None, "got '15', expected a heading over column D"),
    "merged cells": ("members", 2, "length [m]", "got '6', expected a cell of its own for every value"),
    "unit missing": ("members", 1, "length", "a unit in square brackets (such as length [m])"),
    "unknown unit": ("members", 1, "EI [kn m2]", "got 'kn m2', expected a known unit (write kN)"),
    "unit of another kind": ("members", 1, "length [kN]", "got 'kN', expected a unit of length such as m"),
    "unit of another row": (
        "gauges",
        2,
        "u [mrad]",
        "such as mm, as this row is one of deflection",
    ),
    "unit not wanted": ("members", 1, "member [1]", "a heading without unit (these cells are no numbers)"),
    "blank cell": ("members", 2, "length [m]", "got 'n/a', expected a length"),
    "not a number": ("members", 2, "length [m]", "got 'six', expected a number or a blank cell"),
    "too large": ("members", 2, "EI [kN m2]", "got '1e999', expected a number a computer can hold"),
    "beyond reason": ("members", 2, "EI [kN m2]", "got '2e-154', expected a size from 1e-15 to 1e+18 in SI units"),
    "not positive": ("members", 2, "EI [kN m2]", "got '-20000', expected a number above 0"),
    "out of range": ("unknowns", 2, "high", "got '1.2', expected a fixity factor from 0 (free) to 1 (fixed)"),
    "ambiguous comma": ("members", 2, "EI [kN m2]", "got '20,000', expected a number that can be read one way only"),
    "mixed decimal marks": ("members", 2, "length [m]", "got '6,5', expected one decimal mark in the whole column"),
    "unit in the cell": ("members", 2, "length [m]", "got '6 m', expected a number alone"),
    "date for a number": ("members", 2, "length [m]", "got '2024-06-01', expected a number (a spreadsheet may have"),
    "spreadsheet error": ("members", 2, "EI [kN m2]", "got '#DIV/0!', expected a number"),
    "formula": ("members", 2, "length [m]", "got '=2*3', expected a stored value (formulas are never worked out"),
    "not a time": ("stages", 2, "start", "got '03/04/2024', expected a date or time such as 2024-05-14"),
    "not yes or no": ("readings", 2, "use", "got 'maybe', expected yes or no"),
    "unknown word": ("supports", 2, "vertical", "got 'rigd', expected rigid or spring or none (did you mean rigid"),
    "hidden character": ("members", 2, "note", "without hidden characters (it holds ZERO WIDTH SPACE)"),
    "too long": ("members", 2, "member", "BBB...', expected at most 100 characters"),
    "stated twice": ("gauges", 2, "u [mm]", "one u a row"),
    "name twice": ("members", 3, "member", "got 'B1', expected a name given once (it is that of row 2)"),
    "row twice": ("readings", 3, "member", "a row that differs from every earlier one"),
    "star not allowed": ("readings", 2, "member", "got '*', expected the name of one member"),
    "unknown member": ("loads", 3, "member", "got 'B7', expected a member of the members table (known: B1)"),
    "unknown load case": ("stages", 2, "load case", "got 'Q', expected a load case of this member (known: P)"),
    "unknown stage": ("readings", 2, "stage", "got 'full load', expected a stage of this member (known: P)"),
    "unknown support": ("imposed", 2, "support", "got 'C', expected a support of this member (known: A, B)"),
    "unknown gauge": ("readings", 2, "gauge", "got 'D1', expected a gauge of this member (did you mean D?)"),
    "unknown zone": ("unknowns", 2, "where", "got 'middle', expected a zone of this member (none is known)"),
    "unknown span": ("limits", 2, "where", "got '2', expected a span of this member (known: A-B)"),
    "no stiffness": ("members", 2, "EI", "EI, or both E and I"),
    "length at odds": (
        "members",
        2,
        "length [mm]",
        "got '6', expected a length that reaches the stations of this member,",
    ),
    "stiffness at odds": ("members", 2, "EI [kN m2]", "agrees with E times I within 0.5 % (10000 kN m2)"),
    "depth missing": ("imposed", 2, "top minus bottom [K]", "a depth of this member in the members table"),
    "stiffness missing": ("supports", 2, "bearing stiffness [kN/mm]", "a bearing stiffness, as vertical is a spring"),
    "stiffness not wanted": ("supports", 2, "bearing stiffness [kN/mm]", "got '50', expected a blank cell"),
    "support holds nothing": ("supports", 2, "vertical", "holds the member up or restrains rotation"),
    "same place": ("supports", 3, "at [m]", "a place without another support"),
    "hinge at an end": ("hinges", 2, "at [m]", "a station inside the member"),
    "zones overlap": ("zones", 3, "from [m]", "a station where the zone to its left has ended"),
    "off the beam": ("readings", 2, "at [m]", "got '6.5', expected a station from 0 to 6 m"),
    "edges crossed": ("loads", 2, "to [m]", "a station beyond from"),
    "taper without start": ("zones", 2, "EI [kN m2]", "EI, as EI end is given"),
    "no load": ("loads", 2, "force [kN]", "a force, an intensity or a moment"),
    "several loads": ("loads", 2, "moment [kN m]", "one of force, intensity and moment a row"),
    "edge missing": ("loads", 2, "to [m]", "where the spread load ends"),
    "edge not wanted": ("loads", 2, "to [m]", "a blank cell: a moment acts at a point"),
    "stage without load": ("stages", 2, "load case", "a load case (a stage without load has another role, such as"),
    "roles at odds": ("stages", 3, "role", "got 'hold', expected the role that this stage has in its first row"),
    "cycles at odds": ("stages", 3, "cycle", "got '2', expected the cycle that this stage has in its first row"),
    "nothing to scale": ("stages", 2, "load case", "a load case, as factor is given"),
    "ends before start": ("stages", 2, "end", "a time after start"),
    "support missing": ("imposed", 2, "support", "the support that settled"),
    "settlement missing": ("imposed", 2, "settlement [mm]", "a settlement, as a support is named"),
    "expansion missing": ("imposed", 2, "expansion [1/K]", "a coefficient of expansion"),
    "difference missing": ("imposed", 2, "top minus bottom [K]", "a temperature difference, as its u is given"),
    "two curvatures": ("imposed", 2, "top minus bottom [K]", "a curvature or a temperature difference, not both"),
    "nothing imposed": ("imposed", 2, "settlement [mm]", "a settlement, a curvature or a temperature difference"),
    "sense of another kind": ("gauges", 2, "positive sense", "expected down or up, as it measures deflection"),
    "distance missing": ("gauges", 3, "below neutral axis [mm]", "how far the strain gauge is below the neutral axis"),
    "distance not wanted": ("gauges", 2, "below neutral axis [mm]", "a blank cell: it is no strain gauge"),
    "two uncertainties": ("gauges", 2, "plus or minus [mm]", "u or plus or minus, not both"),
    "uncertainty missing": ("readings", 3, "u", "u, plus or minus or resolution"),
    "no station": ("readings", 2, "at [m]", "a gauge, or at"),
    "no value": ("readings", 2, "deflection [mm]", "a value (or write no in the column use)"),
    "several values": ("readings", 2, "level [m]", "one value a row ('8.4' stands below deflection [mm]; write a row"),
    "gauge of another kind": ("readings", 2, "rotation [mrad]", "a deflection, as the gauge measures it"),
    "strain without gauge": ("readings", 2, "gauge", "its distance below the neutral axis must be known"),
    "gauge in two places": ("readings", 2, "at [m]", "the station that this gauge has elsewhere in the book"),
    "station on a jump": ("readings", 2, "at", "got 'D at 3 m', expected a station to one side"),
    "backsight missing": ("levels", 2, "sight", "got 'intermediate', expected a backsight in every set-up"),
    "two backsights": ("levels", 3, "sight", "expected one backsight a set-up (a further sight at a known point"),
    "sighted twice": ("levels", 4, "point", "got 'L', expected a point sighted once by a set-up"),
    "length of sight missing": ("levels", 3, "distance [m]", "the length of the sight, as a figure per km is given"),
    "not connected": ("levels", 4, "point", "that sights connect with a benchmark of known height (known: BM)"),
    "channel of several gauges": ("readings", 1, "D [mm]", "a column of one gauge (it is a gauge of B1, B2"),
    "no stage": ("readings", 2, "stage", "a stage, or a time within the window of one"),
    "no window": ("readings", 2, "stage", "a stage, or a start and an end of the stages of this member"),
    "reset without log": ("resets", 2, "time", "no row: yes in the column reset of the readings says it"),
    "window open": ("stages", 3, "end", "when it ended, as readings are placed by their time"),
    "windows overlap": ("stages", 3, "start", "a time when the stage before it had ended"),
    "times at odds": ("readings", 2, "time", "a date with a time of day, as other times of this book (write the off"),
    "time backwards": ("readings", 3, "time", "(it goes back by about an hour, as a clock set to winter time does"),
    "coefficient alone": ("gauges", 2, "temperature coefficient u", "how sure the coefficient is"),
    "value not wanted": ("unknowns", 2, "low", "a blank cell for this unknown (what is known of it stands with the g"),
    "temperature missing": ("readings", 3, "temperature", "a temperature with every reading of this gauge"),
    "where missing": ("unknowns", 2, "where", "a support, for rotational restraint"),
    "where not wanted": ("unknowns", 2, "where", "a blank cell for this unknown"),
    "stage not wanted": ("unknowns", 2, "stage", "got 'P', expected a blank cell: this unknown holds for every stage"),
    "stage missing": ("unknowns", 2, "stage", "a stage, for this unknown"),
    "expected alone": ("unknowns", 2, "expected u", "how sure the expected value is"),
    "expected out of bounds": ("unknowns", 2, "expected", "a value from low to high"),
    "bounds crossed": ("unknowns", 2, "high", "got '0.5', expected more than low"),
    "no limit": ("limits", 2, "at most", "at least, at most, or both"),
    "unknown number": ("limits", 2, "where", "got 'recovry', expected a number of IS 456:2000 (did you mean recovery"),
    "number not named": ("limits", 2, "where", "which number of IS 456:2000 this one takes the place of (known: w"),
    "number missing": ("limits", 2, "at least", "the number that takes the place of the published recovery"),
    "wrong side": ("limits", 2, "at most", "got '0.8', expected a blank cell: write it in the column at least"),
    "natures at odds": ("loads", 3, "nature", "got 'roof', expected the nature that this load case has in its first"),
}
NEED_MORE_THAN_A_BOOK = {"already there", "cannot be opened"}


@pytest.mark.parametrize("kind", EXPECTED)
def test_each_fault_is_said_alone_and_in_its_place(kind: str, tmp_path: Path) -> None:
    with pytest.raises(FieldBookError) as refused:
        observe(read_book(write_broken(kind, tmp_path)))
    (fault,) = refused.value.faults
    table, row, column, words = EXPECTED[kind]
    assert (fault.kind, fault.table, fault.row, fault.column) == (kind, table, row, column)
    assert words in str(fault)


def test_every_declared_kind_is_tested_and_described() -> None:
    assert set(EXPECTED) == set(BROKEN)
    assert set(FAULTS) == set(EXPECTED) | NEED_MORE_THAN_A_BOOK
    assert len(FAULTS) >= 40
    assert len(set(FAULTS.values())) == len(FAULTS)
    assert all(sentence.endswith(".") for sentence in FAULTS.values())


def kinds_used() -> Iterator[str]:
    """Every kind of fault that the code names outright, by the calls that note one."""
    place = {"fault": 0, "refuse_heading": 0, "CellFault": 1}
    for room in ("fieldbook", "observe"):
        for source in (Path(fieldfit.__file__).parent / room).glob("*.py"):
            for call in ast.walk(ast.parse(source.read_text(encoding="utf-8"))):
                if not isinstance(call, ast.Call):
                    continue
                name = call.func.id if isinstance(call.func, ast.Name) else getattr(call.func, "attr", "")
                at = place.get(name, (2 if isinstance(call.func, ast.Name) else 0) if name == "refuse" else 99)
                named = [word.value for word in call.keywords if word.arg == "kind"] if name == "Fault" else []
                for kind in (*call.args[at : at + 1], *named):
                    if isinstance(kind, ast.Constant):
                        yield str(kind.value)


def test_every_kind_used_is_declared() -> None:
    used = set(kinds_used())
    assert len(used) > 60
    assert used <= set(FAULTS)


def test_a_file_that_cannot_be_opened_is_a_fault(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(_: Path) -> bytes:
        raise PermissionError(13, "Permission denied")

    book = write_book(tmp_path / "book", SIMPLE)
    monkeypatch.setattr(Path, "read_bytes", refuse)
    with pytest.raises(FieldBookError) as refused:
        read_book(book)
    assert {fault.kind for fault in refused.value.faults} == {"cannot be opened"}
    assert "got 'loads.csv', expected a file that can be read (Permission denied)" in str(refused.value)


@pytest.mark.parametrize("name", ["book", "book.xlsx"])
def test_a_blank_book_is_not_written_over_anything(name: str, tmp_path: Path) -> None:
    write_blank(tmp_path / name)
    before = {path: path.read_bytes() for path in tmp_path.rglob("*") if path.is_file()}
    with pytest.raises(FieldBookError, match="expected a path where nothing is yet") as refused:
        write_blank(tmp_path / name)
    assert [fault.kind for fault in refused.value.faults] == ["already there"]
    assert {path: path.read_bytes() for path in tmp_path.rglob("*") if path.is_file()} == before


def test_a_table_that_cannot_be_read_is_not_echoed_by_the_names_in_it(tmp_path: Path) -> None:
    book = write_book(tmp_path / "book", SIMPLE)
    (book / "loads.csv").write_bytes(b"\0")
    (book / "readings.csv").write_text("member,stage,at [m],deflection [mm]\nB1,P,3,heavy\nB9,P,3,8\n")
    with pytest.raises(FieldBookError) as refused:
        read_book(book)
    assert [fault.kind for fault in refused.value.faults] == ["not text", "not a number", "unknown member"]


HEADS = "member,stage,at [m],deflection [mm],level [m],rotation [mrad],strain [microstrain]\n"


def refusals(folder: Path, **tables: str) -> list[str]:
    """What is said of a sound little book with some of its files changed."""
    book = write_book(folder / "book", SIMPLE)
    for name, text in tables.items():
        (book / f"{name}.csv").write_text(text)
    with pytest.raises(FieldBookError) as refused:
        read_book(book)
    return [str(fault) for fault in refused.value.faults]


def test_a_decimal_comma_that_parts_a_cell_is_told_with_both_halves(tmp_path: Path) -> None:
    (said,) = refusals(tmp_path, readings=HEADS + "B1,P,3,,99,9971,\n")
    assert said == (
        "readings, row 2 [rotation [mrad]]: got '9971', expected one value a row ('99' stands below level [m]; write "
        "99.9971 in one cell: in a CSV file a cell that holds a comma needs quotes)"
    )


def test_values_that_no_comma_can_have_parted_are_told_without_one(tmp_path: Path) -> None:
    for name, row in (("apart", "B1,P,3,8,,21,\n"), ("points", "B1,P,3,8.4,99.2,,\n"), ("three", "B1,P,3,8,9,10,\n")):
        (said,) = refusals(tmp_path / name, readings=HEADS + row)
        assert "write a row for each value" in said
        assert "comma" not in said
    (said,) = refusals(tmp_path / "semicolons", readings=(HEADS + "B1,P,3,8,99,,\n").replace(",", ";"))
    assert "comma" not in said
    assert (
        "got '10', expected one value a row ('8' stands below deflection [mm], '9' stands below level [m];"
        in refusals(tmp_path / "all three", readings=HEADS + "B1,P,3,8,9,10,\n")[0].replace("rotation [mrad]", "")
    )


@pytest.mark.parametrize(
    ("word", "nearest"),
    [
        ("natural frequency", ""),
        ("deflections", "did you mean deflection"),
        ("IRC SP51 steel", "did you mean IRC SP 51 steel"),
    ],
)
def test_an_unlisted_limit_is_one_fault_and_a_short_one(word: str, nearest: str, tmp_path: Path) -> None:
    (said,) = refusals(tmp_path, limits=f"member,limit,at least,at most\nB1,{word},,2.0\n")
    assert said.startswith(
        f"limits, row 2 [limit]: got '{word}', expected a word of its list, such as EI ratio, fixity,"
    )
    assert nearest in said
    assert "words stand in the note on this column of a blank book" in said
    assert len(said) < 300
