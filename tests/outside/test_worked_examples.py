"""Worked examples of textbooks, as printed; those known to be wrong as traps, which must not be reproduced.

Most were read as recomputed in the open companion notebooks to the books. "Independent check" marks a number that
an independent beam solver gave for this table; pages and examples stand with each test.
"""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from fieldfit.beam import (
    Force,
    Loads,
    Members,
    Movement,
    Spread,
    Support,
    Zone,
    largest_sag,
    loads,
    member,
    respond,
)
from tests.outside.printed import printed

FIXED = Support(0.0, fixity=1.0)


def at(one: Members, acting: Loads, *stations: float):
    """Response of the only case: fields of shape (S,)."""
    response = respond(one, acting, np.array([stations]))
    return {name: getattr(response, name)[0, 0] for name in response.__slots__}


def level(*places: float) -> list[Support]:
    return [Support(place) for place in places]


# Support stiffness, settlement, prescribed rotation


def test_levinson_13_8_cantilever_on_a_spring():
    """I. J. Levinson, Statics and Strength of Materials, Ex. 13.8, p. 333 (lb, in)."""
    one = member(length=72.0, EI=30e6 * 1.728, supports=[FIXED, Support(72.0, flexibility=1 / 1000)])
    found = at(one, loads(one, forces=[Force(72.0, -680.0)]), 72.0)
    assert found["reaction"][1] == printed(480.0, 0.5)
    assert -found["deflection"][0] == printed(0.480, 5e-4)


def test_sarkar_12_8_prop_level_and_low():
    """B. K. Sarkar, Strength of Materials, Prob. 12.8, p. 292; kN, m."""
    one = member(length=8.0, EI=200.0, supports=level(0.0, 4.0, 8.0))
    spread = Spread(0.0, 8.0, -3.0)
    assert at(one, loads(one, spreads=[spread]), 0.0)["reaction"][1] == printed(15.0, 5e-3)
    low = at(one, loads(one, spreads=[spread], movements=[Movement(1, -0.02)]), 0.0)["reaction"]
    assert low[1] == printed(14.625, 5e-4)
    assert low[[0, 2]].tolist() == [printed(4.69, 5e-3)] * 2


class TestSettlementLessonWithALostFactor:
    """NPTEL (India), structural analysis, slope-deflection with settlement: three spans of 10 m (kN, m).

    The settlements, 5 and 10 mm, are from memory. The printed chord terms lack a factor of 3, so the printed moments
    belong to a third of them. Moments and reactions for the full settlements: independent check.
    """

    one = member(length=30.0, EI=270_000.0, supports=level(0.0, 10.0, 20.0, 30.0))

    def found(self, second: float, third: float):
        movements = [Movement(1, -second), Movement(2, -third)]
        return at(self.one, loads(self.one, spreads=[Spread(0.0, 30.0, -5.0)], movements=movements), 0, 10, 20, 30)

    def test_full_settlements_do_not_give_the_printed_moments(self):
        found = self.found(0.005, 0.010)
        assert found["moment"][1:3].tolist() == [printed(-66.20, 5e-3), printed(14.80, 5e-3)]
        assert_allclose(found["reaction"], [18.38, 64.72, 40.42, 26.48], rtol=0, atol=5.1e-3)  # half the last digit
        assert np.abs(np.abs(found["moment"][1:3]) - [55.40, 28.40]).min() > 10

    def test_a_third_of_them_does(self):
        found = self.found(0.005 / 3, 0.010 / 3)
        assert found["moment"][1:3].tolist() == [printed(-55.40, 5e-3), printed(-28.40, 5e-3)]
        assert_allclose(found["rotation"], [-5.9629e-4, -7.9013e-5, -8.7653e-5, 9.2963e-4], rtol=0, atol=1e-8)


def test_boresi_rail_on_an_elastic_foundation():
    """A. P. Boresi and R. J. Schmidt, Advanced Mechanics of Materials, ch. 10, Ex. 1, p. 366 (N, mm): 5.04, 51.21.

    The last digits, 5.038 and 51.214, are of an independent check. A row of springs stands for the foundation; what it
    misses of the moment falls with the square of its spacing, so two rows give the limit.
    """
    (coarse, rough), (fine, better) = on_springs(200.0), on_springs(100.0)
    assert (coarse, fine) == (printed(5.038, 1e-3), printed(5.038, 1e-3))
    assert better + (better - rough) / 3 == printed(51.214, 1e-3)
    assert better != printed(51.214, 1e-2)


