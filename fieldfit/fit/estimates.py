"""Estimates: what a fit says of each quantity, in SI, with how each side of its interval ends."""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from fieldfit.beam import Array
from fieldfit.fit.design import Design
from fieldfit.fit.gauge_effects import WARMTH
from fieldfit.fit.least_squares import covariance_of, weights_of
from fieldfit.fit.noise import LEVEL
from fieldfit.fit.nuisance import Nuisance
from fieldfit.fit.profile import BetterMinimum, End, Ends, Profile
from fieldfit.fit.unknowns import BEARING, CAMBER, CREEP, EI, RESTRAINT, Unknown, flexibility_unit
from fieldfit.observe import Subject

__all__ = ["Estimate", "estimates_of", "nuisance_estimates", "recovered", "undetermined"]

ALONE = 10.0  # an interval so many times wider without what the book expects is held up by that alone
CUT = 3.0  # an interval so many times wider without the bounds of the others is made by these bounds
WIDER = 0.5  # of the room between bounds: how far the edges of the search are moved to see what moves with them
MOVED = 0.1  # of the way from the best fit or to a bound: an end that moves so far with an edge is not the readings'


@dataclass(frozen=True, slots=True, kw_only=True)
class Estimate:
    """One estimated quantity, SI, with its interval at ``level``; None where the readings cannot say.

    ``determined`` is yes, between, at least, at most or no; only yes has a value. ``ratio`` is over the ``recorded``
    value, for EI; ``fixity`` stands beside a rotational restraint. ``bounded`` says that an end was taken from the
    problem with its bounds. ``kind`` is its kind of quantity where its name alone does not say it. ``number`` is that
    of the unknown in the fit, None for a nuisance, ``unit`` what one of
    it stands for (a bearing flexibility, m/N).
    """

    quantity: str
    where: str
    stage: str | None
    kind: str | None = None
    number: int | None = None
    value: float | None = None
    u: float | None = None
    low: float | None = None
    high: float | None = None
    level: float = LEVEL
    low_ends: Ends | None = None
    high_ends: Ends | None = None
    determined: str = "no"
    recorded: float | None = None
    ratio: float | None = None
    ratio_low: float | None = None
    ratio_high: float | None = None
    fixity: float | None = None
    fixity_low: float | None = None
    fixity_high: float | None = None
    bounded: bool = False
    unit: float = 1.0


def estimates_of(subject: Subject, design: Design, profile: Profile) -> tuple[Estimate, ...]:
    """An estimate for each unknown of a fit."""
    unknowns = design.model.unknowns
    return tuple(_estimate(subject, design, profile, number) for number in range(len(unknowns)))


def undetermined(subject: Subject, unknown: Unknown, number: int | None) -> Estimate:
    """An unknown of which the readings say nothing."""
    plain = Estimate(
        quantity=unknown.quantity, where=unknown.where, stage=unknown.stage, kind=unknown.kind, number=number
    )
    return replace(plain, recorded=_recorded(subject, unknown))


def _estimate(subject: Subject, design: Design, profile: Profile, number: int) -> Estimate:
    unknown = design.model.unknowns[number]
    u = float(np.sqrt(profile.noise.variance * profile.minimum.covariance[number, number]))
    alone = unknown.is_expected and _without_expectation(design, profile, number) > ALONE * u
    low, high = (_named(end, alone) for end in _ends(design, profile, number))
    determined = _determined(profile, unknown, number, low, high)
    plain = undetermined(subject, unknown, number)
    plain = replace(plain, determined=determined, bounded=low.bounded or high.bounded)
    best = float(profile.minimum.unknowns[number])
    known = determined == "yes"
    shown = [_side(unknown, low, 0), _side(unknown, high, 1)]
    if determined == "no":  # an end that nothing holds up is no limit; one that nature sets remains
        shown = [side if end.ends == "bound" else None for side, end in zip(shown, (low, high), strict=True)]
    return SHOWN.get(unknown.quantity, _as_it_is)(
        subject, unknown, plain, (best, u) if known else None, shown, (low.ends, high.ends)
    )


