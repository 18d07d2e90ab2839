"""Load cases: moved, combined, put side by side and stacked."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from fieldfit.beam import (
    Bend,
    Couple,
    Force,
    Movement,
    Spread,
    Support,
    combine,
    loads,
    member,
    respond,
    shift,
    side_by_side,
    stack,
    stack_loads,
)
from fieldfit.errors import ModelError

ONE = member(length=10.0, EI=1000.0)
AT = np.array([[1.0, 5.0, 9.0]])
EVERYTHING = {
    "forces": [Force(2.0, -3.0), Force(4.0, -1.0, 1)],
    "spreads": [Spread(1.0, 6.0, -2.0, -4.0, 1)],
    "couples": [Couple(3.0, 2.0)],
    "bends": [Bend(0.0, 5.0, 0.01, 1)],
    "movements": [Movement(0, -0.02), Movement(1, 0.03, 1)],
}


def deflection(acting):
    return respond(ONE, acting, AT).deflection


def test_cases_are_counted_by_the_highest_number():
    assert loads(ONE).cases == 1
    assert loads(ONE, couples=[Couple(1.0, 1.0, 4)]).cases == 5
    assert loads(ONE, movements=[Movement(0, 1.0, 2)]).cases == 3


def test_movements_of_one_support_add_up():
    found = loads(ONE, movements=[Movement(0, 0.1), Movement(0, 0.2), Movement(1, 0.4, 1)])
    assert_allclose(found.support_up, [[[0.3, 0.0], [0.0, 0.4]]], rtol=1e-15)


def test_a_load_at_zero_width_does_nothing():
    assert_array_equal(deflection(loads(ONE, spreads=[Spread(3.0, 3.0, -5.0)])), np.zeros((1, 1, 3)))


@pytest.mark.parametrize(
    "rows",
    [
        {"forces": [Force(10.001, -1.0)]},
        {"forces": [Force(-0.001, -1.0)]},
        {"couples": [Couple(11.0, 1.0)]},
        {"spreads": [Spread(9.0, 10.5, -1.0)]},
        {"bends": [Bend(-1.0, 5.0, 0.01)]},
    ],
)
def test_a_load_off_the_beam_is_refused_by_name(rows):
    sound, given = loads(ONE), loads(ONE, **rows)
    two = stack([ONE, member("G7", length=10.0, EI=1000.0)])
    with pytest.raises(ModelError, match=r"'G7'.*a load lies off the beam"):
        respond(two, stack_loads([sound, given]), np.repeat(AT, 2, axis=0))


@pytest.mark.parametrize("rows", [{"spreads": [Spread(5.0, 4.0, -1.0)]}, {"bends": [Bend(5.0, 4.0, 0.01)]}])
def test_a_load_must_not_end_before_it_starts(rows):
    with pytest.raises(ModelError, match="a load must not end before it starts"):
        deflection(loads(ONE, **rows))


def test_a_load_that_rounding_puts_beyond_the_end_counts_in_full():
    cantilever = member(length=10.0, EI=1000.0, supports=[Support(0.0, fixity=1.0)])
    acting = loads(cantilever, forces=[Force(10.0 * (1 + 1e-15), -3.0)], couples=[Couple(-1e-15, 1.0)])
    found = respond(cantilever, acting, AT)
    assert_allclose([found.reaction.item(), found.restraint.item()], [3.0, -29.0], rtol=1e-12)  # rounding


class TestShift:
    def test_axles_that_leave_the_beam_count_no_more(self):
        """Three axles, 4 m apart, on a beam of 10 m."""
        axles = loads(ONE, forces=[Force(at, -1.0) for at in (0.0, 4.0, 8.0)])
        for offset, on in {-8.0: [0.0], -4.0: [0.0, 4.0], 0.0: [0.0, 4.0, 8.0], 3.0: [3.0, 7.0], 10.0: [10.0]}.items():
            moved = shift(axles, ONE, np.array([[offset]]))
            expected = loads(ONE, forces=[Force(at, -1.0) for at in on])
            assert_array_equal(deflection(moved), deflection(expected))
            assert_array_equal(moved.force_at[~np.isnan(moved.force_at)], on)

    def test_a_load_a_hair_beyond_the_end_stands_on_it(self):
        moved = shift(loads(ONE, forces=[Force(4.0, -1.0)]), ONE, np.array([[6.0 + 1e-9]]))
        assert_array_equal(moved.force_at, [[10.0]])

    @pytest.mark.parametrize(
        ("offset", "expected"),
        [
            (5.0, Spread(7.0, 10.0, -1.0, -2.5)),  # half off at the right: cut with its intensity there
            (-4.0, Spread(0.0, 2.0, -2.0, -3.0)),  # half off at the left
            (3.0, Spread(5.0, 9.0, -1.0, -3.0)),
            (8.0, None),
            (-6.0, None),
        ],
    )
    def test_a_spread_load_is_cut_at_the_ends(self, offset, expected):
        moved = shift(loads(ONE, spreads=[Spread(2.0, 6.0, -1.0, -3.0)]), ONE, np.array([[offset]]))
        kept = loads(ONE, spreads=[expected] if expected else [])
        assert_allclose(deflection(moved), deflection(kept), rtol=1e-13, atol=0)  # the cut intensity is rounded
        assert np.isnan(moved.spread_from).all() == (expected is None)

    def test_a_spread_load_of_no_width_moves_without_ado(self):
        moved = shift(loads(ONE, spreads=[Spread(3.0, 3.0, -5.0)]), ONE, np.array([[1.0]]))
        assert_array_equal(deflection(moved), np.zeros((1, 1, 3)))

    def test_couples_move_and_leave_too(self):
        couples = loads(ONE, couples=[Couple(2.0, 1.0), Couple(9.0, 1.0)])
        moved = shift(couples, ONE, np.array([[2.0]]))
        assert_array_equal(deflection(moved), deflection(loads(ONE, couples=[Couple(4.0, 1.0)])))

    def test_each_case_has_its_own_offset_and_curvature_stays(self):
        moved = shift(loads(ONE, **EVERYTHING), ONE, np.array([[1.0, 2.0]]))
        assert_array_equal(moved.force_at, [[3.0, 6.0]])
        assert_array_equal(moved.spread_from, [[3.0]])
        assert_array_equal([moved.bend_from, moved.bend_to], [[[0.0]], [[5.0]]])


def test_stages_carry_so_much_of_every_case():
    given = loads(ONE, **EVERYTHING)
    factors = np.array([[[1.0, 0.0], [0.5, -2.0], [0.0, 0.0]]])
    cases, stages = deflection(given)[0], deflection(combine(given, factors))[0]
    # rounding beside the larger of what is added
    assert_allclose(stages, factors[0] @ cases, rtol=1e-12, atol=1e-16)


def test_side_by_side_numbers_the_cases_on():
    first, second = loads(ONE, **EVERYTHING), loads(ONE, forces=[Force(7.0, -2.0)])
    both = deflection(side_by_side([first, second, first]))
    assert_allclose(
        both, np.concatenate([deflection(x) for x in (first, second, first)], axis=1), rtol=1e-12, atol=1e-16
    )


def test_a_case_that_a_member_of_a_stack_lacks_is_empty():
    two = stack([ONE, ONE])
    joint = stack_loads([loads(ONE, **EVERYTHING), loads(ONE, forces=[Force(7.0, -2.0)])])
    found = respond(two, joint, np.repeat(AT, 2, axis=0)).deflection
    assert_allclose(found[0], deflection(loads(ONE, **EVERYTHING))[0], rtol=1e-12, atol=1e-16)  # rounding
    assert_allclose(found[1, 0], deflection(loads(ONE, forces=[Force(7.0, -2.0)]))[0, 0], rtol=1e-12)
    assert_array_equal(found[1, 1], 0.0)


def test_loads_of_one_member_of_a_stack_come_out_without_padding():
    few = loads(ONE, forces=[Force(7.0, -2.0)])
    taken = stack_loads([loads(ONE, **EVERYTHING), few]).take(1, 2)
    assert_array_equal(taken.force_at, few.force_at)
    assert taken.spread_from.shape == taken.couple_at.shape == taken.bend_from.shape == (1, 0)
    assert taken.cases == 2
