"""Load test: what the readings of a test hold, how it behaved, and what each rule that the book names makes of it."""

from dataclasses import dataclass

from fieldfit.fit import Reconciliation
from fieldfit.judge.rules.asked import rule_outcomes
from fieldfit.judge.rules.behaviour import Behaviour, behaviour_of
from fieldfit.judge.rules.catalogue import RULES
from fieldfit.judge.rules.outcome import Outcome
from fieldfit.judge.rules.record import Record, record_of

__all__ = ["LoadTest", "load_test_of"]

TESTING = ("hold", "unload", "recovery")  # roles that only a load test has


@dataclass(frozen=True, slots=True, kw_only=True)
class LoadTest:
    """A load test and its outcomes; ``record`` and ``behaviour`` are None where nothing was read."""

    record: Record | None
    behaviour: Behaviour | None
    outcomes: tuple[Outcome, ...]


def load_test_of(found: Reconciliation) -> LoadTest | None:
    """The load test of a member; None where the book neither names a rule nor has stages of one."""
    subject = found.subject
    asked = any(limit.limit in RULES for limit in subject.limits)
    if not asked and not any(stage.role in TESTING for stage in subject.stages):
        return None
    record = record_of(found)
    outcomes = tuple(rule_outcomes(found, record))
    if record is None and not outcomes:
        return None
    return LoadTest(
        record=record,
        behaviour=None if record is None else behaviour_of(found, record),
        outcomes=outcomes,
    )
