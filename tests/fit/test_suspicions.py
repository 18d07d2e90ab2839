"""What gauges do that beams do not: found, said, and nothing mended; and silence where there is nothing to say."""

from collections.abc import Callable, Sequence

import numpy as np
import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation, reconcile_member
from fieldfit.observe import observe

BookOf = Callable[..., Book]
PEAK = 12.5  # mm at midspan for P whole and EI 0.9 of the record: P l3 / 48 EI
FACTORS = {"zero": 0.0, "quarter": 0.25, "half": 0.5, "three quarters": 0.75, "full": 1.0, "after": 0.0}
ROLES = {"zero": "zero", "after": "recovery"}
PLACES = {"D1": 1.5, "D2": 3.0, "D3": 4.5}
SHAPE = {"D1": 11 / 16, "D2": 1.0, "D3": 11 / 16, "A": 0.0}  # of the midspan deflection under a midspan force


def true_readings(seed: int = 1) -> dict[tuple[str, str], float]:
    """Readings (mm) of three gauges in six stages, each with an error of u 0.01 mm."""
    random = np.random.default_rng(seed)
    return {
        (stage, gauge): PEAK * factor * SHAPE[gauge] + 0.01 * random.normal()
        for stage, factor in FACTORS.items()
        for gauge in PLACES
    }


def reconciled(
    book_of: BookOf, readings: dict[tuple[str, str], float], unknowns: Sequence[Sequence[object]] | None = None
) -> Reconciliation:
    gauges = {**PLACES, "A": 0.0, "A2": 0.0}
    seen = {gauge for _, gauge in readings}
    tables = {
        "stages": [
            ["member", "stage", "load case", "factor", "role"],
            *(["B1", s, "P" if f else "", f or "", ROLES.get(s, "load")] for s, f in FACTORS.items()),
        ],
        "gauges": [
            ["member", "gauge", "at [m]", "u [mm]"],
            *(["B1", name, at, 0.01] for name, at in gauges.items() if name in seen),
        ],
        "readings": [
            ["member", "stage", "gauge", "deflection [mm]"],
            *(["B1", stage, gauge, f"{value:.2f}"] for (stage, gauge), value in readings.items()),
        ],
    }
    if unknowns:
        tables["unknowns"] = unknowns
    (subject,) = observe(book_of(**tables))
    return reconcile_member(subject)


def said_of_gauges(found: Reconciliation) -> list[str]:
    return [text for text in found.warnings if text.startswith(("Gauge", "Support A was"))]


@pytest.mark.parametrize("seed", range(20))
def test_a_sound_record_raises_no_suspicion(book_of: BookOf, seed: int) -> None:
    assert said_of_gauges(reconciled(book_of, true_readings(seed))) == []


def test_a_gauge_at_the_end_of_its_travel(book_of: BookOf) -> None:
    readings = true_readings()
    readings["three quarters", "D2"] = readings["full", "D2"] = 9.00
    said = said_of_gauges(reconciled(book_of, readings))
    assert said[0] == (
        "Gauge D2 shows one figure in stages three quarters, full, which should differ: at the end of its travel, or "
        "stuck?"
    )


def test_a_gauge_that_sticks_on_its_way(book_of: BookOf) -> None:
    readings = true_readings()
    for stage in ("quarter", "half", "three quarters"):
        readings[stage, "D1"] = 2.15
    said = said_of_gauges(reconciled(book_of, readings))
    assert said[0] == "Gauge D1 shows one figure in stages quarter, half, three quarters, which should differ: stuck?"


def test_a_gauge_that_jumps_and_its_cure(book_of: BookOf) -> None:
    readings = true_readings()
    for stage in ("three quarters", "full", "after"):
        readings[stage, "D3"] += 0.40
    found = reconciled(book_of, readings)
    (said,) = (text for text in said_of_gauges(found) if "stands apart" in text)
    assert said.startswith("Gauge D3 stands apart from stage three quarters on, by ")
    assert found.profile is not None
    assert found.profile.noise.explains_readings is False  # nothing was mended


