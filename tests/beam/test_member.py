"""Members: what they are, what they are measured against, and what cannot be one."""

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from fieldfit.beam import Support, Zone, member, pad, stack
from fieldfit.errors import ModelError


def test_without_supports_a_member_is_simple_at_both_ends():
    one = member(length=4.0, EI=1.0)
    assert_array_equal(one.support_at, [[0.0, 4.0]])
    assert_array_equal(one.support_flexibility, [[0.0, 0.0]])
    assert_array_equal(one.support_fixity, [[0.0, 0.0]])


def test_arrays_are_copies_that_cannot_be_written():
    at = np.array([[1.0]])
    one = member(length=4.0, EI=1.0)
    with pytest.raises(ValueError, match="read-only"):
        one.length[0] = 5.0
    assert at is not one.support_at


@pytest.mark.parametrize(
    ("what", "why"),
    [
        ({"length": 0.0}, "length must be positive"),
        ({"length": np.nan}, "length must be positive"),
        ({"EI": -1.0}, "EI must be positive and finite"),
        ({"EI": np.inf}, "EI must be positive and finite"),
        ({"GA": 0.0}, "GA must be positive"),
        ({"GA": -5.0}, "GA must be positive"),
        ({"supports": [Support(-0.1), Support(4.0)]}, "a support lies off the beam"),
        ({"supports": [Support(0.0), Support(4.1)]}, "a support lies off the beam"),
        ({"supports": [Support(1.0), Support(3.0), Support(1.0)]}, "two supports stand at the same place"),
        ({"supports": [Support(0.0, -1.0), Support(4.0)]}, "support stiffness must not be negative"),
        ({"supports": [Support(0.0, fixity=1.1), Support(4.0)]}, "support stiffness must not be negative"),
        ({"hinges": [0.0]}, "a hinge must lie between the ends"),
        ({"hinges": [4.0]}, "a hinge must lie between the ends"),
        ({"hinges": [2.0, 2.0]}, "two hinges stand at the same place"),
        ({"zones": [Zone(0.0, 4.5, 1.0)]}, "a zone lies off the beam"),
        ({"zones": [Zone(2.0, 1.0, 1.0)]}, "a zone must end after it starts"),
        ({"zones": [Zone(0.0, 2.0, 1.0), Zone(1.5, 3.0, 1.0)]}, "two zones overlap"),
        ({"zones": [Zone(0.0, 2.0, 0.0)]}, "a zone's EI must be positive"),
        ({"zones": [Zone(0.0, 2.0, 1.0, np.inf)]}, "rigid at both its ends or neither"),
        ({"zones": [Zone(0.0, 2.0, 1.0, GA=-1.0)]}, "GA must be positive"),
        ({"zones": [Zone(0.0, 2.0, 1.0, GA=0.0)]}, "GA must be positive"),
        ({"GA": np.nan}, "GA must be positive"),
    ],
)
def test_what_cannot_be_a_member_is_refused_by_name(what, why):
    with pytest.raises(ModelError, match=f"member 'G7' cannot be solved: .*{why}"):
        member("G7", **{"length": 4.0, "EI": 1.0} | what)


def test_the_first_faulty_member_of_a_stack_is_named():
    one = member("A", length=4.0, EI=1.0)
    # Put together by hand, because a faulty member does not come to be alone.
    arrays = {name: np.repeat(getattr(one, name), 3, axis=0) for name in one.__slots__[1:]}
    arrays["EI"] = np.array([1.0, -1.0, -1.0])
    with pytest.raises(ModelError, match="'B'"):
        type(one)(name=("A", "B", "C"), **arrays)


def test_zones_may_touch_and_stand_in_any_order():
    one = member(length=4.0, EI=1.0, zones=[Zone(2.0, 3.0, 5.0), Zone(0.0, 2.0, 4.0)])
    assert one.zone_from.shape == (1, 2)


def test_fixity_is_measured_against_the_nearest_other_support():
    one = member(length=10.0, EI=2.0, supports=[Support(0.0), Support(3.0), Support(8.0)])
    assert_allclose(one.support_reach, [[3.0, 3.0, 5.0]], rtol=1e-15)
    assert_allclose(one.fixity_stiffness, [[2.0, 2.0, 1.2]], rtol=1e-15)


def test_a_lone_support_is_measured_against_the_length():
    one = member(length=10.0, EI=2.0, supports=[Support(0.0, fixity=1.0)])
    assert_allclose(one.fixity_stiffness, [[0.6]], rtol=1e-15)


def test_EI_beside_a_place_is_the_stiffer_side_and_never_rigid():
    zones = [Zone(1.0, 2.0, 8.0), Zone(2.0, 4.0, 4.0, 6.0), Zone(5.0, 6.0, np.inf)]
    one = member(length=10.0, EI=2.0, zones=zones)
    assert_allclose(one.EI_beside(np.array([[0.5, 1.0, 2.0, 3.0, 5.5]])), [[2.0, 8.0, 8.0, 5.0, 2.0]], rtol=1e-15)


def test_stacked_members_are_padded_and_come_out_as_they_went_in():
    short = member("short", length=2.0, EI=1.0)
    long = member(
        "long", length=9.0, EI=3.0, supports=[Support(x) for x in (0, 4, 9)], hinges=[2.0], zones=[Zone(5, 6, 2)]
    )
    both = stack([short, long])
    assert (both.name, len(both)) == (("short", "long"), 2)
    assert_array_equal(both.support_at, [[0, 2, np.nan], [0, 4, 9]])
    assert_array_equal(both.zone_from, [[np.nan], [5]])
    for row, one in enumerate((short, long)):
        taken = both.take(row)
        assert taken.name == one.name
        for name in one.__slots__[1:]:
            assert_array_equal(getattr(taken, name), getattr(one, name))


def test_rows_are_laid_out_by_their_owner_in_order():
    owner, values = np.array([2, 0, 2, 0, 2]), np.array([1.0, 2.0, 3.0, 4.0, 5.0])
    assert_array_equal(pad(owner, 3, values), [[2, 4, np.nan], [np.nan] * 3, [1, 3, 5]])
    assert_array_equal(pad(owner, 3, values, 0.0)[1], [0, 0, 0])
    assert pad(owner[:0], 3, values[:0]).shape == (3, 0)
