"""One EI from the readings of a member: value, interval, and when there is none."""

from collections.abc import Callable

import numpy as np
import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation, reconcile_member
from fieldfit.fit.model import model_of
from fieldfit.fit.unknowns import asked_unknowns
from fieldfit.observe import observe

BookOf = Callable[..., Book]
HEADING = ["member", "stage", "at [m]", "deflection [mm]"]
MIDSPAN = 50e3 * 6.0**3 / 48 / 20e6 * 1000  # mm, P l3 / 48 EI of the simple book


def fitted(book: Book) -> Reconciliation:
    return reconcile_member(observe(book)[0])


def readings(*values: float, u: float | None = 0.1) -> list[list[object]]:
    """Repeated midspan readings (mm) of the simple book."""
    heading = HEADING if u is None else [*HEADING, "u [mm]"]
    tail = [] if u is None else [u]
    return [heading, *(["B1", "P", 3.0 + 1e-6 * n, value, *tail] for n, value in enumerate(values))]


def test_one_reading_with_u_gives_the_closed_form(book_of: BookOf) -> None:
    (estimate,) = fitted(book_of(readings=readings(1.25 * MIDSPAN))).estimates
    assert estimate.ratio == pytest.approx(0.8, rel=1e-6)
    assert estimate.value == pytest.approx(0.8 * 20e6, rel=1e-6)
    assert estimate.u is not None and estimate.value is not None
    assert estimate.u / estimate.value == pytest.approx(0.1 / (1.25 * MIDSPAN), rel=1e-6)
    # EI is inverse to the reading, so the interval is the reading's own, turned over.
    assert estimate.ratio_low == pytest.approx(MIDSPAN / (1.25 * MIDSPAN + 1.959964 * 0.1), rel=1e-6)
    assert estimate.ratio_high == pytest.approx(MIDSPAN / (1.25 * MIDSPAN - 1.959964 * 0.1), rel=1e-6)
    assert (estimate.low_ends, estimate.high_ends, estimate.determined) == ("found", "found", "yes")


def test_without_u_the_scatter_decides_with_students_t(book_of: BookOf) -> None:
    found = fitted(book_of(readings=readings(11.1, 11.3, 11.5, u=None)))
    (estimate,) = found.estimates
    assert found.profile is not None
    assert found.profile.noise.source == "scatter"
    assert found.profile.noise.p is None
    # mean 11.3, s 0.2; t for 2 degrees of freedom at 97.5 %: 4.302653 (any table of Student's t)
    reach = 4.302653 * 0.2 / np.sqrt(3)
    assert estimate.ratio_low == pytest.approx(MIDSPAN / (11.3 + reach), rel=1e-5)
    assert estimate.ratio_high == pytest.approx(MIDSPAN / (11.3 - reach), rel=1e-5)


def test_one_reading_without_u_determines_nothing(book_of: BookOf) -> None:
    found = fitted(book_of(readings=readings(11.3, u=None)))
    (estimate,) = found.estimates
    assert (estimate.value, estimate.u, estimate.low, estimate.high) == (None, None, None, None)
    assert estimate.determined == "no"
    assert np.isnan(found.fitted).all()


def test_resolution_is_a_floor_that_scatter_raises_but_never_lowers(book_of: BookOf) -> None:
    def at_resolution(*values: float) -> Reconciliation:
        rows = readings(*values, u=0.5)
        rows[0][-1] = "resolution [mm]"
        return fitted(book_of(readings=rows))

    calm, rough = at_resolution(11.3, 11.3, 11.3), at_resolution(10.3, 11.3, 12.3)
    assert calm.profile is not None and rough.profile is not None
    np.testing.assert_allclose(calm.u, 0.5e-3 / np.sqrt(12), rtol=1e-12)
    np.testing.assert_allclose(rough.u, 1e-3, rtol=1e-3)  # the standard deviation of 10.3, 11.3, 12.3
    assert calm.profile.noise.degrees_of_freedom is None
    assert rough.profile.noise.degrees_of_freedom == 2


def test_readings_the_model_cannot_explain_are_said_to_be_so(book_of: BookOf) -> None:
    quarter_deeper_than_midspan = [[*HEADING, "u [mm]"], ["B1", "P", 1.5, 12.0, 0.1], ["B1", "P", 3.0, 9.0, 0.1]]
    found = fitted(book_of(readings=quarter_deeper_than_midspan))
    assert found.profile is not None
    assert found.profile.noise.explains_readings is False


def test_gauges_far_from_the_response_determine_nothing(book_of: BookOf) -> None:
    (estimate,) = fitted(book_of(readings=[[*HEADING, "u [mm]"], ["B1", "P", 0.0, 0.1, 0.1]])).estimates
    assert estimate.determined == "no"
    assert estimate.ratio is None


def test_readings_far_below_their_uncertainty_leave_only_a_lower_limit(book_of: BookOf) -> None:
    (estimate,) = fitted(book_of(readings=readings(1.0, u=5.0))).estimates
    assert estimate.determined == "at least"
    assert estimate.value is None
    # P l3 / 48 over a deflection of at most 1.0 + 1.96 x 5.0 mm; the search stops at EI a thousandfold
    assert estimate.ratio_low == pytest.approx(MIDSPAN / (1.0 + 1.959964 * 5.0), rel=2e-3)
    assert estimate.ratio_high is None


def test_standardised_residuals_are_none_where_one_reading_decides(book_of: BookOf) -> None:
    found = fitted(book_of(readings=readings(11.3)))
    assert np.isnan(found.standardised).all()


def test_a_zero_stage_frees_a_zero_for_each_gauge(book_of: BookOf) -> None:
    book = book_of(
        stages=[
            ["member", "stage", "load case", "role"],
            ["B1", "before", "", "zero"],
            ["B1", "loaded", "P", "load"],
        ],
        gauges=[["member", "gauge", "at [m]", "measures", "u [mm]"], ["B1", "D", 3.0, "deflection", 0.1]],
        readings=[
            ["member", "stage", "gauge", "deflection [mm]"],
            ["B1", "before", "D", 4.0],
            ["B1", "loaded", "D", 4.0 + MIDSPAN],
        ],
    )
    found = fitted(book)
    (estimate,) = found.estimates
    assert estimate.ratio == pytest.approx(1.0, rel=1e-9)
    assert estimate.u is not None and estimate.value is not None
    assert estimate.u / estimate.value == pytest.approx(np.sqrt(2) * 0.1 / MIDSPAN, rel=1e-6)  # a difference of two


def test_the_jacobian_is_the_derivative_of_the_readings(book_of: BookOf) -> None:
    book = book_of(
        members=[["member", "length [m]", "EI [kN m2]", "tolerance [%]"], ["B1", 6.0, 20000, 10]],
        zones=[["member", "zone", "from [m]", "to [m]", "EI [kN m2]"], ["B1", "soft", 2.0, 4.0, 15000]],
        unknowns=[["member", "unknown", "where"], ["B1", "EI", ""], ["B1", "EI", "soft"]],
    )
    subject = observe(book)[0]
    model = model_of(subject, asked_unknowns(subject))
    values, step = np.array([0.1, -0.2]), 1e-5
    differences = [
        (model.predicted(values + step * one) - model.predicted(values - step * one)) / (2 * step) for one in np.eye(2)
    ]
    np.testing.assert_allclose(model.evaluate(values)[1], np.transpose(differences), rtol=1e-8, atol=1e-14)
