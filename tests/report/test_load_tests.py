"""Load tests in the report: page, record, workbook and figures, also with two hundred gauges."""

import json
import re
from pathlib import Path

import numpy as np
import pytest
from openpyxl import load_workbook

from fieldfit import Findings, read_book, reconcile
from fieldfit.fieldbook import Book
from fieldfit.report.figures import FIGURES
from tests.demos import DATASETS
from tests.load_tests import TWO, book_of, strained
from tests.report.test_figures import assert_nothing_collides

LONG = "Gauge <north> & south of the covered way, number $1$"


def crowded() -> Book:
    """Two hundred gauges, two cycles, two rules, long names; those near the supports drown in their noise."""
    at = np.linspace(0.05, 5.95, 200).round(3)
    names = [f"{LONG} {number}" for number in range(200)]
    shape = np.sin(np.pi * at / 6.0)
    noise = np.random.default_rng(3)
    shares = {"zero": 0.0, "full": 1.0, "held": 1.1, "off": 0.4, "day after": 0.3, "full again": 1.3, "held again": 1.4}
    shares["day after that"] = 0.4
    rows = [["member", "stage", *(f"{name} [mm]" for name in names)]]
    rows += [["B", n, *(6 * share * shape + noise.normal(0, 0.05, 200)).round(3)] for n, share in shares.items()]
    gauges = [
        ["member", "gauge", "at [m]", "u [mm]"],
        *(["B", name, x, 0.05] for name, x in zip(names, at, strict=True)),
    ]
    limits = [["ACI 318-14"], ["IS 456:2000"]]
    return book_of({}, TWO, limits=limits, gauges=gauges, readings_table=rows)


@pytest.fixture(scope="module")
def busy() -> Findings:
    return reconcile(crowded())


@pytest.fixture(scope="module")
def floor() -> Findings:
    return reconcile(read_book(DATASETS / "concrete_floor_retest"))


@pytest.mark.parametrize("findings", ["busy", "floor"])
def test_no_text_of_the_figures_runs_into_another(findings: str, request: pytest.FixtureRequest) -> None:
    assert_nothing_collides(request.getfixturevalue(findings))


def test_a_load_test_has_three_figures_and_another_member_none(busy: Findings) -> None:
    found = busy[0].reconciliation
    drawn = [
        FIGURES[name](busy.book, found) for name in ("load over time", "load and deflection", "left after unloading")
    ]
    assert [picture.key for picture in drawn if picture] == ["load-test-time", "load-test-loops", "load-test-left"]
    assert drawn[2] is not None
    assert "below measurable range" in drawn[2].caption
    plain = reconcile(read_book(DATASETS / "warehouse_floor_beam"))
    assert FIGURES["load over time"](plain.book, plain[0].reconciliation) is None


def test_page_record_and_workbook_tell_the_same(floor: Findings, tmp_path: Path) -> None:
    page = floor.write(tmp_path / "out").read_text(encoding="utf-8")
    record = json.loads((tmp_path / "out" / "results.json").read_text(encoding="utf-8"))
    first = record["members"][0]["load_test"]
    (rule,) = first["rules"]
    assert (rule["rule"], rule["result"], rule["verdict"]) == ("ACI 318-14", "passes on repeat", "within")
    gates = {gate["gate"]: gate for gate in rule["gates"]}
    assert gates["maximum deflection"]["limit"] == pytest.approx(6.48)  # mm: 7.2² / (20000 x 0.4) m
    assert gates["residual over maximum of the repeat"]["met"] is True
    assert gates["residual over maximum"]["probability"] < 0.025
    assert all(condition["met"] for condition in rule["conditions"])
    assert first["critical_section_m"] == pytest.approx(3.6)
    for words in ("ACI 318-14", "passes on repeat", "number from memory", "The repeat began after 96.5 h"):
        assert words in page
    rows = list(load_workbook(tmp_path / "out" / "results.xlsx")["Load tests"].iter_rows(values_only=True))
    assert rows[0][:4] == ("member", "rule", "result", "gate")
    assert {row[2] for row in rows[1:]} == {"passes", "passes on repeat"}
    # both gates by gauge and two findings; the repeat of F1, none of F2
    assert len(rows) - 1 == 2 * (2 * 5 + 2) + 5 + 1


