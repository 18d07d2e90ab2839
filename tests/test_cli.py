"""The commands as a user runs them."""

import json
import subprocess
import sys
from collections.abc import Mapping
from io import StringIO
from pathlib import Path

import pytest
from rich.console import Console
from typer.testing import CliRunner

from fieldfit import read_book, reconcile
from fieldfit.cli import app
from fieldfit.report import say_findings
from tests.books import SIMPLE, Table, write_book

DATASETS = Path(__file__).parents[1] / "datasets"


def run(*words: object) -> tuple[int, str]:
    result = CliRunner().invoke(app, [str(word) for word in words])
    return result.exit_code, result.output


def test_the_demo_ends_by_naming_its_report(tmp_path: Path) -> None:
    out = tmp_path / "out"
    status, said = run("reconcile", DATASETS / "warehouse_floor_beam", "--out", out)
    assert status == 0
    assert said.splitlines()[-1] == f"Report: {out / 'report.html'}"
    assert [line.split()[:3] for line in said.splitlines() if "beyond" in line][1] == ["F2", "▲", "beyond"]
    record = json.loads((out / "results.json").read_text(encoding="utf-8"))
    truth = json.loads((DATASETS / "warehouse_floor_beam" / "truth.json").read_text(encoding="utf-8"))
    for member in record["members"]:
        (estimate,) = member["estimates"]
        assert estimate["ratio_low"] < truth["EI over recorded"][member["member"]] < estimate["ratio_high"]


FAULTS: Mapping[str, tuple[Mapping[str, Table | None], Mapping[str, str]]] = {
    "missing table": ({"members": None}, {"table": "members"}),
    "missing column": (
        {"members": [["member", "length [m]"], ["B1", 6.0]]},
        {"table": "members", "expected": "EI"},
    ),
    "unknown unit": (
        {"members": [["member", "length [furlongz]", "EI [kN m2]"], ["B1", 6.0, 20000]]},
        {"table": "members", "column": "length", "value": "furlongz"},
    ),
    "text in a number": (
        {"loads": [["member", "load case", "from [m]", "force [kN]"], ["B1", "P", 3.0, "heavy"]]},
        {"table": "loads", "row": "row 2", "column": "force", "value": "heavy"},
    ),
    "unknown member": (
        {"loads": [["member", "load case", "from [m]", "force [kN]"], ["B1", "P", 3, 50], ["B2", "P", 3, 50]]},
        {"table": "loads", "row": "row 3", "column": "member", "value": "B2", "hint": "B1"},
    ),
    "station off the beam": (
        {
            "readings": [
                ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"],
                ["B1", "P", 6.5, 8.4, 0.1],
            ]
        },
        {"table": "readings", "row": "row 2", "column": "at", "value": "6.5", "expected": "6"},
    ),
}


@pytest.mark.parametrize("kind", FAULTS)
def test_a_faulty_book_ends_with_status_2_and_writes_nothing(kind: str, tmp_path: Path) -> None:
    change, words = FAULTS[kind]
    tables = {name: rows for name, rows in {**SIMPLE, **change}.items() if rows is not None}
    book = write_book(tmp_path / "book", tables)
    status, said = run("reconcile", book, "--out", tmp_path / "out")
    assert status == 2
    assert "Traceback" not in said
    assert "Nothing was written" in said
    for part in words.values():
        assert part in said
    assert not (tmp_path / "out").exists()


def test_all_faults_are_said_at_once(tmp_path: Path) -> None:
    book = write_book(
        tmp_path / "book",
        {
            "members": [["member", "length [m]", "EI [kN m2]"], ["B1", "six", 20000]],
            "loads": [["member", "load case", "from [m]", "force [kN]"], ["B1", "P", 3.0, "heavy"]],
            "readings": [["member", "stage", "at [m]", "deflection [mm]"], ["B1", "Q", 3.0, 11.0]],
        },
    )
    status, said = run("reconcile", book, "--out", tmp_path / "out")
    assert status == 2
    assert all(word in said for word in ("'six'", "'heavy'", "'Q'"))


def test_a_mechanism_is_said_in_words(tmp_path: Path) -> None:
    supports = [["member", "support", "at [m]"], ["B1", "A", 0.0]]
    status, said = run("reconcile", write_book(tmp_path / "book", {**SIMPLE, "supports": supports}))
    assert status == 2
    assert "B1" in said
    assert "mechanism" in said
    assert "Traceback" not in said


def test_a_foreign_folder_is_refused(tmp_path: Path) -> None:
    (tmp_path / "mine").mkdir()
    (tmp_path / "mine" / "letter.txt").write_text("dear")
    status, said = run("reconcile", write_book(tmp_path / "book", SIMPLE), "--out", tmp_path / "mine")
    assert status == 2
    assert "did not write" in said


def test_one_member_can_be_asked_for(tmp_path: Path) -> None:
    status, said = run("reconcile", DATASETS / "warehouse_floor_beam", "--out", tmp_path / "out", "--member", "F3")
    assert status == 0
    assert "1 member held" in said
    page = (tmp_path / "out" / "report.html").read_text(encoding="utf-8")
    assert "Only 1 of the 3 members of the book were asked for." in page


def test_a_member_that_is_not_there_is_said_in_words(tmp_path: Path) -> None:
    status, said = run("reconcile", DATASETS / "warehouse_floor_beam", "--out", tmp_path / "out", "--member", "F9")
    assert status == 2
    assert "no member 'F9'" in said
    assert "it has F1, F2, F3" in said
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(("member", "status"), [("F2", 3), ("F1", 0)])
def test_a_run_can_fail_on_a_member_that_is_beyond(member: str, status: int, tmp_path: Path) -> None:
    words = ["--member", member, "--fail-on", "beyond", "--quiet"]
    found, said = run("reconcile", DATASETS / "warehouse_floor_beam", "--out", tmp_path / "out", *words)
    assert found == status
    assert said == f"Report: {tmp_path / 'out' / 'report.html'}\n"


