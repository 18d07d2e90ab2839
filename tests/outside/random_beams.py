"""Random beams for hypothesis, and the same beam for both models.

All places stand on a grid of 1/48 of the length, so that no element is needlessly short.
"""

import numpy as np
from hypothesis import strategies as st

from fieldfit.beam import Bend, Couple, Force, Loads, Members, Movement, Spread, Support, Zone, loads, member
from tests.outside import hermite

GRID = 48

factor = st.integers(-8, 8).filter(bool)


@st.composite
def beams(draw: st.DrawFn, *, hinges: bool = True, tapers: bool = True, loaded: bool = True) -> hermite.Beam:
    """Beams that stand: on two vertical supports or more, or with a fixed left end where there is a hinge."""
    length, EI = draw(st.sampled_from([0.3, 6.0, 42.0])), draw(st.sampled_from([40.0, 2e7]))
    step, load = length / GRID, 1e-3 * EI / length**2
    places = sorted({draw(st.integers(0, 2)), draw(st.integers(5, 8)), *draw(st.sets(st.integers(0, 8), max_size=3))})
    supports = [_support(draw, 6 * place * step, EI, length) for place in places]
    hinge = []
    if hinges and draw(st.booleans()):
        # Left of the hinge the fixed end holds the beam, right of it the hinge and the last support do.
        supports = [hermite.Support(0.0, rotational=np.inf), *(s for s in supports if s.at > 0)]
        hinge = [(6 * draw(st.integers(0, places[-1] - 1)) + 2) * step]
    if not loaded:
        return hermite.Beam(length, EI, supports, hinge, _zones(draw, EI, step, tapers))
    points = st.lists(st.tuples(st.integers(0, GRID), factor), max_size=3)
    return hermite.Beam(
        length,
        EI,
        supports,
        hinge,
        _zones(draw, EI, step, tapers),
        [hermite.Force(x * step, f * load) for x, f in draw(points)],
        [hermite.Couple(x * step, f * load * length) for x, f in draw(points) if x * step not in hinge],
        [
            hermite.Spread(*ends, draw(factor) * load / length, draw(factor) * load / length)
            for ends in _parts(draw, step)
        ],
        [hermite.Bend(*ends, draw(factor) * 1e-3 / length) for ends in _parts(draw, step)],
    )


def _support(draw: st.DrawFn, at: float, EI: float, length: float) -> hermite.Support:
    vertical = draw(st.sampled_from([np.inf, np.inf, 1000.0, 50.0])) * EI / length**3
    rotational = draw(st.sampled_from([0.0, 0.0, 2.0, 20.0, np.inf])) * EI / length
    return hermite.Support(at, vertical, rotational, draw(st.sampled_from([0.0, 1e-3, -1e-3])) * length)


def _zones(draw: st.DrawFn, EI: float, step: float, tapers: bool) -> list[hermite.Zone]:
    """Up to two zones, the first of which may taper."""
    edges = sorted(draw(st.sets(st.integers(0, GRID // 6), max_size=4)))
    out = []
    for start, end in zip(edges[::2], edges[1::2], strict=False):
        ratio = draw(st.sampled_from([0.5, 0.75, 1.5, 2.0]))
        taper = ratio * EI * draw(st.sampled_from([0.625, 1.6])) if tapers and not out and draw(st.booleans()) else None
        out.append(hermite.Zone(6 * start * step, 6 * end * step, ratio * EI, taper))
    return out


def _parts(draw: st.DrawFn, step: float) -> list[tuple[float, float]]:
    places = st.integers(0, GRID)
    parts = draw(st.lists(st.tuples(places, places), max_size=2))
    return [(min(part) * step, max(part) * step) for part in parts if part[0] != part[1]]


def as_fieldfit(beam: hermite.Beam) -> tuple[Members, Loads]:
    """The same beam as a member and its loads."""
    one = member(
        length=beam.length,
        EI=beam.EI,
        supports=[Support(s.at, 1.0 / s.vertical, _fixity(beam, s)) for s in beam.supports],
        hinges=beam.hinges,
        zones=[Zone(zone.start, zone.end, zone.EI, zone.EI_end) for zone in beam.zones],
    )
    return one, loads(
        one,
        forces=[Force(f.at, f.up) for f in beam.forces],
        couples=[Couple(c.at, c.anticlockwise) for c in beam.couples],
        spreads=[Spread(s.start, s.end, s.up, s.up_end) for s in beam.spreads],
        bends=[Bend(b.start, b.end, b.curvature) for b in beam.bends],
        movements=[Movement(number, s.up) for number, s in enumerate(beam.supports)],
    )


def _fixity(beam: hermite.Beam, support: hermite.Support) -> float:
    """Fixity factor by its definition, 1/(1 + 3EI/(k l)), EI the greater one beside the support."""
    if support.rotational == 0:
        return 0.0
    away = min(abs(support.at - other.at) for other in beam.supports if other is not support)
    beside = []
    for zone in beam.zones:
        if zone.start <= support.at <= zone.end:
            share = (support.at - zone.start) / (zone.end - zone.start)
            beside.append(zone.EI + share * ((zone.EI if zone.EI_end is None else zone.EI_end) - zone.EI))
    return 1.0 / (1.0 + 3.0 * max(beside, default=beam.EI) / (support.rotational * away))
