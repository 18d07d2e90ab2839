"""The demos: committed as their scripts make them, their truth found, their planted members flagged."""

import json
from itertools import chain
from pathlib import Path

import pytest
from openpyxl import load_workbook

from fieldfit import Findings, read_book, reconcile
from tests.demos import DATASETS, DEMOS, held, run, script

SEEDS = range(5)


@pytest.fixture(scope="module", params=DEMOS)
def demo(request: pytest.FixtureRequest) -> tuple[str, Findings]:
    return request.param, reconcile(read_book(DATASETS / request.param / DEMOS[request.param]))


def test_the_committed_book_is_what_its_script_makes(demo: tuple[str, Findings], tmp_path: Path) -> None:
    name, _ = demo
    home = DATASETS / name
    script(name).make(tmp_path, json.loads((home / "truth.json").read_text(encoding="utf-8"))["seed"])
    made = sorted(path.name for path in tmp_path.iterdir())
    assert made == sorted(path.name for path in home.iterdir() if path.suffix in (".csv", ".json", ".xlsx"))
    for file in made:
        if file.endswith(".xlsx"):
            assert cells(tmp_path / file) == cells(home / file)
        else:
            assert (tmp_path / file).read_bytes() == (home / file).read_bytes()


def cells(path: Path) -> list[list[tuple[object, ...]]]:
    return [list(sheet.iter_rows(values_only=True)) for sheet in load_workbook(path).worksheets]


def test_no_sound_member_is_beyond_and_no_planted_one_within(demo: tuple[str, Findings]) -> None:
    """At the seed first drawn a planted member may be not assessed; how often it is flagged is tested below."""
    name, findings = demo
    truth = json.loads((DATASETS / name / "truth.json").read_text(encoding="utf-8"))
    assert {one.reconciliation.subject.name for one in findings if one.verdict == "beyond"} <= set(truth["planted"])
    assert all(findings[member].verdict != "within" for member in truth["planted"])
    inside = held(findings, DATASETS / name / "truth.json").inside.values()
    assert sum(inside) >= 0.8 * len(inside)  # each holds the truth 95 times in 100
    for member in truth.get("unreadable", []):
        assert findings[member].verdict == "not assessed"


def test_load_tests_come_out_by_their_rules_as_planted(demo: tuple[str, Findings]) -> None:
    """At the seed first drawn; how often at others is tested below."""
    name, findings = demo
    assert all(held(findings, DATASETS / name / "truth.json").ruled.values())


@pytest.mark.parametrize("name", DEMOS)
def test_other_seeds_find_the_truth_as_often_as_their_intervals_say(name: str, tmp_path: Path) -> None:
    outcomes = [run(name, tmp_path / str(seed), seed) for seed in SEEDS]
    inside = list(chain.from_iterable(outcome.inside.values() for outcome in outcomes))
    # Of 15 intervals and more that each hold the truth 95 times in 100, fewer than 80 in 100 do by chance once in 100.
    assert sum(inside) / len(inside) >= 0.8
    flagged = list(chain.from_iterable(outcome.flagged.values() for outcome in outcomes))
    assert sum(flagged) >= 0.8 * len(flagged)
    assert not any(chain.from_iterable(outcome.accused.values() for outcome in outcomes))
    ruled = list(chain.from_iterable(outcome.ruled.values() for outcome in outcomes))
    assert sum(ruled) >= 0.8 * len(ruled)
