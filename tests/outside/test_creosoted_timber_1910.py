"""Eight creosoted half-beams of 1910.

W. B. Gregory, Tests of Creosoted Timber, Trans. ASCE vol. LXX (December 1910), Paper 1168, Table 4.

The printed moduli are P l3 / 4 D b h3 with the load P and the deflection D at the elastic limit. The regression values
(a line through the origin up to that limit) are not printed in the paper; they were computed for this check from its
figures by an independent least-squares script, to four digits.
"""

import csv
from collections.abc import Iterable
from pathlib import Path

import pytest

from fieldfit.fieldbook import read_book
from fieldfit.judge import Verdict
from fieldfit.work import reconcile
from tests.books import write_book

DATASET = Path(__file__).parents[2] / "datasets" / "published" / "creosoted_timber_1910"
RECORDED_E = 1_416_000  # psi, of every member in the book: the mean of the eight printed moduli
#: half-beam: load (lb) and deflection (in) at the elastic limit, printed E (psi), regression E (million psi)
TABLE_4 = {
    "I-A": (22_000, 0.41, 1_575_000, 1.585),
    "I-B": (20_000, 0.465, 1_383_000, 1.417),
    "II-A": (20_000, 0.38, 1_562_000, 1.582),
    "II-B": (16_000, 0.43, 979_000, 0.982),
    "III-A": (24_000, 0.535, 1_489_000, 1.509),
    "III-B": (21_000, 0.515, 1_288_000, 1.306),
    "V-A": (22_000, 0.40, 1_670_000, 1.709),
    "V-B": (14_000, 0.315, 1_382_000, 1.339),
}


def moduli(verdicts: Iterable[Verdict]) -> dict[str, float]:
    """Effective E (psi) by half-beam."""
    found = {verdict.reconciliation.subject.name: verdict.reconciliation.estimates[0].ratio for verdict in verdicts}
    return {name: ratio * RECORDED_E for name, ratio in found.items() if ratio is not None}


def test_the_reading_at_the_elastic_limit_gives_the_printed_moduli(tmp_path: Path) -> None:
    tables = {
        name: list(csv.reader((DATASET / f"{name}.csv").read_text(encoding="utf-8").splitlines()))
        for name in ("members", "loads", "stages", "gauges")
    }
    tables["stages"].append(["*", "21000 lb", "head at midspan", "21"])  # between two steps of the log
    limit = [[name, f"{load} lb", "midspan", deflection] for name, (load, deflection, _, _) in TABLE_4.items()]
    tables["readings"] = [["member", "stage", "gauge", "deflection [in]"], *limit]
    found = moduli(reconcile(read_book(write_book(tmp_path / "book", tables))))
    assert found == {name: pytest.approx(row[2], rel=0.003) for name, row in TABLE_4.items()}


def test_all_steps_up_to_the_elastic_limit_give_the_regression_moduli() -> None:
    verdicts = reconcile(read_book(DATASET))
    assert moduli(verdicts) == {name: pytest.approx(row[3] * 1e6, rel=0.005) for name, row in TABLE_4.items()}
    assert [v.reconciliation.subject.name for v in verdicts if v.verdict == "beyond"] == ["II-B"]


def test_readings_beyond_the_elastic_limit_stay_in_the_ledger() -> None:
    verdicts = reconcile(read_book(DATASET))
    lines = (DATASET / "readings.csv").read_text(encoding="utf-8").splitlines()[1:]
    assert sum(len(verdict.reconciliation.used_for) for verdict in verdicts) == len(lines) == 143
    for verdict in verdicts:
        beyond = verdict.reconciliation.used_for == "none"
        assert beyond.any()
        assert set(verdict.reconciliation.why[beyond]) == {"set aside in the book (use: no)"}
