"""Outlook: what planned gauges and stages will determine, before anything is read, and what gauge would help most.

A test without noise is made at a design point and fitted like a real one, so that intervals and words are those a
test will give on average. Restraints and bearings of which the book knows nothing are put at both ends of what they
can be. Further gauges are ranked by the covariance at the design point (a choice of one reading by its information:
Fedorov, 1972), and the best of them is fitted again.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from fieldfit.beam import Array, Flags, Members, jumps
from fieldfit.fit.ahead import parted
from fieldfit.fit.design import Design, design_of
from fieldfit.fit.estimates import Estimate
from fieldfit.fit.gauge_effects import WARMTH, drifts, warmths
from fieldfit.fit.least_squares import covariance_of
from fieldfit.fit.model import model_of
from fieldfit.fit.nuisance import nuisances_of
from fieldfit.fit.reconcile import reconcile_member
from fieldfit.fit.unknowns import BEARING, EI, GRADIENT, RESTRAINT, Unknown
from fieldfit.fit.whitening import whitening_of
from fieldfit.observe import Subject
from fieldfit.observe.planned import planned_test, with_gauge

__all__ = ["Candidate", "Foreseen", "Help", "Outlook", "outlook"]

#: Standard uncertainties of a further gauge whose kind the book has none of: common practice, no source.
USUAL_U = {"deflection": 2e-5, "level": 3e-4, "rotation": 1e-5, "strain": 2e-6}  # m, m, rad, strain
WORTH = 0.05  # of the uncertainty: a gauge that takes off less is not worth its while
NEAR = 0.01  # of the length: a gauge so close to another of its kind is no new place
BESIDE = 0.05  # of a span: where strain gauges stand beside a support
SOFT = 1 / 48  # l3/EI: a bearing as soft as a span is in its middle, where the book sets no bound
SUPPORTS = {
    "unknown supports at their softest": 0.0,
    "unknown supports half-way": 0.5,
    "unknown supports at their stiffest": 1.0,
}
AS_BOOKED = "as the book has it"
NAME = "one more"  # of a gauge that is tried


@dataclass(frozen=True, slots=True, kw_only=True)
class Candidate:
    """A gauge that could be added: what it measures, where (m), how well (SI), and whether that u is but the usual."""

    quantity: str
    at: float
    u: float
    is_usual: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class Foreseen:
    """What the test should say of the unknowns were the member as ``point`` says."""

    point: str
    estimates: tuple[Estimate, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Help:
    """The one further gauge that would help an estimate most, and what it would then be, by design point.

    ``gauge`` is None where none of the ``tried`` would take a twentieth off its uncertainty. ``load`` names the load
    or temperature difference whose own uncertainty limits it more than any gauge could mend.
    """

    before: Estimate
    point: str
    gauge: Candidate | None
    after: Estimate | None
    tried: int
    load: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Outlook:
    """What a planned test will determine; ``silent`` says in a sentence why nothing can be said, if so."""

    subject: Subject
    foreseen: tuple[Foreseen, ...] = ()
    helps: tuple[Help, ...] = ()
    silent: str = ""


def outlook(subject: Subject) -> Outlook:
    """What the gauges of the gauges table will determine in the stages of the stages table; readings are not looked at.

    Raises ModelError for a member that cannot be solved.
    """
    test = planned_test(subject)
    seen = test.observations
    without = [*dict.fromkeys(seen.gauge[np.isnan(seen.u)])]
    if without:
        return Outlook(
            subject=test,
            silent=f"How well the test will determine anything cannot be said: no u is given for {', '.join(without)}. "
            "Give u, plus or minus or resolution in gauges.",
        )
    if not any(stage.factors.any() for stage in (test.stages[n] for n in np.unique(seen.stage))):
        return Outlook(subject=test, silent="No gauge is read under load: the test will determine nothing.")
    unknowns, _ = parted(test)
    points = _points(unknowns)
    foreseen = tuple(Foreseen(point=name, estimates=_estimates(test, values)) for name, values in points.items())
    return Outlook(subject=test, foreseen=foreseen, helps=tuple(_helps(test, unknowns, points, foreseen)))


def _points(unknowns: Sequence[Unknown]) -> dict[str, Array]:
    """Design points (p,) by name: as the book has it, then with its unknown restraints and bearings from end to end."""
    best = np.array([unknown.expected if unknown.is_expected else unknown.start for unknown in unknowns])
    open_ended = [u.quantity in (RESTRAINT, BEARING) and not u.is_expected for u in unknowns]
    points = {AS_BOOKED: best}
    for name, share in SUPPORTS.items():
        there = [
            _between(unknown, share) if free else np.nan for unknown, free in zip(unknowns, open_ended, strict=True)
        ]
        point = np.where(open_ended, there, best)
        if not any(np.allclose(point, other) for other in points.values()):
            points[name] = point
    return points


def _between(unknown: Unknown, share: float) -> float:
    """A restraint or bearing so far from the softest it can be to the stiffest."""
    if unknown.quantity == RESTRAINT:
        return unknown.lower + share * (unknown.upper - unknown.lower)
    return unknown.lower + (1.0 - share) * (min(unknown.upper, max(SOFT, unknown.start)) - unknown.lower)


def _estimates(test: Subject, values: Array) -> tuple[Estimate, ...]:
    """Estimates of what the book asks for, from readings without noise of a member with these unknowns (p,)."""
    asked = {row.quantity for row in test.asked} - {WARMTH}
    found = reconcile_member(_read(test, values)).estimates
    return tuple(one for one in found if one.quantity in asked or one.quantity.startswith("apparent"))


def _read(test: Subject, values: Array) -> Subject:
    """The test as it would be read without noise."""
    unknowns, free = parted(test)
    model = model_of(test, (*unknowns, *free))
    known = [unknown.expected if unknown.is_expected else unknown.start for unknown in free]
    return replace(test, observations=replace(test.observations, value=model.predicted(np.append(values, known))))


def _helps(
    test: Subject, unknowns: Sequence[Unknown], points: Mapping[str, Array], foreseen: Sequence[Foreseen]
) -> Iterator[Help]:
    """For every EI, and whatever else the test leaves open, the gauge that takes most off its uncertainty.

    Judged where the test does worst by it.
    """
    tried = [*candidates(test)]
    for place, first in enumerate(foreseen[0].estimates):
        cases = [one.estimates[place] for one in foreseen]
        if first.number is None or (EI not in first.quantity and not {"no", "between"} & {c.determined for c in cases}):
            continue
        spreads = [_spreads(test, unknowns, tried, values, first.number) for values in points.values()]
        ranks = [
            (case.determined in ("no", "between"), spread.bare) for case, spread in zip(cases, spreads, strict=True)
        ]
        worst = max(range(len(ranks)), key=ranks.__getitem__)
        spread, point = spreads[worst], foreseen[worst].point
        gains = 1.0 - spread.more / spread.bare if np.isfinite(spread.bare) else 1.0 / (1.0 + spread.more)
        best = int(np.argmax(gains)) if tried else -1
        helps = best >= 0 and gains[best] > (WORTH if np.isfinite(spread.bare) else 0.0)
        after = None
        if helps:
            added = with_gauge(test, NAME, tried[best].quantity, tried[best].at, tried[best].u)
            after = _estimates(added, points[point])[place]
        yield Help(
            before=cases[worst],
            point=point,
            gauge=tried[best] if helps else None,
            after=after,
            tried=len(tried),
            load=spread.load,
        )


@dataclass(frozen=True, slots=True)
class _Spread:
    """Standard uncertainty of an unknown by linear theory: ``bare``, with each gauge tried ``more`` (k,), and the name
    of what is known beforehand and limits it, if any.
    """

    bare: float
    more: Array
    load: str | None


def _spreads(
    test: Subject, unknowns: Sequence[Unknown], tried: Sequence[Candidate], values: Array, number: int
) -> _Spread:
    whole = test
    for place, one in enumerate(tried):
        whole = with_gauge(whole, f"{NAME} {place}", one.quantity, one.at, one.u)
    design, gauge = _design(_read(whole, values)), whole.observations.gauge
    jacobian = design.whole_jacobian(values)
    own = np.ones(len(jacobian), dtype=bool)
    own[len(test.observations) : len(gauge)] = False

    def u(rows: Flags, columns: Array | slice = slice(None)) -> float:
        return float(np.sqrt(covariance_of(jacobian[rows][:, columns])[0][number, number]))

    bare = u(own)
    more = np.empty(len(tried))
    for place in range(len(tried)):
        rows = own.copy()
        rows[: len(gauge)] |= gauge == f"{NAME} {place}"
        more[place] = u(rows)
    load = None
    for other, unknown in enumerate(unknowns):
        if unknown.quantity in ("load", GRADIENT) and other > number and np.isfinite(bare):
            exact = u(own, np.delete(np.arange(jacobian.shape[1]), other))
            if exact < min(bare / 2, *(more if len(more) else [np.inf])):
                load = unknown.name
    return _Spread(bare, more, load)


def _design(subject: Subject) -> Design:
    """The design of a fit of all readings."""
    unknowns, free = parted(subject)
    nuisances = nuisances_of(subject, (*free, *warmths(subject), *drifts(subject)))
    seen = subject.observations
    every = np.ones(len(seen), dtype=bool)
    return design_of(model_of(subject, unknowns), seen.value, whitening_of(seen, every, believed=True), nuisances)


def candidates(test: Subject) -> Iterator[Candidate]:
    """A small set of further gauges: at quarter points, ends of overhangs and supports, of every kind of reading.

    One counts as well as the book's own gauges of its kind, else as is usual; strain gauges need the depth. A place
    where what it reads jumps, or where such a gauge already stands, is none.
    """
    seen, length = test.observations, float(test.member.length[0])
    held = np.sort(test.member.support_at[0, np.isfinite(test.member.support_flexibility[0])])
    middles = [a + (b - a) * share for a, b in pairwise(held) for share in (0.25, 0.5, 0.75)]
    ends = [at for at in (0.0, length) if len(held) and np.abs(held - at).min() > NEAR * length]
    beside = [at for a, b in pairwise(held) for at in (a + BESIDE * (b - a), b - BESIDE * (b - a))]
    upright = "level" if "level" in seen.quantity and "deflection" not in seen.quantity else "deflection"
    places = {upright: [*middles, *ends, *held], "rotation": [*held, *ends], "curvature": [*middles, *beside]}
    if test.is_shape_survey:  # with no zero, a tilt or a strain would have the built shape in it
        places = {upright: places[upright]}
    for quantity, stations in places.items():
        u, is_usual = _u(test, quantity)
        if not np.isfinite(u):
            continue
        at = np.array(stations)
        jump = jumps(_restrained(test), test.loads, at[None])
        bad = {"rotation": jump.rotation, "curvature": jump.curvature}.get(quantity, np.zeros((1, len(at)), dtype=bool))
        there = seen.at[seen.quantity == quantity]
        for station, jumping in zip(stations, bad[0], strict=True):
            if not jumping and not np.any(np.abs(there - station) <= NEAR * length):
                yield Candidate(quantity=quantity, at=float(station), u=u, is_usual=is_usual)


def _restrained(test: Subject) -> Members:
    """The member with every support restrained, so that its moment may jump at each."""
    return replace(test.member, support_fixity=np.ones_like(test.member.support_fixity))


def _u(test: Subject, quantity: str) -> tuple[float, bool]:
    """Standard uncertainty of a further gauge (SI), and whether it is but the usual one; NaN where not known."""
    seen = test.observations
    own = seen.u[seen.quantity == quantity]
    if len(own):
        return float(np.median(own)), False
    if quantity != "curvature":
        return USUAL_U[quantity], True
    strain = seen.u[seen.quantity == "strain"]  # two of them, over the depth
    return float(np.sqrt(2.0) * (np.median(strain) if len(strain) else USUAL_U["strain"]) / test.depth), not len(strain)
