"""The result folder: whole, safe to open, and never over somebody else's files."""

import csv
import json
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pandas as pd
import pytest

from fieldfit.fieldbook import Book, read_book
from fieldfit.observe import observe
from fieldfit.report import OutputError, overview
from fieldfit.report.actions import actions_in, every_action
from fieldfit.report.canvas import Line, Mark, Text
from fieldfit.report.figures import FIGURES
from fieldfit.report.results import actions_table, safe_cells
from fieldfit.report.rows import reading_groups
from fieldfit.report.say import answer, findings_by_verdict, stiffness_of
from fieldfit.report.words import number, percent, plain, printable, span_of, typeset
from fieldfit.work import Findings, among, judged, reconcile
from tests.demos import DATASETS, DEMOS
from tests.report.test_figures import assert_nothing_collides

BookOf = Callable[..., Book]
HOSTILE = "<script>alert(1)</script>"


def written(book: Book, out: Path) -> Path:
    reconcile(book).write(out)
    return out


def test_the_folder_holds_every_result(book_of: BookOf, tmp_path: Path) -> None:
    out = written(book_of(), tmp_path / "out")
    names = ["figures", "members.csv", "readings.csv", "report.html", "results.json", "results.xlsx"]
    assert sorted(path.name for path in out.iterdir()) == names
    record = json.loads((out / "results.json").read_text(encoding="utf-8"))
    (member,) = record["members"]
    assert record["format"] == 1
    assert member["verdict"] == "within"
    assert member["estimates"][0]["unit"] == "kN m2"
    assert [reading["used_for"] for reading in member["readings"]] == ["fit"] * 3
    assert member["readings"][1]["as_recorded"] == pytest.approx(11.25)  # mm, P l3 / 48 EI


def test_nothing_but_time_differs_between_two_runs(book_of: BookOf, tmp_path: Path) -> None:
    book = book_of()
    first, second = written(book, tmp_path / "a"), written(book, tmp_path / "b")
    for name in ("members.csv", "readings.csv", "results.json"):
        assert (first / name).read_bytes() == (second / name).read_bytes()
    pages = [(out / "report.html").read_text(encoding="utf-8").splitlines() for out in (first, second)]
    assert all("<footer" in a for a, b in zip(*pages, strict=True) if a != b)


def test_text_of_the_book_is_text_on_the_page(book_of: BookOf, tmp_path: Path) -> None:
    book = book_of(
        members=[["member", "length [m]", "EI [kN m2]"], [HOSTILE, 6.0, 20000]],
        loads=[["member", "load case", "from [m]", "force [kN]"], [HOSTILE, HOSTILE, 3.0, 50]],
        readings=[
            ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"],
            [HOSTILE, HOSTILE, 3.0, 11.0, 0.1],
        ],
    )
    page = (written(book, tmp_path / "out") / "report.html").read_text(encoding="utf-8")
    assert HOSTILE not in page
    assert "&lt;script&gt;" in page


def test_cells_that_would_be_formulas_are_made_text(tmp_path: Path) -> None:
    table = pd.DataFrame({"text": ["=1+1", "@x", "plain", "-", ""], "number": [-1.0, 2.0, 3.0, 4.0, 5.0]})
    safe_cells(table).to_csv(tmp_path / "t.csv", index=False)
    rows = list(csv.reader((tmp_path / "t.csv").read_text(encoding="utf-8").splitlines()))
    assert [row[0] for row in rows[1:]] == ["'=1+1", "'@x", "plain", "'-", ""]
    assert rows[1][1] == "-1.0"


def test_an_earlier_result_is_replaced_whole(book_of: BookOf, tmp_path: Path) -> None:
    out = written(book_of(), tmp_path / "out")
    (out / "extra.txt").write_text("left over")
    written(book_of(), out)
    assert not (out / "extra.txt").exists()
    assert [path.name for path in tmp_path.iterdir() if path.name.startswith(".")] == []


