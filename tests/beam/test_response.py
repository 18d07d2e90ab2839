"""What loaded members do: closed forms, stacks, jumps, refusals, and invariants of random beams."""

import itertools
from dataclasses import fields, replace
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose

from fieldfit.beam import (
    Bend,
    Couple,
    Force,
    Loads,
    Movement,
    Response,
    Spread,
    Support,
    Zone,
    combine,
    loads,
    member,
    respond,
    response,
    side_by_side,
    stack,
    stack_loads,
)
from fieldfit.errors import ModelError
from tests.beam.unlike import unlike
from tests.outside import hermite
from tests.outside.random_beams import GRID, as_fieldfit, beams

FIELDS = [field.name for field in fields(Response)]
FIXED = Support(0.0, fixity=1.0)
SOFT = [Support(0.0, flexibility=1e30), Support(4.0, flexibility=1e30)]

# Invariants hold to rounding, but random beams on soft springs lose a few digits to cancellation of large movements.
CLOSE = 1e-10


def assert_same(found, expected, name, *, close=CLOSE, least=0.0):
    """Agreement to a share of the largest value, or of what would count (``least``) where next to nothing happens."""
    assert_allclose(found, expected, rtol=0, atol=close * max(np.nanmax(np.abs(expected)), least), err_msg=name)


def counts(beam):
    """What counts as something, in each field: about what one of the heavier loads of a random beam does."""
    return sizes(beam.length, beam.EI)


def sizes(length, EI):
    held = 1e-2 * EI / length
    return dict(
        zip(FIELDS, (1e-2 * length, 1e-2, 1e-2, 1e-2 / length, held, held / length, held / length, held), strict=True)
    )


# Closed forms


def exact_spans(count):
    """Equal spans under uniform load, all of one: moments at the supports, reactions, deflections at midspan.

    The three-moment equation (Clapeyron) in exact fractions, M(i-1) + 4M(i) + M(i+1) = -1/2.
    """
    diagonal, right = [Fraction(4)], [Fraction(-1, 2)]
    for _ in range(count - 2):
        share = 1 / diagonal[-1]
        diagonal.append(4 - share)
        right.append(Fraction(-1, 2) - share * right[-1])
    moments = [Fraction(0)]
    for pivot, load in zip(reversed(diagonal), reversed(right), strict=True):
        moments.insert(0, (load - moments[0]) / pivot)
    moments.insert(0, Fraction(0))
    half = Fraction(1, 2)
    shear = [half + after - before for before, after in itertools.pairwise(moments)]
    reactions = [
        shear[0],
        *(after - before + 1 for before, after in itertools.pairwise(shear)),
        1 - shear[-1],
    ]
    middles = [-Fraction(5, 384) - (a + b) / 16 for a, b in itertools.pairwise(moments)]
    return [np.array(values, dtype=float) for values in (moments, reactions, middles)]


@pytest.mark.parametrize(
    ("spans", "close"), [(2, 1e-14), (5, 1e-14), (10, 1e-14), (20, 2e-14), (40, 5e-14), (80, 1e-13)]
)
def test_equal_spans_against_exact_fractions(spans, close):
    """The goal is 1e-10 up to ten spans; the tolerances are what the docstring of ``respond`` claims, doubled."""
    moments, reactions, middles = exact_spans(spans)
    one = member(length=float(spans), EI=1.0, supports=[Support(float(at)) for at in range(spans + 1)])
    at = np.concatenate([np.arange(spans + 1), np.arange(spans) + 0.5])[None]
    found = respond(one, loads(one, spreads=[Spread(0.0, float(spans), -1.0)]), at)
    assert_same(found.moment[0, 0, : spans + 1], moments, "moment", close=close)
    assert_same(found.reaction[0, 0], reactions, "reaction", close=close)
    assert_same(found.deflection[0, 0, spans + 1 :], middles, "deflection", close=close)


def test_shear_flexibility_shares_the_load_of_a_propped_cantilever():
    """(wl4/8EI + wl2/2GA) / (l3/3EI + l/GA), all of one: (1/8 + 1/2) / (1/3 + 1) = 15/32."""
    one = member(length=1.0, EI=1.0, GA=1.0, supports=[FIXED, Support(1.0)])
    found = respond(one, loads(one, spreads=[Spread(0.0, 1.0, -1.0)]), np.array([[1.0]]))
    assert_allclose(found.reaction[0, 0], [17 / 32, 15 / 32], rtol=1e-13)  # rounding


