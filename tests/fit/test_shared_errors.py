"""Readings that share their errors: the fit against generalised least squares written out by hand; resets of gauges."""

from collections.abc import Callable

import numpy as np
import pytest
from scipy import stats

from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation, reconcile_member
from fieldfit.observe import observe
from tests.observe.test_levelling import HEADINGS, loop

BookOf = Callable[..., Book]
TWO_STAGES = [["member", "stage", "load case", "role"], ["B1", "zero", "", "zero"], ["B1", "P", "P", "load"]]


def fitted(book: Book) -> Reconciliation:
    (subject,) = observe(book)
    return reconcile_member(subject)


def levelled_book(book_of: BookOf, **tables: object) -> Book:
    """Three level points of the simple book, 7.5 to 11 mm lower under load, with a settlement asked for."""
    falls = {"L1": 0.0079, "L2": 0.0113, "L3": 0.0081}
    loaded = [[*row[:5], row[5] + falls.get(str(row[4]), 0.0), *row[6:]] for row in loop("P")]
    given = {
        "stages": TWO_STAGES,
        "gauges": [["member", "gauge", "at [m]", "measures"], *(["B1", f"L{n}", 1.5 * n, "level"] for n in (1, 2, 3))],
        "levels": [HEADINGS, *loop("zero"), *loaded],
        "levelling": [["u [mm]"], [0.1]],
        "benchmarks": [["benchmark", "height [m]"], ["BM", 50.0]],
        "readings": None,
        **tables,
    }
    return book_of(**given)


def test_one_ei_is_that_of_generalised_least_squares(book_of: BookOf) -> None:
    """EI alone, zeros free: 1/EI ratio = (c' W d) / (c' W c), d the changes, W the inverse of their covariance."""
    found = fitted(levelled_book(book_of))
    seen = found.subject.observations
    change = seen.value[3:] - seen.value[:3]
    weight = np.linalg.inv(seen.covariance[3:, 3:] + seen.covariance[:3, :3])  # the stages share no error
    theory = found.as_recorded[3:]
    flexibility = (theory @ weight @ change) / (theory @ weight @ theory)
    (EI,) = found.estimates
    assert EI.ratio == pytest.approx(1 / flexibility, rel=1e-9)
    u = 1 / np.sqrt(theory @ weight @ theory)
    assert EI.u == pytest.approx(u / flexibility**2 * 20e6, rel=1e-6)
    left = change - theory * flexibility
    assert found.profile is not None
    assert found.profile.minimum.sum_of_squares == pytest.approx(left @ weight @ left, rel=1e-6)
    np.testing.assert_allclose((found.fitted[3:] - found.fitted[:3]), theory * flexibility, atol=1e-12)


def test_standardised_residuals_are_over_the_spread_of_the_residual_itself(book_of: BookOf) -> None:
    """By hand: covariance of the residual is C - A (A' W A)^-1 A'."""
    found = fitted(levelled_book(book_of))
    seen, theory = found.subject.observations, found.as_recorded
    design = np.column_stack([theory, np.tile(np.eye(3), (2, 1))])
    weight = np.linalg.inv(seen.covariance)
    spread = seen.covariance - design @ np.linalg.inv(design.T @ weight @ design) @ design.T
    expected = (seen.value - found.fitted) / np.sqrt(np.diag(spread))
    np.testing.assert_allclose(found.standardised, expected, rtol=1e-5)


def test_independent_errors_would_claim_another_certainty(book_of: BookOf) -> None:
    """A negative control: read as independent levels of the same u, EI has another u."""
    first = fitted(levelled_book(book_of))
    seen = first.subject.observations
    rows = [
        ["B1", first.subject.stages[stage].name, gauge, f"{value:.6f}", f"{u:.9f}"]
        for stage, gauge, value, u in zip(seen.stage, seen.gauge, seen.value, seen.u, strict=True)
    ]
    plain = [["member", "stage", "gauge", "level [m]", "u [m]"], *rows]
    second = fitted(levelled_book(book_of, levels=None, levelling=None, benchmarks=None, readings=plain))
    assert first.estimates[0].u is not None
    assert second.estimates[0].u is not None
    assert abs(first.estimates[0].u / second.estimates[0].u - 1) > 0.05


def stray(sight: list[object], mm: float) -> list[object]:
    return [*sight[:5], float(str(sight[5])) + mm / 1000, *sight[6:]]