def on_springs(spacing: float) -> tuple[float, float]:
    """Deflection (mm) and moment (kN m) under the wheel; 20 m is long against the 1.2 m in which the wave dies away."""
    springs = [Support(place, flexibility=1 / (14.0 * spacing)) for place in np.arange(0.0, 20_001.0, spacing)]
    rail = member(length=20_000.0, EI=200e3 * 36.9e6, supports=springs)
    found = at(rail, loads(rail, forces=[Force(10_000.0, -170e3)]), 10_000.0)
    return -found["deflection"][0], found["moment"][0] * 1e-6


# Stepped stiffness


@pytest.mark.parametrize(("ratio", "tip"), [(1, 1.00), (2, 0.53), (3, 0.38), (4, 0.30), (5, 0.25)])
def test_gere_9_7_2_stepped_cantilever(ratio, tip):
    """J. M. Gere and B. J. Goodno, Mechanics of Materials, 7th ed., 9.7-2: tip over that of one I throughout."""
    zones = [Zone(0.0, 0.5, float(ratio))]
    stepped = member(length=1.0, EI=1.0, supports=[FIXED], zones=zones)
    found = at(stepped, loads(stepped, spreads=[Spread(0.0, 1.0, -8.0)]), 1.0)  # q L4 / 8 EI = 1
    assert -found["deflection"][0] == printed(tip, 5.01e-3)


def test_gere_9_7_4_stiff_middle_half():
    """Gere and Goodno, 9.7-4: 7qL3/256EI at the end; 31qL4/4096EI at midspan (from memory)."""
    one = member(length=1.0, EI=1.0, zones=[Zone(0.25, 0.75, 2.0)])
    found = at(one, loads(one, spreads=[Spread(0.0, 1.0, -1.0)]), 0.0, 0.5)
    assert_allclose(-found["rotation"][0], 7 / 256, rtol=1e-13)  # rounding only
    assert_allclose(-found["deflection"][1], 31 / 4096, rtol=1e-13)


# Cantilevers and overhangs

# Rows: length (m), EI (N m2), what acts (N, m); tip slope (rad) and tip deflection (m), each with its last digit.
# 13.1 to 13.6: R. K. Bansal, A Textbook of Strength of Materials. 5.5.2 (p. 192), 5.5.4 (p. 193): S. S. Bhavikatti,
# Strength of Materials.
CANTILEVERS = {
    "Bansal 13.1": (3.0, 2.1e7, {"forces": [Force(3.0, -25e3)]}, (0.005357, 1e-6), (10.71e-3, 1e-5)),
    "Bansal 13.2": (3.0, 2.0e7, {"forces": [Force(2.0, -50e3)]}, (0.005, 1e-5), (11.67e-3, 1e-5)),
    "Bansal 13.3": (2.5, 2e11 * 7.95e-5, {"spreads": [Spread(0.0, 2.5, -16.4e3)]}, None, (5.036e-3, 1e-6)),
    "Bansal 13.5": (3.0, 2.0e7, {"spreads": [Spread(0.0, 2.0, -10e3)]}, (0.00066, 1e-5), (1.67e-3, 1e-5)),
    "Bansal 13.6": (3.0, 2.0e7, {"spreads": [Spread(1.0, 3.0, -10e3)]}, (0.002167, 1e-6), (4.8333e-3, 1e-7)),
    "Bhavikatti 5.5.2": (3.0, 40e6, {"forces": [Force(2.0, -20e3), Force(3.0, -30e3)]}, None, (9.08e-3, 1e-5)),
    "Bhavikatti 5.5.4": (
        3.0,
        36e6,
        {"spreads": [Spread(0.0, 2.0, -20e3)], "forces": [Force(3.0, -20e3)]},
        None,
        (6.85e-3, 1e-5),
    ),
}


@pytest.mark.parametrize("name", CANTILEVERS)
def test_cantilevers(name):
    length, EI, rows, slope, tip = CANTILEVERS[name]
    one = member(length=length, EI=EI, supports=[FIXED])
    found = at(one, loads(one, **rows), length)
    assert -found["deflection"][0] == printed(*tip)
    assert slope is None or -found["rotation"][0] == printed(*slope)


def test_levinson_13_1_cantilever():
    """Levinson, Ex. 13.1, p. 313 (lb, in)."""
    one = member(length=144.0, EI=1.5e6 * 64, supports=[FIXED])
    found = at(one, loads(one, forces=[Force(72.0, -100.0), Force(144.0, -100.0)]), 144.0)
    assert -found["deflection"][0] == printed(1.36, 5e-3)


def test_levinson_13_5_cantilever():
    """Levinson, Ex. 13.5, p. 329 (lb, ft): EI times tip deflection, printed in thousands."""
    one = member(length=8.0, EI=1.0, supports=[FIXED])
    found = at(one, loads(one, spreads=[Spread(0.0, 8.0, -180.0)], forces=[Force(6.0, -1200.0)]), 8.0)
    assert -found["deflection"][0] == printed(222_000, 500)


