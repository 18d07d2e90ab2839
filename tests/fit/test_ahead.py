"""What stages to come should read: bands against closed forms, draws against one fit after another."""

from collections.abc import Callable

import numpy as np
import pytest
from scipy import stats

from fieldfit.fieldbook import Book
from fieldfit.fit import before_test, reconcile_member
from fieldfit.fit.ahead import Expected
from fieldfit.observe import observe

BookOf = Callable[..., Book]
PEAK = 11.25  # mm, P l3 / 48 EI of the simple book
STAGES = [
    ["member", "stage", "load case", "factor", "role"],
    ["B1", "zero", "", "", "zero"],
    ["B1", "half", "P", 0.5, "load"],
    ["B1", "full", "P", 1, "load"],
]
LOADS = [["member", "load case", "from [m]", "force [kN]", "u [%]"], ["B1", "P", 3.0, 50, 2]]
GAUGES = [["member", "gauge", "at [m]", "u [mm]"], ["B1", "D", 3.0, 0.05]]
PRIOR = [["member", "unknown", "expected", "expected u"], ["B1", "EI", 1.1, 0.05]]
READINGS = ["member", "stage", "gauge", "deflection [mm]"]


def plan_of(book: Book) -> Expected:
    (subject,) = observe(book)
    return before_test(subject)


def test_before_the_test_the_band_is_that_of_what_is_known_beforehand(book_of: BookOf) -> None:
    """In closed form, to first order: u² = (value u_EI)² + (value u_load)² + 2 u²; the ends by log-normal EI."""
    found = plan_of(book_of(stages=STAGES, loads=LOADS, gauges=GAUGES, unknowns=PRIOR, readings=None))
    value = np.array([PEAK / 2, PEAK]) / 1.1
    np.testing.assert_allclose(1000 * found.expected, value, rtol=1e-9)
    u = np.sqrt(value**2 * ((0.05 / 1.1) ** 2 + 0.02**2) + 2 * 0.05**2)
    np.testing.assert_allclose(1000 * (found.high - found.low) / 2, 1.96 * u, rtol=0.02)
    np.testing.assert_allclose(1000 * (found.stop_high - found.stop_low) / 2, 2.576 * u, rtol=0.03)
    assert found.is_change
    assert found.left_out == ()


def test_without_an_expectation_ei_is_taken_within_its_tolerance(book_of: BookOf) -> None:
    """Exact loads and readings of no u: the band is the tolerance itself, less what 95 % leave of an even spread."""
    gauges = [["member", "gauge", "at [m]"], ["B1", "D", 3.0]]
    found = plan_of(book_of(stages=STAGES, gauges=gauges, readings=None))
    even = stats.uniform(np.log(0.9), np.log(1.1) - np.log(0.9))
    np.testing.assert_allclose(1000 * found.high[1], PEAK / np.exp(even.ppf(0.025)), rtol=1e-3)
    np.testing.assert_allclose(1000 * found.low[1], PEAK / np.exp(even.ppf(0.975)), rtol=1e-3)
    assert found.left_out == ("No u is given for D: its readings were taken as exact.",)


def test_a_restraint_of_which_nothing_is_known_goes_from_free_to_fixed(book_of: BookOf) -> None:
    """One end fixed: P l3 / 48 EI becomes 7 P l3 / 768 EI at midspan, 0.4375 of it."""
    unknowns = [["member", "unknown", "where", "expected", "expected u"], ["B1", "EI", "", 1, 1e-6]]
    unknowns.append(["B1", "rotational restraint", "A", "", ""])
    found = plan_of(book_of(stages=STAGES, gauges=GAUGES, unknowns=unknowns, readings=None))
    assert 1000 * found.high[1] == pytest.approx(PEAK, rel=0.03)
    assert 1000 * found.low[1] == pytest.approx(0.4375 * PEAK, rel=0.05)


def test_a_pinned_member_keeps_to_the_band_of_an_unknown_restraint(book_of: BookOf) -> None:
    """It stands at the edge of all that the restraint may be: what it should read lies in the band all the same."""
    unknowns = [["member", "unknown", "where"], ["B1", "EI", ""], ["B1", "rotational restraint", "A"]]
    found = plan_of(book_of(stages=STAGES, gauges=GAUGES, unknowns=unknowns, readings=None))
    reach = 1.96 * np.sqrt(2) * 0.05
    assert np.all(1000 * (found.high - found.expected) >= 0.999 * reach)
    assert np.all(found.stop_high > found.high)