def test_json_is_all_that_stands_on_the_standard_output(tmp_path: Path) -> None:
    words = ["reconcile", str(write_book(tmp_path / "book", SIMPLE)), "--out", str(tmp_path / "out"), "--json", "--png"]
    result = CliRunner().invoke(app, words)
    assert json.loads(result.stdout) == json.loads((tmp_path / "out" / "results.json").read_text(encoding="utf-8"))
    assert result.stderr.startswith("Report: ")
    assert len(list((tmp_path / "out" / "figures").glob("*.png"))) == 6


def test_a_terminal_gets_a_table_with_a_shape_for_each_verdict() -> None:
    verdicts = reconcile(read_book(DATASETS / "warehouse_floor_beam")).verdicts
    console = Console(force_terminal=True, width=100, file=StringIO(), color_system=None)
    say_findings(verdicts, console)
    said = console.file.getvalue()  # type: ignore[attr-defined]
    assert "▲ beyond" in said
    assert "Note (F3)" in said


def test_check_says_what_would_be_used_and_assumed_and_writes_nothing(tmp_path: Path) -> None:
    book = write_book(tmp_path / "book", SIMPLE)
    status, said = run("check", book)
    assert status == 0
    assert "for the fit: 3 of deflection; u: given" in said
    assert "Supports A and B were taken as rigid without a gauge there" in said
    assert "Loads were taken as exact" in said
    drawing = [line for line in said.splitlines() if set(line.strip()) == {"^", " "}]
    assert [line.index("^") for line in drawing] == [2]  # one support at each end of the drawn member
    assert len(drawing[0].rstrip()) - 2 == len(next(line.strip() for line in said.splitlines() if "---" in line))
    assert sorted(path.name for path in tmp_path.iterdir()) == ["book"]


def test_check_shows_control_characters_instead_of_printing_them(tmp_path: Path) -> None:
    gauges = [["member", "gauge", "at [m]", "measures", "u [mm]"], ["B1", "a\x1b[31mred", 3.0, "deflection", 0.1]]
    readings = [["member", "stage", "gauge", "deflection [mm]"], ["B1", "P", "a\x1b[31mred", 8.4]]
    _, said = run("check", write_book(tmp_path / "book", {**SIMPLE, "gauges": gauges, "readings": readings}))
    assert "\x1b" not in said


@pytest.mark.parametrize("name", ["members.svg", "members.png", "members"])
def test_check_draws_the_members_to_scale_where_it_is_told_to(name: str, tmp_path: Path) -> None:
    out = tmp_path / "new" / name
    status, said = run("check", DATASETS / "warehouse_floor_beam", "--out", out)
    assert status == 0
    assert said.splitlines()[-1] == f"Drawn: {out}"
    if out.is_dir():
        assert [path.name for path in sorted(out.iterdir())] == [f"member-00{number}.svg" for number in (1, 2, 3)]
        assert ">D2<" in (out / "member-001.svg").read_text(encoding="utf-8")
    elif out.suffix == ".svg":
        drawn = out.read_text(encoding="utf-8")
        assert all(f">{member}<" in drawn for member in ("F1", "F2", "F3"))
    else:
        assert out.read_bytes().startswith(b"\x89PNG")
    assert [path.name for path in out.parent.iterdir()] == [name]


def test_check_draws_over_nothing(tmp_path: Path) -> None:
    mine = tmp_path / "mine.svg"
    mine.write_text("dear")
    status, said = run("check", DATASETS / "warehouse_floor_beam", "--out", mine)
    assert status == 2
    assert "is there already" in said
    assert mine.read_text() == "dear"


def test_check_refuses_a_faulty_book_like_reconcile(tmp_path: Path) -> None:
    status, said = run("check", write_book(tmp_path / "book", {**SIMPLE, "members": [["member"], ["B1"]]}))
    assert status == 2
    assert "Nothing was written" in said


@pytest.mark.parametrize("name", ["fresh", "fresh.xlsx"])
def test_a_blank_book_can_be_checked_and_reconciled_as_it_is(name: str, tmp_path: Path) -> None:
    assert run("blank", tmp_path / name)[0] == 0
    assert run("check", tmp_path / name)[0] == 0
    assert run("reconcile", tmp_path / name, "--out", tmp_path / "out")[0] == 0
    status, said = run("blank", tmp_path / name)
    assert status == 2
    assert "Traceback" not in said


def test_help_imports_nothing_heavy() -> None:
    code = (
        "import sys; from typer.testing import CliRunner; from fieldfit.cli import app; "
        "r = CliRunner().invoke(app, ['--help']); assert r.exit_code == 0, r.output; "
        "heavy = {'lmfit', 'scipy', 'pandas', 'numpy', 'matplotlib', 'pint'} & set(sys.modules); "
        "assert not heavy, heavy"
    )
    subprocess.run([sys.executable, "-c", code], check=True, timeout=60)


def test_plan_writes_the_site_sheet(tmp_path: Path) -> None:
    status, said = run("plan", DATASETS / "warehouse_floor_beam", "--out", tmp_path / "sheet")
    assert status == 0
    assert "the licensed engineer in charge of the test decides" in said
    assert said.splitlines()[-1] == f"Site sheet: {tmp_path / 'sheet' / 'plan.html'}"


def test_a_plan_without_gauges_is_refused_in_words(tmp_path: Path) -> None:
    unread = {name: table for name, table in SIMPLE.items() if name != "readings"}
    status, said = run("plan", write_book(tmp_path / "book", unread))
    assert status == 2
    assert "give a table of gauges" in said
