"""Readings whose u is not given, beside what is known beforehand: neither may swamp the other."""

from collections.abc import Callable

import numpy as np
import pytest
from scipy import optimize, stats

from fieldfit.fieldbook import Book
from fieldfit.fit import Estimate, Reconciliation, reconcile_member
from fieldfit.observe import observe

BookOf = Callable[..., Book]
MIDSPAN = 50e3 * 6.0**3 / 48 / 20e6 * 1000  # mm, P l3 / 48 EI of the simple book
READ = np.array([11.10, 11.30, 11.20, 11.42])  # mm
UNKNOWN = ["member", "unknown", "where", "expected", "expected u"]


def fitted(book: Book) -> Reconciliation:
    return reconcile_member(observe(book)[0])


def repeated(values: np.ndarray, **column: float) -> list[list[object]]:
    """Midspan readings (mm) of the simple book, with one column more where it is named."""
    heading = ["member", "stage", "at [m]", "deflection [mm]", *(f"{name} [mm]" for name in column)]
    return [heading, *(["B1", "P", 3.0 + 1e-6 * n, value, *column.values()] for n, value in enumerate(values))]


def weighed_load(u: float) -> list[list[object]]:
    return [["member", "load case", "from [m]", "force [kN]", "u [%]"], ["B1", "P", 3.0, 50, 100 * u]]


def of(found: Reconciliation, quantity: str) -> Estimate:
    return next(one for one in found.estimates if one.quantity == quantity)


@pytest.mark.parametrize("column", [{}, {"resolution": 0.001}], ids=["scatter", "resolution"])
@pytest.mark.parametrize("u", [0.01, 0.05, 0.10])
def test_the_u_of_a_load_carries_over_to_EI_whatever_the_u_of_readings_rests_on(
    book_of: BookOf, column: dict[str, float], u: float
) -> None:
    found = fitted(book_of(readings=repeated(READ, **column), loads=weighed_load(u)))
    estimate = of(found, "EI")
    # EI goes with load over deflection, so that the two relative uncertainties add in squares.
    own = READ.std(ddof=1) / 2 / READ.mean()
    assert estimate.ratio == pytest.approx(MIDSPAN / READ.mean(), rel=1e-5)
    assert estimate.u is not None and estimate.value is not None
    assert estimate.u / estimate.value == pytest.approx(np.hypot(u, own), rel=1e-3)
    assert of(found, "load").u == pytest.approx(u, rel=1e-6)


def test_degrees_of_freedom_count_only_for_the_share_that_rests_on_scatter(book_of: BookOf) -> None:
    estimate = of(fitted(book_of(readings=repeated(READ), loads=weighed_load(0.02))), "EI")
    own = READ.std(ddof=1) / 2 / READ.mean()
    u = float(np.hypot(0.02, own))
    t = stats.t.ppf(0.975, 3 * (u / own) ** 4)  # Welch-Satterthwaite, JCGM 100:2008, G.4.1
    assert estimate.ratio_high is not None and estimate.ratio_low is not None
    assert np.log(estimate.ratio_high / estimate.ratio_low) == pytest.approx(2 * t * u, rel=0.01)


def test_readings_that_contradict_an_expected_EI_prevail_by_their_scatter(book_of: BookOf) -> None:
    asked = [UNKNOWN, ["B1", "EI", "", 1.0, 0.05]]
    estimate = of(fitted(book_of(readings=repeated(READ), unknowns=asked)), "EI")
    own = READ.std(ddof=1) / 2 / READ.mean()
    weights = np.array([1 / own**2, 1 / 0.05**2])
    log = float(np.average([np.log(MIDSPAN / READ.mean()), 0.0], weights=weights))
    assert estimate.ratio == pytest.approx(np.exp(log), rel=0.003)
    assert estimate.low_ends == estimate.high_ends == "found"


