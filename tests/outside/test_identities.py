"""Identities of curvature integration, and what shear adds to deflection.

Standard results of any handbook, from memory. Where a number stands beside a formula, length, EI and load are one, so
that the coefficient of the formula stands alone.
"""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from fieldfit.beam import (
    Bend,
    Force,
    Movement,
    Spread,
    Support,
    area,
    loads,
    member,
    respond,
    tangential_deviation,
)
from tests.outside.printed import printed

SIMPLE = member(length=1.0, EI=1.0)
CANTILEVER = member(length=1.0, EI=1.0, supports=[Support(0.0, fixity=1.0)])
FIXED = member(length=1.0, EI=1.0, supports=[Support(0.0, fixity=1.0), Support(1.0, fixity=1.0)])
UNIFORM = {"spreads": [Spread(0.0, 1.0, -1.0)]}
CENTRE = {"forces": [Force(0.5, -1.0)]}
THIRDS = {"forces": [Force(1 / 3, -0.5), Force(2 / 3, -0.5)]}
TIP = {"forces": [Force(1.0, -1.0)]}


@pytest.mark.parametrize(
    ("one", "acting", "name", "place", "value"),
    [
        (SIMPLE, UNIFORM, "deflection", 0.5, -5 / 384),
        (SIMPLE, UNIFORM, "rotation", 1.0, 1 / 24),
        (SIMPLE, UNIFORM, "curvature", 0.5, 1 / 8),
        (SIMPLE, CENTRE, "deflection", 0.5, -1 / 48),
        (SIMPLE, CENTRE, "rotation", 1.0, 1 / 16),
        (SIMPLE, THIRDS, "deflection", 0.5, -23 / 1296),
        (FIXED, UNIFORM, "deflection", 0.5, -1 / 384),
        (FIXED, UNIFORM, "moment", 1.0, -1 / 12),
        (CANTILEVER, TIP, "deflection", 1.0, -1 / 3),
        (CANTILEVER, UNIFORM, "deflection", 1.0, -1 / 8),
    ],
)
def test_coefficients(one, acting, name, place, value):
    found = getattr(respond(one, loads(one, **acting), np.array([[place]])), name)
    assert_allclose(found.item(), value, rtol=0, atol=1e-14)  # rounding beside terms of order one


def test_first_and_second_moment_area_theorem():
    """Uniform load: the area of wx(l - x)/2 from end to middle is 1/24, its moment about the end 5/384."""
    acting = loads(SIMPLE, **UNIFORM)
    end, middle = np.array([[0.0]]), np.array([[0.5]])
    assert area(SIMPLE, acting, end, middle).item() == pytest.approx(1 / 24, rel=1e-13)  # rounding
    assert area(SIMPLE, acting, middle, end).item() == pytest.approx(-1 / 24, rel=1e-13)
    assert tangential_deviation(SIMPLE, acting, end, middle).item() == pytest.approx(5 / 384, rel=1e-13)


def test_temperature_gradient_alone():
    """alpha dT x (l - x)/2h below the chord with the hot side below: here alpha dT/h = 1, at the quarter 3/32."""
    acting = loads(SIMPLE, bends=[Bend(0.0, 1.0, 1.0)])
    found = respond(SIMPLE, acting, np.array([[0.25, 0.5]]))
    assert_allclose(found.deflection[0, 0], [-3 / 32, -1 / 8], rtol=0, atol=1e-15)  # rounding


def test_scaling_EI_divides_load_curvature_and_leaves_thermal_curvature():
    stiff = member(length=1.0, EI=4.0)
    for rows, curvature in ((UNIFORM, 1 / 32), ({"bends": [Bend(0.0, 1.0, 0.01)]}, 0.01)):
        found = respond(stiff, loads(stiff, **rows), np.array([[0.5]]))
        assert_allclose(found.curvature.item(), curvature, rtol=1e-13)  # rounding


def test_support_movement_adds_the_chord():
    """Movements of .01 and .03 of a simple span: .0125 at the eighth, on top of what the load does."""
    moved = loads(SIMPLE, movements=[Movement(0, 0.01), Movement(1, 0.03)], **UNIFORM)
    still = loads(SIMPLE, **UNIFORM)
    at = np.array([[0.125]])
    chord = respond(SIMPLE, moved, at).deflection - respond(SIMPLE, still, at).deflection
    assert_allclose(chord.item(), 0.0125, rtol=0, atol=1e-16)  # rounding of a difference


# Shear over bending deflection, rectangular section (k = 5/6), E/G = 16: in percent, L/h = 20 and 10.
SHEAR = {"uniform": (UNIFORM, 3.84, 15.4), "centre": (CENTRE, 4.8, 19.2), "thirds": (THIRDS, 3.76, 15.0)}


@pytest.mark.parametrize("name", SHEAR)
@pytest.mark.parametrize("slenderness", [20, 10])
def test_shear_share_of_solid_timber(name, slenderness):
    """Derived by hand from wL2/8kGA, PL/4kGA and PL/6kGA. With EI = 1 and L = 1, kGA = (5/6) 12 (L/h)2 / 16."""
    acting, slender, stocky = SHEAR[name]
    soft = member(length=1.0, EI=1.0, GA=5 / 6 * 12 * slenderness**2 / 16)
    with_shear, without = (respond(m, loads(m, **acting), np.array([[0.5]])) for m in (soft, SIMPLE))
    share = 100 * (with_shear.deflection / without.deflection - 1).item()
    assert share == (printed(slender, 5e-3) if slenderness == 20 else printed(stocky, 5e-2))
    assert_allclose(with_shear.moment, without.moment, rtol=1e-13)  # shear moves no moment of a simple span
