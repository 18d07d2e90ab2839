"""The two moment-area theorems, held against the deflections and rotations of the same beams."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from fieldfit.beam import Couple, Force, Support, area, loads, member, respond, tangential_deviation
from tests.outside.random_beams import GRID, as_fieldfit, beams


@settings(max_examples=60, deadline=None)
@given(beam=beams(hinges=False), places=st.tuples(st.integers(0, GRID), st.integers(0, GRID)))
def test_random_beams(beam, places):
    """Area = phi(end) - phi(start); deviation = y(of) - y(t) - phi(t)(of - t), either way along the beam."""
    one, acting = as_fieldfit(beam)
    start, end = (np.array([[beam.length * place / GRID]]) for place in places)
    here, there = (respond(one, acting, at) for at in (start, end))
    turned = area(one, acting, start, end)
    assert_allclose(turned, there.rotation - here.rotation, rtol=0, atol=1e-12)  # rotations of about .01, rounded
    deviation = there.deflection - here.deflection - here.rotation * (end - start)
    assert_allclose(tangential_deviation(one, acting, end, start), deviation, rtol=0, atol=1e-12 * beam.length)


def test_propped_cantilever_by_hand():
    """Clamp, prop at 1, load of one at 1/2: the prop lies on the tangent of the clamp, its rotation 1/32 is the area
    between the two, and the place of the load hangs 7/768 below that tangent (standard table).
    """
    one = member(length=1.0, EI=1.0, supports=[Support(0.0, fixity=1.0), Support(1.0)])
    acting = loads(one, forces=[Force(0.5, -1.0)])
    clamp, middle, prop = (np.array([[at]]) for at in (0.0, 0.5, 1.0))
    assert_allclose(tangential_deviation(one, acting, prop, clamp).item(), 0.0, rtol=0, atol=1e-16)
    assert_allclose(area(one, acting, clamp, prop).item(), 1 / 32, rtol=1e-13)
    assert_allclose(tangential_deviation(one, acting, middle, clamp).item(), -7 / 768, rtol=1e-13)


def test_cases_and_station_pairs_are_kept_apart():
    """A cantilever of one under a couple of one at the tip, and of two: area x, deviation x2/2 from the clamp."""
    one = member(length=1.0, EI=1.0, supports=[Support(0.0, fixity=1.0)])
    acting = loads(one, couples=[Couple(1.0, 1.0), Couple(1.0, 2.0, 1)])
    start, end = np.array([[0.0, 0.2]]), np.array([[1.0, 0.6]])
    assert_allclose(area(one, acting, start, end), [[[1.0, 0.4], [2.0, 0.8]]], rtol=1e-13)
    assert_allclose(tangential_deviation(one, acting, end, start), [[[0.5, 0.08], [1.0, 0.16]]], rtol=1e-13)


def test_neither_a_hinge_nor_shear_is_area():
    fixed = Support(0.0, fixity=1.0)
    plain = member(length=2.0, EI=1.0, supports=[fixed, Support(2.0)], hinges=[1.0])
    soft = member(length=2.0, EI=1.0, GA=3.0, supports=[fixed, Support(2.0)], hinges=[1.0])
    start, end = np.array([[0.0]]), np.array([[1.5]])
    for one in (plain, soft):
        acting = loads(one, forces=[Force(1.0, -1.0)])
        assert_allclose(area(one, acting, start, end).item(), -1 / 2, rtol=1e-13)  # a tip load on a cantilever of one
        # its centroid is 1/3 from the clamp: 1/2 (3/2 - 1/3)
        assert_allclose(tangential_deviation(one, acting, end, start).item(), -7 / 12, rtol=1e-13)


@pytest.mark.parametrize("place", [0.0, 0.3, 1.0])
def test_a_station_has_no_area_to_itself(place):
    one = member(length=1.0, EI=1.0)
    acting = loads(one, forces=[Force(0.5, -1.0)])
    at = np.array([[place]])
    assert area(one, acting, at, at).item() == tangential_deviation(one, acting, at, at).item() == 0.0
