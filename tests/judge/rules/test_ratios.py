"""Ratios of deflections: against Monte Carlo (JCGM 101:2008), and where they mean nothing."""

import numpy as np
import pytest

from fieldfit.beam import Array
from fieldfit.judge.rules.measures import MEASURES
from fieldfit.judge.rules.ratios import Ratio
from tests.load_tests import ONE, TWO, Stages, book_of, cyclic, one, record, two

DRAWS = 400_000
CASES = [
    ("residual over maximum", one(6.0, 1.4), ONE, 0.25),
    ("recovery", one(6.0, 1.4), ONE, 0.75),
    ("residual over maximum", one(0.6, 0.10), ONE, 0.25),  # Dm twelve times its u
    ("growth under hold", {"zero": 0.3, "full": 18.3, "held": 19.9}, ONE, 0.1),
    ("deviation from linearity", *cyclic([(0.25, 2.0, 0.0), (1.0, 9.6, 0.1)]), 0.25),
    ("permanency ratio", *cyclic([(1.0, 8.0, 0.9), (1.0, 8.1, 0.4)]), 0.5),
    ("repeatability", *cyclic([(1.0, 6.0, 0.2), (1.0, 5.95, 0.3)]), 0.95),
    ("permanency", *cyclic([(1.0, 6.0, 0.2), (1.0, 5.95, 0.6)]), 0.1),
    ("gain of recovery", *cyclic([(1.0, 4.0, 0.9), (1.0, 3.9, 0.8)]), 0.0),
]


@pytest.mark.parametrize(("measure", "readings", "stages", "limit"), CASES, ids=lambda one: str(one)[:24])
def test_u_interval_and_probability_are_those_of_a_monte_carlo(
    measure: str, readings: dict[str, float], stages: Stages, limit: float
) -> None:
    """Every reading is drawn 400,000 times about its value; the measure is worked out anew from each draw."""
    u = 0.03
    found = record(book_of(readings, stages, u=u))
    (taking,) = MEASURES[measure](found, found.cycles[0])
    ratio = taking.ratio
    assert ratio is not None
    drawn = by_hand(measure, found.read[:, 0] + np.random.default_rng(8).normal(0, u / 1000, (DRAWS, len(found.read))))
    assert ratio.u[0] == pytest.approx(drawn.std(), rel=0.03)  # the ratio is not quite Gaussian
    assert ratio.below(limit)[0] == pytest.approx((drawn <= limit).mean(), abs=0.006)
    ends = np.array([end[0] for end in ratio.interval()])
    assert ends == pytest.approx(np.quantile(drawn, [0.025, 0.975]), abs=0.03 * drawn.std() + 0.02 * np.ptp(ends))


def by_hand(measure: str, drawn: Array) -> Array:
    """The measure from readings (draws, stages), written out for each book above."""
    z = drawn.T
    if measure in ("residual over maximum", "recovery"):
        share = (z[4] - z[0]) / (z[1] - z[0])
        return 1 - share if measure == "recovery" else share
    if measure == "growth under hold":
        return (z[2] - z[1]) / (z[1] - z[0])
    if measure == "deviation from linearity":
        return 1 - (1.0 / (z[3] - z[0])) / (0.25 / (z[1] - z[0]))
    most_a, left_a, most_b, left_b = z[1] - z[0], z[2] - z[0], z[3] - z[2], z[4] - z[2]
    return {
        "permanency ratio": lambda: (left_b / most_b) / (left_a / most_a),
        "repeatability": lambda: (most_b - left_b) / (most_a - left_a),
        "permanency": lambda: left_b / most_b,
        "gain of recovery": lambda: left_a / most_a - left_b / most_b,
    }[measure]()


def test_taking_the_readings_as_independent_is_another_answer() -> None:
    """The control: without the shared zero the variance is not that of the draws."""
    found = record(book_of(one(6.0, 1.4), u=0.1))
    (taking,) = MEASURES["residual over maximum"](found, found.cycles[0])
    assert taking.ratio is not None
    apart = Ratio(
        top=taking.ratio.top,
        bottom=taking.ratio.bottom,
        top_variance=taking.ratio.top_variance,
        bottom_variance=taking.ratio.bottom_variance,
        covariance=0 * taking.ratio.covariance,
    )
    assert apart.u[0] > 1.1 * taking.ratio.u[0]


def test_a_repeat_shares_its_start_with_the_residual_of_the_first() -> None:
    readings, stages = two(6.0, 1.8, 5.5, 1.05), [stage for stage in TWO if stage[0] != "zero again"]
    del readings["zero again"]
    found = record(book_of(readings, stages))
    first, second = found.cycles
    assert (first.recovery, second.start) == (4, 4)
    (taking,) = MEASURES["residual over maximum"](found, second)
    assert taking.ratio is not None
    assert taking.ratio.value[0] == pytest.approx(1.05 / 5.5)


def ratio_of(top: float, bottom: float, u: float) -> Ratio:
    square = np.array([u**2])
    return Ratio(
        top=np.array([top]),
        bottom=np.array([bottom]),
        top_variance=2 * square,
        bottom_variance=2 * square,
        covariance=square,
    )


def test_a_denominator_lost_in_the_noise_carries_no_ratio() -> None:
    faint, clear = ratio_of(0.01, 0.28, 0.1), ratio_of(0.01, 0.29, 0.1)  # 2u = 0.283
    assert not faint.is_measurable[0]
    assert clear.is_measurable[0]
    assert np.isfinite(clear.interval()).all()
    assert np.isinf(ratio_of(0.01, 0.2, 0.1).interval()).all()  # Fieller: every ratio is possible


def test_without_any_uncertainty_there_is_no_probability() -> None:
    unknown = ratio_of(1.4, 6.0, np.nan)
    assert np.isnan([unknown.u[0], unknown.below(0.25)[0], *np.ravel(unknown.interval())]).all()
    assert unknown.value[0] == pytest.approx(1.4 / 6.0)
    exact = ratio_of(1.4, 6.0, 0.0)
    assert exact.below(0.25)[0] == 1.0
    assert exact.below(0.2)[0] == 0.0


@pytest.mark.parametrize("scale", [1.0, -1.0])
def test_a_span_that_rises_is_judged_like_one_that_sags(scale: float) -> None:
    found = record(book_of({name: scale * value for name, value in one(6.0, 1.4).items()}))
    (taking,) = MEASURES["residual over maximum"](found, found.cycles[0])
    assert taking.ratio is not None
    assert taking.ratio.value[0] == pytest.approx(1.4 / 6.0)
    assert taking.ratio.below(0.25)[0] == pytest.approx(0.94, abs=0.01)
    (taking,) = MEASURES["maximum deflection"](found, found.cycles[0])
    assert taking.ratio is not None
    assert taking.ratio.value[0] == pytest.approx(0.006)
