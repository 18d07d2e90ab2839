"""Timber bars of 1875 and a pine rod of 1871, as field books.

T. Laslett, Timber and Timber Trees (Macmillan, 1875), Tables V, VI, XXIV, CLIV, CLX: E = P l3 / 48 I D is worked out
here from the printed deflections D. R. S. Ball, Experimental Mechanics (second edition 1888), Table XXIII: the slope
of a line through the origin, worked out here likewise. Neither book prints a modulus in this definition.
"""

import csv
from pathlib import Path

import pytest

from fieldfit import Findings, read_book, reconcile
from tests.books import write_book

PUBLISHED = Path(__file__).parents[2] / "datasets" / "published"
BARS, ROD = PUBLISHED / "oak_and_pine_bars_1875", PUBLISHED / "pine_rod_1871"
#: lowest and highest E (million psi) of the bars of each table, by P l3 / 48 I D
RANGES = {
    "V": (0.627, 0.728),
    "VI": (1.300, 1.516),
    "XXIV": (1.378, 1.685),
    "CLIV": (1.625, 1.820),
    "CLX": (1.516, 2.166),
}


@pytest.fixture(scope="module")
def bars() -> Findings:
    return reconcile(read_book(BARS))


def moduli(findings: Findings) -> dict[str, float]:
    """Effective E (psi) of every member that was fitted."""
    recorded = {row["member"]: row["E"] for row in findings.book.tables["members"].to_dict("records")}
    ratios = {one.reconciliation.subject.name: one.reconciliation.estimates[0].ratio for one in findings}
    psi = 6894.757293168
    return {name: ratio * recorded[name] / psi for name, ratio in ratios.items() if ratio is not None}


def test_every_bar_has_the_modulus_of_its_printed_deflection(bars: Findings) -> None:
    rows = list(csv.DictReader((BARS / "readings.csv").read_text(encoding="utf-8").splitlines()))
    printed = {row["member"]: float(row["deflection [in]"]) for row in rows if row["stage"] == "390 lb"}
    found = moduli(bars)
    assert len(found) == 29  # 30 less the repeated one
    assert found == {name: pytest.approx(390 * 72**3 / (48 * 4 / 3 * printed[name]), rel=1e-4) for name in found}


@pytest.mark.parametrize("table", RANGES)
def test_the_bars_of_each_table_span_their_range(bars: Findings, table: str) -> None:
    of_table = [E / 1e6 for name, E in moduli(bars).items() if name.rsplit("-", 1)[0] == table]
    assert (min(of_table), max(of_table)) == pytest.approx(RANGES[table], abs=0.001)


def test_the_repeated_specimen_is_set_aside_and_recoveries_are_kept_for_the_rules(bars: Findings) -> None:
    assert set(bars["V-4"].reconciliation.used_for) == {"none"}
    assert bars["V-4"].verdict == "not assessed"
    assert bars.readings["used for"].value_counts().to_dict() == {"fit": 29, "rule": 29, "none": 2}


@pytest.mark.parametrize(("steps", "E"), [(4, 1.213e6), (5, 1.203e6)])
def test_the_rod_has_the_modulus_of_its_straight_part(tmp_path: Path, steps: int, E: float) -> None:
    tables = {path.stem: list(csv.reader(path.read_text(encoding="utf-8").splitlines())) for path in ROD.glob("*.csv")}
    for number, row in enumerate(tables["readings"][1:]):
        row[4] = "yes" if number < steps else "no"
    (modulus,) = moduli(reconcile(read_book(write_book(tmp_path / "rod", tables)))).values()
    assert modulus == pytest.approx(E, rel=5e-4)


def test_the_rod_is_committed_with_five_steps_in_use() -> None:
    assert moduli(reconcile(read_book(ROD)))["rod"] == pytest.approx(1.203e6, rel=5e-4)