def test_a_zone_has_its_own_shear_flexibility():
    """A tip load on a cantilever of two halves, GA 2 and 1: 1/3 + 1/2 (1/2 + 1) = 13/12."""
    one = member(length=1.0, EI=1.0, GA=1.0, supports=[FIXED], zones=[Zone(0.0, 0.5, 1.0, GA=2.0)])
    found = respond(one, loads(one, forces=[Force(1.0, -1.0)]), np.array([[0.25, 0.75, 1.0]]))
    assert_allclose(-found.deflection[0, 0, 2], 13 / 12, rtol=1e-13)  # rounding
    assert_allclose((found.rotation - found.slope)[0, 0], [0.5, 1.0, 1.0], rtol=1e-13)


def test_strain_is_tension_below_a_sagging_axis():
    one = member(length=4.0, EI=100.0)
    found = respond(one, loads(one, forces=[Force(2.0, -5.0)]), np.array([[2.0, 2.0]]))
    # Pl/4 = 5, over EI = .05, times .1 below and above
    assert_allclose(found.strain(np.array([0.1, -0.1]))[0, 0], [0.005, -0.005], rtol=1e-13)


def test_a_hinge_turns_freely_and_carries_no_moment():
    """Fixed left, hinge at the middle, support right, load of one on the left of the hinge: the tip of a cantilever."""
    one = member(length=2.0, EI=1.0, supports=[FIXED, Support(2.0)], hinges=[1.0])
    at = np.array([[1.0, 1.0]])
    found = respond(one, loads(one, forces=[Force(1.0, -1.0)]), at, left=np.array([[True, False]]))
    assert_allclose(found.deflection[0, 0], [-1 / 3, -1 / 3], rtol=1e-13)
    assert_allclose(found.rotation[0, 0], [-1 / 2, 1 / 3], rtol=1e-13)
    assert_allclose(found.moment[0, 0], [0, 0], rtol=0, atol=1e-15)


# Sides of jumps, ends, padding


def test_a_station_on_a_jump_is_read_right_of_it_or_left():
    one = member(length=4.0, EI=10.0)
    acting = loads(one, forces=[Force(1.0, -4.0)], couples=[Couple(3.0, 8.0)])
    at, left = np.array([[1.0, 1.0, 3.0, 3.0]]), np.array([[True, False, True, False]])
    found = respond(one, acting, at, left)
    # Reactions 3 + 2 and 1 - 2: the couple lifts the left end's by 8/4.
    assert_allclose(found.shear[0, 0], [5, 1, 1, 1], rtol=1e-13)
    assert_allclose(found.moment[0, 0], [5, 5, 7, -1], rtol=1e-13)


def test_the_ends_are_read_from_inside():
    one = member(length=4.0, EI=10.0)
    found = respond(one, loads(one, forces=[Force(2.0, -4.0)], couples=[Couple(4.0, 2.0)]), np.array([[0.0, 4.0]]))
    assert_allclose(found.shear[0, 0], [2.5, -1.5], rtol=1e-13)
    assert_allclose(found.moment[0, 0], [0.0, 2.0], rtol=0, atol=1e-14)


def test_blank_stations_and_missing_supports_stay_blank():
    two, three = (member(length=4.0, EI=1.0, supports=[Support(x) for x in at]) for at in ((0, 4), (0, 2, 4)))
    acting = stack_loads([loads(two, forces=[Force(1.0, -1.0)]), loads(three, forces=[Force(1.0, -1.0)])])
    found = respond(stack([two, three]), acting, np.array([[1.0, np.nan], [1.0, 3.0]]))
    assert np.isnan(found.deflection[:, 0]).tolist() == [[False, True], [False, False]]
    assert np.isnan(found.reaction[:, 0]).tolist() == [[False, False, True], [False, False, False]]


@pytest.mark.parametrize("station", [-1e-3, 4.001])
def test_a_station_off_the_beam_is_refused(station):
    one = member("G7", length=4.0, EI=1.0)
    with pytest.raises(ModelError, match=r"'G7'.*station lies off the beam"):
        respond(one, loads(one), np.array([[station]]))


# Uplift, refusals


def test_uplift_is_told_of_the_support_that_holds_down():
    one = member(length=2.0, EI=1.0, supports=[Support(0.0), Support(1.0), Support(2.0)])
    acting = loads(one, forces=[Force(0.5, -1.0), Force(0.5, -1.0, 1), Force(1.5, -1.0, 1)])
    found = respond(one, acting, np.array([[0.5]]))
    assert found.uplift[0].tolist() == [[False, False, True], [False, False, False]]
    assert_allclose(found.reaction[0, 0], [13 / 32, 22 / 32, -3 / 32], rtol=1e-13)  # Clapeyron


