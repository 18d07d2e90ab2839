"""Timber bars of 1875 by two rules of load tests: T. Laslett, Timber and Timber Trees (Macmillan, 1875).

Each bar carried 390 lb at midspan and was read again without it. Held against the residual of a tenth of the DAfStb
guideline and the recovery of three quarters of IBC 1708.2.2 this is arithmetic on real readings, no more: the first
rule is of concrete, no time is on record, 390 lb was no load of service, and nobody noted signs of failure. IBC
therefore assesses none that has recovered. Expected shares are worked out here from the printed deflections.
"""

import csv
from pathlib import Path

import pytest

from fieldfit import Findings, read_book, reconcile
from fieldfit.judge.rules import Held, Outcome
from tests.books import write_book

BARS = Path(__file__).parents[2] / "datasets" / "published" / "oak_and_pine_bars_1875"
DAFSTB, IBC = "DAfStb 2000", "IBC 1708.2.2"


@pytest.fixture(scope="module")
def bars(tmp_path_factory: pytest.TempPathFactory) -> Findings:
    tables = {path.stem: list(csv.reader(path.read_text(encoding="utf-8").splitlines())) for path in BARS.glob("*.csv")}
    tables["limits"] = [["member", "limit"], ["*", DAFSTB], ["*", IBC]]
    return reconcile(read_book(write_book(tmp_path_factory.mktemp("bars") / "bars", tables)))


def printed() -> dict[str, float]:
    """Set over deflection of every bar that is in use, from the printed inches."""
    rows = list(csv.DictReader((BARS / "readings.csv").read_text(encoding="utf-8").splitlines()))
    read = {(row["member"], row["stage"]): float(row["deflection [in]"]) for row in rows if row["use"] == "yes"}
    return {name: read[name, "unloaded"] / value for (name, stage), value in read.items() if stage == "390 lb"}


def outcome(bars: Findings, member: str, rule: str) -> Outcome:
    test = bars[member].load_test
    assert test is not None
    return next(one for one in test.outcomes if one.rule.name == rule)


def deciding(bars: Findings, member: str, rule: str, key: str) -> Held:
    return next(gate for gate in outcome(bars, member, rule).gates if gate.key == key)


def test_every_bar_has_the_residual_of_its_printed_deflections(bars: Findings) -> None:
    shares = printed()
    assert len(shares) == 29
    found = {name: deciding(bars, name, DAFSTB, "residual").value for name in shares}
    assert found == {name: pytest.approx(share) for name, share in shares.items()}


def test_by_a_residual_of_a_tenth_some_pass_and_some_do_not(bars: Findings) -> None:
    shares = printed()
    results = {name: outcome(bars, name, DAFSTB).result for name in shares}
    assert results == {name: "passes" if share <= 0.1 else "fails" for name, share in shares.items()}
    assert sum(share <= 0.1 for share in shares.values()) == 25


def test_for_many_the_printed_eighths_and_twentieths_cannot_tell(bars: Findings) -> None:
    """A set is known to u = 1/8 in / sqrt 12 or 1/20 in / sqrt 12, some tenths of what the rule allows to stay."""
    sure = [deciding(bars, name, DAFSTB, "residual").probability for name in printed()]
    assert sum(one is not None and 0.025 < one < 0.975 for one in sure) == 10


def test_by_ibc_none_is_assessed_and_all_have_recovered(bars: Findings) -> None:
    for name, share in printed().items():
        recovery = deciding(bars, name, IBC, "recovery")
        assert recovery.value == pytest.approx(1 - share)
        assert recovery.met is (1 - share >= 0.75)
        assert outcome(bars, name, IBC).result == "not assessed"
    assert all(share < 0.25 for share in printed().values())


def test_what_is_not_on_record_is_said(bars: Findings) -> None:
    found = outcome(bars, "V-1", IBC)
    assert {one.met for one in found.conditions} == {None}
    assert {gate.key for gate in found.gates if gate.met is None} == {
        "span over deflection at design load",
        "sign of failure",
    }


def test_the_bar_set_aside_is_assessed_by_neither(bars: Findings) -> None:
    assert [outcome(bars, "V-4", rule).result for rule in (DAFSTB, IBC)] == ["not assessed", "not assessed"]
