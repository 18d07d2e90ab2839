"""Means of repeats: their interval holds the truth as often as it says, however the readings hang together."""

import numpy as np
import pytest
from scipy import stats

from fieldfit.beam import Array
from fieldfit.observe.repeats import combined, plateaus, u_of_means


def autoregression(rng: np.random.Generator, coefficient: float, runs: int, count: int) -> Array:
    """Runs (runs, count) of a stationary first-order autoregression of mean 0 and standard deviation 1."""
    values = rng.standard_normal((runs, count))
    for n in range(1, count):
        values[:, n] = coefficient * values[:, n - 1] + np.sqrt(1 - coefficient**2) * values[:, n]
    return values


def covered(values: Array, gauges: int | None = None) -> float:
    """How often mean +/- t u holds 0, a run a row; each a gauge of its own, or so many gauges."""
    runs, count = values.shape
    found = plateaus(values.ravel(), np.arange(runs) * count)
    u, freedom = u_of_means(found, np.arange(runs) if gauges is None else np.arange(runs) % gauges)
    return float((np.abs(found.mean) <= stats.t.ppf(0.975, freedom) * u).mean())


@pytest.mark.parametrize("coefficient", [0.0, 0.3, 0.6, 0.8, 0.9])
@pytest.mark.parametrize("count", [30, 100])
def test_the_interval_of_a_plateau_holds_the_truth_95_times_in_100(coefficient: float, count: int) -> None:
    values = autoregression(np.random.default_rng(20), coefficient, 2000, count)  # a standard deviation of 0.5 %
    assert 0.93 <= covered(values) <= 0.97


def test_a_mean_taken_as_of_independent_readings_covers_far_too_seldom() -> None:
    values = autoregression(np.random.default_rng(21), 0.9, 1500, 100)
    naive = 1.984 * values.std(axis=1, ddof=1) / np.sqrt(100)
    assert (np.abs(values.mean(axis=1)) <= naive).mean() < 0.5


@pytest.mark.parametrize("coefficient", [0.0, 0.9])
def test_short_plateaus_are_wider_rather_than_too_sure(coefficient: float) -> None:
    values = autoregression(np.random.default_rng(22), coefficient, 1500, 5)
    assert covered(values) >= 0.93


def test_short_plateaus_of_one_gauge_are_pooled() -> None:
    """Six stages of three readings tell the scatter far better than one; independent readings: near s/sqrt(n)."""
    values = np.random.default_rng(23).standard_normal((1200, 3))
    found = plateaus(values.ravel(), np.arange(1200) * 3)
    alone, _ = u_of_means(found, np.arange(1200))
    pooled, _ = u_of_means(found, np.arange(1200) // 6)
    assert np.std(np.log(pooled)) < 0.7 * np.std(np.log(alone))
    assert covered(values, 200) == pytest.approx(0.97, abs=0.025)


def test_sums_of_runs() -> None:
    found = plateaus(np.array([1.0, 3.0, 5.0, 5.0, 2.0]), np.array([0, 3, 4]))
    assert found.count.tolist() == [3, 1, 1]
    assert found.mean.tolist() == [3.0, 5.0, 2.0]
    assert found.square.tolist() == [8.0, 0.0, 0.0]
    assert found.lagged.tolist() == [0.0, 0.0, 0.0]  # (-2)(0) + (0)(2)
    assert np.isnan(found.change).all()


def test_the_last_third_of_a_ramp_moves_by_a_third_of_it() -> None:
    found = plateaus(np.arange(60.0), np.array([0]))
    assert found.change[0] == pytest.approx(20.0)
    assert found.change_u[0] < 1.0


def test_one_reading_tells_no_scatter_and_equal_ones_none() -> None:
    found = plateaus(np.array([1.0, 2.0, 2.0, 2.0]), np.array([0, 1]))
    u, freedom = u_of_means(found, np.array([0, 1]))
    assert np.isnan(u[0])
    assert u[1] == 0.0
    assert combined(np.array([0.1, 0.1]), u, freedom) == pytest.approx([0.1, 0.1], rel=1e-5)


def test_a_dial_gauge_read_five_times() -> None:
    """Division 0.01 mm, accuracy 0.02 mm, scatter of the mean 0.0067 mm: 0.0137 mm (JCGM 100:2008, 4.3 and 5.1.2)."""
    known = np.hypot(0.02 / np.sqrt(3), 0.01 / np.sqrt(12))
    u = combined(np.array([known]), np.array([0.015 / np.sqrt(5)]), np.array([4.0]))
    effective = 4 * (0.0137 / 0.0067) ** 4
    assert u[0] == pytest.approx(0.0137 * stats.t.ppf(0.975, effective) / 1.96, rel=0.01)
    assert u[0] >= 0.01 / np.sqrt(12)