def test_what_nothing_is_known_of_is_named(book_of: BookOf) -> None:
    unknowns = [["member", "unknown", "where", "stage"], ["B1", "EI", "", ""], ["B1", "settlement", "B", "full"]]
    members = [["member", "length [m]", "EI [kN m2]"], ["B1", 6, 20000]]
    found = plan_of(book_of(members=members, stages=STAGES, gauges=GAUGES, unknowns=unknowns, readings=None))
    (said,) = found.left_out
    assert said.startswith("Taken as recorded, without any spread: EI, settlement B full.")


def test_a_test_half_done_predicts_the_next_stage_in_closed_form(book_of: BookOf) -> None:
    """EI and zero are linear in 1/EI: next = zero + 2 (half - zero), so that u² = (1 + 4 + 1) u² with exact loads."""
    readings = [READINGS, ["B1", "zero", "D", 0.31], ["B1", "half", "D", 6.31]]
    (subject,) = observe(book_of(stages=STAGES, gauges=GAUGES, readings=readings))
    found = reconcile_member(subject).ahead
    assert found is not None
    assert [found.subject.stages[stage].name for stage in found.subject.observations.stage] == ["full"]
    assert 1000 * found.expected[0] == pytest.approx(0.31 + 2 * 6.0, rel=1e-6)
    u = np.sqrt(1 + 4 + 1) * 0.05
    assert 1000 * (found.high[0] - found.low[0]) / 2 == pytest.approx(1.96 * u, rel=1e-3)
    assert not found.is_change


def test_the_next_stage_lies_in_its_band_as_often_as_it_says(book_of: BookOf) -> None:
    """Two gauges, one reset on the way, EI 0.8 of the record: 95 of 100 readings in the band, give or take 3."""
    random, inside = np.random.default_rng(3), []
    gauges = [["member", "gauge", "at [m]", "u [mm]"], ["B1", "D", 3.0, 0.05], ["B1", "E", 1.5, 0.05]]
    columns = [*READINGS, "reset"]
    for _ in range(60):
        half, error = {"D": PEAK / 1.6, "E": PEAK / 1.6 * 11 / 16}, 0.05 * random.normal(size=7)
        rows = [["zero", "D", error[0], ""], ["zero", "E", error[1], ""], ["half", "D", half["D"] + error[2], ""]]
        rows += [["half", "E", half["E"] + error[3], ""], ["half", "E", 1.0 + error[4], "yes"]]
        book = book_of(stages=STAGES, gauges=gauges, readings=[columns, *(["B1", *row] for row in rows)])
        found = reconcile_member(observe(book)[0]).ahead
        assert found is not None
        real = {"D": 2 * half["D"] + error[5], "E": 1.0 + half["E"] + error[6]}
        for gauge, low, high in zip(found.subject.observations.gauge, found.low, found.high, strict=True):
            inside.append(low <= real[gauge] / 1000 <= high)
    assert 0.89 <= np.mean(inside) <= 0.99


def test_a_settlement_still_to_come_leaves_no_band(book_of: BookOf) -> None:
    unknowns = [["member", "unknown", "where", "stage"], ["B1", "EI", "", ""], ["B1", "settlement", "B", "full"]]
    readings = [READINGS, ["B1", "zero", "D", 0.0], ["B1", "half", "D", 6.0]]
    found = reconcile_member(observe(book_of(stages=STAGES, gauges=GAUGES, unknowns=unknowns, readings=readings))[0])
    assert found.ahead is not None
    assert np.isnan(found.ahead.high).all()
    assert "say nothing of settlement B full" in found.ahead.left_out[0]
    assert found.estimates[0].ratio == pytest.approx(PEAK / 12, rel=1e-6)


def test_nothing_is_ahead_where_every_stage_was_read(book_of: BookOf) -> None:
    (subject,) = observe(book_of())
    assert reconcile_member(subject).ahead is None


def test_with_only_the_zero_read_the_band_is_that_of_before_the_test(book_of: BookOf) -> None:
    tables = {"stages": STAGES, "loads": LOADS, "gauges": GAUGES, "unknowns": PRIOR}
    readings = [READINGS, ["B1", "zero", "D", 0.31]]
    found = reconcile_member(observe(book_of(**tables, readings=readings))[0])
    planned = plan_of(book_of(**tables, readings=None))
    assert found.profile is None
    assert found.ahead is not None
    np.testing.assert_allclose(found.ahead.high, planned.high)
    assert any(text.startswith("Not read: half, full.") for text in found.warnings)