def test_foreign_folders_are_left_alone(book_of: BookOf, tmp_path: Path) -> None:
    foreign = tmp_path / "holiday"
    foreign.mkdir()
    (foreign / "photo.jpg").write_bytes(b"x")
    with pytest.raises(OutputError, match="did not write"):
        written(book_of(), foreign)
    (tmp_path / "file").write_text("x")
    with pytest.raises(OutputError, match="is a file"):
        written(book_of(), tmp_path / "file")
    assert [path.name for path in foreign.iterdir()] == ["photo.jpg"]


def test_numbers_keep_the_digits_their_uncertainty_supports() -> None:
    assert number(0.91496, 0.0053) == "0.9150"
    assert number(46707.3, 78.1) == "46\u202f707"
    assert number(46707.3, 780.0) == "46\u202f710"
    assert number(-1e-9, 0.001) == "0.0000"
    assert number(1.0, None) == "–"
    assert plain(0.0) == "0"
    assert plain(11.25, 3) == "11.2"
    assert number(-0.0312, 0.01) == "−0.031"
    assert plain(80.0) == "80"
    assert plain(1500000.0) == "1\u202f500\u202f000"
    assert percent(0.99999) == ">\u202f99.9\u202f%"
    assert percent(0.0123) == "1.2\u202f%"
    assert percent(0.5) == "50\u202f%"
    assert typeset("kip ft2") == "kip ft²"
    assert typeset("1/km") == "1/km"
    assert span_of(0.91, None, 0.01) == "at least 0.910"
    assert span_of(None, 1.0, 0.01) == "at most 1.000"


def test_a_terminal_is_sent_no_control_or_direction_characters() -> None:
    assert printable("a\x1b[2J\u202eb\x9bc\u2028") == "a\\x1b[2J\\u202eb\\x9bc\\u2028"
    assert printable("Träger 1\u202f500 kN m²") == "Träger 1\u202f500 kN m²"


def test_an_overview_shows_control_characters_of_stages(book_of: BookOf) -> None:
    book = book_of()
    (subject,) = observe(book)  # read_book itself refuses such names
    named = replace(subject, name="B\x1b[2J", stages=tuple(replace(one, name="P\x9b1m") for one in subject.stages))
    said = "\n".join(overview(book, [named]))
    assert "B\\x1b[2J: length 6 m" in said
    assert "stages: P\\x9b1m (load)" in said


def test_the_record_holds_reactions_and_moments_of_the_heaviest_stage(book_of: BookOf, tmp_path: Path) -> None:
    # Simple beam, 50 kN at the middle of 6 m: statics alone, whatever the stiffness.
    out = written(book_of(), tmp_path / "out")
    (member,) = json.loads((out / "results.json").read_text(encoding="utf-8"))["members"]
    found = {(row["action"], row["where"]): row for row in member["actions"]}
    assert list(found) == [("reaction", "A"), ("reaction", "B"), ("largest sagging moment", "whole")]
    for (action, _), expected in zip(found, (25.0, 25.0, 75.0), strict=True):
        rows = [row for row in member["actions"] if row["action"] == action]
        assert all(row["recorded"] == pytest.approx(expected, rel=1e-9) for row in rows)
        assert all(row["fitted"] == pytest.approx(expected, rel=1e-9) for row in rows)
        assert all(row["u"] == pytest.approx(0.0, abs=1e-9) for row in rows)
        assert all(row["unit"] == ("kN" if action == "reaction" else "kN m") for row in rows)
    page = (out / "report.html").read_text(encoding="utf-8")
    assert "<h3>Reactions and moments</h3>" in page
    assert '<th scope="row">largest sagging moment [kN m]</th><td class="n">75</td>' in page


def test_an_uncertain_load_makes_reactions_as_uncertain(book_of: BookOf) -> None:
    loads = [["member", "load case", "from [m]", "force [kN]", "u [%]"], ["*", "P", 3.0, 50, 2]]
    book = book_of(loads=loads)
    verdicts = reconcile(book).verdicts
    reactions = actions_table(book, verdicts, every_action(verdicts)).query("action == 'reaction'")
    assert list(reactions["fitted"]) == pytest.approx([25.0, 25.0], rel=1e-6)
    assert list(reactions["u"]) == pytest.approx([0.5, 0.5], rel=1e-3)  # 2 % of 25 kN