def test_the_scatter_found_is_the_likeliest_one(book_of: BookOf) -> None:
    """With the load alone unknown, readings are normal about w as recorded, with the covariance s2 I + (0.05 w)2."""
    asked = [UNKNOWN, ["B1", "load", "P", 1.0, 0.05]]
    found = fitted(book_of(readings=repeated(READ), unknowns=asked))

    def against(log_s: float) -> float:
        covariance = np.exp(2 * log_s) * np.eye(4) + (0.05 * MIDSPAN) ** 2
        return -float(stats.multivariate_normal(np.full(4, MIDSPAN), covariance).logpdf(READ))

    likeliest = float(np.exp(optimize.minimize_scalar(against, bounds=(-6.0, 1.0), method="bounded").x))
    assert found.profile is not None
    assert found.profile.noise.raised == pytest.approx(likeliest * 1e-3, rel=1e-3)
    assert found.u[0] == pytest.approx(likeliest * 1e-3, rel=1e-3)


def test_a_resolution_that_scatter_does_not_reach_is_believed_and_tested(book_of: BookOf) -> None:
    found = fitted(book_of(readings=repeated(READ, resolution=1.0), loads=weighed_load(0.05)))
    estimate, own = of(found, "EI"), 1.0 / np.sqrt(12) / 2 / READ.mean()
    assert estimate.u is not None and estimate.value is not None
    assert estimate.u / estimate.value == pytest.approx(np.hypot(0.05, own), rel=1e-4)
    assert found.profile is not None and found.profile.noise.degrees_of_freedom is None
    assert found.profile.noise.p == pytest.approx(stats.chi2.sf(3 * READ.var(ddof=1) * 12, 3), rel=1e-4)


@pytest.mark.parametrize("values", [READ[:1], np.full(4, 11.25)], ids=["one reading", "without scatter"])
def test_readings_without_scatter_say_nothing_beside_a_load_of_known_u(book_of: BookOf, values: np.ndarray) -> None:
    estimate = of(fitted(book_of(readings=repeated(values), loads=weighed_load(0.05))), "EI")
    assert (estimate.value, estimate.low, estimate.high, estimate.determined) == (None, None, None, "no")


def test_a_camber_expected_beforehand_stays_as_sure_as_it_was(book_of: BookOf) -> None:
    """Levels tell EI and camber together here, so that neither is told apart without what is expected of camber."""
    dead = [["member", "load case", "from [m]", "to [m]", "intensity [kN/m]"], ["B1", "dead", 0, 6, 10]]
    at = np.arange(7.0)
    sag = 10e3 * at * (6.0**3 - 2 * 6.0 * at**2 + at**3) / (24 * 20e6)
    level = 100 + 0.010 * 4 * at * (6 - at) / 36 - sag + 1e-4 * np.array([0.1, -0.6, 0.8, -0.3, -0.7, 0.9, -0.2])
    rows = [["B1", "now", x, z] for x, z in zip(at, level, strict=True)]
    book = book_of(
        loads=dead,
        stages=[["member", "stage", "load case"], ["B1", "now", "dead"]],
        readings=[["member", "stage", "at [m]", "level [m]"], *rows],
        unknowns=[
            [*UNKNOWN[:3], "expected", "expected u", "expected [mm]", "expected u [mm]"],
            ["B1", "EI", "", "", "", "", ""],
            ["B1", "camber", "1", "", "", 10, 2],
            ["B1", "creep factor", "", 0.001, 0.001, "", ""],
        ],
    )
    found = fitted(book)
    columns = np.column_stack([sag, 4 * at * (6 - at) / 36, np.ones(7), at]) / found.u[0]
    columns = np.vstack([columns, [0, 1 / 0.002, 0, 0]])
    u = float(np.sqrt(np.linalg.inv(columns.T @ columns)[1, 1]))
    assert u > 0.0005
    assert of(found, "camber").u == pytest.approx(u, rel=0.02)
