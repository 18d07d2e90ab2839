"""Conditions: what a rule asks of the test itself: how long the load stayed on, how long after it was read, how much.

Times come from the stages' start and end. Where the book gives none, the roles of its stages are taken at their word
and the report says so; where it gives less than the rule asks for, the gates do not count.
"""

from collections.abc import Iterator, Mapping

import numpy as np

from fieldfit.judge.rules.adequacy import Adequacy
from fieldfit.judge.rules.declare import Rule, Wait
from fieldfit.judge.rules.outcome import Condition
from fieldfit.judge.rules.record import SAME_LOAD, Cycle, Record, hours
from fieldfit.observe import Limit

__all__ = ["load_conditions", "time_conditions"]

SLACK = 1e-9  # of a time: binary rounding
LATE = 1.25  # times the recovery time: a residual read so late does not show what the rule asks


def time_conditions(rule: Rule, record: Record, numbers: Mapping[str, Limit]) -> Iterator[Condition]:
    """The times a rule asks for, of the test and of its repeat, as far as the book tells them."""
    tested = [record.cycles[-1 if rule.channels == "every" else 0]]
    if rule.of_repeat:
        tested += record.cycles[1:2]
    for wait in rule.waits:
        row = numbers.get(wait.key)
        asked = wait.hours if row is None or row.at_least is None else row.at_least
        if wait.key == "wait before repeat":
            if len(tested) > 1:
                begun = [hours(record.subject.stages[number], last=False) for number in tested[1].stages]
                begin = np.nanmin(begun) if np.isfinite(begun).any() else float("nan")
                said = "the repeat began after"
                yield _condition(wait, asked, float(begin) - _removed(record, tested[0]), said, again=True)
            continue
        for number, cycle in enumerate(tested):
            again = number > 0
            taken, said = _kept_on(record, cycle) if wait.key == "hold" else _until_read(record, cycle)
            yield _condition(wait, asked, taken, f"in the repeat {said}" if again else said, again=again)


def _kept_on(record: Record, cycle: Cycle) -> tuple[float, str]:
    stages = record.subject.stages
    begin, end = stages[cycle.full[0]], stages[[*cycle.full, *cycle.held][-1]]
    return hours(end, last=True) - hours(begin, last=False), "the load was kept on"


def _until_read(record: Record, cycle: Cycle) -> tuple[float, str]:
    said = "the residual was read after"
    if cycle.recovery is None:
        return float("nan"), said
    return hours(record.subject.stages[cycle.recovery], last=True) - _removed(record, cycle), said


def _removed(record: Record, cycle: Cycle) -> float:
    """When the load was off: the end of the first stage without it, or of the last with it."""
    stages = record.subject.stages
    off = [number for number in cycle.off if stages[number].role == "unload"]
    if off:
        return hours(stages[off[0]], last=True)
    return hours(stages[cycle.full[-1]], last=True)


def _condition(wait: Wait, asked: float, taken: float, said: str, *, again: bool) -> Condition:
    """A time taken against a time asked for; too short a rest may spoil a failure, as more could still come back."""
    if not np.isfinite(taken):
        says = f"{said}: time not recorded, the rule asks for {asked:g} h"
        return Condition(says=says, met=None, mark=wait.mark, of_repeat=again)
    short = taken < asked * (1 - SLACK)
    late = wait.key == "recovery time" and taken > LATE * asked and not wait.open_ended
    says = f"{said} {taken:.4g} h, the rule asks for {asked:g} h"
    return Condition(
        says=f"{says}: so late a reading favours the member" if late else says,
        met=not (short or late),
        mark=wait.mark,
        of_repeat=again,
        spoils_failure=short and wait.key != "hold",
    )


def load_conditions(rule: Rule, record: Record, adequacy: Adequacy | None) -> Iterator[Condition]:
    """Whether the test loaded the critical section as the rule asks, and its repeat as much as the first."""
    if adequacy is not None:
        yield Condition(says=adequacy.says, met=adequacy.met, mark=rule.loads_mark)
    elif rule.loads:
        says = "load asked for not checked: the book states no load of service (nature, in the table of loads)"
        yield Condition(says=says, met=None, mark=rule.loads_mark)
    if rule.of_repeat and len(record.cycles) > 1:
        share = record.top(record.cycles[1]) / record.top(record.cycles[0])
        says = f"the repeat reached {share:.4g} times the moment of the first test at the critical section"
        yield Condition(says=says, met=bool(share >= 1 - SAME_LOAD), mark="seen", of_repeat=True)
