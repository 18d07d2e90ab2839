"""Random beams against cubic Hermite finite elements assembled by scikit-fem."""

from dataclasses import replace

import numpy as np
from hypothesis import given, settings
from numpy.testing import assert_allclose

from fieldfit.beam import respond
from tests.outside import hermite
from tests.outside.random_beams import as_fieldfit, beams

# Elements lose about n**4 times the rounding unit, n being the number of the shortest ones in the length.
CLOSE = 1e-8


@settings(max_examples=120, deadline=None)
@given(beam=beams())
def test_random_beams_agree_with_finite_elements(beam):
    """Spans, overhangs, springs, movements, a hinge, zones, tapers, every kind of load.

    Where little happens, what the elements add and take away counts: about what the heaviest load does.
    """
    one, acting = as_fieldfit(beam)
    at = beam.length / 48 * np.array([1, 4, 7, 15, 24, 29, 35, 41, 47])
    ours = respond(one, acting, at[None])
    held = 1e-2 * beam.EI / beam.length
    deflection, rotation, moment, reactions, restraints = _by_elements(beam, at)
    _assert_close(ours.deflection, deflection, least=1e-3 * beam.length)
    _assert_close(ours.rotation, rotation, least=1e-3)
    _assert_close(ours.moment, moment, least=held)
    _assert_close(ours.reaction, reactions, least=held / (beam.length / 8))
    _assert_close(ours.restraint, -restraints, least=held)


def _by_elements(beam, at):
    """What the elements say; of two meshes, because halving tapered elements leaves a sixteenth of their error."""
    coarse, fine = (hermite.solve(replace(beam, taper_element=size), at) for size in (1 / 48, 1 / 96))
    pairs = [[getattr(s, name)(at) for s in (coarse, fine)] for name in ("deflection", "rotation", "moment")]
    pairs += [(coarse.reactions, fine.reactions), (coarse.restraints, fine.restraints)]
    return [better + (better - rough) / 15 for rough, better in pairs]


def _assert_close(ours, theirs, *, least):
    assert_allclose(ours[0, 0], theirs, rtol=0, atol=CLOSE * max(np.abs(ours).max(), least))


def test_the_elements_notice_a_wrong_stiffness():
    """Negative control: one part in a million on EI is seen at the tolerance above."""
    beam = hermite.Beam(6.0, 2e7, [hermite.Support(0.0), hermite.Support(6.0)], forces=[hermite.Force(2.0, -1e4)])
    one, acting = as_fieldfit(hermite.Beam(6.0, 2e7 * (1 + 1e-6), beam.supports, forces=beam.forces))
    at = np.array([2.0])
    off = respond(one, acting, at[None]).deflection[0, 0] / hermite.solve(beam).deflection(at) - 1
    assert_allclose(off, -1e-6, rtol=1e-2)  # first order in the change
