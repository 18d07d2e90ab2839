"""The level book in the report: every run and every sight."""

from pathlib import Path

import pandas as pd
import pytest

from fieldfit import Findings, read_book, reconcile
from fieldfit.report import every_action, result_record
from fieldfit.report.say import fit_words
from tests.fit.test_shared_errors import BookOf, misread_line

DEMO = Path(__file__).parents[2] / "datasets" / "levelled_bridge_pier"


@pytest.fixture(scope="module")
def demo() -> Findings:
    return reconcile(read_book(DEMO))


def test_every_sight_is_accounted_for(demo: Findings, tmp_path: Path) -> None:
    written = pd.read_csv(DEMO / "levels.csv")
    table = pd.read_csv(demo.write(tmp_path / "out").parent / "levels.csv")
    assert len(table) == len(written) == 140
    assert table["used for"].value_counts().to_dict() == {"fit": 112, "none": 28}
    assert table["residual [mm]"].notna().sum() == 112
    assert (table.loc[table["used for"] == "none", "why"] == "set aside in the book (use: no)").all()
    assert sum(len(one.reconciliation.subject.observations) for one in demo) == 72


def test_the_report_says_how_every_run_closed(demo: Findings, tmp_path: Path) -> None:
    page = demo.write(tmp_path / "out").read_text(encoding="utf-8")
    section = page.partition('id="levels"')[2].partition("</section>")[0]
    assert "140 sights in the level book: 112 used, 28 set aside." in section
    assert section.count("● within") == 4
    assert section.count("▲ beyond; sights set aside") == 1


def test_the_record_for_machines_has_runs_and_sights(demo: Findings) -> None:
    record = result_record(demo.book, demo.verdicts, every_action(demo.verdicts))["levelling"]
    assert len(record["sights"]) == 140
    assert [run["used"] for run in record["runs"]] == [True, True, False, True, True]
    assert max(abs(run["misclosure"]) for run in record["runs"]) == pytest.approx(0.0031, abs=0.001)  # m, as planted


def test_what_the_sights_leave_is_said_and_recorded_with_the_fit(book_of: BookOf) -> None:
    """30 mm in a line of four sights of 0.3 mm: 30^2 / (4 0.3^2) = 2500; the fit itself leaves nothing over."""
    found = reconcile(misread_line(book_of, 0.030))
    (verdict,) = found.verdicts
    words = fit_words(verdict).replace("\N{NARROW NO-BREAK SPACE}", "")
    assert "chi-square is 2500 on 2 degrees of freedom (of it 2500 on 2 among the sights" in words
    assert verdict.verdict == "not assessed"
    fit = result_record(found.book, found.verdicts, every_action(found.verdicts))["members"][0]["fit"]
    assert fit["chi_square"] == pytest.approx(2500)
    assert (fit["degrees_of_freedom"], fit["explains_readings"]) == (2, False)