def test_the_step_is_the_root_of_the_fall_of_chi_square(book_of: BookOf) -> None:
    """The same step told to the book as a reset: chi-square falls by the square of the number in the sentence."""
    readings = true_readings()
    for stage in ("three quarters", "full"):
        readings[stage, "D3"] += 0.20
    found = reconciled(book_of, readings)
    (said,) = (text for text in said_of_gauges(found) if "stands apart" in text)
    size = float(said.split("by ")[1].split(" times")[0])
    assert found.profile is not None
    rows = [
        ["B1", stage, gauge, f"{value:.2f}", "yes" if (stage, gauge) == ("three quarters", "D3") else ""]
        for (stage, gauge), value in readings.items()
    ]
    book = book_of(
        stages=[
            ["member", "stage", "load case", "factor", "role"],
            *(["B1", s, "P" if f else "", f or "", ROLES.get(s, "load")] for s, f in FACTORS.items()),
        ],
        gauges=[["member", "gauge", "at [m]", "u [mm]"], *(["B1", name, at, 0.01] for name, at in PLACES.items())],
        readings=[["member", "stage", "gauge", "deflection [mm]", "reset"], *rows],
    )
    cured = reconcile_member(observe(book)[0])
    assert cured.profile is not None
    fall = found.profile.minimum.sum_of_squares - cured.profile.minimum.sum_of_squares
    assert np.sqrt(fall) == pytest.approx(size, abs=0.5)
    assert cured.profile.noise.explains_readings
    assert said_of_gauges(cured) == []


def test_a_wrong_model_accuses_no_gauge(book_of: BookOf) -> None:
    """Every gauge is off in every loaded stage: that is no step of one of them."""
    readings = {key: value * (1.3 if key[1] == "D2" else 1.0) for key, value in true_readings().items()}
    found = reconciled(book_of, readings)
    assert found.profile is not None
    assert found.profile.noise.explains_readings is False
    assert not any("stands apart" in text for text in found.warnings)


def test_recovery_beyond_full_is_no_recovery(book_of: BookOf) -> None:
    readings = true_readings()
    readings["after", "D2"] = -0.50
    (said,) = (text for text in said_of_gauges(reconciled(book_of, readings)) if "recovers" in text)
    assert said.startswith("Gauge D2 recovers 104 % in stage after: past its zero.")


def test_a_support_taken_as_rigid_that_moves(book_of: BookOf) -> None:
    readings = true_readings()
    readings |= {(stage, "A"): 0.6 * factor for stage, factor in FACTORS.items()}
    (said,) = (text for text in said_of_gauges(reconciled(book_of, readings)) if text.startswith("Support A"))
    assert "gauge A at it moved in stages quarter, half, three quarters, full" in said
    readings |= {(stage, "A2"): 0.6 * FACTORS[stage] for stage in ("zero", "full")}
    (said,) = (text for text in said_of_gauges(reconciled(book_of, readings)) if text.startswith("Support A"))
    assert "gauges A, A2 at it moved in stages quarter, half, three quarters, full" in said
    asked = [["member", "unknown", "where"], ["B1", "EI", ""], ["B1", "bearing stiffness", "A"]]
    assert not any(text.startswith("Support A") for text in said_of_gauges(reconciled(book_of, readings, asked)))


def test_a_single_reading_that_stands_apart_at_the_end(book_of: BookOf) -> None:
    readings = {key: value for key, value in true_readings().items() if key[0] != "after"}
    readings["full", "D3"] += 0.40
    (said,) = (text for text in said_of_gauges(reconciled(book_of, readings)) if "stands apart" in text)
    assert said.startswith("Gauge D3 stands apart in stage full, its last in the fit, by ")


