"""Columns of unknowns: a reading that is set aside is as good as not taken, one kept for the rules is not."""

from collections.abc import Callable

import numpy as np
import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation, reconcile_member
from fieldfit.fit.columns import axial_columns, zero_columns
from fieldfit.observe import observe

BookOf = Callable[..., Book]
BENT = {1.5: 11.25 * 11 / 16, 3.0: 11.25, 4.5: 11.25 * 11 / 16}  # mm under the midspan load of the simple book
STAGES = [["member", "stage", "load case", "role"], ["B1", "zero", "", "zero"], ["B1", "P", "P", "load"]]
STRAIN = 1e6 * 25e3 * 2.0 / 20e6 * 0.2  # microstrain 2 m from the end and 0.2 m below the axis: P/2 x y / EI
PAIR = [
    ["member", "gauge", "at [m]", "measures", "below neutral axis [mm]", "u [microstrain]"],
    ["B1", "top", 2.0, "strain", -200, 2],
    ["B1", "bottom", 2.0, "strain", 200, 2],
]
STRAINS = ["member", "stage", "gauge", "strain [microstrain]", "use"]


def fitted(book: Book) -> Reconciliation:
    (subject,) = observe(book)
    return reconcile_member(subject)


def test_a_level_that_is_set_aside_takes_no_datum_shift_from_the_deflections(book_of: BookOf) -> None:
    rows: list[list[object]] = [["B1", "zero", x, 0.0, "", 0.1, ""] for x in BENT]
    rows += [["B1", "P", x, bent + 2.0, "", 0.1, ""] for x, bent in BENT.items()]
    rows += [["B1", "P", 3.0, "", 99.9, 0.1, "no"]]
    unknowns = [["member", "unknown", "stage"], ["B1", "EI", ""], ["B1", "datum shift", "P"]]
    heading = ["member", "stage", "at [m]", "deflection [mm]", "level [m]", "u [mm]", "use"]
    found = fitted(book_of(stages=STAGES, unknowns=unknowns, readings=[heading, *rows]))
    EI, shift = found.estimates
    assert EI.ratio == pytest.approx(1.0, rel=1e-6)
    assert shift.value == pytest.approx(2e-3, rel=1e-6)


def test_a_strain_gauge_that_is_set_aside_leaves_its_twin_alone(book_of: BookOf) -> None:
    rows = [["B1", "P", "bottom", STRAIN, ""], ["B1", "P", "top", 999, "no"]]
    found = fitted(book_of(gauges=PAIR, readings=[STRAINS, *rows]))
    assert found.estimates[0].ratio == pytest.approx(1.0, rel=1e-6)
    assert "read as bending strain, without axial strain" in " ".join(found.warnings)


def test_a_pair_of_which_nothing_is_used_is_not_said_to_be_read(book_of: BookOf) -> None:
    rows = [["B1", "P", "bottom", STRAIN, "no", ""], ["B1", "P", "", "", "", 11.25]]
    heading = ["member", "stage", "gauge", "strain [microstrain]", "use", "deflection [mm]", "u [mm]", "at [m]"]
    found = fitted(book_of(gauges=PAIR, readings=[heading, [*rows[0], "", ""], [*rows[1], 0.1, 3.0]]))
    assert "read as bending strain" not in " ".join(found.warnings)


def test_a_pair_kept_for_the_rules_shares_an_axial_strain(book_of: BookOf) -> None:
    stages = [*STAGES, ["B1", "off", "", "unload"]]
    rows = [["B1", stage, gauge, 0, ""] for stage in ("zero", "P", "off") for gauge in ("top", "bottom")]
    (subject,) = observe(book_of(gauges=PAIR, stages=stages, readings=[STRAINS, *rows]))
    assert [*axial_columns(subject)] == ["axial strain at 2 m, P", "axial strain at 2 m, off"]


def test_a_zero_is_that_of_a_gauge_in_use(book_of: BookOf) -> None:
    gauges = [["member", "gauge", "at [m]", "u [mm]"], ["B1", "D1", 3.0, 0.1], ["B1", "D2", 1.5, 0.1]]
    heading = ["member", "stage", "gauge", "deflection [mm]", "use", "reset"]
    rows = [["B1", "zero", "D1", 0, "", ""], ["B1", "P", "D1", 11, "", ""], ["B1", "P", "D1", 2, "no", "yes"],
            ["B1", "zero", "D2", 0, "no", ""], ["B1", "P", "D2", 8, "no", ""]]  # fmt: skip
    (subject,) = observe(book_of(gauges=gauges, stages=STAGES, readings=[heading, *rows]))
    assert [*zero_columns(subject)] == ["zero of D1"]


def test_the_change_of_an_uncertain_scale_is_counted_from_the_zero_in_use(book_of: BookOf) -> None:
    """One gauge: its scale and the readings at zero and under load add as squares."""
    gauges = [["member", "gauge", "at [m]", "u [mm]", "scale u [%]"], ["B1", "D1", 3.0, 0.05, 5]]
    rows = [["B1", "zero", "D1", 0, ""], ["B1", "zero", "D1", 99, "no"], ["B1", "P", "D1", BENT[3.0], ""]]
    heading = ["member", "stage", "gauge", "deflection [mm]", "use"]
    EI = fitted(book_of(gauges=gauges, stages=STAGES, readings=[heading, *rows])).estimates[0]
    assert EI.ratio == pytest.approx(1.0, rel=1e-6)
    assert EI.u is not None and EI.recorded is not None
    assert EI.u / EI.recorded == pytest.approx(np.hypot(0.05, 2**0.5 * 0.05 / BENT[3.0]), rel=1e-3)