def tied(book_of: BookOf, strays: list[float]) -> tuple[Book, list[list[object]]]:
    """The levelled points with errors (mm) in their 18 sights, a second benchmark (50.1 m, u 0.2 mm) joining all."""
    falls = {"L1": 0.0079, "L2": 0.0113, "L3": 0.0081}
    loaded = [[*row[:5], row[5] + falls.get(str(row[4]), 0.0), *row[6:]] for row in loop("P")]
    again = [["", stage, set_up, "intermediate", "BM2", 1.4, 20, ""] for stage in ("zero", "P") for set_up in "12"]
    sights = [stray(row, mm) for row, mm in zip([*loop("zero"), *loaded, *again], strays, strict=True)]
    marks = [["benchmark", "height [m]", "u [mm]"], ["BM", 50.0, ""], ["BM2", 50.1, 0.2]]
    return levelled_book(book_of, levels=[HEADINGS, *sights], benchmarks=marks), sights


def in_one_step(sights: list[list[object]], u: float) -> tuple[float, int]:
    """Chi-square and degrees of freedom of lines, heights and flexibility together, by numpy from the sights.

    P l3/48 EI = 11.25 mm at midspan and 11/16 of it at the quarter points; a larger staff is a lower point.
    """
    theory = {"L1": 0.01125 * 11 / 16, "L2": 0.01125, "L3": 0.01125 * 11 / 16}
    names = [*dict.fromkeys((row[1], row[2]) for row in sights), "BM2", *theory, "flexibility"]
    rows, right = [], []
    for _member, stage, set_up, _sight, point, staff, *_ in sights:
        row = dict.fromkeys(names, 0.0)
        row[stage, set_up] = 1.0
        if point != "BM":
            row[point] = -1.0
        if stage == "P":
            row["flexibility"] = theory.get(str(point), 0.0)
        rows.append([*row.values()])
        right.append(float(str(staff)) + (50.0 if point == "BM" else 0.0))
    weighed = np.array([*(np.array(rows) / u), np.array([name == "BM2" for name in names]) / 2e-4])
    owed = np.append(np.array(right) / u, 50.1 / 2e-4)
    values = np.linalg.lstsq(weighed, owed, rcond=None)[0]
    return float(((weighed @ values - owed) ** 2).sum()), len(owed) - len(names)


def test_sights_and_fit_are_tested_together_as_in_one_step(book_of: BookOf) -> None:
    strays = 0.1 * np.random.default_rng(3).normal(size=18)
    book, sights = tied(book_of, [*strays])
    found = fitted(book)
    chi_square, spare = in_one_step(sights, 1e-4)
    assert found.profile is not None
    noise = found.profile.noise
    assert noise.tested is not None
    assert noise.tested.spare == spare == 18 + 1 - 4 - 1 - 3 - 1
    assert noise.tested.chi_square == pytest.approx(chi_square, rel=1e-5)
    assert noise.chi_square is not None
    assert noise.chi_square < chi_square  # the fit alone does not see it all
    assert noise.p == pytest.approx(stats.chi2.sf(chi_square, spare), rel=1e-4)


LONE_POINT = [["member", "gauge", "at [m]", "measures"], ["B1", "L", 3.0, "level"]]
TWO_MARKS = [["benchmark", "height [m]"], ["BM", 50.0], ["BM2", 50.7]]


def line(stage: str, fall: float, misread: float = 0.0, member: str = "B1") -> list[list[object]]:
    """From BM by a turning point to BM2, the member's point on the way ``fall`` (m) lower than 52 m."""
    return [
        ["", stage, f"{member} 1", "backsight", "BM", 1.5, 20, ""],
        ["", stage, f"{member} 1", "foresight", f"TP {member}", 0.5 + misread, 20, ""],
        ["", stage, f"{member} 2", "backsight", f"TP {member}", 1.2, 20, ""],
        [member, stage, f"{member} 2", "intermediate", "L", 0.2 + fall, 20, ""],
        ["", stage, f"{member} 2", "foresight", "BM2", 1.5, 20, ""],
    ]


def misread_line(book_of: BookOf, misread: float) -> Book:
    levels = [HEADINGS, *line("zero", 0.0), *line("P", 0.01125, misread)]
    return levelled_book(book_of, levels=levels, benchmarks=TWO_MARKS, gauges=LONE_POINT, levelling=[["u [mm]"], [0.3]])


