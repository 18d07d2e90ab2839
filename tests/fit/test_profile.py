"""Profiles: probabilities at and beyond bounds that the truth keeps to."""

import numpy as np
import pytest

from fieldfit.fit.least_squares import Problem, minimise
from fieldfit.fit.noise import Noise
from fieldfit.fit.profile import Profile

PHI_1 = 0.841345  # of the normal distribution, any table


def one_reading_of_one(lower: float, upper: float) -> Profile:
    """An unknown read once as 1 with u = 1."""
    problem = Problem(
        evaluate=lambda value: (value - 1.0, np.ones((1, 1))), lower=np.array([lower]), upper=np.array([upper])
    )
    noise = Noise(source="given", variance=1.0, degrees_of_freedom=None, chi_square=0.0, spare=0, p=None)
    minimum = minimise(problem, np.array([0.5 * (lower + upper)]))
    return Profile(problem=problem, minimum=minimum, noise=noise, readings=1)


def test_inside_bounds_the_root_of_the_profile_decides() -> None:
    profile, within = one_reading_of_one(0.0, 5.0), (0.0, 5.0)
    for ask in (profile.probability_below, profile.probability_up_to):
        assert ask(0, 2.0, within) == pytest.approx(PHI_1, abs=1e-6)
        assert ask(0, 1.0, within) == pytest.approx(0.5, abs=1e-6)


def test_nothing_lies_beyond_a_bound_of_the_truth() -> None:
    profile, within = one_reading_of_one(0.0, 5.0), (0.0, 5.0)
    for ask in (profile.probability_below, profile.probability_up_to):
        assert (ask(0, -0.1, within), ask(0, 5.1, within)) == (0.0, 1.0)


def test_a_truth_may_stand_at_its_bound() -> None:
    """It is never below the lower one, and always up to the upper one; at the lower one it may be with Phi(-1)."""
    profile, within = one_reading_of_one(0.0, 2.0), (0.0, 2.0)
    assert profile.probability_below(0, 0.0, within) == 0.0
    assert profile.probability_up_to(0, 0.0, within) == pytest.approx(1 - PHI_1, abs=1e-6)
    assert profile.probability_up_to(0, 2.0 - 1e-15, within) == 1.0
    assert profile.probability_below(0, 2.0, within) == pytest.approx(PHI_1, abs=1e-6)


def test_where_only_the_search_stops_nothing_is_certain() -> None:
    profile = one_reading_of_one(0.0, 2.0)
    assert profile.probability_up_to(0, 3.0) == pytest.approx(PHI_1, abs=1e-6)
