"""Verdicts: a member is within its limits, beyond one, undecided at this uncertainty, or not assessed."""

from collections.abc import Iterator
from dataclasses import dataclass

from fieldfit.fit import Reconciliation, uplift_notes
from fieldfit.judge.checks import Check, worst
from fieldfit.judge.limits import checks_of
from fieldfit.judge.restraint import restraint_notes
from fieldfit.judge.rules import LoadTest, check_of, load_test_of

__all__ = ["CAUTIONS", "Verdict", "judge_member"]

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
LOOK = "look first at the units of the loads, of E and of I, and only then for a cause in the member."
FAR = 3.0  # times the record, either way: a slip in the record is then likelier than such a member (judgement)


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """A reconciled member, its checks and the worst of them; ``load_test`` where its readings hold or ask for one."""

    reconciliation: Reconciliation
    checks: tuple[Check, ...]
    verdict: str
    warnings: tuple[str, ...]
    load_test: LoadTest | None = None
    cautions: tuple[str, ...] = CAUTIONS

    def __repr__(self) -> str:
        return f"Verdict({self.reconciliation.subject.name}: {self.verdict})"


def judge_member(found: Reconciliation) -> Verdict:
    """Hold what was found against every limit of the book."""
    load_test = load_test_of(found)
    checks = (*checks_of(found), *(check_of(outcome) for outcome in (load_test.outcomes if load_test else ())))
    lost = found.profile is not None and found.profile.noise.explains_readings is False
    stiffer = any(e.quantity == "EI" and e.ratio_low is not None and e.ratio_low > 1.0 for e in found.estimates)
    warnings = [*_unlikely(found), *found.warnings]
    if stiffer and not lost:
        warnings.append(EXTRA_STIFFNESS)
    warnings.extend(uplift_notes(found))
    return Verdict(
        reconciliation=found,
        checks=checks,
        verdict=worst(check.verdict for check in checks),
        warnings=(*warnings, *restraint_notes(found)),
        load_test=load_test,
    )


def _unlikely(found: Reconciliation) -> Iterator[str]:
    """Where an EI is so far from the record that the record is to be looked at before the member."""
    for estimate in found.estimates:
        where = "" if estimate.where == "whole" else f" of {estimate.where}"
        if estimate.quantity != "EI":
            continue
        if estimate.ratio_high is not None and estimate.ratio_high < 1.0 / FAR:
            yield f"EI{where} comes out at less than a third of the recorded one: {LOOK}"
        if estimate.ratio_low is not None and estimate.ratio_low > FAR:
            yield f"EI{where} comes out at more than three times the recorded one: {LOOK}"
