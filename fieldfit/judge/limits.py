"""Limits: what the book asks of a member, held against what was found."""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np

from fieldfit.fieldbook.published import DYNAMIC
from fieldfit.fit import Estimate, Reconciliation, Sagging, sag_of_stage
from fieldfit.judge.checks import Check, decided
from fieldfit.judge.rules import DEFLECTIONS, RULES, deflection_checks
from fieldfit.observe import Limit

__all__ = ["checks_of"]

BOOK = "limit in the field book"
TOLERANCE = "tolerance in the field book"


def checks_of(found: Reconciliation) -> tuple[Check, ...]:
    """Every check that the book asks for: the tolerance on each EI, then its limits in order."""
    checks = list(_tolerance_checks(found))
    for limit in _asked_for(found.subject.limits):
        checks += MAKERS[limit.limit](found, limit)
    return tuple(checks)


def _asked_for(limits: Sequence[Limit]) -> Iterator[Limit]:
    """Every limit that is a check of its own: a published rule is judged as a whole, and a dynamic factor asks too."""
    plain = {limit.limit for limit in limits if limit.where != DYNAMIC}
    for limit in limits:
        if limit.limit in RULES:
            continue
        if limit.where != DYNAMIC:
            yield limit
        elif limit.limit not in plain:
            yield replace(limit, where=None, at_least=None)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Seen:
    """An estimate as a check sees it: value and interval, and how to ask for the probability below a value."""

    value: float | None
    u: float | None
    low: float | None
    high: float | None
    below: Callable[[float], float | None] | None


def _tolerance_checks(found: Reconciliation) -> Iterator[Check]:
    tolerance = found.subject.tolerance
    limited = bool(np.isfinite(tolerance))
    ends = (1.0 - tolerance, 1.0 + tolerance) if limited else (None, None)
    for estimate in _estimates(found, "EI", None):
        check = _check(found, estimate, "EI ratio", "ratio", _seen_EI(found, estimate), ends, TOLERANCE)
        yield check if limited else replace(check, verdict="not assessed", reason="the book gives no tolerance")


def _ratio_checks(found: Reconciliation, limit: Limit) -> list[Check]:
    ends = (limit.at_least, limit.at_most)
    return [
        _check(found, estimate, "EI ratio", "ratio", _seen_EI(found, estimate), ends, BOOK)
        for estimate in _estimates(found, "EI", limit.where)
    ]


def _fixity_checks(found: Reconciliation, limit: Limit) -> list[Check]:
    ends = (limit.at_least, limit.at_most)
    return [
        _check(found, estimate, "fixity", "ratio", _seen_fixity(found, estimate), ends, BOOK)
        for estimate in _estimates(found, "rotational restraint", limit.where)
    ]


def _bearing_checks(found: Reconciliation, limit: Limit) -> list[Check]:
    ends = (limit.at_least, limit.at_most)
    return [
        _check(found, estimate, "bearing stiffness", "bearing stiffness", _seen_bearing(found, estimate), ends, BOOK)
        for estimate in _estimates(found, "bearing stiffness", limit.where)
    ]


def _sag_checks(found: Reconciliation, limit: Limit) -> list[Check]:
    """Largest deflection of a span from the chord of its supports, by the fitted member under a stage's load.

    ``span/n`` asks the same of the length of the span over the deflection, a cantilever counting twice its length.
    """
    checks = []
    for number, stage in enumerate(found.subject.stages):
        if limit.stage not in (None, stage.name) or stage.role == "zero":
            continue
        spans = [sagging for sagging in sag_of_stage(found, number) if limit.where in (None, *sagging.names)]
        checks += [_sag_check(found, limit, stage.name, sagging) for sagging in spans]
    return checks


def _sag_check(found: Reconciliation, limit: Limit, stage: str, sagging: Sagging) -> Check:
    at_least, at_most = limit.at_least, limit.at_most
    value, u, ends = sagging.sag, sagging.u, (sagging.low, sagging.high)
    kind = "deflection"
    if limit.limit == "span/n":
        # The deflection must not be more than the length over n.
        at_most = None if at_least is None else sagging.length / at_least
        at_least = None
    seen = _Seen(value=value, u=u, low=ends[0], high=ends[1], below=sagging.probability_below)
    plain = Estimate(
        quantity=limit.limit, where=sagging.names[0], stage=stage, determined="yes" if u is not None else "no"
    )
    source = f"{BOOK}: span/{limit.at_least:g}" if limit.limit == "span/n" and limit.at_least is not None else BOOK
    check = _check(found, plain, limit.limit, kind, seen, (at_least, at_most), source)
    return replace(check, stage=stage)