def _ends(design: Design, profile: Profile, number: int) -> tuple[End, End]:
    """Both ends of a profile interval; one that moves with the edges of the search is none, and is called flat.

    An unknown stops at such an edge where the search gives up, set by neither the book nor nature. Another that goes on
    with it as far as that has not been found to end there; but one that hardly moves has (EI of a soft zone, when a
    rigid one leaves all of a deflection to it).
    """
    interval = profile.interval(number)
    ends, edges = (interval.low, interval.high), _search_edges(design)
    held_up = [
        end.ends == "found" and _made_by_bounds(profile, number, end) and _others_at(profile, number, end, edges)
        for end in ends
    ]
    if not any(held_up):
        return ends
    wider = _ends_of_a_wider_search(profile, number, edges)
    bounds = float(profile.problem.lower[number]), float(profile.problem.upper[number])
    best = float(profile.minimum.unknowns[number])
    low, high = (
        replace(end, ends="flat") if doubted and _moves(end, other, min(abs(end.value - best), room)) else end
        for end, other, room, doubted in zip(
            ends, wider, (ends[0].value - bounds[0], bounds[1] - ends[1].value), held_up, strict=True
        )
    )
    return low, high


def _search_edges(design: Design) -> tuple[Array, Array]:
    """Bounds (p,) of the unknowns where the search gives up rather than the book or nature sets them; else infinite."""
    unknowns = design.model.unknowns
    own = np.array([unknown.own_bounds for unknown in unknowns])
    lower, upper = (np.array([getattr(unknown, side) for unknown in unknowns]) for side in ("lower", "upper"))
    return np.where(own[:, 0], -np.inf, lower), np.where(own[:, 1], np.inf, upper)


def _ends_of_a_wider_search(
    profile: Profile, number: int, edges: tuple[Array, Array]
) -> tuple[End, End] | tuple[None, None]:
    """The ends with the edges of the search farther out; none where something fits better there."""
    problem = profile.problem
    further = WIDER * (problem.upper - problem.lower)
    lower = np.where(np.isfinite(edges[0]), problem.lower - further, problem.lower)
    upper = np.where(np.isfinite(edges[1]), problem.upper + further, problem.upper)
    try:
        interval = replace(profile, problem=replace(problem, lower=lower, upper=upper)).interval(number)
    except BetterMinimum:
        return None, None
    return interval.low, interval.high


def _moves(end: End, wider: End | None, way: float) -> bool:
    """Whether an end is another one once the search goes farther, by its way from the best fit or to its bound."""
    return wider is None or wider.ends != "found" or abs(wider.value - end.value) > MOVED * way


def _named(end: End, alone: bool) -> End:
    """An end that only what the book expects of the unknown makes is said to be so."""
    return replace(end, ends="expected") if alone and end.ends == "found" else end


def _side(unknown: Unknown, end: End, side: int) -> float | None:
    """Value of an end; None where the search gave up rather than the book or nature set a bound."""
    open_ended = end.ends == "flat" or (end.ends == "bound" and not unknown.own_bounds[side])
    return None if open_ended else end.value


def _without_expectation(design: Design, profile: Profile, number: int) -> float:
    """Standard uncertainty of an unknown had the book expected nothing of it; infinite if nothing else holds it."""
    row = len(profile.minimum.residual) - len(design.prior) + int(np.flatnonzero(design.prior == number)[0])
    return float(np.sqrt(profile.noise.variance)) * _u_without(profile.minimum.jacobian, row, number)


def _u_without(jacobian: Array, row: int, number: int) -> float:
    """Standard uncertainty of an unknown of a linear problem that lacks one row, for residuals of unit variance."""
    jacobian = np.delete(jacobian, row, axis=0)
    length = np.linalg.norm(jacobian, axis=0)
    if length[number] == 0:
        return float(np.inf)
    others = np.delete(jacobian / np.where(length > 0, length, 1.0), number, axis=1)
    mine = jacobian[:, number] / length[number]
    left = mine - others @ np.linalg.lstsq(others, mine, rcond=1e-10)[0] if others.size else mine
    sight = float(np.linalg.norm(left))
    return 1.0 / (sight * length[number]) if sight > 1e-8 else float(np.inf)


