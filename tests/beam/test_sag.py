"""The largest sag of every span: closed forms, and random beams looked at closely."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from fieldfit.beam import (
    Couple,
    Force,
    Movement,
    Spread,
    Stiffness,
    Support,
    largest_sag,
    loads,
    member,
    recorded,
    respond,
    stack,
    stack_loads,
)
from tests.beam.unlike import unlike


def test_point_load_off_the_middle():
    """P b (l2 - b2)**1.5 / (9 sqrt(3) l EI) at sqrt((l2 - b2)/3) from the farther support (standard table)."""
    one = member(length=1.0, EI=1.0)
    found = largest_sag(one, loads(one, forces=[Force(0.7, -1.0)]))
    assert_allclose(found.sag.item(), 0.3 * 0.91**1.5 / (9 * np.sqrt(3)), rtol=1e-12)
    assert_allclose(found.at.item(), np.sqrt(0.91 / 3), rtol=0, atol=1e-6)  # as promised: the curve is flat there


def test_overhangs_are_measured_from_the_level_of_their_support():
    """Supports at 1 and 3, loads of one at both tips: both ends hang, the span between rises by M l2/8 = 1/2."""
    one = member(length=4.0, EI=1.0, supports=[Support(1.0), Support(3.0)])
    found = largest_sag(one, loads(one, forces=[Force(0.0, -1.0), Force(4.0, -1.0)]))
    assert_array_equal(found.overhang, [[True, False, True]])
    assert_array_equal(found.start, [[0.0, 1.0, 3.0]])
    assert_array_equal(found.end, [[1.0, 3.0, 4.0]])
    assert_allclose(found.sag[0, 0], [4 / 3, -1 / 2, 4 / 3], rtol=1e-12)  # 1/3 + the tangent's 1
    assert_allclose(found.at[0, 0], [0.0, 2.0, 4.0], rtol=0, atol=1e-6)


@pytest.mark.parametrize("sense", [1.0, -1.0])
def test_a_couple_bends_a_span_both_ways(sense):
    """At x = sqrt(c/3) l from each end M l2 c**1.5 / (9 sqrt(3) EI), c = 6a/l - 3(a/l)**2 - 2 (standard table).

    For a = 0.55 l from the left c is 0.3925, from the right, at 0.45 l, 0.0925. Anticlockwise, the left goes down.
    """
    one = member(length=1.0, EI=1.0)
    found = largest_sag(one, loads(one, couples=[Couple(0.55, sense)]))
    left, right = (c**1.5 / (9 * np.sqrt(3)) for c in (0.3925, 0.0925))
    down, up = (left, right) if sense > 0 else (right, left)
    assert_allclose([found.down.item(), found.up.item()], [down, up], rtol=1e-10)
    places = [np.sqrt(0.3925 / 3), 1 - np.sqrt(0.0925 / 3)]
    assert_allclose([found.down_at.item(), found.up_at.item()], places[:: int(sense)], rtol=0, atol=1e-6)
    assert_allclose(found.sag.item(), sense * left, rtol=1e-10)
    assert_allclose(found.at.item(), places[0], rtol=0, atol=1e-6)


def test_a_span_that_only_sags_does_not_rise():
    one = member(length=1.0, EI=1.0)
    assert largest_sag(one, loads(one, forces=[Force(0.7, -1.0)])).up.item() == 0.0


def test_settlement_alone_is_no_sag():
    one = member(length=4.0, EI=1.0, supports=[Support(0.0), Support(4.0)])
    acting = loads(one, movements=[Movement(0, -0.1), Movement(1, 0.4)], forces=[Force(2.0, -1.0, 1)])
    assert_allclose(largest_sag(one, acting).sag[0, :, 0], [0.0, 4 / 3], rtol=1e-12, atol=1e-16)


def test_a_hinge_is_where_a_hung_span_sags_most():
    one = member(length=2.0, EI=1.0, supports=[Support(0.0, fixity=1.0), Support(2.0)], hinges=[1.0])
    found = largest_sag(one, loads(one, forces=[Force(1.0, -1.0)]))
    assert_allclose([found.sag.item(), found.at.item()], [1 / 3, 1.0], rtol=1e-12)


def test_supports_that_hold_nothing_end_no_span():
    free = Support(2.0, flexibility=np.inf)
    one = member(length=4.0, EI=1.0, supports=[Support(0.0), free, Support(4.0)])
    found = largest_sag(one, loads(one, spreads=[Spread(0.0, 4.0, -1.0)]))
    assert_array_equal([found.start, found.end], [[[0.0]], [[4.0]]])


def test_another_stiffness_than_recorded():
    one = member(length=1.0, EI=1.0)
    acting = loads(one, spreads=[Spread(0.0, 1.0, -1.0)])
    half = Stiffness(np.array([[0.5]]), *recorded(one)[1:])
    assert_allclose(largest_sag(one, acting, half).sag.item(), 5 / 192, rtol=1e-12)


@pytest.mark.parametrize("seed", range(30))
def test_no_place_sags_more_than_the_largest(seed):
    """Unlike beams looked at in 4000 places a span, and where the largest is said to be."""
    one, acting, _ = unlike(seed)
    found = largest_sag(one, acting)
    held = np.sort(one.support_at[0])
    noise = 1e-14 * one.length.item()
    for span, (start, end) in enumerate(zip(found.start[0], found.end[0], strict=True)):
        ends = np.array([start, end]) if not found.overhang[0, span] else held[[0, 0] if end <= held[0] else [-1, -1]]
        x = np.concatenate([found.at[0, :, span], np.linspace(start, end, 4001)])
        deflection = respond(one, acting, np.concatenate([x, ends])[None]).deflection[0]
        chord = deflection[:, -2:-1] + (deflection[:, -1:] - deflection[:, -2:-1]) * (x - start) / (end - start)
        deviation = chord - deflection[:, :-2]
        sag = found.sag[0, :, span]
        assert_allclose(np.diagonal(deviation), sag, rtol=1e-12, atol=noise)
        # as promised, good to 1e-10 of itself
        assert (np.abs(deviation).max(axis=1) <= np.abs(sag) * (1 + 1e-10) + noise).all()
        for way, largest, at in ((1, found.down, found.down_at), (-1, found.up, found.up_at)):
            assert ((way * deviation).max(axis=1) <= largest[0, :, span] * (1 + 1e-10) + noise).all()
            there = respond(one, acting, np.concatenate([at[0, :, span], ends])[None]).deflection[0]
            tilt = (there[:, -1] - there[:, -2]) / (end - start)
            own = there[:, -2] + tilt * (at[0, :, span] - start) - np.diagonal(there)
            assert_allclose(way * own, largest[0, :, span], rtol=1e-12, atol=noise)


def test_a_stack_sags_like_its_members():
    several, acting, _ = zip(*(unlike(seed) for seed in range(8)), strict=True)
    together = largest_sag(stack(several), stack_loads(acting))
    for row, (one, own) in enumerate(zip(several, acting, strict=True)):
        alone = largest_sag(one, own).sag[0]
        joint = together.sag[row, : len(alone), : alone.shape[1]]
        # Sizes, because a span that sags just as much as it rises (a clamped one that settles) may say either.
        assert_allclose(np.abs(joint), np.abs(alone), rtol=1e-10, atol=1e-14)  # rounding of places, on a flat curve
        assert np.isnan(together.sag[row, :, alone.shape[1] :]).all()
