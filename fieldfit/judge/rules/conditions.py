"""Conditions: what a rule asks of the test itself: how long the load stayed on, how long after it was read, how much.

Times come from the stages' start and end. Where the book gives none, or less than the rule asks for, a pass does not
count: whoever writes no times is not judged better than one who wrote that they were too short.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from fieldfit.judge.rules.adequacy import Adequacy
from fieldfit.judge.rules.declare import Rule, Wait
from fieldfit.judge.rules.measures import pairs
from fieldfit.judge.rules.outcome import Condition
from fieldfit.judge.rules.record import SAME_LOAD, Cycle, Record, hours
from fieldfit.observe import Limit

__all__ = ["load_conditions", "time_conditions", "timed"]

SLACK = 1e-9  # of a time: binary rounding
ZERO_BEFORE = 1.0  # h: a reading no longer before the first increment is its zero (ACI 318)
LATE = 1.25  # times the recovery time: a residual read so late does not show what the rule asks


def time_conditions(rule: Rule, record: Record, numbers: Mapping[str, Limit]) -> Iterator[Condition]:
    """The times a rule asks for, of the test and of its repeat, as far as the book tells them."""
    tested = [record.cycles[-1] if rule.channels == "every" else record.heaviest]
    if rule.of_repeat and record.repeat is not None:
        tested.append(record.repeat)
        yield from _zero_of_repeat(record, record.repeat)
    for wait in rule.waits:
        asked = _asked(wait, numbers)
        if wait.key == "wait before repeat":
            if len(tested) > 1:
                yield _condition(wait, asked, _until_repeat(record, tested[0], tested[1]), again=True)
            continue
        for number, cycle in enumerate(tested):
            taken = _kept_on(record, cycle) if wait.key == "hold" else _until_read(record, cycle)
            yield _condition(wait, asked, taken, again=number > 0)


def _zero_of_repeat(record: Record, repeat: Cycle) -> Iterator[Condition]:
    """A repeat counts from the position at its own start, so that one must have been read: D2 and Dr hang on it."""
    if repeat.zeros or repeat.start is None:
        return
    start, first = record.subject.stages[repeat.start], record.subject.stages[repeat.loaded[0]]
    before = hours(first, last=False) - hours(start, last=True)
    if before <= ZERO_BEFORE * (1 + SLACK):
        return
    when = f"read {_in_words(before)} before {first.name}" if np.isfinite(before) else "read at a time not recorded"
    says = f"the repeat has no zero reading of its own and would count from {start.name}, {when}"
    yield Condition(says=says, met=False if np.isfinite(before) else None, mark="seen", of_repeat=True)


def timed(rule: Rule, record: Record, numbers: Mapping[str, Limit]) -> Record:
    """The record with what was left, and what grew under the load, read as soon as the rule's time was up.

    Where several stages were read: the first of them at or after the time, else the last stage there is.
    """
    asked = {wait.key: _asked(wait, numbers) for wait in rule.waits}

    def first(stages: Sequence[int], since: float, key: str) -> int | None:
        read = [number for number in stages if np.isfinite(record.read[number]).any()]
        taken = [hours(record.subject.stages[number], last=True) - since for number in read]
        late = (n for n, time in zip(read, taken, strict=True) if key in asked and time >= asked[key] * (1 - SLACK))
        return next(late, stages[-1] if stages else None)

    def at_its_times(cycle: Cycle) -> Cycle:
        back = [number for number in cycle.off if record.subject.stages[number].role == "recovery"]
        begun = hours(record.subject.stages[cycle.full[0]], last=False)
        removed = _removed(record, cycle)[1]
        return replace(cycle, recovery=first(back, removed, "recovery time"), kept=first(cycle.held, begun, "hold"))

    return replace(record, cycles=tuple(at_its_times(cycle) for cycle in record.cycles))


def _asked(wait: Wait, numbers: Mapping[str, Limit]) -> float:
    """The time (h) that a rule asks for, the book's own where it gives one."""
    row = numbers.get(wait.key)
    return wait.hours if row is None or row.at_least is None else row.at_least


@dataclass(frozen=True, slots=True, kw_only=True)
class _Taken:
    """A time taken (hours, NaN where not recorded): how it is told, how its want is, and what the book should give."""

    hours: float
    said: str
    missing: str
    give: str


def _kept_on(record: Record, cycle: Cycle) -> _Taken:
    first, last = cycle.full[0], [*cycle.full, *cycle.held][-1]
    begin, end = record.subject.stages[first], record.subject.stages[last]
    known = first != last or end.end is not None
    ends = f"of {begin.name} and of the end of {end.name}" if first != last else f"and the end of {end.name}"
    return _Taken(
        hours=hours(end, last=True) - hours(begin, last=False) if known else float("nan"),
        said="the load was kept on",
        missing="how long the load was kept on",
        give=f"date and time of the start {ends}",
    )