def _determined(profile: Profile, unknown: Unknown, number: int, low: End, high: End) -> str:
    """What the two ends leave to say; ``between`` where only the bounds of other unknowns made them.

    A best fit where the search gives up, at an EI a thousandfold or a thousandth of the record, says nothing.
    """
    best = float(profile.minimum.unknowns[number])
    edges = (best <= unknown.lower, best >= unknown.upper)
    if any(edge and not own for edge, own in zip(edges, unknown.own_bounds, strict=True)):
        return "no"
    made = (low.ends in ("found", "expected"), high.ends in ("found", "expected"))
    words = {(True, False): "at least", (False, True): "at most", (False, False): "no"}
    if made != (True, True):
        return words[made]
    if not np.isfinite(profile.minimum.covariance[number, number]):
        return "between"
    bounds = profile.problem.lower, profile.problem.upper
    cut = any(_made_by_bounds(profile, number, end) and _others_at(profile, number, end, bounds) for end in (low, high))
    return "between" if cut else "yes"


def _made_by_bounds(profile: Profile, number: int, end: End) -> bool:
    """Whether an end is so near that the readings alone, without the bounds of the others, did not make it."""
    reach = float(np.sqrt(end.drop * profile.minimum.covariance[number, number]))
    return not reach <= CUT * abs(end.value - float(profile.minimum.unknowns[number]))


def _others_at(profile: Profile, number: int, end: End, bounds: tuple[Array, Array]) -> bool:
    """Whether any other unknown stands at one of these bounds (p,) at an end."""
    room = profile.problem.upper - profile.problem.lower
    slack = 1e-6 * np.where(np.isfinite(room), room, 1.0)
    at_bound = (end.unknowns - bounds[0] <= slack) | (bounds[1] - end.unknowns <= slack)
    return bool(np.delete(at_bound, number).any())


Best = tuple[float, float] | None  # an unknown and its standard uncertainty, None where it is not determined
Sides = list[float | None]
Whys = tuple[Ends, Ends]


def _as_it_is(_: Subject, __: Unknown, plain: Estimate, best: Best, sides: Sides, ends: Whys) -> Estimate:
    value, u = best or (None, None)
    return replace(plain, value=value, u=u, low=sides[0], high=sides[1], low_ends=ends[0], high_ends=ends[1])


def _as_EI(_: Subject, __: Unknown, plain: Estimate, best: Best, sides: Sides, ends: Whys) -> Estimate:
    """From the logarithm of the ratio to the ratio and to EI."""
    recorded = plain.recorded or np.nan
    ratios = [None if side is None else float(np.exp(side)) for side in sides]
    ratio = None if best is None else float(np.exp(best[0]))
    return replace(
        plain,
        ratio=ratio,
        ratio_low=ratios[0],
        ratio_high=ratios[1],
        value=None if ratio is None else ratio * recorded,
        u=None if best is None or ratio is None else best[1] * ratio * recorded,
        low=None if ratios[0] is None else ratios[0] * recorded,
        high=None if ratios[1] is None else ratios[1] * recorded,
        low_ends=ends[0],
        high_ends=ends[1],
    )


def _as_restraint(
    subject: Subject, unknown: Unknown, plain: Estimate, best: Best, sides: Sides, ends: Whys
) -> Estimate:
    """From the fixity factor to the stiffness kr = (3EI/l) r/(1 - r); None where fixed."""
    which = subject.supports.index(unknown.where)
    unit = float(subject.member.fixity_stiffness[0, which])

    def stiffness(fixity: float | None) -> float | None:
        return None if fixity is None or fixity >= 1 else unit * fixity / (1 - fixity)

    fixity, u = best or (None, None)
    spread = None if fixity is None or u is None or fixity >= 1 else unit * u / (1 - fixity) ** 2
    return replace(
        plain,
        fixity=fixity,
        fixity_low=sides[0],
        fixity_high=sides[1],
        value=stiffness(fixity),
        u=spread,
        low=stiffness(sides[0]),
        high=stiffness(sides[1]),
        low_ends=ends[0],
        high_ends=ends[1],
    )