def test_a_refuted_net_is_not_explained_though_the_fit_has_nothing_left_over(book_of: BookOf) -> None:
    """A misread of d in a line of four sights between exact heights leaves d2/4u2: 30 mm of 0.3 mm is 2500."""
    for misread, explained in ((0.0, True), (0.030, False)):
        found = fitted(misread_line(book_of, misread))
        assert found.profile is not None
        noise = found.profile.noise
        assert (noise.spare, noise.sights.spare) == (0, 2)
        assert noise.sights.chi_square == pytest.approx((misread / 3e-4) ** 2 / 4, abs=1e-6)
        assert noise.explains_readings is explained


def test_a_line_that_no_height_of_the_fit_rests_on_does_not_refute_it(book_of: BookOf) -> None:
    """Exact benchmarks part the stages: a misreading in recovery touches neither zero nor load."""
    stages = [*TWO_STAGES, ["B1", "back", "", "recovery"]]
    levels = [HEADINGS, *line("zero", 0.0), *line("P", 0.01125), *line("back", 0.0, misread=0.030)]
    found = fitted(levelled_book(book_of, levels=levels, benchmarks=TWO_MARKS, gauges=LONE_POINT, stages=stages))
    assert found.profile is not None
    assert found.profile.noise.sights.spare == 2
    assert found.profile.noise.explains_readings


READINGS = ["member", "stage", "gauge", "deflection [mm]", "u [mm]", "reset"]
STAGES = [
    ["member", "stage", "load case", "factor", "role"],
    ["B1", "zero", "", "", "zero"],
    *(["B1", f"{n}", "P", n / 2, "load"] for n in (1, 2, 3)),
]


def test_a_reset_starts_a_new_zero(book_of: BookOf) -> None:
    """EI 0.9 of the record: P l3/48 EI = 12.5 mm for factor 1. At stage 2 the gauge was set back to 0.30."""
    rows = [("zero", 0.5, ""), ("1", 6.75, ""), ("2", 13.0, ""), ("2", 0.3, "yes"), ("3", 6.55, "")]
    readings = [READINGS, *(["B1", stage, "D", value, 0.01, reset] for stage, value, reset in rows)]
    gauges = [["member", "gauge", "at [m]"], ["B1", "D", 3.0]]
    found = fitted(book_of(stages=STAGES, gauges=gauges, readings=readings))
    assert found.estimates[0].ratio == pytest.approx(0.9, rel=1e-9)
    np.testing.assert_allclose(1000 * found.fitted, [0.5, 6.75, 13.0, 0.3, 6.55], atol=1e-9)
    assert found.profile is not None
    assert found.profile.noise.spare == 5 - 1 - 2


def test_a_reset_without_zero_stage_and_without_a_reading_after_it(book_of: BookOf) -> None:
    """Readings are changes from unloaded until the reset; a lone reading after it says nothing but its zero."""
    rows = [("1", 6.25, ""), ("2", 12.5, ""), ("3", 0.4, "yes")]
    readings = [READINGS, *(["B1", stage, "D", value, 0.01, reset] for stage, value, reset in rows)]
    gauges = [["member", "gauge", "at [m]"], ["B1", "D", 3.0]]
    stages = [row for row in STAGES if row[1] != "zero"]
    found = fitted(book_of(stages=stages, gauges=gauges, readings=readings))
    assert found.estimates[0].ratio == pytest.approx(0.9, rel=1e-9)
    assert [*found.used_for] == ["fit", "fit", "none"]
    assert found.why[-1] == "no zero"


def test_a_reset_in_a_row_a_stage_is_one_of_every_gauge_in_it(book_of: BookOf) -> None:
    wide = [
        ["member", "stage", "reset", "D [mm]", "E [mm]"],
        ["B1", "zero", "", 0.0, 0.0],
        ["B1", "1", "", 6.0, 4.0],
        ["B1", "1", "yes", 0.0, 0.0],
        ["B1", "2", "", 6.0, 4.0],
    ]
    gauges = [["member", "gauge", "at [m]", "u [mm]"], ["B1", "D", 3.0, 0.01], ["B1", "E", 1.5, 0.01]]
    found = fitted(book_of(stages=STAGES, gauges=gauges, readings=wide))
    assert [*found.subject.observations.zero] == [0, 0, 0, 0, 1, 1, 1, 1]
