"""Panels: how members are divided, and the mechanisms among them."""

import numpy as np
import pytest
from numpy.testing import assert_array_equal

from fieldfit.beam import Support, loads, member, respond, stack
from fieldfit.beam.panels import panels
from fieldfit.errors import ModelError

FIXED = Support(0.0, fixity=1.0)
NONE = Support(0.0, flexibility=np.inf)


def test_nodes_are_ends_supports_and_hinges_once_each():
    one = member(length=10.0, EI=1.0, supports=[Support(7.0), Support(0.0, fixity=1.0)], hinges=[4.0])
    found = panels(one)
    assert_array_equal(found.at, [[0.0, 4.0, 7.0, 10.0]])
    assert_array_equal(found.hinged, [[False, True, False, False]])
    assert_array_equal(found.of_support, [[2, 0]])


def test_a_support_a_hair_from_the_end_is_at_the_end():
    one = member(length=10.0, EI=1.0, supports=[Support(0.0), Support(10.0 - 1e-9)])
    assert panels(one).at.shape == (1, 2)


def test_short_members_of_a_stack_repeat_their_end():
    both = stack([member(length=2.0, EI=1.0), member(length=9.0, EI=1.0, supports=[Support(1.0), Support(5.0)])])
    found = panels(both)
    assert_array_equal(found.at, [[0, 2, 2, 2], [0, 1, 5, 9]])
    assert_array_equal(found.of_support, [[0, 1], [1, 2]])


def test_a_place_belongs_to_the_panel_right_of_it_or_left():
    found = panels(member(length=9.0, EI=1.0, supports=[Support(x) for x in (0, 4, 9)]))
    x = np.array([[0.0, 4.0, 4.0, 6.0, 9.0]])
    left = np.array([[False, False, True, False, True]])
    assert_array_equal(found.holding(x, left), [[0, 1, 0, 1, 1]])


MECHANISMS = {
    "no support": ([], [], "no vertical support"),
    "supports that hold nothing": ([NONE, Support(9.0, flexibility=np.inf)], [], "no vertical support"),
    "a couple alone": ([Support(0.0, flexibility=np.inf, fixity=1.0)], [], "no vertical support"),
    "one free support": ([Support(4.0)], [], "a second support or a fixed rotation is missing"),
    "one free support, one that holds nothing": ([Support(4.0), Support(9.0, np.inf)], [], "a second support"),
    "a hinge in a simple span": ([Support(0.0), Support(9.0)], [4.0], "its 1 hinge.s. leave it 1 way.s. to move"),
    "two hinges in a span": (
        [Support(x) for x in (0.0, 3.0, 6.0, 9.0)],
        [3.5, 4.0, 4.5],
        "its 3 hinge.s. leave it 1 way.s. to move freely; as many supports",
    ),
    "a hinge beyond the last support": ([FIXED, Support(4.0)], [6.0], "leave it 1 way.s. to move"),
    "two hinges and a tip": ([FIXED], [3.0, 6.0], "its 2 hinge.s. leave it 2 way.s. to move"),
    "restraint at a hinge": ([FIXED, Support(4.0, fixity=0.5), Support(9.0)], [4.0], "restraint stands at a hinge"),
}


@pytest.mark.parametrize("name", MECHANISMS)
def test_a_mechanism_is_refused_with_what_is_missing(name):
    supports, hinges, why = MECHANISMS[name]
    one = member("G7", length=9.0, EI=1.0, supports=supports, hinges=hinges)
    with pytest.raises(ModelError, match=f"member 'G7' cannot be solved: .*{why}"):
        respond(one, loads(one), np.array([[1.0]]))


@pytest.mark.parametrize("name", MECHANISMS)
def test_a_mechanism_in_a_stack_is_refused_by_name(name):
    supports, hinges, why = MECHANISMS[name]
    sound = member("sound", length=9.0, EI=1.0, supports=[FIXED, Support(9.0)], hinges=[5.0])
    faulty = member("faulty", length=9.0, EI=1.0, supports=supports, hinges=hinges)
    with pytest.raises(ModelError, match=f"member 'faulty' cannot be solved: .*{why}"):
        panels(stack([sound, faulty, sound]))


@pytest.mark.parametrize(
    ("supports", "hinges"),
    [
        ([FIXED], []),
        ([FIXED, Support(9.0)], [4.0]),
        ([Support(x) for x in (0.0, 3.0, 9.0)], [5.0]),
        ([Support(x) for x in (0.0, 3.0, 6.0, 9.0)], [4.0, 5.0]),
        ([Support(3.0, flexibility=1.0, fixity=0.01)], []),
    ],
)
def test_what_just_stands_is_solved(supports, hinges):
    one = member(length=9.0, EI=1.0, supports=supports, hinges=hinges)
    assert np.isfinite(respond(one, loads(one), np.array([[1.0]])).deflection).all()
