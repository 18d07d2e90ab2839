"""Conditions: what a rule asks of the test itself: how long the load stayed on, how long after it was read, how much.

Times come from the stages' start and end. Where the book gives none, the roles of its stages are taken at their word
and the report says so; where it gives less than the rule asks for, the gates do not count.
"""

from collections.abc import Iterator, Mapping

import numpy as np

from fieldfit.judge.rules.adequacy import Adequacy
from fieldfit.judge.rules.declare import Rule, Wait
from fieldfit.judge.rules.outcome import Condition
from fieldfit.judge.rules.record import Cycle, Record, hours
from fieldfit.observe import Limit

__all__ = ["EARLY", "load_conditions", "time_conditions"]

SLACK = 1e-9  # of a time: binary rounding
LATE = 1.25  # times the recovery time: a reading so late is said to be
READ, BEGAN = "the residual was read after", "the repeat began after"
EARLY = (READ, BEGAN)  # what keeps a failure from counting, too: it may still have gone back


def time_conditions(rule: Rule, record: Record, numbers: Mapping[str, Limit]) -> Iterator[Condition]:
    """The times a rule asks for, as far as the book tells them."""
    first = record.cycles[0]
    for wait in rule.waits:
        row = numbers.get(wait.key)
        asked = wait.hours if row is None or row.at_least is None else row.at_least
        if wait.key == "hold":
            taken = _span(record, first.full[0], [*first.full, *first.held][-1])
            said = "the load was kept on"
            yield _condition(wait, asked, taken, said)
        elif wait.key == "recovery time":
            cycle = record.cycles[-1] if rule.channels == "every" else first
            taken = float("nan") if cycle.recovery is None else _since_removal(record, cycle, cycle.recovery, last=True)
            yield _condition(wait, asked, taken, READ)
        elif len(record.cycles) > 1:
            begun = [hours(record.subject.stages[number], last=False) for number in record.cycles[1].stages]
            begin = np.nanmin(begun) if np.isfinite(begun).any() else float("nan")
            yield _condition(wait, asked, float(begin) - _removed(record, first), BEGAN)


def _span(record: Record, begin: int, end: int) -> float:
    return hours(record.subject.stages[end], last=True) - hours(record.subject.stages[begin], last=False)


def _removed(record: Record, cycle: Cycle) -> float:
    """When the load was off: the end of the first stage without it, or of the last with it."""
    stages = record.subject.stages
    off = [number for number in cycle.off if stages[number].role == "unload"]
    if off:
        return hours(stages[off[0]], last=True)
    return hours(stages[cycle.full[-1]], last=True)


def _since_removal(record: Record, cycle: Cycle, stage: int, *, last: bool) -> float:
    return hours(record.subject.stages[stage], last=last) - _removed(record, cycle)


def _condition(wait: Wait, asked: float, taken: float, said: str) -> Condition:
    if not np.isfinite(taken):
        return Condition(says=f"{said}: time not recorded, the rule asks for {asked:g} h", met=None, mark=wait.mark)
    met = taken >= asked * (1 - SLACK)
    late = ""
    if wait.key == "recovery time" and taken > LATE * asked:
        late = ": later than the rule says, which favours the member"
    says = f"{said} {taken:.4g} h, the rule asks for {asked:g} h{late}"
    return Condition(says=says, met=bool(met), mark=wait.mark)


def load_conditions(rule: Rule, adequacy: Adequacy | None) -> Iterator[Condition]:
    """Whether the test loaded the critical section as the rule asks."""
    if adequacy is not None:
        yield Condition(says=adequacy.says, met=adequacy.met, mark=rule.loads_mark)
    elif rule.loads:
        says = "load asked for not checked: the book states no load of service (nature, in the table of loads)"
        yield Condition(says=says, met=None, mark=rule.loads_mark)
