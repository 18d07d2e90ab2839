"""Intervals hold as often as they say: a smaller, seeded run of tests/benchmarks/coverage.py.

With n members the share that holds has a standard deviation of sqrt(0.95 x 0.05 / n); the limits stand three of them
off, so that a run fails by chance once in several hundred. Intervals too short by a third, which would hold 81 %,
fall below them. The median of n errors has a standard deviation of sqrt(pi / 2n).
"""

import numpy as np
import pytest

from tests.benchmarks.coverage import run
from tests.simulate import Cause, bearing, load_prior, one_EI, two_restraints, zeros


@pytest.mark.parametrize(
    ("cause", "members"),
    [(one_EI, 240), (zeros, 120), (load_prior, 80), (bearing, 60), (two_restraints, 60)],
    ids=lambda value: value.name if isinstance(value, Cause) else str(value),
)
def test_intervals_hold_the_truth_as_often_as_they_say(cause: Cause, members: int) -> None:
    slack = 3 * np.sqrt(0.95 * 0.05 / members)
    for row in run(cause, members, seed=7):
        assert row.covered >= 0.95 - slack, row.quantity
        assert row.covered <= min(0.95 + slack, 1.0), row.quantity
        assert abs(row.median.whole) <= 0.1 + 3 * np.sqrt(np.pi / (2 * members)), row.quantity