def test_the_page_words_findings_and_corrections_as_an_engineer_would(tmp_path: Path) -> None:
    head = ["member", "gauge", "at [m]", "u [mm]", "temperature coefficient [mm/K]", "temperature coefficient u [mm/K]"]
    rows = [["member", "stage", "gauge", "deflection [mm]", "temperature [degC]"]]
    rows += [["B", stage, "G", value, 10] for stage, value in (("zero", 0), ("full", 3.0), ("held", 3.0), ("off", 1.0))]
    book = book_of(
        {},
        findings={"crushing or spalling": "no", "sign of failure": "yes", "not proportional to load": "no"},
        limits=[["ACI 318-14"], ["NTC 2018"]],
        gauges=[head, ["B", "G", 3, 0.02, 0.1, 0.001]],
        readings_table=[*rows, ["B", "day after", "G", 0.5, 12]],
    )
    page = reconcile(book).write(tmp_path / "out").read_text(encoding="utf-8")
    cells = dict(re.findall(r'class="name">([^<]*)</th><td data-label="by the code">([^<]*)</td>', page))
    assert cells["no crushing or spalling"] == "met"
    assert cells["no sign of failure"] == "not met"
    assert cells["proportional to load"] == "met"
    assert "Decided by: sign of failure: found." in page
    assert "Corrected for the temperature of the gauge, by its coefficient in the book: G." in page
    assert "<li>B: ACI 318-14: fails: sign of failure: found" in page
    assert "the code's own comparison of the readings as they are, whatever their interval" in page


def test_a_verdict_on_readings_of_unknown_uncertainty_is_told_as_such(tmp_path: Path) -> None:
    readings = {"zero": 0.0, "full": 6.0, "held": 6.0, "off": 3.0, "day after": 2.4}
    page = reconcile(book_of(readings, limits=[["EHE-08 reinforced"]], u="")).write(tmp_path / "out")
    assert "0.4000 (its uncertainty is not known), allowed at most 0.25: fails" in page.read_text(encoding="utf-8")


def test_secants_linearity_and_permanence_of_every_gauge_are_written(floor: Findings, tmp_path: Path) -> None:
    page = floor.write(tmp_path / "out").read_text(encoding="utf-8")
    assert "which deflects most, the secant at full load is" in page
    assert "of the maximum was left in the first cycle" in page
    written = json.loads((tmp_path / "out" / "results.json").read_text(encoding="utf-8"))["members"][0]["load_test"]
    assert [one["gauge"] for one in written["by_gauge"]] == written["gauges"]
    for gauge in written["by_gauge"]:
        assert len(gauge["secant_over_first"]) == len(written["stiffness_by_stage"])
        assert gauge["permanence"]["low"] < gauge["permanence"]["value"] < gauge["permanence"]["high"]
        assert 0.5 < gauge["linearity"]["value"] < 1.5


def test_secants_of_one_table_have_like_decimals(tmp_path: Path) -> None:
    """2.1 mm at twice the load of 1 mm: a secant of 2 / 2.1 = 0.952 of the first, and 3 mm at three times it 1."""
    shares = (("zero", 0.0), ("one", 1.0), ("two", 2.0), ("three", 3.0))
    stages = [(name, "load" if share else "zero", "1", share / 3, "", "") for name, share in shares]
    stages.append(("off", "unload", "1", 0.0, "", ""))
    page = reconcile(book_of({"zero": 0.0, "one": 1.0, "two": 2.1, "three": 3.0, "off": 0.0}, stages)).write(
        tmp_path / "o"
    )
    cells = re.findall(
        r'<th scope="row">(one|two|three)</th>.*?<td class="n">([^<]*)</td></tr>', page.read_text("utf-8")
    )
    assert cells == [("one", "1.000"), ("two", "0.952"), ("three", "1.000")]


def test_names_of_a_book_stay_text(busy: Findings, tmp_path: Path) -> None:
    page = busy.write(tmp_path / "out").read_text(encoding="utf-8")
    assert "<north>" not in page
    assert "Gauge &lt;north&gt; &amp; south" in page


def test_the_factor_of_a_bridge_test_stands_on_the_page_without_any_gauge_of_deflection(tmp_path: Path) -> None:
    given = [["calculated rating factor", "", 0.95], ["test over rating", "", 0.5]]
    findings = reconcile(strained([("zero", "G", 0), ("V1", "G", 80)], limits=given))
    page = findings.write(tmp_path / "out").read_text(encoding="utf-8")
    for said in ("AASHTO MBE factor K", "1.200", "at least 1.053", "number from memory: confirm with the clause"):
        assert said in page
    written = json.loads((tmp_path / "out" / "results.json").read_text(encoding="utf-8"))["members"][0]
    (check,) = (one for one in written["checks"] if one["check"] == "AASHTO MBE factor K")
    assert (check["value"], check["verdict"]) == (pytest.approx(1.2), "within")
    (rule,) = written["load_test"]["rules"]
    assert rule["gates"][0]["certainty"] == "number from memory: confirm with the clause"


def test_a_rule_that_allows_a_repeat_says_so_where_it_is_undecided(tmp_path: Path) -> None:
    findings = reconcile(read_book(DATASETS / "cyclic_floor_beams"))
    (check,) = [one for one in findings["C1"].checks if one.verdict == "undecided"]
    assert check.reason is not None
    assert check.reason.startswith("repeat allowed")
    page = findings.write(tmp_path / "out").read_text(encoding="utf-8")
    assert "Undecided: ACI 437.2-13 cyclic of L1 (repeat allowed" in page
