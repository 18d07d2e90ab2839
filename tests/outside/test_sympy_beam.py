"""Random beams against the beam module of sympy, which integrates singularity functions in exact fractions."""

from fractions import Fraction

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.testing import assert_allclose
from sympy import Rational, Symbol
from sympy.physics.continuum_mechanics.beam import Beam

from fieldfit.beam import Couple, Force, Spread, Support, loads, member, respond

LENGTH, EI = 12, 5000
STATIONS = [1, Fraction(7, 2), 5, Fraction(23, 3), 11]
size = st.integers(-9, 9).filter(bool)
place = st.integers(0, LENGTH)


@st.composite
def cases(draw):
    """Supports, forces, couples (none where a station stands: the moment jumps), spread loads."""
    supports = sorted({draw(st.integers(0, 2)), draw(st.integers(8, LENGTH)), *draw(st.sets(place, max_size=1))})
    forces = draw(st.lists(st.tuples(place, size), min_size=1, max_size=2))
    couples = draw(st.lists(st.tuples(st.sampled_from([2, 6, 9]), size), max_size=1))
    spans = [
        (start, start + draw(st.integers(1, LENGTH - start))) for start in draw(st.sets(st.integers(0, 8), max_size=1))
    ]
    return supports, draw(st.booleans()), forces, couples, [(*span, draw(size)) for span in spans]


def by_sympy(supports, clamped, forces, couples, spreads):
    """Deflection, slope, moment at the stations, and reactions, in sympy's signs: couples clockwise, moment hogging.

    Supports stay level: sympy takes the movement of a support without EI.
    """
    beam = Beam(LENGTH, EI, 1)
    unknowns = [Symbol(f"R{number}") for number in range(len(supports))]
    for unknown, at in zip(unknowns, supports, strict=True):
        beam.apply_load(unknown, at, -1)
        beam.bc_deflection.append((at, 0))
    restraint = Symbol("M")
    if clamped:
        beam.apply_load(restraint, supports[0], -2)
        beam.bc_slope.append((supports[0], 0))
    for at, up in forces:
        beam.apply_load(up, at, -1)
    for at, anticlockwise in couples:
        beam.apply_load(-anticlockwise, at, -2)
    for start, end, up in spreads:
        beam.apply_load(up, start, 0, end=end)
    beam.solve_for_reaction_loads(*unknowns, *[restraint] * clamped)
    curves = beam.deflection(), beam.slope(), beam.bending_moment()
    at = [Rational(station) for station in STATIONS]
    values = [[float(curve.subs(beam.variable, x)) for x in at] for curve in curves]
    return values, [float(beam.reaction_loads[unknown]) for unknown in unknowns]


@settings(max_examples=25, deadline=None)  # exact fractions are slow
@given(case=cases())
def test_random_beams_agree_with_sympy(case):
    supports, clamped, forces, couples, spreads = case
    (deflection, slope, moment), reactions = by_sympy(*case)
    one = member(
        length=LENGTH, EI=EI, supports=[Support(at, fixity=float(clamped and at == supports[0])) for at in supports]
    )
    acting = loads(
        one,
        forces=[Force(*row) for row in forces],
        couples=[Couple(*row) for row in couples],
        spreads=[Spread(*row) for row in spreads],
    )
    found = respond(one, acting, np.array([STATIONS], dtype=float))
    # The smallest load, one, moves such a beam by about length3/EI; sympy cancels polynomials of the whole beam.
    assert_allclose(found.deflection[0, 0], deflection, rtol=1e-10, atol=1e-10 * LENGTH**3 / EI)
    assert_allclose(found.rotation[0, 0], slope, rtol=1e-10, atol=1e-10 * LENGTH**2 / EI)
    assert_allclose(-found.moment[0, 0], moment, rtol=1e-10, atol=1e-10 * LENGTH)
    assert_allclose(found.reaction[0, 0], reactions, rtol=1e-10, atol=1e-10)
