"""Simple spans of handbooks and textbooks: deflections and slopes, typed as printed.

Sources: R. K. Bansal, A Textbook of Strength of Materials, Examples 12.1 (p. 518), 12.4 (p. 526), 12.5 (p. 529);
S. S. Bhavikatti, Strength of Materials, Examples 5.5.10 (p. 201), 5.5.11 (p. 203); A. Pytel and J. Kiusalaas,
Mechanics of Materials, Example 6.3 (p. 198): each as printed in the open companion notebooks to these books. The
coefficients of the standard table of simple spans are from memory. Deflections are given downward.
"""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from fieldfit.beam import Couple, Force, Loads, Members, Spread, largest_sag, loads, member, respond
from tests.outside.printed import printed


def deflection(one: Members, acting: Loads, at: float) -> float:
    """Downward, m."""
    return -float(respond(one, acting, np.array([[at]])).deflection.item())


def slope(one: Members, acting: Loads, at: float) -> float:
    """Anticlockwise, rad."""
    return float(respond(one, acting, np.array([[at]])).rotation.item())


def test_bansal_12_1_point_load_at_the_middle():
    one = member(length=6.0, EI=2.1e11 * 78e-6)
    acting = loads(one, forces=[Force(3.0, -50e3)])
    assert deflection(one, acting, 3.0) * 1e3 == printed(13.736, 1e-3)
    assert np.degrees(-slope(one, acting, 0.0)) == printed(0.3935, 1e-4)


def test_bansal_12_4_point_load_off_the_middle():
    one = member(length=5.0, EI=2e11 * 1e-4)
    acting = loads(one, forces=[Force(3.0, -5e3)])
    assert -slope(one, acting, 0.0) == printed(0.00035, 1e-5)
    assert deflection(one, acting, 3.0) * 1e3 == printed(0.6, 1e-2)
    assert largest_sag(one, acting).sag.item() * 1e3 == printed(0.6173, 1e-4)


def test_bansal_12_5_uniform_load():
    one = member(length=5.0, EI=1e10 * 0.2 * 0.3**3 / 12)
    acting = loads(one, spreads=[Spread(0.0, 5.0, -9e3)])
    assert -slope(one, acting, 0.0) == printed(0.0104, 1e-4)
    assert deflection(one, acting, 2.5) * 1e3 == printed(16.27, 1e-2)


def test_bhavikatti_5_5_10_point_load_off_the_middle():
    """The companion labels these metres as mm."""
    one = member(length=6.0, EI=3000e3)
    acting = loads(one, forces=[Force(4.0, -18e3)])
    assert largest_sag(one, acting).sag.item() == printed(0.0232, 1e-4)
    assert deflection(one, acting, 4.0) == printed(0.0213, 1e-4)
    assert abs(slope(one, acting, 3.0)) == printed(0.0017, 1e-4)


def test_bhavikatti_5_5_11_point_load_and_couple():
    """The sense of the couple shows: turned the other way round it would print .0120."""
    one = member(length=6.0, EI=10_000e3)
    force = Force(4.0, -30e3)
    clockwise = loads(one, forces=[force], couples=[Couple(4.0, -15e3)])
    anticlockwise = loads(one, forces=[force], couples=[Couple(4.0, 15e3)])
    assert deflection(one, clockwise, 4.0) == printed(0.0093, 1e-4)
    assert deflection(one, anticlockwise, 4.0) == printed(0.0120, 1e-4)


def test_pytel_6_3_deflection():
    """Where the sag is largest, 1.63 m, was worked out by an independent solver for this check."""
    one = member(length=3.0, EI=12e9 * 0.04 * 0.08**3 / 12)
    sag = largest_sag(one, loads(one, forces=[Force(2.0, -300.0)]))
    assert sag.sag.item() * 1e3 == printed(7.09, 1e-2)
    assert sag.at.item() == printed(1.63, 1e-2)


# On a span of 1 with EI 1 under a load of 1 the coefficients of the table stand alone: the load or intensity acts
# downward, the couple clockwise; deflections are downward, rotations clockwise at the left end, anticlockwise at
# the right. From memory; the fractions are typed, the formula of each in its comment.
QUARTER = 0.25
TABLE = {
    # P at the middle: Pl3/48, Pl2/16
    "point, middle": ({"forces": [Force(0.5, -1.0)]}, 0.5, 1 / 48, 1 / 16, 1 / 16),
    # P at a from the left: Pa2b2/3l at the load, Pab(l + b)/6l, Pab(l + a)/6l
    "point, quarter": ({"forces": [Force(QUARTER, -1.0)]}, QUARTER, 3 / 256, 7 / 128, 5 / 128),
    # P/2 at both third points: 23 Pl3/1296, Pl2/18
    "third points": ({"forces": [Force(1 / 3, -0.5), Force(2 / 3, -0.5)]}, 0.5, 23 / 1296, 1 / 18, 1 / 18),
    # w throughout: 5wl4/384, wl3/24
    "uniform": ({"spreads": [Spread(0.0, 1.0, -1.0)]}, 0.5, 5 / 384, 1 / 24, 1 / 24),
    # w on the left half: 5wl4/768 at the middle, 3wl3/128, 7wl3/384
    "uniform, left half": ({"spreads": [Spread(0.0, 0.5, -1.0)]}, 0.5, 5 / 768, 3 / 128, 7 / 384),
    # triangle rising from 0 to w at the right: 5wl4/768 at the middle, 7wl3/360, wl3/45
    "triangle": ({"spreads": [Spread(0.0, 1.0, 0.0, -1.0)]}, 0.5, 5 / 768, 7 / 360, 1 / 45),
    # couple at the left end: Ml2/16 at the middle, Ml/3, Ml/6
    "couple, left end": ({"couples": [Couple(0.0, -1.0)]}, 0.5, 1 / 16, 1 / 3, 1 / 6),
    # couple at the middle: nothing there, both ends turn by Ml/24 the other way round
    "couple, middle": ({"couples": [Couple(0.5, -1.0)]}, 0.5, 0.0, -1 / 24, 1 / 24),
}


@pytest.mark.parametrize("name", TABLE)
def test_table_of_simple_spans(name):
    rows, at, down, left, right = TABLE[name]
    one = member(length=1.0, EI=1.0)
    acting = loads(one, **rows)
    found = deflection(one, acting, at), -slope(one, acting, 0.0), slope(one, acting, 1.0)
    # The claim of the model for a single span, beside terms of order one.
    assert_allclose(found, (down, left, right), rtol=0, atol=1e-14)
