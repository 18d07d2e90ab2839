"""Equal rotational springs at both ends under uniform load: the closed-form table.

With k L/EI the stiffness of the springs, r = 1/(1 + 3EI/kL) (Monforton and Wu, 1963), the end moment is
(wL2/12) 3r/(2 + r) and the deflection at midspan (5wL4/384EI) (1 - 0.8/(1 + 2EI/kL)). The rows were derived from these
by hand, independently of the package; the limits named are of EN 1993-1-8, 5.2.2.5, and of AISC 360, commentary
B3.4 (both from memory).
"""

import numpy as np
import pytest

from fieldfit.beam import Spread, Support, loads, member, respond
from tests.outside.printed import printed

# k L/EI: r, end moment over that of fixed ends, midspan deflection over that of a simple span, v(L/4)/v(L/2)
TABLE = {
    0.0: (0.000, 0.000, 1.000, 0.7125),  # pin
    0.5: (0.143, 0.200, 0.840, 0.7054),  # EN: nominally pinned
    2.0: (0.400, 0.500, 0.600, 0.6875),  # AISC: simple
    8.0: (0.727, 0.800, 0.360, 0.6458),  # EN: rigid, braced frames
    20.0: (0.870, 0.909, 0.273, 0.6125),  # AISC: fully restrained
    25.0: (0.893, 0.926, 0.259, 0.6054),  # EN: rigid, other frames
    np.inf: (1.000, 1.000, 0.200, 0.5625),  # fixed
}


def restrained(length: float, EI: float, spring: float, intensity: float):
    """Response at the left end, the quarter and the middle."""
    fixity = spring / (spring + 3 * EI / length) if np.isfinite(spring) else 1.0
    one = member(length=length, EI=EI, supports=[Support(0.0, fixity=fixity), Support(length, fixity=fixity)])
    acting = loads(one, spreads=[Spread(0.0, length, -intensity)])
    return fixity, respond(one, acting, length * np.array([[0.0, 0.25, 0.5]]))


@pytest.mark.parametrize("stiffness", TABLE)
def test_closed_form_fixity_table(stiffness):
    fixity, found = restrained(1.0, 1.0, stiffness, 1.0)
    moment = -12 * found.moment[0, 0, 0]
    quarter, middle = -found.deflection[0, 0, 1:]
    row = fixity, moment, middle * 384 / 5, quarter / middle
    # Half a unit of the last digit; .6875 and .5625 are exact.
    assert row == tuple(
        printed(value, last) for value, last in zip(TABLE[stiffness], (5e-4, 5e-4, 5e-4, 5e-5), strict=True)
    )


def test_example_of_stiffness_mistaken():
    """Example N1: 6 m, 10 kN/m, 20,000 kN m2; springs of 8000 kN m/rad make it look 1.774 times too stiff."""
    simple, sprung = (-restrained(6.0, 2e7, spring, 1e4)[1].deflection[0, 0, 2] for spring in (0.0, 8e6))
    assert simple * 1e3 == printed(8.4375, 5e-5)
    assert sprung * 1e3 == printed(4.756, 5e-4)
    assert simple / sprung == printed(1.774, 5e-4)
