"""Estimates: what a fit says of each quantity, in SI, with how each side of its interval ends."""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from scipy import stats

from fieldfit.beam import Array
from fieldfit.fit.design import Design
from fieldfit.fit.gauge_effects import WARMTH
from fieldfit.fit.least_squares import covariance_of
from fieldfit.fit.noise import LEVEL, Noise
from fieldfit.fit.nuisance import Nuisance
from fieldfit.fit.profile import End, Ends, Profile
from fieldfit.fit.unknowns import BEARING, CAMBER, CREEP, EI, RESTRAINT, Unknown, flexibility_unit
from fieldfit.observe import Subject

__all__ = ["Estimate", "estimates_of", "nuisance_estimates", "recovered", "undetermined"]

ALONE = 10.0  # an interval so many times wider without what the book expects is held up by that alone
CUT = 3.0  # an interval so many times wider without the bounds of the others is made by these bounds


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
    interval = profile.interval(number)
    u = float(np.sqrt(profile.noise.variance * profile.minimum.covariance[number, number]))
    alone = unknown.is_expected and _without_expectation(design, profile, number) > ALONE * u
    low, high = (_named(end, alone) for end in (interval.low, interval.high))
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
    jacobian = np.delete(profile.minimum.jacobian, row, axis=0)
    length = np.linalg.norm(jacobian, axis=0)
    if length[number] == 0:
        return float(np.inf)
    others = np.delete(jacobian / np.where(length > 0, length, 1.0), number, axis=1)
    mine = jacobian[:, number] / length[number]
    left = mine - others @ np.linalg.lstsq(others, mine, rcond=1e-10)[0] if others.size else mine
    sight = float(np.linalg.norm(left))
    return float(np.sqrt(profile.noise.variance)) / (sight * length[number]) if sight > 1e-8 else float(np.inf)


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
    variance = profile.minimum.covariance[number, number]
    if not np.isfinite(variance):
        return "between"
    for end in (low, high):
        reach = np.sqrt(end.drop * variance)
        if reach > CUT * abs(end.value - best) and _others_at_bound(profile, number, end):
            return "between"
    return "yes"


def _others_at_bound(profile: Profile, number: int, end: End) -> bool:
    lower, upper = profile.problem.lower, profile.problem.upper
    slack = 1e-6 * np.where(np.isfinite(upper - lower), upper - lower, 1.0)
    at_bound = (end.unknowns - lower <= slack) | (upper - end.unknowns <= slack)
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


def nuisance_estimates(
    design: Design, nuisances: tuple[Nuisance, ...], profile: Profile, noise: Noise
) -> tuple[Estimate, ...]:
    """The nuisances the book asked for, recovered from the whole design at the best fit."""
    wanted = [(number, nuisance.unknown) for number, nuisance in enumerate(nuisances) if nuisance.unknown]
    if not wanted:
        return ()
    values, whole = recovered(design, profile)
    covariance = whole[len(whole) - len(values) :, len(whole) - len(values) :]
    reach = stats.norm.ppf((1 + LEVEL) / 2)
    if noise.degrees_of_freedom is not None:
        reach = stats.t.ppf((1 + LEVEL) / 2, noise.degrees_of_freedom)
    out = []
    for number, unknown in wanted:
        value, u = float(values[number]), float(np.sqrt(noise.variance * covariance[number, number]))
        plain = undetermined(design.model.subject, unknown, None)
        if np.isfinite(u):
            sides: list[float | None] = [value - reach * u, value + reach * u]
            plain = replace(_as_it_is_found(plain, value, u, sides), determined="yes")
        out.append(plain)
    return tuple(out)


def _as_it_is_found(plain: Estimate, value: float, u: float, sides: Sides) -> Estimate:
    return replace(plain, value=value, u=u, low=sides[0], high=sides[1], low_ends="found", high_ends="found")


def recovered(design: Design, profile: Profile) -> tuple[Array, Array]:
    """Nuisances (m,) at the best fit, and the covariance (p + m, p + m) of unknowns and nuisances together.

    For a residual of unit variance.
    """
    best = profile.minimum.unknowns
    values = -np.linalg.lstsq(design.nuisances, design.rows(best), rcond=1e-10)[0]
    return values, covariance_of(design.whole_jacobian(best))[0]
