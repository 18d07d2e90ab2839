"""Area integrals: zones that taper converge faster than any power, prismatic and rigid ones are exact."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad

from fieldfit.beam import Force, Spread, Support, Zone, cells, loads, member, respond

FIXED = Support(0.0, fixity=1.0)
TAPERS = [2.0, 10.0, 100.0, 1000.0, 10_000.0]


def tip_of_taper(taper, *, thick_first):
    """Rotation and deflection at the tip of a cantilever of one that tapers all along, under 1 + x downward."""
    zone = Zone(0.0, 1.0, 1.0, 1 / taper) if thick_first else Zone(0.0, 1.0, 1 / taper, 1.0)
    one = member(length=1.0, EI=1.0, supports=[FIXED], zones=[zone])
    found = respond(one, loads(one, spreads=[Spread(0.0, 1.0, -1.0, -2.0)]), np.array([[1.0]]))
    return np.array([found.rotation.item(), found.deflection.item()])


def by_quadrature(taper, *, thick_first):
    """M/EI integrated adaptively, M = -(integral of (1 + t)(t - x) from x to 1) = -(5 - 9x + 3x2 + x3)/6."""

    def curvature(x):
        EI = 1 - x * (1 - 1 / taper) if thick_first else 1 / taper + x * (1 - 1 / taper)
        return -(5 - 9 * x + 3 * x**2 + x**3) / 6 / EI

    # EI falls fast near its thin end, so the quadrature is broken there.
    near = 1 - np.geomspace(1e-5, 0.3, 8) if thick_first else np.geomspace(1e-5, 0.3, 8)
    exactly = {"points": near, "epsabs": 0, "epsrel": 1e-13, "limit": 200}
    return np.array([quad(curvature, 0, 1, **exactly)[0], quad(lambda x: curvature(x) * (1 - x), 0, 1, **exactly)[0]])


@pytest.mark.parametrize("taper", TAPERS)
@pytest.mark.parametrize("thick_first", [True, False])
def test_tapered_zones_against_adaptive_quadrature(taper, thick_first):
    found = tip_of_taper(taper, thick_first=thick_first)
    # What the quadrature itself is good for; the comment on GAUSS claims more, measured in 40 digits.
    assert_allclose(found, by_quadrature(taper, thick_first=thick_first), rtol=2e-13)


def test_convergence_is_spectral(monkeypatch):
    """Four points more leave an ever smaller part of the error; a method of fixed order would leave a larger one."""
    exact = by_quadrature(100.0, thick_first=True)[1]
    errors = []
    for points in (4, 8, 12):
        monkeypatch.setattr(cells, "GAUSS", cells.gauss(points))
        errors.append(abs(tip_of_taper(100.0, thick_first=True)[1] / exact - 1))
    left = np.array(errors[1:]) / errors[:-1]
    assert left[0] < 1e-3
    assert left[1] < left[0] / 3


def test_a_taper_of_nothing_is_a_prism():
    whole, barely = (member(length=1.0, EI=1.0, zones=[Zone(0.2, 0.6, 2.0, end)]) for end in (2.0, 2.0 * (1 + 1e-9)))
    at = np.array([[0.1, 0.4, 0.8]])
    first, second = (respond(m, loads(m, forces=[Force(0.5, -1.0)]), at).deflection for m in (whole, barely))
    assert_allclose(first, second, rtol=1e-9)


@pytest.mark.parametrize("apart", [1e-10, -1e-10])
def test_zones_that_rounding_parts_or_overlaps_are_touching_zones(apart):
    """Also a third one, because the numbers of two that overlap must not add up to it."""
    zones = [Zone(0.0, 0.4, 2.0), Zone(0.4 + apart, 0.7, 3.0), Zone(0.7, 1.0, 4.0)]
    rough, clean = (member(length=1.0, EI=1.0, zones=z) for z in (zones, [zones[0], Zone(0.4, 0.7, 3.0), zones[2]]))
    at = np.array([[0.2, 0.4, 0.6]])
    found, expected = (respond(m, loads(m, forces=[Force(0.5, -1.0)]), at).deflection for m in (rough, clean))
    assert_allclose(found, expected, rtol=1e-9)  # the sliver itself


def test_a_rigid_zone_stays_straight():
    """A rigid middle third of a simple span: each end third bends like a cantilever under the reaction, 1/2.

    Midspan: (1/2)(1/3)**3/3 = 1/162; the ends turn by (1/2)(1/3)**2/2 = 1/36.
    """
    one = member(length=1.0, EI=1.0, zones=[Zone(1 / 3, 2 / 3, np.inf)])
    found = respond(one, loads(one, forces=[Force(0.5, -1.0)]), np.array([[0.0, 0.4, 0.5, 0.6]]))
    assert_allclose(found.deflection[0, 0], [0, -1 / 162, -1 / 162, -1 / 162], rtol=1e-13, atol=1e-16)  # rounding
    assert_allclose(found.rotation[0, 0], [-1 / 36, 0, 0, 0], rtol=1e-13, atol=1e-16)
    assert_allclose(found.curvature[0, 0, 1:], 0.0, rtol=0, atol=0)


def test_a_beam_rigid_all_along_only_moves_with_its_springs():
    springs = [Support(0.0, 0.1), Support(4.0, 0.3)]
    one = member(length=4.0, EI=1.0, supports=springs, zones=[Zone(0.0, 4.0, np.inf)])
    found = respond(one, loads(one, forces=[Force(1.0, -4.0)]), np.array([[0.0, 2.0, 4.0]]))
    assert_allclose(found.deflection[0, 0], [-0.3, -0.3, -0.3], rtol=1e-13)  # 3 x 0.1 and 1 x 0.3