@pytest.mark.parametrize(("gauge", "stage"), [("D2", "half"), ("D1", "three quarters"), ("D3", "zero")])
def test_one_wrong_reading_is_named(book_of: BookOf, gauge: str, stage: str) -> None:
    readings = true_readings()
    right = found_without(book_of, readings, (stage, gauge))
    readings[stage, gauge] += 0.30
    found = reconciled(book_of, readings)
    (said,) = (text for text in found.warnings if "stands apart" in text)
    assert said.startswith(f"The reading of gauge {gauge} in stage {stage} stands apart, by ")
    # The number is the root of what chi-square falls by without that reading.
    assert found.profile is not None and right.profile is not None
    fall = found.profile.minimum.sum_of_squares - right.profile.minimum.sum_of_squares
    assert float(said.split("by ")[1].split(" times")[0]) == pytest.approx(np.sqrt(fall), abs=0.6)


def found_without(book_of: BookOf, readings: dict[tuple[str, str], float], which: tuple[str, str]) -> Reconciliation:
    return reconciled(book_of, {key: value for key, value in readings.items() if key != which})


def test_two_wrong_readings_are_not_told_as_one(book_of: BookOf) -> None:
    readings = true_readings()
    readings["half", "D2"] += 0.30
    readings["three quarters", "D1"] -= 0.30
    assert not any("stands apart" in text for text in reconciled(book_of, readings).warnings)


def test_a_gauge_that_stops_is_told(book_of: BookOf) -> None:
    readings = {key: value for key, value in true_readings().items() if key[1] != "D1" or key[0] in ("zero", "quarter")}
    (said,) = said_of_gauges(reconciled(book_of, readings))
    assert said.startswith("Gauge D1 has no reading in stages half, three quarters, full, after, where others have")


@pytest.mark.parametrize(
    ("from_minute", "highest", "stages"), [(40, np.inf, "half, full"), (0, 5.0, "half, full")], ids=["stuck", "at end"]
)
def test_a_logged_gauge_that_repeats_one_figure(book_of: BookOf, from_minute: int, highest: float, stages: str) -> None:
    """Means of one figure differ in their last digits with the number of readings: that does not hide it."""
    random, rows = np.random.default_rng(2), []
    for minute in np.arange(0, 120, 0.5):
        factor = 0.0 if minute < 30 else 0.5 if minute < 70 else 1.0
        read = {name: PEAK * factor * SHAPE[name] + 0.03 * random.normal() for name in PLACES}
        read["D2"] = min(read["D2"], highest) if np.isfinite(highest) or minute < from_minute else 6.21
        at = f"2024-05-14T{8 + int(minute) // 60:02}:{int(minute) % 60:02}:{30 * (minute % 1 > 0):02}"
        rows.append([at, *(f"{value:.2f}" for value in read.values())])
    table = [
        ["B1", name, case, factor, role, f"2024-05-14T{start}", f"2024-05-14T{end}"]
        for name, case, factor, role, start, end in (
            ("zero", "", "", "zero", "08:00", "08:25"),
            ("half", "P", 0.5, "load", "08:45", "09:05"),
            ("full", "P", 1, "load", "09:15", "09:55"),
        )
    ]
    book = book_of(
        stages=[["member", "stage", "load case", "factor", "role", "start", "end"], *table],
        gauges=[["member", "gauge", "at [m]", "u [mm]"], *(["B1", name, at, 0.01] for name, at in PLACES.items())],
        readings=[["time", *(f"{name} [mm]" for name in PLACES)], *rows],
    )
    (said,) = (text for text in said_of_gauges(reconcile_member(observe(book)[0])) if "one figure" in text)
    assert said.startswith(f"Gauge D2 shows one figure in stages {stages}, which should differ")


def test_a_gauge_whose_readings_are_all_set_aside_is_no_gauge(book_of: BookOf) -> None:
    rows = [["B1", "full", "D1", 8.0, "no"], ["B1", "full", "D2", 12.5, "yes"]]
    book = book_of(
        gauges=[["member", "gauge", "at [m]", "u [mm]"], ["B1", "D1", 1.5, 0.1], ["B1", "D2", 3.0, 0.1]],
        stages=[["member", "stage", "load case"], ["B1", "full", "P"]],
        readings=[["member", "stage", "gauge", "deflection [mm]", "use"], *rows],
    )
    assert said_of_gauges(reconcile_member(observe(book)[0])) == []
