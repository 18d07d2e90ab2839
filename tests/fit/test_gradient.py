"""A temperature difference over the depth with an uncertainty of its own: an unknown that the book knows in part."""

from collections.abc import Callable

import numpy as np
import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import before_test, reconcile_member
from fieldfit.observe import observe

BookOf = Callable[..., Book]
MEMBERS = [["member", "length [m]", "EI [kN m2]", "depth [mm]"], ["B1", 8.0, 40000, 500]]
LOADS = [["member", "load case", "from [m]", "force [kN]"], ["B1", "P", 4.0, 60]]
HEADING = ["member", "stage", "top minus bottom [K]", "top minus bottom u [K]", "expansion [1/K]"]
READINGS = ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]
BENT = 60 * 8**3 / 48 / 40000 * 1000  # mm at midspan: P l3 / 48 EI
PER_KELVIN = 10e-6 * 8**2 / (8 * 0.5) * 1000  # mm up a kelvin: alpha l2 / 8 h


def imposed(u: object, stage: str = "P") -> list[list[object]]:
    return [HEADING, ["B1", stage, 8, u, 10e-6]]


def test_its_cost_shows_in_the_interval_in_closed_form(book_of: BookOf) -> None:
    """Linear: the u of the reading and that of the thermal hogging add as squares, each over the deflection."""
    readings = [READINGS, ["B1", "P", 4.0, BENT - 8 * PER_KELVIN, 0.05]]
    (subject,) = observe(book_of(members=MEMBERS, loads=LOADS, imposed=imposed(2), readings=readings))
    EI, warmth = reconcile_member(subject).estimates
    assert EI.ratio == pytest.approx(1.0, rel=1e-6)
    assert EI.u is not None and EI.recorded is not None
    assert EI.u / EI.recorded == pytest.approx(np.hypot(0.05, 2 * PER_KELVIN) / BENT, rel=1e-4)
    assert (warmth.quantity, warmth.where, warmth.stage) == ("top minus bottom", "whole", "P")
    assert warmth.value == pytest.approx(8.0, abs=1e-6)
    assert warmth.recorded == 8.0
    assert (warmth.low_ends, warmth.high_ends) == ("expected", "expected")  # the reading alone could not tell it


def test_readings_may_know_it_better(book_of: BookOf) -> None:
    """Two gauges and a stage without load: the shape tells the difference in temperature, whatever the book guessed."""
    tables = {"members": MEMBERS, "loads": LOADS, "imposed": imposed(6)}
    shape = {4.0: (1.0, 1.0), 2.0: (11 / 16, 0.75)}  # of load and of warmth, by station
    rows = [["B1", "P", at, BENT * a - 11 * PER_KELVIN * b, 0.02] for at, (a, b) in shape.items()]
    found = reconcile_member(observe(book_of(**tables, readings=[READINGS, *rows]))[0])
    assert found.estimates[1].value == pytest.approx(11.0, abs=0.5)
    assert found.estimates[1].low_ends == "found"
    assert found.estimates[0].ratio == pytest.approx(1.0, rel=5e-3)


def test_without_u_it_is_exact_and_said_so(book_of: BookOf) -> None:
    readings = [READINGS, ["B1", "P", 4.0, BENT - 8 * PER_KELVIN, 0.05]]
    found = reconcile_member(observe(book_of(members=MEMBERS, loads=LOADS, imposed=imposed(""), readings=readings))[0])
    assert [one.quantity for one in found.estimates] == ["EI"]
    assert "taken as exact in P: the book gives no u for it" in " ".join(found.warnings)


def test_restrained_ends_carry_it_as_a_moment(book_of: BookOf) -> None:
    """Fixed ends: no free curvature, so that its u costs a deflection reading nothing."""
    supports = [["member", "support", "at [m]", "rotation"], ["B1", "A", 0, "fixed"], ["B1", "B", 8, "fixed"]]
    readings = [READINGS, ["B1", "P", 4.0, BENT / 4, 0.05]]
    book = book_of(members=MEMBERS, loads=LOADS, imposed=imposed(2), supports=supports, readings=readings)
    EI = reconcile_member(observe(book)[0]).estimates[0]
    assert EI.u is not None and EI.recorded is not None
    assert EI.u / EI.recorded == pytest.approx(0.05 / (BENT / 4), rel=1e-4)


def test_expected_readings_have_it_in_their_bands(book_of: BookOf) -> None:
    gauges = [["member", "gauge", "at [m]", "u [mm]"], ["B1", "D", 4.0, 0.05]]
    unknowns = [["member", "unknown", "expected", "expected u"], ["B1", "EI", 1.0, 1e-6]]
    stages = [["member", "stage", "load case", "role"], ["B1", "zero", "", "zero"], ["B1", "P", "P", "load"]]
    tables = {"members": MEMBERS, "loads": LOADS, "gauges": gauges, "unknowns": unknowns, "stages": stages}
    found = before_test(observe(book_of(**tables, imposed=imposed(2), readings=None))[0])
    assert 1000 * found.expected[0] == pytest.approx(BENT - 8 * PER_KELVIN)
    u = np.sqrt(2 * 0.05**2 + (2 * PER_KELVIN) ** 2)
    assert 1000 * (found.high[0] - found.low[0]) / 2 == pytest.approx(1.96 * u, rel=0.03)


def test_the_interval_holds_the_truth(book_of: BookOf) -> None:
    """Forty days, each with its own true difference around what the book gives: about 95 in 100 intervals hold."""
    random, held = np.random.default_rng(7), []
    for _ in range(40):
        warmth, ratio = 8 + 2 * random.normal(), random.uniform(0.7, 1.2)
        values = [BENT / ratio - warmth * PER_KELVIN, BENT / ratio * 11 / 16 - warmth * PER_KELVIN * 0.75]
        read = [value + 0.1 * random.normal() for value in values]
        rows = [["B1", "P", at, value, 0.1] for at, value in zip((4.0, 2.0), read, strict=True)]
        book = book_of(members=MEMBERS, loads=LOADS, imposed=imposed(2), readings=[READINGS, *rows])
        EI = reconcile_member(observe(book)[0]).estimates[0]
        assert EI.ratio_low is not None and EI.ratio_high is not None
        held.append(EI.ratio_low <= ratio <= EI.ratio_high)
    assert sum(held) >= 35