def _as_bearing(subject: Subject, unknown: Unknown, plain: Estimate, best: Best, sides: Sides, ends: Whys) -> Estimate:
    """From the flexibility to the stiffness, whose sides change places; None where rigid."""
    unit = flexibility_unit(subject.member, subject.supports.index(unknown.where))

    def stiffness(flexibility: float | None) -> float | None:
        return None if flexibility is None or flexibility <= 0 else 1.0 / (flexibility * unit)

    flexibility, u = best or (None, None)
    value = stiffness(flexibility)
    turned = {"at least": "at most", "at most": "at least"}
    return replace(
        plain,
        value=value,
        u=None if value is None or u is None or flexibility is None else value * u / flexibility,
        unit=unit,
        low=stiffness(sides[1]),
        high=stiffness(sides[0]),
        low_ends=ends[1],
        high_ends=ends[0],
        determined=turned.get(plain.determined, plain.determined),
    )


SHOWN: dict[str, Callable[[Subject, Unknown, Estimate, Best, Sides, Whys], Estimate]] = {
    EI: _as_EI,
    RESTRAINT: _as_restraint,
    BEARING: _as_bearing,
}


def _recorded(subject: Subject, unknown: Unknown) -> float | None:
    """What the record says of an unknown, SI: EI of the zone at its left end; None for infinite stiffness or nothing.

    Of a settlement or a temperature curvature it is what the book imposes.
    """
    member = subject.member
    if unknown.quantity == EI:
        zone = int(np.argmax(unknown.stiffness))
        return float(member.EI[0] if zone == 0 else member.zone_EI[0, zone - 1])
    if unknown.quantity in (RESTRAINT, BEARING):
        which = subject.supports.index(unknown.where)
        fixity, flexibility = member.support_fixity[0, which], member.support_flexibility[0, which]
        if unknown.quantity == BEARING:
            return None if flexibility == 0 else float(1.0 / flexibility)
        return None if fixity == 1 else float(member.fixity_stiffness[0, which] * fixity / (1 - fixity))
    if unknown.quantity in (CREEP, CAMBER):  # nothing of it is on record
        return None
    if unknown.quantity == WARMTH:
        return unknown.expected if np.isfinite(unknown.expected) else None
    return 1.0 if unknown.quantity == "load" else unknown.already


def nuisance_estimates(design: Design, nuisances: tuple[Nuisance, ...], profile: Profile) -> tuple[Estimate, ...]:
    """The nuisances the book asked for, recovered from the whole design at the best fit."""
    wanted = [(number, nuisance.unknown) for number, nuisance in enumerate(nuisances) if nuisance.unknown]
    if not wanted:
        return ()
    values, covariance = recovered(design, profile)
    jacobian = design.whole_jacobian(profile.minimum.unknowns)
    weights, before = weights_of(jacobian), len(covariance) - len(values)
    expected = [number for number, nuisance in enumerate(nuisances) if nuisance.is_expected]
    out = []
    for number, unknown in wanted:
        noise, place = profile.resting(weights[before + number]), before + number
        value, spread = float(values[number]), float(np.sqrt(covariance[place, place]))
        estimate = undetermined(design.model.subject, unknown, None)
        if np.isfinite(spread):
            alone = number in expected and ALONE * spread < _u_without(
                jacobian, len(design.measured) + expected.index(number), place
            )
            reach = float(np.sqrt(noise.drop())) * spread
            end: Ends = "expected" if alone else "found"
            estimate = replace(
                estimate,
                value=value,
                u=float(np.sqrt(noise.variance)) * spread,
                low=value - reach,
                high=value + reach,
                low_ends=end,
                high_ends=end,
                determined="yes",
            )
        out.append(estimate)
    return tuple(out)


def recovered(design: Design, profile: Profile) -> tuple[Array, Array]:
    """Nuisances (m,) at the best fit, and the covariance (p + m, p + m) of unknowns and nuisances together.

    For a residual of unit variance.
    """
    best = profile.minimum.unknowns
    values = -np.linalg.lstsq(design.nuisances, design.rows(best), rcond=1e-10)[0]
    return values, covariance_of(design.whole_jacobian(best))[0]
