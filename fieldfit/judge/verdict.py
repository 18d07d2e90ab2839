"""Verdicts: a member is within its limits, beyond one, undecided at this uncertainty, or not assessed."""

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from fieldfit.fit import Estimate, Reconciliation

__all__ = ["CAUTIONS", "VERDICTS", "Check", "Verdict", "judge_member"]

VERDICTS = ("beyond", "undecided", "not assessed", "within")  # the worst first

CAUTIONS = (
    "This is a screening and back-analysis aid, not a structural assessment.",
    "Stiffness says nothing of strength: never extrapolate a stiffness found at test load to capacity.",
    "Decisions on safety, load limits and strengthening belong to a licensed engineer under the local code.",
    "A load test can bring a member down: stop criteria, propping and exclusion zones come first.",
    "Small-deflection elastic theory is assumed.",
    "A rigid support that nobody measured is an assumption, and is named as one.",
)
EXTRA_STIFFNESS = (
    "The member is stiffer than recorded. What adds that stiffness at test load (restraint, composite action, "
    "finishes) may not exist at ultimate load."
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """One value held against one pair of limits (None: no limit on that side), in ``unit``.

    ``probability_within`` is None where nothing is known of the value; ``reason`` says why a check is not
    assessed, or which side is beyond.
    """

    check: str
    where: str
    stage: str | None
    value: float | None
    low: float | None
    high: float | None
    unit: str
    at_least: float | None
    at_most: float | None
    verdict: str
    probability_within: float | None
    source: str
    edition: str | None
    reason: str | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """A reconciled member, its checks and the worst of them."""

    reconciliation: Reconciliation
    checks: tuple[Check, ...]
    verdict: str
    warnings: tuple[str, ...]
    cautions: tuple[str, ...] = CAUTIONS


def judge_member(reconciliation: Reconciliation) -> Verdict:
    """Hold every EI estimate against the tolerance on the recorded EI."""
    estimates = [estimate for estimate in reconciliation.estimates if estimate.quantity == "EI"]
    checks = tuple(_EI_check(reconciliation, number, estimate) for number, estimate in enumerate(estimates))
    stiffer = any(e.ratio_low is not None and e.ratio_low > 1.0 for e in estimates)
    return Verdict(
        reconciliation=reconciliation,
        checks=checks,
        verdict=worst(check.verdict for check in checks),
        warnings=reconciliation.warnings + ((EXTRA_STIFFNESS,) if stiffer else ()),
    )


def worst(verdicts: Iterable[str]) -> str:
    """The worst of some verdicts; not assessed if there are none."""
    return min(verdicts, key=VERDICTS.index, default="not assessed")


def _EI_check(reconciliation: Reconciliation, number: int, estimate: Estimate) -> Check:
    tolerance = reconciliation.subject.tolerance
    limited = bool(np.isfinite(tolerance))
    at_least, at_most = (1.0 - tolerance, 1.0 + tolerance) if limited else (None, None)
    reason = _unassessable(reconciliation, estimate, limited)
    verdict = "not assessed" if reason else _verdict(estimate, tolerance)
    probability = None
    if limited and reconciliation.profile is not None and estimate.determined == "yes":
        # The profile is in the logarithm of the ratio; a tolerance of 100 % and more leaves no lower limit.
        below = [
            reconciliation.profile.probability_below(number, np.log(r)) for r in (at_least, at_most) if r and r > 0
        ]
        probability = below[-1] - (below[0] if len(below) == 2 else 0.0)
    return Check(
        check="EI ratio",
        where=estimate.where,
        stage=None,
        value=estimate.ratio,
        low=estimate.ratio_low,
        high=estimate.ratio_high,
        unit="1",
        at_least=at_least,
        at_most=at_most,
        verdict=verdict,
        probability_within=probability,
        source="tolerance on the recorded EI, as given in the field book",
        edition=None,
        reason=reason or _side(estimate, verdict, tolerance),
    )


def _unassessable(reconciliation: Reconciliation, estimate: Estimate, limited: bool) -> str | None:
    if not limited:
        return "the book gives no tolerance"
    if estimate.determined != "yes":
        return "the readings do not determine EI"
    if reconciliation.profile is not None and reconciliation.profile.noise.explains_readings is False:
        return "the model does not explain the readings at their stated uncertainty"
    return None


def _verdict(estimate: Estimate, tolerance: float) -> str:
    if estimate.ratio_low is None or estimate.ratio_high is None:
        return "not assessed"
    if 1.0 - tolerance <= estimate.ratio_low and estimate.ratio_high <= 1.0 + tolerance:
        return "within"
    outside = estimate.ratio_high < 1.0 - tolerance or estimate.ratio_low > 1.0 + tolerance
    return "beyond" if outside else "undecided"


def _side(estimate: Estimate, verdict: str, tolerance: float) -> str | None:
    if verdict != "beyond" or estimate.ratio is None:
        return None
    return "stiffer than recorded" if estimate.ratio > 1.0 + tolerance else "softer than recorded"
