"""Estimated: limits on what a fit estimates (EI ratio, fixity, bearing stiffness, settlement), place by place."""

from collections.abc import Callable, Collection, Iterator, Mapping
from dataclasses import dataclass, replace
from itertools import repeat

import numpy as np

from fieldfit.fit import Estimate, Reconciliation
from fieldfit.judge.checks import BOOK, Check, decided, missed_side, unassessed
from fieldfit.judge.spans import APPARENT, UNEXPLAINED, is_apparent
from fieldfit.observe import Limit

__all__ = ["limit_checks", "tolerance_checks"]

TOLERANCE = "tolerance in the field book"
SAME = 1e-9  # of the length: zones that leave less than this of a member leave nothing


@dataclass(frozen=True, slots=True, kw_only=True)
class _Seen:
    """An estimate as a check sees it: value and interval, and how to ask for the probability of meeting limits."""

    value: float | None
    u: float | None
    low: float | None
    high: float | None
    between: Callable[[float | None, float | None], float] | None


@dataclass(frozen=True, slots=True, kw_only=True)
class _Kind:
    """What a limit is on: the quantity fitted for it, its kind of quantity, and how its estimate is seen."""

    check: str
    quantity: str
    kind: str
    seen: Callable[[Reconciliation, Estimate], _Seen]


def tolerance_checks(found: Reconciliation) -> Iterator[Check]:
    """The tolerance on each EI; where the book gives none, each is not assessed."""
    tolerance = found.subject.tolerance
    if np.isfinite(tolerance):
        whole = Limit(limit="EI ratio", where=None, stage=None, at_least=1.0 - tolerance, at_most=1.0 + tolerance)
        yield from _place_checks(found, whole, TOLERANCE)
        return
    for estimate in _estimates(found, "EI"):
        check = _check(found, KINDS["EI ratio"], estimate, (None, None), TOLERANCE)
        yield replace(check, verdict="not assessed", probability_within=None, reason="the book gives no tolerance")


def limit_checks(found: Reconciliation, limit: Limit) -> list[Check]:
    """A limit on an estimated quantity at every place it holds for."""
    return list(_place_checks(found, limit, BOOK))


def _place_checks(found: Reconciliation, limit: Limit, source: str) -> Iterator[Check]:
    """A check at every place that a limit holds for, also where nothing was fitted to hold against it."""
    kind, ends = KINDS[limit.limit], (limit.at_least, limit.at_most)
    fitted = [e for e in _estimates(found, kind.quantity) if None in (limit.stage, e.stage) or e.stage == limit.stage]
    places = {estimate.where for estimate in fitted}
    for place in (limit.where,) if limit.where else tuple(dict.fromkeys(e.where for e in fitted)):
        yield from (_check(found, kind, estimate, ends, source) for estimate in fitted if estimate.where == place)
    for place in {limit.where} - places if limit.where else _unfitted_places(found, kind, places):
        yield _unfitted(kind, place, ends, source, others=bool(fitted))


def _unfitted_places(found: Reconciliation, kind: _Kind, fitted: Collection[str]) -> tuple[str, ...]:
    """Where a limit that holds everywhere has nothing to be held against: supports, or what is left of the member."""
    member, supports = found.subject.member, found.subject.supports
    if kind.quantity == "EI":
        in_zones = float(np.nansum(member.zone_to - member.zone_from)) if found.subject.zones else 0.0
        rest = in_zones < (1.0 - SAME) * float(member.length[0]) or not {*found.subject.zones} <= {*fitted}
        return ("whole",) if rest and "whole" not in fitted else ()
    holds = np.isfinite(member.support_flexibility[0]) if kind.quantity == "bearing stiffness" else repeat(True)
    return tuple(name for name, held in zip(supports, holds, strict=False) if held and name not in fitted)


def _unfitted(kind: _Kind, place: str, ends: tuple[float | None, float | None], source: str, *, others: bool) -> Check:
    part = f" at {place}" if kind.quantity != "EI" else f" of {place}" if place != "whole" else ""
    rest = " of the rest of the member" if others and place == "whole" else part
    name = "EI" if kind.quantity == "EI" else kind.check
    return unassessed(
        kind.check,
        place,
        kind.kind,
        source,
        f"{name}{rest} was not among the unknowns: nothing was fitted to hold it against",
        ends,
    )


def _estimates(found: Reconciliation, quantity: str) -> list[Estimate]:
    """Estimates of a quantity, an apparent EI being one of EI."""
    return [e for e in found.estimates if e.quantity == quantity or (quantity == "EI" and is_apparent(e))]


