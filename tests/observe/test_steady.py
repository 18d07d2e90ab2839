"""Scatter about drift and warming, which are unknowns of the fit: by hand, by simulation, and through a whole book."""

from collections.abc import Callable

import numpy as np
import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import reconcile_member
from fieldfit.observe import Subject, observe
from fieldfit.observe.repeats import Plateaus, combined, plateaus, u_of_means
from fieldfit.observe.steady import steadied

BookOf = Callable[..., Book]
ROLES = ["zero", "load", "zero"]


def three_windows(values: np.ndarray, roles: list[str], zero: tuple[int, ...] = (0, 0, 0), **given: object) -> Plateaus:
    """Plateaus of gauges (R, 3 n), each read n times in three windows with as long a pause between them."""
    runs, count = values.shape[0], values.shape[1] // 3
    time = np.concatenate([np.arange(count) + 2.0 * count * window for window in range(3)])
    starts = np.arange(3 * runs) * count
    nothing = {"temperature": np.full(values.size, np.nan), "per_kelvin": np.full(3 * runs, np.nan)}
    told = {"time": np.tile(time, runs), **nothing, **given}
    return steadied(
        plateaus(values.ravel(), starts),
        values.ravel(),
        starts,
        role=np.tile(np.array(roles, dtype=object), runs),
        gauge=np.repeat(np.arange(runs), 3),
        zero=np.tile(np.array(zero), runs),
        **told,
    )


TIME = np.concatenate([np.arange(30.0) + 60.0 * window for window in range(3)])
WAVE = np.tile(np.random.default_rng(2).permutation(np.arange(30.0) - 14.5), 3) / 100  # no mean in any window
SUMS = ("square", "lagged", "first", "last")


def test_a_drift_is_no_scatter_and_leaves_the_means() -> None:
    """The same deviations in all windows: zeros rise by 120 times the rate, which leaves just these deviations."""
    load = np.repeat([0.0, 5.0, 0.0], 30)
    without, drifting = (three_windows((WAVE + load + rate * TIME)[None], ROLES) for rate in (0.0, 0.02))
    for name in SUMS:
        np.testing.assert_allclose(getattr(drifting, name), getattr(without, name), atol=1e-9)
    np.testing.assert_allclose(drifting.mean - without.mean, 0.02 * (14.5 + 60 * np.arange(3)))


@pytest.mark.parametrize(
    ("roles", "zero"),
    [
        (["zero", "zero", "load"], (0, 0, 0)),  # no zero after the load
        (["zero", "hold", "zero"], (0, 0, 0)),  # no stage that loads
        (["", "", ""], (0, 0, 0)),  # roles of a test with cycles
        (["zero", "load", "zero"], (0, 0, 1)),  # reset on the way
    ],
)
def test_without_a_drift_in_the_fit_all_movement_is_scatter(roles: list[str], zero: tuple[int, ...]) -> None:
    values = WAVE + 0.02 * TIME
    raw = plateaus(values, np.arange(3) * 30)
    np.testing.assert_array_equal(three_windows(values[None], roles, zero).square, raw.square)


def test_warming_by_a_stated_coefficient_is_no_scatter() -> None:
    warmth = 20.0 + np.sin(np.arange(90.0))
    stated = {"temperature": warmth, "per_kelvin": np.full(3, 0.3)}
    found = three_windows((WAVE + 0.3 * warmth + 0.02 * TIME)[None], ROLES, **stated)
    np.testing.assert_allclose(found.square, plateaus(WAVE, np.arange(3) * 30).square, rtol=1e-9)


def test_a_stuck_gauge_has_no_scatter_by_the_drift_of_its_zeros() -> None:
    values = np.concatenate([WAVE[:30], np.full(30, 5.0), WAVE[:30] + 1.0])
    assert three_windows(values[None], ROLES).square[1] == 0.0


