"""Evaluate: a published rule held against a load test. The code's own comparison decides; probabilities stand beside.

Nothing missing ever passes: a gate without its reading is unknown, and an unknown gate is only passed over where the
rule joins it by OR with one that is met.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace

import numpy as np

from fieldfit.judge.rules.adequacy import SHARE, adequacy_of
from fieldfit.judge.rules.conditions import load_conditions, time_conditions, timed
from fieldfit.judge.rules.declare import Gate, Repeat, Rule, Seen, findings_of
from fieldfit.judge.rules.gates import FAINT, NO_REPEAT, held_gates, largest_gauge, looked_for, of_every_gauge, of_span
from fieldfit.judge.rules.means import AFTER_RESET
from fieldfit.judge.rules.measures import OF_ONE_CYCLE
from fieldfit.judge.rules.outcome import Condition, Held, Outcome, joined, sureness
from fieldfit.judge.rules.record import Cycle, Record
from fieldfit.judge.rules.remarks import remarks
from fieldfit.observe import Limit
from fieldfit.observe.naming import first_named

__all__ = ["evaluate"]

WORST_FIRST = ("fails", "repeat allowed", "not assessed", "passes on repeat", "passes")
Decided = Mapping[Gate | Seen, Held]
Result = tuple[str, Held | None, str]

VERDICTS = {"passes": "within", "passes on repeat": "within", "fails": "beyond", "repeat allowed": "undecided"}
#: what time may still mend: taken after the time of recovery
RESIDUALS = ("residual over maximum", "last residual over maximum", "recovery", "gain of recovery")
GROWTH = "growth under hold"
OVER_RECOVERED = 2.0  # of its own u: a residual so far below nothing is no better than complete recovery


def evaluate(rule: Rule, record: Record, overrides: Sequence[Limit]) -> Outcome:
    """Hold one rule against one test; ``overrides`` are the rows of the book that give other numbers for it."""
    numbers = {row.where: row for row in overrides if row.where}
    record = timed(rule, record, numbers)
    cycles: tuple[Cycle, Cycle | None] = (record.heaviest, record.repeat)
    taken = {gate: tuple(held_gates(gate, record, cycles[gate.of_repeat], numbers)) for gate in rule.gates}
    every = [one for each in taken.values() for one in each]
    seen: Decided = {finding: looked_for(finding, record.subject) for finding in findings_of(rule)}
    share = numbers[SHARE].at_least if SHARE in numbers else None
    adequacy = adequacy_of(rule, record, share or 1.0)
    conditions = (*time_conditions(rule, record, numbers), *load_conditions(rule, record, adequacy))
    spans = [{**held, **seen} for held in _by_span(rule, record, taken)]
    held, (result, decided_by, reason) = _governing([(held, _result(rule, held, conditions)) for held in spans])
    return Outcome(
        rule=rule,
        result=result,
        verdict=VERDICTS.get(result, "not assessed"),
        reason=reason,
        decided_by=decided_by,
        gates=tuple(held.values()),
        every=tuple(every),
        conditions=conditions,
        notes=tuple(_notes(rule, record, every, numbers)),
    )


def _by_span(rule: Rule, record: Record, taken: Mapping[Gate, Sequence[Held]]) -> Iterator[Decided]:
    """What decides each gate, span by span of the test, the one that deflects most first.

    Each span is held to the whole rule: of gates joined by OR one span may meet this, another that. Where every gauge
    counts, all are one, beside the spans without any.
    """
    tested = [number for number, span in enumerate(record.spans) if span.tested]
    most = int(record.place[record.gauges.index(largest_gauge(record))])
    if rule.channels == "every":
        yield {gate: of_every_gauge(record, each) for gate, each in taken.items()}
        tested = [number for number in tested if not (record.place == number).any()]
    for number in sorted(tested, key=lambda number: number != most):
        yield {gate: of_span(gate, record, number, each) for gate, each in taken.items()}


def _governing(
    found: Sequence[tuple[Decided, Result]],
) -> tuple[Decided, Result]:
    """The span that comes out worst, then the least sure of those.

    One that deflects so little that nothing can be told of it does not keep the others from being judged.
    """
    (held, first), *others = found
    told = [one for one in others if not (one[1][0] == "not assessed" and one[1][1] and one[1][1].reason in FAINT)]
    return min([(held, first), *told], key=lambda one: (WORST_FIRST.index(one[1][0]), sureness(one[1][1])))


def _result(rule: Rule, held: Decided, conditions: Sequence[Condition]) -> Result:
    """The result in a word, the gate that decided it, and why in words."""
    first = joined(rule.accept, held)
    unmet = [one for one in conditions if one.is_open]
    of_first = [one for one in unmet if not (one.of_repeat and rule.repeat)]
    if first is None or first.met is None:
        return "not assessed", first, "" if first is None else first.reason or ""
    if first.met:
        return _passed("passes", *_resting(rule, held, first, of_first))
    if rule.repeat is None:
        return _failed(first, joined(rule.accept, _without_residuals(held)), of_first)
    return _repeated(rule.repeat, first, held, unmet)


def _resting(rule: Rule, held: Decided, first: Held, unmet: Sequence[Condition]) -> tuple[Held, Sequence[Condition]]:
    """What a pass rests on and the conditions open for it: when a residual was read is nothing to a pass without it."""
    alone = joined(rule.accept, _without_residuals(held))
    others = [one for one in unmet if not one.of_residual]
    return (alone, others) if alone is not None and alone.met and len(others) < len(unmet) else (first, unmet)


def _without_residuals(held: Decided) -> Decided:
    """The gates as if nothing had been read of what was left."""
    return {part: replace(one, met=None) if one.measure in RESIDUALS else one for part, one in held.items()}


def _repeated(repeat: Repeat, first: Held, held: Decided, unmet: Sequence[Condition]) -> Result:
    """The result where the first test did not pass and the rule knows a repeat."""
    allowed = joined(repeat.allowed, held) if repeat.allowed else None
    if allowed is not None and allowed.met is not True:
        return "fails" if allowed.met is False else "not assessed", allowed, _says(allowed)
    second = joined(repeat.accept, held)
    if second is None or second.reason == NO_REPEAT:
        return "repeat allowed", first, f"{_says(first)}; the rule allows a repeat test, and the book has none"
    if second.met is None:
        return "not assessed", second, f"first test: {_says(first)}; repeat: {second.reason}"
    if second.met:
        return _passed("passes on repeat", second, unmet)
    return _failed(second, joined(repeat.accept, _without_residuals(held)), unmet)


def _passed(word: str, by: Held, unmet: Sequence[Condition]) -> tuple[str, Held, str]:
    """A pass counts only where the test was made as the rule asks, and the book tells so."""
    if not unmet:
        return word, by, _says(by)
    says = [one.says for one in sorted(unmet, key=lambda one: one.met is None)]  # what is known to be short comes first
    return "not assessed", by, f"its gates are met, but {'; '.join(says)}"


def _failed(by: Held, alone: Held | None, unmet: Sequence[Condition]) -> tuple[str, Held, str]:
    """A residual read too early may still have gone: that keeps a failure by it from counting.

    ``alone`` is what decides without any residual: a failure by that no time can mend.
    """
    early = [one.says for one in unmet if one.spoils_failure]
    if not early:
        return "fails", by, _says(by)
    if alone is not None and alone.met is False:
        return "fails", alone, _says(alone)
    return "not assessed", by, f"{_says(by)}, but {early[0]}"


def _says(held: Held) -> str:
    """A gate and how it came out, in a few words."""
    if held.met is None:
        return f"{held.name}: {held.reason}"
    if held.measure == "inspection":
        return held.name if held.met else f"{held.key}: found"
    return f"{held.name} {'met' if held.met else 'not met'}"


def _notes(rule: Rule, record: Record, every: Sequence[Held], numbers: Mapping[str, Limit]) -> Iterator[str]:
    """What an engineer would want to know of how the rule was read."""
    yield from remarks(rule, numbers)
    yield from _cycles_not_judged(rule, record)
    yield from _zeros_read_twice(record)
    for before in (cycle.before for cycle in record.cycles if cycle.before):
        names = first_named([record.subject.stages[number].name for number in before])
        yield f"Put on and taken off before, in the same cycle: {names}. Times count from the last loading."
    over = [one.where for one in every if _over_recovered(one)]
    if over:
        names = ", ".join(dict.fromkeys(over))
        yield f"{names} came back further than it went: doubt its zero, the temperature or the datum of the test."
    yield from _under_hold(record, every)
    lost = dict.fromkeys(f"{one.where} ({one.key}, {one.at}): {one.reason}" for one in every if one.reason in FAINT)
    if lost:
        more = f" and {len(lost) - 3} more" if len(lost) > 3 else ""
        yield f"Lost in the uncertainty of the readings: {'; '.join(list(lost)[:3])}{more}."
    reset = [name for name in record.gauges if AFTER_RESET in name]
    if reset:
        why = "as no stage was read both before and after the reset"
        yield f"Counted as gauges of their own, {why}: {first_named(reset)}."
    if record.chord:
        bare = [name for name, net in zip(record.gauges, record.on_chord, strict=True) if not net]
        but = f"; as read, supports included: {first_named(bare)}" if bare else ""
        yield f"Deflections are taken from the chord between the gauges at the supports{but}."


def _cycles_not_judged(rule: Rule, record: Record) -> Iterator[str]:
    """Cycles that a rule of one test, or of a test and its repeat, passes over."""
    if not any(gate.measure in OF_ONE_CYCLE for gate in rule.gates):
        return
    test = record.cycles.index(record.heaviest)
    early = [cycle.name for cycle in record.cycles[:test]]
    late = [cycle.name for cycle in record.cycles[test + 1 :] if not (rule.of_repeat and cycle is record.repeat)]
    if early:
        yield (
            f"The test is cycle {record.heaviest.name}, the first to the largest load; taken as leading up to it: "
            f"{first_named(early)}."
        )
    if late:
        yield f"Cycles after those that this rule judges, and not judged by it: {first_named(late)}."


def _zeros_read_twice(record: Record) -> Iterator[str]:
    """Which zero counts where a cycle has several, and how far they are apart."""
    for cycle in record.cycles:
        if cycle.start is None or len(cycle.zeros) < 2:
            continue
        drift, most = record.read[cycle.start] - record.read[cycle.zeros[0]], record.maximum(cycle)[0]
        moved = np.abs(np.divide(drift, most, out=np.full(len(most), np.nan), where=most != 0))
        names = [record.subject.stages[number].name for number in (cycle.start, cycle.zeros[0])]
        apart = "was not read by the same gauges"
        if np.isfinite(moved).any():
            worst = int(np.nanargmax(moved))
            apart = f"is off it by up to {100 * moved[worst]:.2g} % of the largest deflection ({record.gauges[worst]})"
        yield f"Deflections count from {names[0]}, the last zero before the load; {names[1]} {apart}."


def _under_hold(record: Record, every: Sequence[Held]) -> Iterator[str]:
    """Growth after the time that a rule asks for, and deflection that fell while the load was kept on."""
    cycle, most = record.heaviest, largest_gauge(record)
    for one in every:
        if one.measure != GROWTH or one.value is None or cycle.kept is None:
            continue
        if one.where == most and cycle.held[-1] != cycle.kept:
            reached, last = record.read[cycle.full[0]], record.read[cycle.held[-1]]
            start = 0.0 if cycle.start is None else record.read[cycle.start]
            place = record.gauges.index(most)
            grown = float(((last - reached) / (reached - start))[place])
            end = record.subject.stages[cycle.held[-1]].name
            if grown > one.value:
                size = f"{100 * grown:.3g} %"
                yield f"Kept on longer than the rule asks, the load let {most} grow by {size} by stage {end}."
        if one.value < -OVER_RECOVERED * (one.u or 0.0):
            yield (
                f"{one.where} went back by {-100 * one.value:.3g} % while the load was kept on: doubt that all of the "
                "load stayed on, the temperature or the datum of the test."
            )


def _over_recovered(one: Held) -> bool:
    """A residual clearly below nothing."""
    if one.value is None or one.u is None:
        return False
    if one.measure in ("residual over maximum", "last residual over maximum", "permanency"):
        return one.value < -OVER_RECOVERED * one.u
    return one.measure == "recovery" and one.value > 1.0 + OVER_RECOVERED * one.u