MAKERS: Mapping[str, Callable[[Reconciliation, Limit], list[Check]]] = {
    "EI ratio": _ratio_checks,
    "fixity": _fixity_checks,
    "bearing stiffness": _bearing_checks,
    "deflection": _sag_checks,
    "span/n": _sag_checks,
    **dict.fromkeys(DEFLECTIONS, deflection_checks),
}


def _estimates(found: Reconciliation, quantity: str, where: str | None) -> list[Estimate]:
    """Estimates of a quantity, an apparent EI being one of EI."""
    same = [e for e in found.estimates if e.quantity == quantity or e.quantity.startswith(f"apparent {quantity}")]
    return [e for e in same if where is None or e.where == where]


def _seen_EI(found: Reconciliation, estimate: Estimate) -> _Seen:
    u = None if estimate.u is None or not estimate.recorded else estimate.u / estimate.recorded
    below = _below(found, estimate, lambda ratio: float(np.log(ratio)) if ratio > 0 else -np.inf)
    return _Seen(value=estimate.ratio, u=u, low=estimate.ratio_low, high=estimate.ratio_high, below=below)


def _seen_fixity(found: Reconciliation, estimate: Estimate) -> _Seen:
    below = _below(found, estimate, lambda fixity: fixity)
    low, high = estimate.fixity_low, estimate.fixity_high
    return _Seen(value=estimate.fixity, u=None, low=low, high=high, below=below)


def _seen_bearing(found: Reconciliation, estimate: Estimate) -> _Seen:
    """A bearing stiffness below a value is a flexibility above its inverse."""
    unit = estimate.unit
    above = _below(found, estimate, lambda stiffness: 1.0 / (stiffness * unit))
    below = None if above is None else lambda stiffness: 1.0 - above(stiffness)
    return _Seen(value=estimate.value, u=estimate.u, low=estimate.low, high=estimate.high, below=below)


def _below(
    found: Reconciliation, estimate: Estimate, inward: Callable[[float], float]
) -> Callable[[float], float] | None:
    profile, number = found.profile, estimate.number
    if profile is None or number is None or not np.isfinite(profile.minimum.covariance[number, number]):
        return None
    return lambda value: profile.probability_below(number, inward(value))


def _check(
    found: Reconciliation,
    estimate: Estimate,
    name: str,
    kind: str,
    seen: _Seen,
    ends: tuple[float | None, float | None],
    source: str,
) -> Check:
    at_least, at_most = ends
    word = decided(seen.low, seen.high, at_least, at_most)
    reason = _why_not(found, estimate, word)
    return Check(
        check=name,
        where=estimate.where,
        stage=estimate.stage,
        kind=kind,
        value=seen.value,
        u=seen.u,
        low=seen.low,
        high=seen.high,
        at_least=at_least,
        at_most=at_most,
        verdict="not assessed" if reason else word,
        probability_within=_probability(seen, at_least, at_most),
        source=source,
        reason=reason or (_side(name, seen, at_least) if word == "beyond" else None),
    )


def _why_not(found: Reconciliation, estimate: Estimate, word: str) -> str | None:
    """Why a check cannot be assessed, None if it can."""
    if found.profile is not None and found.profile.noise.explains_readings is False:
        return "the model does not explain the readings at their stated uncertainty"
    if estimate.quantity.startswith("apparent"):
        return "only an apparent EI is known: the book declares no camber or no creep"
    if estimate.determined == "no" or (estimate.determined != "yes" and word == "undecided"):
        return f"the readings do not determine {'EI' if estimate.quantity == 'EI' else 'it'}"
    return None


def _probability(seen: _Seen, at_least: float | None, at_most: float | None) -> float | None:
    if seen.below is None or (at_least is None and at_most is None):
        return None
    under = 1.0 if at_most is None else seen.below(at_most)
    over = 0.0 if at_least is None else seen.below(at_least)
    return None if under is None or over is None else float(np.clip(under - over, 0.0, 1.0))


def _side(name: str, seen: _Seen, at_least: float | None) -> str:
    low = at_least is not None and seen.high is not None and seen.high < at_least
    if name == "EI ratio":
        return "softer than recorded" if low else "stiffer than recorded"
    return "below its limit" if low else "above its limit"