def covered(found: Plateaus) -> float:
    """Share of gauges whose mean in the middle less that of their zeros, 0 without a load, lies within 1.96 u."""
    u, freedom = u_of_means(found, np.repeat(np.arange(len(found.mean) // 3), 3))
    u = combined(np.zeros(len(u)), u, freedom)
    change, spread = found.mean.reshape(-1, 3), u.reshape(-1, 3)
    size = np.sqrt(spread[:, 1] ** 2 + (spread[:, 0] ** 2 + spread[:, 2] ** 2) / 4)
    return float(np.mean(np.abs(change[:, 1] - (change[:, 0] + change[:, 2]) / 2) < 1.96 * size))


@pytest.mark.parametrize("hang", [0.0, 0.9])
def test_intervals_of_drifting_gauges_hold_as_often_as_those_of_steady_ones(hang: float) -> None:
    """Readings that hang together too: nothing is fitted within a window. As scatter the drift would hold always."""
    random = np.random.default_rng(7)
    noise = random.normal(size=(700, 350))
    for n in range(1, 350):
        noise[:, n] = hang * noise[:, n - 1] + np.sqrt(1 - hang**2) * noise[:, n]
    inside = np.concatenate([np.arange(200, 230) + 60 * window for window in range(3)])
    steady = noise[:, inside]
    drifting = steady + 0.1 * TIME
    expected = covered(plateaus(steady.ravel(), np.arange(2100) * 30))
    assert covered(three_windows(drifting, ROLES)) == pytest.approx(expected, abs=0.01)
    assert expected > 0.94
    assert covered(plateaus(drifting.ravel(), np.arange(2100) * 30)) == 1.0


WINDOWS = (("z1", "", "zero", 0), ("P", "P", "load", 60), ("z2", "", "zero", 120))  # minutes


def moment(minutes: float) -> str:
    return f"2024-05-14T{8 + int(minutes // 60):02}:{int(minutes % 60):02}:{int(60 * minutes % 60):02}"


def drifting_book(book_of: BookOf, mm_per_hour: float, *, rows: bool) -> Subject:
    """A dial at midspan read every half minute with scatter of 0.005 mm, 11.25 mm under load (P l3/48 EI)."""
    minutes = np.concatenate([start + np.arange(0, 30.25, 0.5) for *_, start in WINDOWS])
    loaded = np.repeat([0.0, 11.25, 0.0], 61)
    values = loaded + mm_per_hour * minutes / 60 + np.random.default_rng(4).normal(0, 0.005, len(minutes))
    pairs = [(moment(at), f"{value:.5f}") for at, value in zip(minutes, values, strict=True)]
    logged = [["time", "D [mm]"], *map(list, pairs)]
    single = [["member", "gauge", "time", "deflection [mm]"], *(["B1", "D", *pair] for pair in pairs)]
    stages = [["B1", name, case, role, moment(at), moment(at + 30)] for name, case, role, at in WINDOWS]
    (subject,) = observe(
        book_of(
            stages=[["member", "stage", "load case", "role", "start", "end"], *stages],
            gauges=[["member", "gauge", "at [m]", "u [mm]"], ["B1", "D", 3.0, 0.005]],
            readings=single if rows else logged,
        )
    )
    return subject


@pytest.mark.parametrize("rows", [False, True])
@pytest.mark.parametrize("mm_per_hour", [0.0, 1.0])
def test_u_of_EI_does_not_grow_with_the_drift(mm_per_hour: float, rows: bool, book_of: BookOf) -> None:
    """By hand: means of u2 = 0.005^2 + 0.005^2/61, the load's less half of both zeros': 1.5 u2, of 11.25 mm."""
    (EI, drift) = reconcile_member(drifting_book(book_of, mm_per_hour, rows=rows)).estimates
    u = np.sqrt(1.5 * (0.005**2 + 0.005**2 / 61)) / 11.25
    assert EI.u is not None
    assert EI.u / 20e6 == pytest.approx(u, rel=0.03)  # the scatter is told from the readings
    assert drift.value == pytest.approx(mm_per_hour / 3.6e6, abs=4e-9)
