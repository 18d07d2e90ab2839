"""Derivatives of every response with respect to every unknown, against differences."""

from dataclasses import fields

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from fieldfit.beam import (
    Force,
    Response,
    Stiffness,
    Support,
    gradient,
    integrate,
    loads,
    member,
    recorded,
    solve,
    solve_with_gradient,
    stack,
    stack_loads,
)
from tests.beam.unlike import unlike

STEPS = 0.02 / 4.0 ** np.arange(9)


def moved(stiffness, areas, unknown, by):
    """The stiffness with one unknown changed by a pure number, and what stands for one of it in SI."""
    ratio, flexibility, fixity = (array.copy() for array in stiffness)
    zones, supports = ratio.shape[1], fixity.shape[1]
    if unknown < zones:
        ratio[:, unknown] *= np.exp(by)
        return Stiffness(ratio, flexibility, fixity), 1.0
    if unknown < zones + supports:
        unit = (areas.scale.length**3 / areas.scale.EI).item()
        flexibility[:, unknown - zones] += by * unit
        return Stiffness(ratio, flexibility, fixity), unit
    fixity[:, unknown - zones - supports] += by
    return Stiffness(ratio, flexibility, fixity), 1.0


def differences(areas, stiffness, unknown):
    """Central differences of fourth order, a stack of responses over ``STEPS``, and the unit of the unknown.

    A hair beyond rigid or fixed is no trouble for the equations.
    """

    def value(by):
        return solve(areas, moved(stiffness, areas, unknown, by)[0])

    rows = [[value(times * step) for times in (1, -1, 2, -2)] for step in STEPS]
    unit = moved(stiffness, areas, unknown, 0.0)[1]
    tables = {}
    for field in fields(Response):
        near, before, far, beyond = (np.stack([getattr(row[n], field.name) for row in rows]) for n in range(4))
        width = 12 * unit * STEPS[:, None, None, None]
        tables[field.name] = (8 * (near - before) - (far - beyond)) / width
    return tables, unit


def on_the_plateau(table):
    """The differences that agree best with those of the next step: longer ones are cut off, shorter ones noise.

    How long a step may be depends on how soft the rest of the beam is beside the unknown.
    """
    apart = np.abs(np.diff(table, axis=0)).max(axis=(1, 2, 3))
    return table[1 + int(np.argmin(apart))]


@pytest.mark.parametrize("seed", range(24))
@pytest.mark.parametrize("at_record", [True, False])
def test_every_field_against_differences(seed, at_record):
    one, acting, at = unlike(seed)
    areas = integrate(one, acting, at)
    stiffness = recorded(one)
    if not at_record:
        rng = np.random.default_rng(seed)
        stiffness = stiffness._replace(EI_ratio=rng.uniform(0.5, 2, stiffness.EI_ratio.shape))
    found, response = gradient(areas, stiffness), solve(areas, stiffness)
    for unknown in range(found.deflection.shape[1]):
        tables, unit = differences(areas, stiffness, unknown)
        for name, table in tables.items():
            expected = on_the_plateau(table)
            # Differences are good to eight digits of themselves, or to what rounding leaves of the response.
            size = max(np.abs(expected).max(), 1e-3 * np.abs(getattr(response, name)).max() / unit, 1e-300)
            derivative = getattr(found, name)[:, unknown]
            assert_allclose(derivative, expected, rtol=0, atol=1e-7 * size, err_msg=f"{name}, {unknown}")


def test_closed_form_of_a_span_between_springs():
    """Load of one at midspan: 1/48 ratio + (f1 + f2)/4."""
    one = member(length=1.0, EI=1.0, supports=[Support(0.0, 0.1), Support(1.0)])
    areas = integrate(one, loads(one, forces=[Force(0.5, -1.0)]), np.array([[0.5]]))
    found = gradient(areas)
    assert_allclose(-found.deflection[0, :3, 0, 0], [-1 / 48, 1 / 4, 1 / 4], rtol=1e-12)  # rounding


def test_the_fixity_of_a_free_end_has_a_derivative():
    """A fixity that starts from nothing: C = 3r phi for small r, phi = -1/16, so the middle rises by 3/16 x 1/16."""
    one = member(length=1.0, EI=1.0)
    areas = integrate(one, loads(one, forces=[Force(0.5, -1.0)]), np.array([[0.5]]))
    assert_allclose(gradient(areas).deflection[0, 3:, 0, 0], [3 / 256, 3 / 256], rtol=1e-12)  # rounding


def test_response_and_gradient_together_are_those_apart():
    one, acting, at = unlike(3)
    areas = integrate(one, acting, at)
    stiffness = recorded(one)
    response, derivative = solve_with_gradient(areas, stiffness)
    for field in fields(Response):
        assert_array_equal(getattr(response, field.name), getattr(solve(areas, stiffness), field.name))
        assert_array_equal(getattr(derivative, field.name), getattr(gradient(areas, stiffness), field.name))


def test_a_stack_has_the_gradients_of_its_members():
    several, acting, at = zip(*(unlike(seed) for seed in range(12)), strict=True)
    together = gradient(integrate(stack(several), stack_loads(acting), np.concatenate(at)))
    zones, supports = (max(getattr(one, name).shape[1] for one in several) for name in ("zone_from", "support_at"))
    for row, (one, own, stations) in enumerate(zip(several, acting, at, strict=True)):
        alone = gradient(integrate(one, own, stations)).deflection[0]
        few, held = one.zone_from.shape[1] + 1, one.support_at.shape[1]
        here = [*range(few), *(zones + 1 + np.arange(held)), *(zones + 1 + supports + np.arange(held))]
        joint = together.deflection[row][here][:, : alone.shape[1]]
        scale = np.abs(alone).max(axis=(1, 2), keepdims=True)
        assert (np.abs(joint - alone) <= 1e-11 * scale + 1e-16 * one.length).all()  # rounding, in units of each unknown