def test_bhavikatti_5_5_18_is_not_reproduced():
    """Bhavikatti, Ex. 5.5.18, p. 213: the companion prints -.08, -.0267, +.0107; the right end alone is right.

    Left end and middle, -.03733 and +.0120: independent check.
    """
    one = member(length=8.0, EI=10_000.0, supports=level(2.0, 6.0))
    left, right, middle = at(one, loads(one, forces=[Force(0.0, -40.0), Force(8.0, -20.0)]), 0, 8, 4)["deflection"]
    assert right == printed(-0.0267, 5e-5)
    assert (left, middle) == (printed(-0.03733, 5e-6), printed(0.0120, 5e-6))


def test_pytel_6_3_printed_slope_is_not_reproduced():
    """A. Pytel and J. Kiusalaas, Mechanics of Materials, Ex. 6.3, p. 198: .487 deg is a slip for .4663."""
    one = member(length=3.0, EI=12e9 * 0.04 * 0.08**3 / 12)
    slopes = at(one, loads(one, forces=[Force(2.0, -300.0)]), 0.0, 3.0)["rotation"]
    assert np.degrees(slopes.max()) == printed(0.4663, 5e-5)


# Statically indeterminate, level supports


def test_sarkar_12_3_propped():
    """Sarkar, 12.3, p. 287 (kN, m)."""
    one = member(length=6.0, EI=1.0, supports=[FIXED, Support(6.0)])
    found = at(one, loads(one, spreads=[Spread(0.0, 6.0, -30.0)], forces=[Force(3.0, -160.0)]), 0.0)
    assert found["reaction"][1] == printed(117.5, 5e-2)
    assert found["moment"][0] == found["restraint"][0] == printed(-315.0, 5e-1)


def test_levinson_13_7_two_spans():
    """Levinson, Ex. 13.7, p. 331 (kip, ft)."""
    one = member(length=12.0, EI=1.0, supports=level(0.0, 6.0, 12.0))
    found = at(one, loads(one, forces=[Force(3.0, -4.0), Force(9.0, -8.0)]), 0.0)
    assert_allclose(found["reaction"], [0.875, 8.25, 2.875], rtol=1e-13)  # exact, rounding only


def test_pytel_7_4_fixed_both_ends():
    """Pytel and Kiusalaas, Ex. 7.4, p. 252 (lb, ft). The right moment, 683: independent check; -380 is printed."""
    one = member(length=12.0, EI=1.0, supports=[FIXED, Support(12.0, fixity=1.0)])
    found = at(one, loads(one, spreads=[Spread(3.0, 12.0, -60.0)]), 0.0, 12.0)
    assert found["reaction"].tolist() == [printed(190.0, 0.5), printed(350.0, 0.5)]
    assert found["moment"].tolist() == [printed(-532.0, 0.5), printed(-683.0, 0.5)]


# Continuous equal spans under uniform load, spans and intensity of one: the standard tables as reproduced after
# M. R. Lindeburg, Civil Engineering Reference Manual, 15th ed. (the primary tables were not seen).


def continuous(spans: int, loaded: int):
    one = member(length=float(spans), EI=1.0, supports=level(*range(spans + 1)))
    acting = loads(one, spreads=[Spread(0.0, float(loaded), -1.0)])
    return largest_sag(one, acting), at(one, acting, 0.0)["reaction"]


def test_two_spans_loaded():
    """1/185 is rounded: the sag itself is .0054162 (independent check)."""
    sag, _ = continuous(2, 2)
    assert 1 / sag.sag[0, 0, 0] == printed(185, 0.5)
    assert sag.sag[0, 0, 0] == printed(0.0054162, 1e-7)
    assert sag.at[0, 0, 0] == printed(0.4215, 1e-4)


def test_three_spans_loaded():
    sag, reactions = continuous(3, 3)
    assert sag.sag[0, 0, 0] == printed(0.0069, 5e-5)
    assert sag.at[0, 0, 0] == printed(0.446, 5e-4)
    assert_allclose(reactions, [0.4, 1.1, 1.1, 0.4], rtol=1e-13)  # exact, rounding only


def test_two_of_three_spans_loaded():
    sag, reactions = continuous(3, 2)
    assert sag.sag[0, 0, 0] == printed(0.0059, 5e-5)
    assert sag.at[0, 0, 0] == printed(0.430, 5e-4)
    assert_allclose(reactions, [0.383, 1.2, 0.45, -0.033], rtol=0, atol=5e-4)  # half the last digit