def test_creep_adds_nothing_to_reactions() -> None:
    book = read_book(DATASETS / "timber_floor_joists" / DEMOS["timber_floor_joists"])
    findings = Findings(book=book, verdicts=tuple(judged(among(observe(book), ["J01"]))))
    for action in actions_in(findings[0].reconciliation):
        assert action.fitted == pytest.approx(action.recorded, rel=0.01)  # the load factor alone


def test_no_interval_is_said_to_hold_where_the_model_does_not_explain_the_readings(
    book_of: BookOf, tmp_path: Path
) -> None:
    rows = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]]
    rows += [["B1", "P", 1.5, 8.4, 0.01], ["B1", "P", 3.0, 11.0, 0.01], ["B1", "P", 4.5, 9.4, 0.01]]
    findings = reconcile(book_of(readings=rows))
    assert stiffness_of(findings[0]) == [("", "–", "none holds")]
    assert answer(findings[0]).startswith("The model does not explain the readings")
    page = findings.write(tmp_path / "out").read_text(encoding="utf-8")
    assert "none holds" in page
    assert "its band is not known, as the model does not explain the readings" in page
    picture = FIGURES["intervals"](findings.book, findings[0].reconciliation)
    assert picture is not None
    shapes = picture.drawing.shapes
    assert not any(isinstance(one, Line) and one.width > 1.0 for one in shapes)  # no bar and no end of one
    assert [one.hollow for one in shapes if isinstance(one, Mark) and one.shape == "circle"] == [True, True]
    texts = [one.text for one in shapes if isinstance(one, Text)]
    assert "best fit, no interval" in texts
    assert not any("95 %" in text for text in (*texts, picture.caption, picture.drawing.description))
    assert "no interval of it holds" in picture.caption
    assert_nothing_collides(findings)


def test_members_that_cannot_be_assessed_for_one_reason_are_said_together(book_of: BookOf) -> None:
    names = [f"M{number:02d}" for number in range(20)]
    heads = [["member", "length [m]", "EI [kN m2]"], *([name, 6.0, 20000] for name in names)]
    rows = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], *([n, "P", 3.0, 11.0, 0.1] for n in names)]
    loads = [["member", "load case", "from [m]", "force [kN]"], ["*", "P", 3.0, 50]]
    book = book_of(members=heads, loads=loads, readings=rows)
    ((word, (sentence,)),) = findings_by_verdict(book, reconcile(book).verdicts)
    assert word == "not assessed"
    assert sentence.startswith("M00, M01")
    assert sentence.endswith("M11 and 8 more: the book gives no tolerance.")


def test_the_ledger_says_once_for_readings_alike_what_they_are_and_were_used_for(book_of: BookOf) -> None:
    rows = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]", "use"]]
    rows += [["B1", "P", at, value, 0.1, use] for at, value, use in ((1.5, 7.7, ""), (3.0, 11.2, ""), (4.5, 9.9, "no"))]
    book = book_of(readings=rows)
    groups = list(reading_groups(book, reconcile(book)[0]))
    assert [(stage, what, len(rows)) for stage, what, rows in groups] == [
        ("P", "deflection [mm], used for the fit", 2),
        ("P", "deflection [mm], set aside in the book (use: no)", 1),
    ]


def test_a_settlement_that_was_found_is_said_with_the_answer(book_of: BookOf, tmp_path: Path) -> None:
    """Read at B alone: 3 mm with u 0.1 mm, 1.96 of which are 0.196 mm."""
    book = book_of(
        readings=[["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], ["B1", "P", 6.0, 3.0, 0.1]],
        unknowns=[["member", "unknown", "where", "stage"], ["B1", "settlement", "B", "P"]],
    )
    page = (written(book, tmp_path / "out") / "report.html").read_text(encoding="utf-8")
    assert "Settled, down: B in stage P by 3.00\N{NO-BREAK SPACE}mm (95 % interval 2.80 to 3.20)." in page
