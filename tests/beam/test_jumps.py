"""Jumps: stations that need a side."""

import numpy as np
import pytest

from fieldfit.beam import Bend, Couple, Force, Spread, Support, Zone, jumps, loads, member

BEAM = member(
    length=10.0,
    EI=1.0,
    supports=[Support(0.0, fixity=1.0), Support(6.0, fixity=0.2), Support(8.0), Support(10.0)],
    hinges=[4.0],
    zones=[Zone(1.0, 2.0, 1.0)],
)
ACTING = loads(
    BEAM,
    forces=[Force(3.0, -1.0)],
    couples=[Couple(5.0, 1.0), Couple(10.0, 1.0, 1)],
    spreads=[Spread(6.5, 7.5, -1.0)],
    bends=[Bend(8.5, 9.0, 0.1, 1)],
)


@pytest.mark.parametrize(
    ("at", "curvature", "rotation"),
    [
        (0.0, False, False),  # the ends are read from inside
        (10.0, False, False),
        (1.0, True, False),  # edges of a zone, of equal EI too
        (2.0, True, False),
        (3.0, False, False),  # a force kinks the moment, it does not jump
        (4.0, False, True),  # a hinge
        (5.0, True, False),  # a couple
        (6.0, True, False),  # a restrained support
        (7.5, False, False),
        (8.0, False, False),  # a support free to turn
        (8.5, True, False),  # imposed curvature, of any case
        (9.0, True, False),
        (9.0 + 5e-9, True, False),  # a hair aside is still there
        (9.0 + 5e-8, False, False),
        (np.nan, False, False),
    ],
)
def test_where_readings_need_a_side(at, curvature, rotation):
    found = jumps(BEAM, ACTING, np.array([[at]]))
    assert (found.curvature.item(), found.rotation.item()) == (curvature, rotation)


def test_what_a_member_of_a_stack_lacks_is_nowhere():
    plain = member(length=10.0, EI=1.0)
    found = jumps(plain, loads(plain), np.array([[0.0, 5.0, np.nan]]))
    assert not found.curvature.any()
    assert not found.rotation.any()
