"""Slips of unit and sign: a slipped book is found, a right one is hardly ever accused, and nothing is mended."""

from collections.abc import Callable, Mapping

import numpy as np
import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation, reconcile_member
from fieldfit.observe import observe

BookOf = Callable[..., Book]
PEAK = 12.5  # mm at midspan: P l3 / 48 EI for EI 0.9 of the record
STAGES = {"zero": 0.0, "half": 0.5, "full": 1.0}
PLACES = {"D1": 1.5, "D2": 3.0, "D3": 4.5}
SHAPE = {"D1": 11 / 16, "D2": 1.0, "D3": 11 / 16}  # of the midspan deflection under a midspan force
U = 0.02


def readings(seed: int) -> dict[tuple[str, str], float]:
    random = np.random.default_rng(seed)
    zeros = {gauge: random.uniform(-3, 3) for gauge in PLACES}
    return {
        (stage, gauge): zeros[gauge] + PEAK * factor * SHAPE[gauge] + U * random.normal()
        for stage, factor in STAGES.items()
        for gauge in PLACES
    }


def reconciled(book_of: BookOf, read: Mapping[tuple[str, str], float], u: float | str = U) -> Reconciliation:
    book = book_of(
        stages=[
            ["member", "stage", "load case", "factor", "role"],
            *(["B1", stage, "P" if f else "", f or "", "load" if f else "zero"] for stage, f in STAGES.items()),
        ],
        gauges=[["member", "gauge", "at [m]", "u [mm]"], *(["B1", name, at, u] for name, at in PLACES.items())],
        readings=[
            ["member", "stage", "gauge", "deflection [mm]"],
            *(["B1", stage, gauge, f"{value:.6g}"] for (stage, gauge), value in read.items()),
        ],
    )
    return reconcile_member(observe(book)[0])


def slips(found: Reconciliation) -> list[str]:
    return [text for text in found.warnings if "look as if" in text or "is no beam" in text]


@pytest.mark.parametrize("u", [U, ""])
@pytest.mark.parametrize("factor", [-1.0, 25.4, 1 / 25.4, 1000.0, 1e-3])
@pytest.mark.parametrize("gauge", PLACES)
def test_a_gauge_of_another_unit_or_sign_is_found(book_of: BookOf, gauge: str, factor: float, u: float | str) -> None:
    read = {key: value * (factor if key[1] == gauge else 1.0) for key, value in readings(1).items()}
    found = reconciled(book_of, read, u)
    (said,) = slips(found)
    meant = {
        -1.0: "had the other sign",
        25.4: "were 25.4 times too large",
        1 / 25.4: "were 25.4 times too small",
        1000.0: "were 1000 times too large",
        1e-3: "were 1000 times too small",
    }
    assert said.startswith(f"Readings of gauge {gauge} look as if they {meant[factor]}")
    assert ", or" not in said
    if u:
        assert found.profile is not None
        assert found.profile.noise.explains_readings is False  # nothing was mended


def test_a_stage_of_the_other_sign_is_found(book_of: BookOf) -> None:
    read = {key: value * (-1.0 if key[0] == "half" else 1.0) for key, value in readings(2).items()}
    (said,) = slips(reconciled(book_of, read))
    assert said.startswith("Readings in stage half look as if they had the other sign; with that all readings would")


def test_stages_that_were_exchanged_are_found(book_of: BookOf) -> None:
    read, other = readings(6), {"zero": "zero", "half": "full", "full": "half"}
    (said,) = slips(reconciled(book_of, {(other[stage], gauge): value for (stage, gauge), value in read.items()}))
    assert "Readings in stages half and full look as if they were exchanged" in said


def test_gauges_that_were_exchanged_are_found(book_of: BookOf) -> None:
    """D1 and D3 stand alike, so that either of them may be the one whose channel is D2's."""
    read, other = readings(7), {"D1": "D2", "D2": "D1", "D3": "D3"}
    (said,) = slips(reconciled(book_of, {(stage, other[gauge]): value for (stage, gauge), value in read.items()}))
    assert said.startswith("Readings of gauges D1 and D2 look as if they were exchanged")


def test_two_gauges_without_error_leave_open_which(book_of: BookOf) -> None:
    read = {(stage, gauge): PEAK * f * SHAPE[gauge] for stage, f in STAGES.items() for gauge in ("D1", "D2")}
    read = {key: value * (25.4 if key[1] == "D1" else 1.0) for key, value in read.items()}
    (said,) = slips(reconciled(book_of, read))
    assert "gauge D1 look as if they were 25.4 times too large (mm for inches), or readings of gauge D2 look" in said


def test_readings_all_of_the_other_sign(book_of: BookOf) -> None:
    (said,) = slips(reconciled(book_of, {key: -value for key, value in readings(4).items()}))
    assert said.startswith("Readings of deflection look as if they had the other sign")


@pytest.mark.parametrize(("factor", "told"), [(25.4, "1/25.4 of"), (1 / 25.4, "25.4 times")])
def test_readings_all_of_another_unit_show_in_EI_alone(book_of: BookOf, factor: float, told: str) -> None:
    (said,) = slips(reconciled(book_of, {key: factor * value for key, value in readings(5).items()}, U * factor))
    assert said.startswith(f"EI comes out at about {told} what is on record")


@pytest.mark.parametrize("u", [U, ""])
def test_a_right_book_is_not_accused(book_of: BookOf, u: float | str) -> None:
    assert [said for seed in range(20) for said in slips(reconciled(book_of, readings(seed), u))] == []


def test_neither_is_one_whose_u_is_too_small_or_whose_model_is_wrong(book_of: BookOf) -> None:
    """Chi-square fails in all of them, but no slip brings it back."""
    for seed in range(4):
        noisy = readings(seed)
        random = np.random.default_rng(100 + seed)
        for key in noisy:
            noisy[key] += 5 * U * random.normal()
        wrong = {key: value * (1.3 if key[1] == "D2" else 1.0) for key, value in readings(seed).items()}
        for read in (noisy, wrong):
            found = reconciled(book_of, read)
            assert found.profile is not None and found.profile.noise.explains_readings is False
            assert slips(found) == []


def test_a_misfit_is_not_explained_by_making_readings_small(book_of: BookOf) -> None:
    """Of one loaded stage a thousandth fits any model; that is no slip."""
    at = np.linspace(0.5, 5.5, 21).round(3)
    read = 15 * np.sin(np.pi * at / 6) + np.random.default_rng(3).normal(0, 0.16, 21)
    rows = [["B1", "zero", x, 0.0, 0.1] for x in at.tolist()]
    rows += [["B1", "P", x, y, 0.1] for x, y in zip(at.tolist(), read.tolist(), strict=True)]
    book = book_of(
        stages=[["member", "stage", "load case", "role"], ["B1", "zero", "", "zero"], ["B1", "P", "P", "load"]],
        readings=[["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], *rows],
    )
    (subject,) = observe(book)
    found = reconcile_member(subject)
    assert found.profile is not None
    assert not found.profile.noise.explains_readings
    assert not [text for text in found.warnings if "look as if" in text]


@pytest.mark.parametrize("stage", ["half", "full"])
def test_gauges_exchanged_in_one_stage_are_found(book_of: BookOf, stage: str) -> None:
    read = readings(3)
    read[stage, "D1"], read[stage, "D2"] = read[stage, "D2"], read[stage, "D1"]
    (said,) = slips(reconciled(book_of, read))
    assert f"gauges D1 and D2 in stage {stage} look as if they were exchanged" in said