@pytest.mark.parametrize("middle", [0.3, 0.7, 1.3])
def test_rounding_is_not_uplift(middle):
    """A load right over a support: the others carry nothing, or by rounding less than nothing."""
    one = member(length=2.1, EI=1.0, supports=[Support(0.0), Support(middle), Support(2.1)])
    found = respond(one, loads(one, forces=[Force(middle, -1.0)]), np.array([[0.1]]))
    assert_allclose(found.reaction[0, 0], [0, 1, 0], rtol=1e-13, atol=1e-14)
    assert not found.uplift.any()


def test_supports_too_soft_to_hold_anything_are_refused_by_name():
    sound, afloat = member("sound", length=4.0, EI=1.0), member("afloat", length=4.0, EI=1.0, supports=SOFT)
    three = stack([sound, afloat, sound])
    with pytest.raises(ModelError, match=r"'afloat'.*a support so soft that it holds nothing"):
        respond(three, stack_loads([loads(sound)] * 3), np.ones((3, 1)))


def test_a_rigid_zone_over_supports_it_does_not_need_is_refused_by_name():
    supports = [Support(x) for x in (0.0, 1.0, 2.0, 4.0)]
    sound = member("sound", length=4.0, EI=1.0, supports=supports, zones=[Zone(0.0, 1.0, np.inf)])
    stiff = member("stiff", length=4.0, EI=1.0, supports=supports, zones=[Zone(0.0, 2.5, np.inf)])
    with pytest.raises(ModelError, match=r"'stiff'.*rigid zone"):
        respond(stack([sound, stiff, sound]), stack_loads([loads(m) for m in (sound, stiff, sound)]), np.ones((3, 1)))


def test_a_rigid_zone_over_two_supports_is_solved():
    """It turns the rest into a cantilever: tip load at 2 beyond the zone, 8/3."""
    one = member(length=4.0, EI=1.0, supports=[Support(0.0), Support(2.0)], zones=[Zone(0.0, 2.0, np.inf)])
    found = respond(one, loads(one, forces=[Force(4.0, -1.0)]), np.array([[1.0, 4.0]]))
    assert_allclose(found.deflection[0, 0], [0, -8 / 3], rtol=1e-13, atol=1e-15)
    assert_allclose(found.curvature[0, 0, 0], 0.0, rtol=0, atol=0)


# Stacks


def test_a_thousand_unlike_members_agree_with_their_single_solves():
    several, acting, at = zip(*(unlike(seed) for seed in range(1000)), strict=True)
    together = respond(stack(several), stack_loads(acting), np.concatenate(at))
    for row, (one, own, stations) in enumerate(zip(several, acting, at, strict=True)):
        alone = respond(one, own, stations)
        for name, least in sizes(one.length.item(), one.EI.item()).items():
            single = getattr(alone, name)[0]
            joint = getattr(together, name)[row][: len(single), ..., : single.shape[-1]]
            # Where a load does next to nothing, as at a free end, beside what such loads do elsewhere.
            assert_same(joint, single, f"{name} of {one.name[0]}", close=1e-12, least=least)


def test_a_member_taken_from_a_stack_is_itself_again():
    several, acting, at = zip(*(unlike(seed) for seed in range(8)), strict=True)
    members, joint = stack(several), stack_loads(acting)
    for row, (one, own, stations) in enumerate(zip(several, acting, at, strict=True)):
        taken = respond(members.take(row), joint.take(row, one.support_at.shape[1]), stations)
        for name in FIELDS:
            expected = getattr(respond(one, own, stations), name)
            np.testing.assert_array_equal(getattr(taken, name)[:, : expected.shape[1]], expected)


# Invariants of random beams

AT = np.array([1, 4, 7, 15, 24, 29, 35, 41, 47]) / GRID
some = settings(max_examples=60, deadline=None)


@some
@given(beam=beams(), factors=st.tuples(st.integers(-3, 3), st.integers(-3, 3)))
def test_superposition(beam, factors):
    """Forces and imposed curvature as one case, everything else as another: each part of the sum acts by itself."""
    first = replace(beam, couples=(), spreads=(), supports=[replace(s, up=0.0) for s in beam.supports])
    second = replace(beam, forces=(), bends=())
    one, some_loads = as_fieldfit(first)
    apart = side_by_side([some_loads, as_fieldfit(second)[1]])
    stations = beam.length * AT[None]
    parts = respond(one, apart, stations)
    together = respond(one, combine(apart, np.array([[factors]], dtype=float)), stations)
    for name, least in counts(beam).items():
        expected = np.tensordot(factors, getattr(parts, name)[0], axes=1)
        assert_same(getattr(together, name)[0, 0], expected, name, least=least)


