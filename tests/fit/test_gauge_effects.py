"""Drift and the temperature of gauges: found with their uncertainty, and told from nothing where times are lacking."""

from collections.abc import Callable

import numpy as np
import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import Estimate, Reconciliation, reconcile_member
from fieldfit.observe import observe

BookOf = Callable[..., Book]
GAUGES = [["member", "gauge", "at [m]", "u [mm]"], ["B1", "D", 3.0, 0.05]]
ORDER = (("z1", "", "zero"), ("P", "P", "load"), ("z2", "", "zero"))
STAGES = [["member", "stage", "load case", "role"], *(["B1", *row] for row in ORDER)]


def found_in(book: Book) -> Reconciliation:
    (subject,) = observe(book)
    return reconcile_member(subject)


def estimate(found: Reconciliation, quantity: str) -> Estimate:
    (one,) = (each for each in found.estimates if each.quantity == quantity)
    return one


def readings(*rows: tuple[str, str, float]) -> list[list[object]]:
    return [
        ["member", "stage", "gauge", "time", "deflection [mm]"],
        *(["B1", stage, "D", f"2024-05-14T{at}:00", value] for stage, at, value in rows),
    ]


def test_two_zeros_tell_a_linear_drift_and_the_load_is_read_on_its_line(book_of: BookOf) -> None:
    """0.02 mm at 8:00, 0.26 mm at 20:00: 0.08 mm at 11:00."""
    rows = readings(("z1", "08:00", 0.02), ("P", "11:00", 11.25 + 0.08), ("z2", "20:00", 0.26))
    found = found_in(book_of(stages=STAGES, gauges=GAUGES, readings=rows))
    drift = estimate(found, "drift")
    assert 3.6e6 * (drift.value or 0) == pytest.approx(0.24 / 12)  # mm/h
    assert 3.6e6 * (drift.u or 0) == pytest.approx(0.05 * np.sqrt(2) / 12)
    stiffness = estimate(found, "EI")
    assert stiffness.ratio == pytest.approx(1.0, rel=1e-6)
    u = np.sqrt(1 + 0.75**2 + 0.25**2) * 0.05  # of the reading less its interpolated zero
    assert (stiffness.u or 0) / 20e6 == pytest.approx(u / 11.25, rel=1e-3)


def test_without_times_no_drift_is_told_and_that_is_said(book_of: BookOf) -> None:
    rows = [row[:3] + row[4:] for row in readings(("z1", "08:00", 0.0), ("P", "11:00", 11.3), ("z2", "20:00", 0.1))]
    found = found_in(book_of(stages=STAGES, gauges=GAUGES, readings=rows))
    assert not [each for each in found.estimates if each.quantity == "drift"]
    assert any("the order of stages is not time" in warning for warning in found.warnings)


def test_zeros_on_one_side_only_tell_no_drift(book_of: BookOf) -> None:
    rows = readings(("z1", "08:00", 0.0), ("z2", "09:00", 0.1), ("P", "11:00", 11.3))
    found = found_in(book_of(stages=STAGES, gauges=GAUGES, readings=rows))
    assert {each.quantity for each in found.estimates} == {"EI"}


WARM = [
    ["member", "stage", "gauge", "deflection [mm]", "temperature [degC]"],
    ["B1", "z1", "D", 0.0, 15],
    ["B1", "P", "D", 11.25 + 0.2, 25],
]


def test_a_stated_coefficient_is_taken_off_with_its_uncertainty(book_of: BookOf) -> None:
    stated = [
        [*GAUGES[0], "temperature coefficient [mm/K]", "temperature coefficient u [mm/K]"],
        [*GAUGES[1], 0.02, 0.01],
    ]
    found = found_in(book_of(stages=STAGES[:3], gauges=stated, readings=WARM))
    stiffness = estimate(found, "EI")
    assert stiffness.ratio == pytest.approx(1.0, rel=1e-6)
    assert (stiffness.u or 0) / 20e6 == pytest.approx(np.hypot(0.05 * np.sqrt(2), 0.1) / 11.25, rel=1e-3)
    coefficient = estimate(found, "temperature coefficient")
    assert (coefficient.value, coefficient.u) == pytest.approx((2e-5, 1e-5), rel=1e-6)


def test_a_coefficient_asked_for_is_found_by_zeros_at_two_temperatures(book_of: BookOf) -> None:
    rows = [*WARM, ["B1", "z2", "D", 0.1, 20]]
    unknowns = [["member", "unknown", "where"], ["B1", "EI", ""], ["B1", "temperature coefficient", "D"]]
    found = found_in(book_of(stages=STAGES, gauges=GAUGES, readings=rows, unknowns=unknowns))
    coefficient = estimate(found, "temperature coefficient")
    assert (coefficient.value, coefficient.u) == pytest.approx((2e-5, 0.05e-3 * np.sqrt(2) / 5), rel=1e-6)
    assert estimate(found, "EI").ratio == pytest.approx(1.0, rel=1e-6)


@pytest.mark.parametrize(("moves", "said"), [(0.0, False), (3.0, True)])
def test_a_stage_that_still_moves_in_its_last_third_is_said(book_of: BookOf, moves: float, said: bool) -> None:
    noise = np.random.default_rng(5).normal(0, 0.005, 60)
    rows = readings(
        ("z1", "07:00", 0.0), *(("P", f"08:{n:02}", round(11.25 + moves * n / 59 + noise[n], 4)) for n in range(60))
    )
    found = found_in(book_of(stages=STAGES[:3], gauges=GAUGES, readings=rows))
    assert any("had not settled" in warning for warning in found.warnings) is said
