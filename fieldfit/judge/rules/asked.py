"""Asked: the rules that a book asks of a member, each as an outcome and as one check among the others."""

from collections.abc import Iterator

import numpy as np

from fieldfit.fit import Reconciliation
from fieldfit.judge.checks import Check
from fieldfit.judge.rules.catalogue import RULES
from fieldfit.judge.rules.declare import MARKS_SAID, Rule
from fieldfit.judge.rules.evaluate import evaluate
from fieldfit.judge.rules.factor import factor_outcome
from fieldfit.judge.rules.means import of_unknown_warmth, readable
from fieldfit.judge.rules.outcome import Held, Outcome
from fieldfit.judge.rules.record import Record
from fieldfit.observe import Subject
from fieldfit.observe.naming import first_named

__all__ = ["check_of", "rule_outcomes"]

NO_TEST = "the readings hold no load test: deflections within a span from a zero stage on, with a loaded stage"
CLOSE = (0.025, 0.975)  # a probability between these: the code's verdict may be chance


def rule_outcomes(found: Reconciliation, record: Record | None) -> Iterator[Outcome]:
    """An outcome for every rule that the member's limits name, in their order."""
    asked = dict.fromkeys(limit.limit for limit in found.subject.limits if limit.limit in RULES)
    for name in asked:
        rows = [limit for limit in found.subject.limits if limit.limit == name]
        unsettled = _unsettled(found.subject, RULES[name])
        if unsettled:
            yield _no_outcome(RULES[name], unsettled)
        elif RULES[name].reads == "strain":
            yield factor_outcome(RULES[name], found, rows)
        elif record is None:
            yield _no_outcome(RULES[name], NO_TEST)
        else:
            yield evaluate(RULES[name], record, rows)


def _unsettled(subject: Subject, rule: Rule) -> str:
    """Why readings that a rule takes cannot be corrected for the temperature of their gauges; empty where they can."""
    seen = subject.observations
    kind = seen.upright if rule.reads == "deflection" else np.isin(seen.quantity.astype(str), ("strain", "curvature"))
    gauges = of_unknown_warmth(subject, readable(seen) & kind)
    if not gauges:
        return ""
    return (
        f"read at several temperatures: {first_named(gauges)}, with a temperature coefficient that only the fit could "
        "tell, from the elastic member and the same readings: give it with its u in the table of gauges"
    )


def _no_outcome(rule: Rule, reason: str) -> Outcome:
    return Outcome(
        rule=rule,
        result="not assessed",
        verdict="not assessed",
        reason=reason,
        decided_by=None,
        gates=(),
        every=(),
        conditions=(),
        notes=(),
    )


def check_of(outcome: Outcome) -> Check:
    """An outcome as a check: the code's own verdict, with the gate that decided it and its probability."""
    by = outcome.decided_by
    number = by if by is not None and (by.limit is not None or by.value is not None) else None
    if number is not None and number.value is None and number.met is not None:
        number = None  # a ratio without bound: not met, and no number to show
    return Check(
        check=outcome.rule.name,
        where="whole" if number is None else number.where,
        stage=None,
        kind="ratio" if number is None else number.kind,
        **{name: getattr(number, name, None) for name in ("value", "u", "low", "high")},
        at_least=number.limit if number and number.sense == "at least" else None,
        at_most=number.limit if number and number.sense != "at least" else None,
        verdict=outcome.verdict,
        probability_within=None if number is None else number.probability,
        source=_source(outcome, by),
        edition=f"{outcome.rule.edition}, {outcome.rule.clause}",
        reason=f"{outcome.result}: {outcome.reason}{_chance(number)}" if outcome.reason else outcome.result,
    )


def _source(outcome: Outcome, by: Held | None) -> str:
    """Where the rule was read, and how sure the deciding number is."""
    marked = MARKS_SAID[by.mark] if by is not None and not by.overridden else ""
    given = "number given in the field book" if by is not None and by.overridden else marked
    return f"{outcome.rule.source}{f' ({given})' if given else ''}"


def _chance(by: Held | None) -> str:
    """A warning where the readings are not sure enough for the code's comparison to mean much."""
    if by is None or by.probability is None or not CLOSE[0] < by.probability < CLOSE[1]:
        return ""
    return "; the code compares the readings as they are, and at their uncertainty it could as well be the other way"
