"""A condensed member sees what the whole solution sees, and changes as it does."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from fieldfit.beam import (
    SEEN,
    Force,
    Spread,
    Stiffness,
    Support,
    condense,
    integrate,
    loads,
    member,
    recorded,
    solve_with_gradient,
)
from fieldfit.errors import ModelError
from tests.beam.unlike import unlike


def other(stiffness: Stiffness, seed: int) -> Stiffness:
    """Another stiffness than the recorded one, with some supports let go, fixed or rigid."""
    random = np.random.default_rng(seed)
    ratio = np.exp(random.normal(0, 0.5, stiffness.EI_ratio.shape))
    fixity = random.choice([0.0, 0.3, 1.0], stiffness.fixity.shape) * (stiffness.fixity > 0) + 0.1
    return Stiffness(ratio, stiffness.flexibility * random.choice([0.0, 1.0, 30.0]), np.minimum(fixity, 1.0))


@pytest.mark.parametrize("seed", range(40))
def test_a_condensed_member_sees_and_changes_as_the_whole_one(seed):
    one, load, at = unlike(seed)
    areas = integrate(one, load, at)
    stiffness = other(recorded(one), seed)
    response, change = solve_with_gradient(areas, stiffness)
    station, kind = np.divmod(np.arange(at.size * len(SEEN)), len(SEEN))
    seen, slopes = condense(areas, station, kind).sight_and_gradient(stiffness)
    for number, name in enumerate(SEEN):
        whole, whole_slopes = getattr(response, name)[0], getattr(change, name)[0]
        assert_allclose(seen[kind == number].T, whole, rtol=1e-10, atol=1e-11 * np.abs(whole).max())
        mine = slopes[:, kind == number].swapaxes(1, 2)
        largest = np.abs(whole_slopes).max(axis=(1, 2), keepdims=True)
        assert np.all(np.abs(mine - whole_slopes) <= 1e-9 * largest)


@pytest.mark.parametrize("seed", range(10))
def test_a_stack_of_stiffnesses_is_seen_as_one_after_the_other(seed):
    one, load, at = unlike(seed)
    condensed = condense(integrate(one, load, at), *np.divmod(np.arange(at.size * len(SEEN)), len(SEEN)))
    each = [other(recorded(one), 100 * seed + number) for number in range(5)]
    stack = Stiffness(*(np.concatenate(parts) for parts in zip(*each, strict=True)))
    singly = np.array([condensed.sight(stiffness)[0] for stiffness in each])
    assert_allclose(condensed.sight(stack), singly, rtol=1e-12, atol=1e-12 * np.abs(singly).max())


def test_ten_spans_keep_ten_digits():
    supports = [Support(4.0 * n, 1e-9, 0.1 * (n % 3)) for n in range(11)]
    one = member("long", length=40.0, EI=2e7, supports=supports)
    load = loads(one, forces=[Force(7.0, -5e4)], spreads=[Spread(0.0, 40.0, -9e3, case=1)])
    areas = integrate(one, load, np.linspace(0.1, 39.9, 40)[None])
    response, _ = solve_with_gradient(areas, recorded(one))
    seen = condense(areas, np.arange(40), np.zeros(40, dtype=int)).sight(recorded(one))[0]
    assert_allclose(seen.T, response.deflection[0], rtol=0, atol=1e-10 * np.abs(response.deflection).max())


def test_a_stiffness_that_holds_nothing_is_refused():
    one, load, at = unlike(1, hinged=False)
    condensed = condense(integrate(one, load, at), np.zeros(1, dtype=int), np.zeros(1, dtype=int))
    nothing = recorded(one)._replace(flexibility=np.full_like(one.support_at, np.inf), fixity=0.0 * one.support_at)
    with pytest.raises(ModelError, match="no unique answer"):
        condensed.sight(nothing)