def test_what_the_zero_stage_carries_is_no_part_of_the_change(book_of: BookOf) -> None:
    """A dead load in every stage and a settlement of all stages are in the zero reading already."""
    loads = [["member", "load case", "from [m]", "to [m]", "force [kN]"], ["B1", "P", 3, "", 50], ["B1", "G", 0, 6, 60]]
    heading, *rows = STAGES
    dead = [["B1", name, "G", 1, role] for name, role in (("zero", "zero"), ("half", "load"), ("full", "load"))]
    imposed = [["member", "support", "settlement [mm]"], ["B1", "B", 4]]
    stages = [heading, *dead, *rows[1:]]
    found = plan_of(book_of(stages=stages, loads=loads, gauges=GAUGES, imposed=imposed, readings=None))
    alone = plan_of(book_of(stages=STAGES, loads=[row for row in loads if row[1] != "G"], gauges=GAUGES, readings=None))
    np.testing.assert_allclose(1000 * found.expected, [PEAK / 2, PEAK], rtol=1e-9)
    np.testing.assert_allclose(found.stop_high, alone.stop_high, rtol=1e-6)


def test_the_scale_of_a_gauge_counts_once_for_a_change(book_of: BookOf) -> None:
    """u² = 2 u² + (scale u x change)²; loads and EI practically exact."""
    gauges = [[*GAUGES[0], "scale u [%]"], [*GAUGES[1], 5]]
    exact = [PRIOR[0], ["B1", "EI", 1, 1e-6]]
    found = plan_of(book_of(stages=STAGES, gauges=gauges, unknowns=exact, readings=None))
    u = np.hypot(np.sqrt(2) * 0.05, 0.05 * np.array([PEAK / 2, PEAK]))
    np.testing.assert_allclose(1000 * (found.high - found.low) / 2, 1.96 * u, rtol=0.01)


def test_the_scale_of_a_gauge_goes_on_as_it_was(book_of: BookOf) -> None:
    """Whatever the scale, the same gauge reads twice as much under twice the load: 1 + 4 + 1 times its u²."""
    gauges = [[*GAUGES[0], "scale u [%]"], [*GAUGES[1], 5]]
    readings = [READINGS, ["B1", "zero", "D", 0.31], ["B1", "half", "D", 6.31]]
    found = reconcile_member(observe(book_of(stages=STAGES, gauges=gauges, readings=readings))[0]).ahead
    assert found is not None
    assert 1000 * found.expected[0] == pytest.approx(0.31 + 2 * 6.0, rel=1e-6)
    assert 1000 * (found.high[0] - found.low[0]) / 2 == pytest.approx(1.96 * np.sqrt(6) * 0.05, rel=1e-3)


@pytest.mark.parametrize("timed", [True, False])
def test_a_drift_goes_on_into_the_next_stage(book_of: BookOf, timed: bool) -> None:
    """1 mm an hour from zero to zero: six hours after the first zero the gauge reads 6 mm more."""

    def at(hour: int) -> str:
        return f"2024-06-11T{hour:02}:00"

    order = [("z1", "", "zero", 8), ("P", 1, "load", 9), ("z2", "", "zero", 10), ("Q", 2, "load", 14)]
    stages = [["member", "stage", "load case", "factor", "role", "start", "end"]]
    for name, factor, role, hour in order:
        moment = at(hour) if timed or name != "Q" else ""
        stages.append(["B1", name, "P" if factor else "", factor, role, moment, moment])
    read = [("z1", 8, 0.0), ("P", 9, PEAK + 1), ("z2", 10, 2.0)]
    readings = [[*READINGS, "time"], *(["B1", stage, "D", value, at(hour)] for stage, hour, value in read)]
    found = reconcile_member(observe(book_of(stages=stages, gauges=GAUGES, readings=readings))[0]).ahead
    assert found is not None
    if timed:
        assert 1000 * found.expected[0] == pytest.approx(2 * PEAK + 6.0, rel=1e-6)
        # linear in zero, 1/EI and drift: Q = z1 + 2 (P - (z1 + z2)/2) + 6 (z2 - z1)/2 = 2 P + 2 z2 - 3 z1
        u = np.sqrt(4 + 4 + 9 + 1) * 0.05
        assert 1000 * (found.high[0] - found.low[0]) / 2 == pytest.approx(1.96 * u, rel=1e-3)
        assert found.left_out == ()
    else:
        assert np.isnan(found.high[0])
        assert found.left_out == ("D drifts, and the book gives no start and end for Q: no band holds there.",)