def _until_read(record: Record, cycle: Cycle) -> _Taken:
    off, when = _removed(record, cycle)
    read, give = float("nan"), "a stage of the role recovery"
    if cycle.recovery is not None:
        stage = record.subject.stages[cycle.recovery]
        read = hours(stage, last=True)
        give = f"date and time of the end of {record.subject.stages[off].name} and of {stage.name}"
    return _Taken(
        hours=read - when,
        said="the residual was read after",
        missing="how long after unloading the residual was read",
        give=give,
    )


def _until_repeat(record: Record, cycle: Cycle, repeat: Cycle) -> _Taken:
    off, when = _removed(record, cycle)
    stages, begun = record.subject.stages, repeat.loaded[0]
    return _Taken(
        hours=hours(stages[begun], last=False) - when,
        said="the repeat began after",
        missing="how long after the first test the repeat began",
        give=f"date and time of the end of {stages[off].name} and of the start of {stages[begun].name}",
    )


def _removed(record: Record, cycle: Cycle) -> tuple[int, float]:
    """When the load was off: the end of the first stage without it, or of the last with it; the stage and its hours."""
    stages = record.subject.stages
    off = [number for number in cycle.off if stages[number].role == "unload"]
    number = off[0] if off else cycle.full[-1]
    return number, hours(stages[number], last=True)


def _condition(wait: Wait, asked: float, taken: _Taken, *, again: bool) -> Condition:
    """A time taken against a time asked for; too short a rest may spoil a failure, as more could still come back."""
    residual = wait.key == "recovery time"
    repeat = "in the repeat " if again and wait.key != "wait before repeat" else ""
    if not np.isfinite(taken.hours):
        says = f"{repeat}{taken.missing} is not recorded, the rule asks for {_in_words(asked)}: give {taken.give}"
        return Condition(says=says, met=None, mark=wait.mark, of_repeat=again, of_residual=residual)
    short = taken.hours < asked * (1 - SLACK)
    late = residual and taken.hours > LATE * asked and not wait.open_ended
    says = f"{repeat}{taken.said} {_in_words(taken.hours)}, the rule asks for {_in_words(asked)}"
    return Condition(
        says=f"{says}: so late a reading favours the member" if late else says,
        met=not (short or late),
        mark=wait.mark,
        of_repeat=again,
        of_residual=residual,
        spoils_failure=short and wait.key != "hold",
    )


def _in_words(time: float) -> str:
    """A time (hours) as an engineer would say it: below an hour in minutes."""
    return f"{60 * time:.3g} min" if abs(time) < 1.0 else f"{time:.4g} h"


def load_conditions(rule: Rule, record: Record, adequacy: Adequacy | str) -> Iterator[Condition]:
    """Whether the test loaded the critical section as the rule asks, and its repeat as much as the first."""
    if isinstance(adequacy, Adequacy):
        yield Condition(says=adequacy.says, met=adequacy.met, mark=rule.loads_mark)
    elif rule.loads:
        yield Condition(says=f"load asked for not checked: {adequacy}", met=None, mark=rule.loads_mark, only_told=True)
    if rule.pairs:
        yield _paired(rule, record)
    if rule.of_repeat and record.repeat is not None:
        share = record.top(record.repeat) / record.top(record.heaviest)
        says = f"the repeat reached {share:.4g} times the moment of the first test at the critical section"
        yield Condition(says=says, met=bool(share >= 1 - SAME_LOAD), mark="seen", of_repeat=True)


def _paired(rule: Rule, record: Record) -> Condition:
    """Whether equal cycles come in as many pairs as the protocol asks for, at rising loads up to the largest."""
    largest = max(record.top(cycle) for cycle in record.cycles)
    shares = [record.top(first) / largest for first, _ in pairs(record)]
    levels = 1 + sum(after > (1 + SAME_LOAD) * before for before, after in pairwise(shares))
    falls = any(after < (1 - SAME_LOAD) * before for before, after in pairwise(shares))
    met = bool(shares) and max(shares) >= 1 - SAME_LOAD and levels >= rule.pairs and not (falls and rule.pairs > 1)
    asked = "a pair of equal cycles to the largest load"
    if rule.pairs > 1:
        asked = f"{rule.pairs} pairs of equal cycles at rising loads, the last to the largest load"
    found = f"pairs to {', '.join(f'{100 * share:.3g} %' for share in shares)} of it" if shares else "none"
    return Condition(says=f"the rule asks for {asked}, the book has {found}", met=met, mark="seen")