@some
@given(beam=beams(loaded=False), places=st.tuples(st.integers(0, GRID), st.integers(0, GRID)))
def test_reciprocity(beam, places):
    """Maxwell and Betti: a force here and a couple there work as much on each other's movements."""
    one, _ = as_fieldfit(beam)
    here, there = (beam.length * place / GRID for place in places)
    if there in beam.hinges:
        there += beam.length / (3 * GRID)
    load = beam.EI / beam.length**2
    by_force = loads(one, forces=[Force(here, load), Force(there, load, 1)])
    by_couple = loads(one, couples=[Couple(there, load * beam.length)])
    moved = respond(one, by_force, np.array([[here, there]]))
    turned = respond(one, by_couple, np.array([[here]])).deflection.item()
    assert_same(moved.deflection[0, 0, 1], moved.deflection[0, 1, 0], "force", least=beam.length)
    assert_same(moved.rotation[0, 0, 1] * beam.length, turned, "couple", least=beam.length)


def mirrored(beam):
    """The beam and its loads seen from behind."""

    def back(thing, **other):
        return replace(thing, start=beam.length - thing.end, end=beam.length - thing.start, **other)

    def tail(end, start):
        return start if end is None else end

    return replace(
        beam,
        supports=[replace(s, at=beam.length - s.at) for s in beam.supports],
        hinges=[beam.length - at for at in beam.hinges],
        zones=[back(z, EI=tail(z.EI_end, z.EI), EI_end=z.EI) for z in beam.zones],
        forces=[replace(f, at=beam.length - f.at) for f in beam.forces],
        couples=[replace(c, at=beam.length - c.at, anticlockwise=-c.anticlockwise) for c in beam.couples],
        spreads=[back(s, up=tail(s.up_end, s.up), up_end=s.up) for s in beam.spreads],
        bends=[back(b) for b in beam.bends],
    )


@some
@given(beam=beams())
def test_mirror_symmetry(beam):
    at = beam.length * np.arange(GRID + 1)[None] / GRID
    here = respond(*as_fieldfit(beam), at)
    there = respond(*as_fieldfit(mirrored(beam)), beam.length - at, left=np.ones(at.shape, dtype=bool))
    for name, least in counts(beam).items():
        sign = -1.0 if name in {"rotation", "slope", "shear", "restraint"} else 1.0
        assert_same(getattr(there, name), sign * getattr(here, name), name, least=least)


@some
@given(beam=beams(), share=st.integers(1, 3))
def test_splitting_zones_and_spread_loads_changes_nothing(beam, share):
    def parts(thing, first, last):
        end = first if last is None else last
        cut, between = thing.start + share / 4 * (thing.end - thing.start), first + share / 4 * (end - first)
        return (thing.start, cut, first, between), (cut, thing.end, between, end)

    whole = beam
    beam = replace(
        beam,
        zones=[hermite.Zone(*part) for z in beam.zones for part in parts(z, z.EI, z.EI_end)],
        spreads=[hermite.Spread(*part) for s in beam.spreads for part in parts(s, s.up, s.up_end)],
    )
    at = beam.length * AT[None]
    expected, found = respond(*as_fieldfit(whole), at), respond(*as_fieldfit(beam), at)
    for name, least in counts(beam).items():
        assert_same(getattr(found, name), getattr(expected, name), name, least=least)


@some
@given(beam=beams(), beyond=st.sampled_from([0.01, 0.3, 2.0]))
def test_an_unloaded_overhang_changes_nothing(beam, beyond):
    at = beam.length * AT[None]
    longer = replace(beam, length=beam.length * (1 + beyond))
    expected, found = respond(*as_fieldfit(beam), at), respond(*as_fieldfit(longer), at)
    for name, least in counts(beam).items():
        assert_same(getattr(found, name), getattr(expected, name), name, least=least)