def _seen_EI(found: Reconciliation, estimate: Estimate) -> _Seen:
    u = None if estimate.u is None or not estimate.recorded else estimate.u / estimate.recorded
    between = _between(found, estimate, lambda ratio: float(np.log(ratio)) if ratio > 0 else -np.inf)
    return _Seen(value=estimate.ratio, u=u, low=estimate.ratio_low, high=estimate.ratio_high, between=between)


def _seen_fixity(found: Reconciliation, estimate: Estimate) -> _Seen:
    between = _between(found, estimate, lambda fixity: fixity)
    low, high = estimate.fixity_low, estimate.fixity_high
    return _Seen(value=estimate.fixity, u=None, low=low, high=high, between=between)


def _seen_bearing(found: Reconciliation, estimate: Estimate) -> _Seen:
    """A bearing stiffness from one value to another is a flexibility between their inverses."""
    unit = estimate.unit
    inward = _between(found, estimate, lambda stiffness: 1.0 / (stiffness * unit) if stiffness > 0 else np.inf)
    between = None if inward is None else lambda at_least, at_most: inward(at_most, at_least)
    return _Seen(value=estimate.value, u=estimate.u, low=estimate.low, high=estimate.high, between=between)


def _seen_settlement(found: Reconciliation, estimate: Estimate) -> _Seen:
    between = _between(found, estimate, lambda settlement: settlement)
    return _Seen(value=estimate.value, u=estimate.u, low=estimate.low, high=estimate.high, between=between)


KINDS: Mapping[str, _Kind] = {
    "EI ratio": _Kind(check="EI ratio", quantity="EI", kind="ratio", seen=_seen_EI),
    "fixity": _Kind(check="fixity", quantity="rotational restraint", kind="ratio", seen=_seen_fixity),
    "bearing stiffness": _Kind(
        check="bearing stiffness", quantity="bearing stiffness", kind="bearing stiffness", seen=_seen_bearing
    ),
    "settlement": _Kind(check="settlement", quantity="settlement", kind="settlement", seen=_seen_settlement),
}


def _between(
    found: Reconciliation, estimate: Estimate, inward: Callable[[float], float]
) -> Callable[[float | None, float | None], float] | None:
    """How probable it is that an unknown lies between two values, both of which will do, None where nobody knows."""
    profile, number = found.profile, estimate.number
    if profile is None or number is None or not np.isfinite(profile.minimum.covariance[number, number]):
        return None
    unknown = found.model.unknowns[number]
    low, high = unknown.own_bounds
    within = (unknown.lower if low else -np.inf, unknown.upper if high else np.inf)

    def probability(at_least: float | None, at_most: float | None) -> float:
        under = 1.0 if at_most is None else profile.probability_up_to(number, inward(at_most), within)
        short = 0.0 if at_least is None else profile.probability_below(number, inward(at_least), within)
        return max(under - short, 0.0)

    return probability


def _check(
    found: Reconciliation, kind: _Kind, estimate: Estimate, ends: tuple[float | None, float | None], source: str
) -> Check:
    at_least, at_most = ends
    seen = kind.seen(found, estimate)
    word = decided(seen.low, seen.high, at_least, at_most)
    refused = _why_not(found, estimate, word)
    known = refused is None and seen.between is not None
    return Check(
        check=kind.check,
        where=estimate.where,
        stage=estimate.stage,
        kind=kind.kind,
        value=seen.value,
        u=seen.u,
        low=seen.low,
        high=seen.high,
        at_least=at_least,
        at_most=at_most,
        verdict="not assessed" if refused else word,
        probability_within=seen.between(at_least, at_most) if known and seen.between else None,
        source=source,
        reason=refused or (_beyond(kind, seen.high, at_least) if word == "beyond" else None),
    )


def _why_not(found: Reconciliation, estimate: Estimate, word: str) -> str | None:
    """Why a check cannot be assessed, None if it can."""
    if found.profile is not None and found.profile.noise.explains_readings is False:
        return UNEXPLAINED
    if is_apparent(estimate):
        return APPARENT
    if estimate.determined == "no" or (estimate.determined != "yes" and word == "undecided"):
        return f"the readings do not determine {'EI' if estimate.quantity == 'EI' else 'it'}"
    return None


def _beyond(kind: _Kind, high: float | None, at_least: float | None) -> str:
    side = missed_side(high, at_least)
    if kind.quantity != "EI":
        return side
    return "softer than recorded" if side.startswith("below") else "stiffer than recorded"