@some
@given(beam=beams())
def test_reactions_balance_the_loads(beam):
    found = respond(*as_fieldfit(beam), np.array([[0.0]]))
    at = np.array([support.at for support in beam.supports])
    up, turn = found.reaction[0, 0].sum(), found.reaction[0, 0] @ at - found.restraint[0, 0].sum()
    up += sum(force.up for force in beam.forces)
    turn += sum(force.up * force.at for force in beam.forces) + sum(c.anticlockwise for c in beam.couples)
    for s in beam.spreads:
        run = s.end - s.start
        up += run * (s.up + s.up_end) / 2
        turn += run * (s.up * (2 * s.start + s.end) + s.up_end * (s.start + 2 * s.end)) / 6
    least = counts(beam)["moment"]
    scale = max(np.abs(found.reaction).max() * beam.length, np.abs(found.restraint).max(), least)
    assert_allclose([up * beam.length, turn], 0, rtol=0, atol=CLOSE * scale)


@pytest.mark.parametrize("seed", range(40))
def test_slope_shear_and_curvature_are_the_derivatives_they_are_named_for(seed):
    """Central differences over a ten-thousandth of the length; stations near a jump are left out."""
    one, acting, _ = unlike(seed)
    length = one.length.item()
    step = 1e-4 * length
    jumps = [one.support_at, one.hinge_at, one.zone_from, one.zone_to, acting.force_at, acting.couple_at]
    jumps += [acting.spread_from, acting.spread_to, acting.bend_from, acting.bend_to]
    at = length * np.linspace(0.03, 0.97, 30)
    at = at[(np.abs(at[:, None] - np.concatenate(jumps, axis=1)) > 2 * step).all(axis=1)]
    before, here, after = (respond(one, acting, at[None] + shift) for shift in (-step, 0.0, step))
    imposed = {"deflection": "slope", "rotation": "curvature", "moment": "shear"}
    for name, derivative in imposed.items():
        found = (getattr(after, name) - getattr(before, name)) / (2 * step)
        assert_same(found, getattr(here, derivative), derivative, close=1e-5)  # zones taper steeply


def test_free_temperature_curvature_leaves_a_simple_span_without_moment():
    one = member(length=5.0, EI=10.0, GA=40.0, zones=[Zone(1.0, 2.0, 30.0, 5.0)])
    found = respond(one, loads(one, bends=[Bend(0.0, 5.0, 0.02)]), np.array([[0.0, 1.5, 2.5, 5.0]]))
    assert_allclose(found.moment, 0.0, rtol=0, atol=1e-14)
    assert_allclose(found.curvature, 0.02, rtol=1e-13)
    assert_allclose(found.deflection[0, 0, 2], -0.02 * 5.0**2 / 8, rtol=1e-13)


def test_held_temperature_curvature_bends_a_clamped_beam_nowhere():
    one = member(length=5.0, EI=10.0, supports=[FIXED, Support(5.0, fixity=1.0)])
    found = respond(one, loads(one, bends=[Bend(0.0, 5.0, 0.02)]), np.array([[2.0]]))
    assert_allclose(found.moment.item(), -0.2, rtol=1e-13)
    assert_allclose([found.curvature.item(), found.deflection.item()], 0.0, rtol=0, atol=1e-15)


def test_a_movement_belongs_to_its_case():
    one = member(length=2.0, EI=1.0)
    found = respond(one, loads(one, movements=[Movement(1, 0.01, 1)]), np.array([[1.0]]))
    assert_allclose(found.deflection[0, :, 0], [0.0, 0.005], rtol=1e-13, atol=1e-17)


def test_no_loads_no_response():
    one = member(length=2.0, EI=1.0)
    nothing: Loads = loads(one)
    assert respond(one, nothing, np.array([[1.0]])).deflection.item() == 0.0


def test_more_members_than_a_block_are_solved_block_by_block(monkeypatch):
    several, acting, at = zip(*(unlike(seed) for seed in range(8)), strict=True)
    members, joint, stations = stack(several), stack_loads(acting), np.concatenate(at)
    left = np.arange(stations.size).reshape(stations.shape) % 2 == 0
    together = respond(members, joint, stations, left)
    monkeypatch.setattr(response, "BLOCK", 3)
    for name in FIELDS:
        parts = getattr(respond(members, joint, stations, left), name)
        assert_same(parts, getattr(together, name), name, close=1e-12)  # rounding


def test_a_faulty_member_of_a_later_block_is_named(monkeypatch):
    monkeypatch.setattr(response, "BLOCK", 2)
    sound, loose = member("sound", length=4.0, EI=1.0), member("loose", length=4.0, EI=1.0, supports=[Support(1.0)])
    four = stack([sound, sound, sound, loose])
    with pytest.raises(ModelError, match="'loose'"):
        respond(four, stack_loads([loads(four.take(row)) for row in range(4)]), np.ones((4, 1)))
