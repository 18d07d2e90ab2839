"""Gates: each comparison of a rule made at every gauge, every time its measure is taken, and which of them decides.

A gate without its reading is unknown, never met.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import Array
from fieldfit.judge.rules.adequacy import design_share
from fieldfit.judge.rules.declare import Form, Gate, Seen
from fieldfit.judge.rules.measures import MEASURES, Taking, deflection
from fieldfit.judge.rules.outcome import Held
from fieldfit.judge.rules.ratios import Ratio
from fieldfit.judge.rules.record import SAME_LOAD, Cycle, Record
from fieldfit.observe import Limit, Subject

__all__ = [
    "FAINT",
    "NO_REPEAT",
    "compared",
    "held_gates",
    "largest_gauge",
    "looked_for",
    "of_every_gauge",
    "of_span",
    "unknown",
]

ROUNDING = 1e-9  # readings are decimal numbers: a difference less than this share is binary rounding
ENOUGH = 0.95  # of the largest deflection of a span: a gauge that shows less can fail a limit on it, not meet it
FLATTEST, STEEPEST = 1e5, 10.0  # a limit finer than span/100000 or coarser than span/10 is a slip of units
FORMULAS: Mapping[Form, str] = {
    "number": "",
    "span / n": "span / {n:g}",
    "span² / (n × depth)": "span² / ({n:g} × depth)",
    "n × span² / depth, m and mm": "{n:g} × span² / depth, with the span in m, the rest in mm",
}
LOADED = ("load", "hold")
NO_REPEAT = "no repeat test in the book"
MOVING = "the datum moves between stages, and no gauges stand at the supports of the span to take it off"
FAINT = ("below measurable range", "not determinable")


def held_gates(gate: Gate, record: Record, cycle: Cycle | None, numbers: Mapping[str, Limit]) -> Iterator[Held]:
    """A gate at every gauge, every time it was taken."""
    number = _number(gate, numbers)
    if cycle is None:
        yield unknown(gate, "", NO_REPEAT)
        return
    if number is None:
        yield unknown(gate, "", f"the book gives no number: write a row of limits with {gate.key} in the column where")
        return
    if gate.form != "number" and not np.isfinite(record.subject.depth) and "depth" in gate.form:
        yield unknown(gate, "", "the depth of the member is not in the book")
        return
    limits, wrong = _limits(gate, number, record)
    takings = (
        _at_design_load(record, cycle, numbers)
        if gate.measure not in MEASURES
        else MEASURES[gate.measure](record, cycle)
    )
    for taking in takings:
        if taking.ratio is None:
            yield unknown(gate, taking.where, taking.reason)
            continue
        for place, one in enumerate(compared(gate, record.gauges, taking, taking.ratio, limits, wrong, number)):
            if record.adrift[place] and one.met is not None:
                yield replace(one, met=None, probability=None, reason=MOVING)
                continue
            shown = _shown(one, 1.0 if taking.shows is None else float(taking.shows[place]))
            yield shown if gate.measure in MEASURES else _by_its_load(shown, _design_share(record, numbers))


def _shown(one: Held, share: float) -> Held:
    """A limit on a largest deflection that no gauge of the span shows is not met, though it may be exceeded."""
    if share >= ENOUGH or one.met is not True:
        return one
    reason = (
        f"no gauge near enough to where the span deflects most: by the record {one.where} shows {100 * share:.0f} %"
    )
    return replace(one, met=None, probability=None, reason=reason)


def _number(gate: Gate, numbers: Mapping[str, Limit]) -> float | None:
    row = numbers.get(gate.key)
    if row is None:
        return gate.number
    return row.at_least if row.at_most is None else row.at_most


def _limits(gate: Gate, number: float, record: Record) -> tuple[Array, NDArray[np.bool_]]:
    """The limit at every gauge (G,), m for a deflection, and where it can only be a slip of units.

    ACI 318: lt²/(20000 h), one unit throughout. IS 456, 17.6: 40 l²/D mm with l in m and D in mm.
    """
    span, depth = record.span, record.subject.depth
    if not gate.doubles:
        span = np.where(_overhanging(record), span / 2.0, span)
    if gate.form == "number":
        return np.full(len(span), number), np.zeros(len(span), dtype=bool)
    if gate.form == "span / n":
        limit = span / number
    elif gate.form == "span² / (n × depth)":
        limit = span**2 / (number * depth)
    else:
        limit = number * span**2 / (1000.0 * depth) / 1000.0
    return limit, (limit > span / STEEPEST) | (limit < span / FLATTEST)


def _overhanging(record: Record) -> NDArray[np.bool_]:
    """Which gauges (G,) stand on an overhang, whose span the record counts twice."""
    member = record.subject.member
    held = member.support_at[0][np.isfinite(member.support_flexibility[0])]
    return (record.at < held.min(initial=np.inf)) | (record.at > held.max(initial=-np.inf))


def _at_design_load(record: Record, cycle: Cycle, numbers: Mapping[str, Limit]) -> Iterator[Taking]:
    """Deflection (m) in the stage that the book names as that of the design load."""
    stage = _design_stage(record, numbers)
    if stage is None:
        yield Taking(where="", ratio=None, reason="the row of limits names no stage of the design load")
        return
    taking, role = deflection(record, stage, record.form(stage, cycle.start)), record.subject.stages[stage].role
    if role not in LOADED:
        reason = f"named as that of the design load, but its role is {role}: name one of role load or hold"
        yield replace(taking, ratio=None, reason=reason)
        return
    yield taking


def _design_stage(record: Record, numbers: Mapping[str, Limit]) -> int | None:
    name = next((row.stage for row in numbers.values() if row.stage), None)
    return next((number for number, one in enumerate(record.subject.stages) if one.name == name), None)


def _design_share(record: Record, numbers: Mapping[str, Limit]) -> float | None:
    """What the stage named carries of the design load, None where the book does not state that by nature."""
    stage = _design_stage(record, numbers)
    return None if stage is None else design_share(record, stage)


def _by_its_load(one: Held, share: float | None) -> Held:
    """Less than the design load can only show that the limit is not met, more than it only that it is."""
    if share is None or one.met is None or abs(share - 1.0) <= SAME_LOAD or one.met is (share > 1.0):
        return one
    reason = (
        f"its stage carries {100 * share:.3g} % of the moment of the design load, all of service less the dead load in "
        "place: name a stage that carries the design load"
    )
    return replace(one, met=None, probability=None, reason=reason)


def compared(
    gate: Gate,
    gauges: Sequence[str],
    taking: Taking,
    ratio: Ratio,
    limits: Array,
    wrong: NDArray[np.bool_],
    number: float,
) -> Iterator[Held]:
    """One taking of a gate at every gauge."""
    value, u, (low, high) = ratio.value, ratio.u, ratio.interval()
    below = ratio.below(limits)
    clear = ratio.is_measurable & (~np.array(taking.positive) | (ratio.bottom > 0))
    # Where the bottom cannot be less than nothing, a top clearly above what the limit allows of it settles the matter.
    above = ~clear & taking.positive & (gate.sense == "at most") & ratio.clearly_above(limits)
    below = np.where(above, ratio.top_below(limits), below)
    value = np.where(above & (ratio.bottom <= 0), np.nan, value)
    kind = "deflection" if gate.form != "number" else "ratio"
    formula = FORMULAS[gate.form].format(n=number)
    for place, name in enumerate(gauges):
        reason = None
        if np.isnan(ratio.top[place]) or np.isnan(ratio.bottom[place]):
            reason = f"a reading of {name} is missing"
        elif not (clear[place] or above[place]):
            reason = taking.faint
        elif wrong[place]:
            reason = "the limit is no deflection of this span: check the units of span and depth"
        probability = 1.0 - below[place] if gate.sense == "at least" else below[place]
        yield Held(
            key=gate.key,
            measure=gate.measure,
            where=name,
            at=taking.by_gauge[place] if taking.by_gauge else taking.where,
            kind=kind,
            value=_plain(value[place]),
            u=_plain(u[place]),
            low=_plain(low[place]),
            high=_plain(high[place]),
            sense=gate.sense,
            limit=float(limits[place]),
            met=None
            if reason
            else not above[place] and _met(float(value[place]), gate.sense, float(limits[place]), kind),
            probability=None if reason else _plain(probability),
            mark=gate.mark,
            of_repeat=gate.of_repeat,
            overridden=number != gate.number,
            waives=gate.waives,
            formula=formula,
            reason=reason,
        )


def _met(value: float, sense: str, limit: float, kind: str) -> bool:
    """The code's own comparison, binary rounding of decimal readings aside; a ratio's is that of its parts, near 1."""
    slack = ROUNDING * max(abs(limit), abs(value), 1.0 if kind == "ratio" else 0.0)
    if sense == "at most":
        return value <= limit + slack
    return value >= limit - slack if sense == "at least" else value < limit - slack


def _plain(value: float) -> float | None:
    return float(value) if np.isfinite(value) else None


def unknown(gate: Gate, at: str, reason: str) -> Held:
    """A gate that cannot be held against anything, and why."""
    return Held(
        key=gate.key,
        measure=gate.measure,
        where="",
        at=at,
        kind="deflection" if gate.form != "number" else "ratio",
        value=None,
        u=None,
        low=None,
        high=None,
        sense=gate.sense,
        limit=None,
        met=None,
        probability=None,
        mark=gate.mark,
        of_repeat=gate.of_repeat,
        overridden=False,
        waives=gate.waives,
        reason=reason,
    )


def of_span(gate: Gate, record: Record, number: int, taken: Sequence[Held]) -> Held:
    """A gate at the gauge that deflects most in a span of the test; unknown where none stands there."""
    if not (record.place == number).any():
        return unknown(gate, "", f"no gauge stands in the span {record.spans[number].name}")
    most = largest_gauge(record, number)
    return min((one for one in taken if one.where in ("", most)), key=_badness)


def of_every_gauge(record: Record, taken: Sequence[Held]) -> Held:
    """The one that decides a gate where every gauge counts.

    Those whose ratio is lost in the uncertainty of the readings are left out, but not at the gauge that deflects most,
    at its last taking.
    """
    of_most = [one for one in taken if one.where in ("", largest_gauge(record))]
    lost = [one for one in taken if one.met is None and one.reason not in FAINT]
    clear = [one for one in taken if one.met is not None]
    last = of_most[-1]
    if any(one.met is False for one in clear):
        return min(clear, key=_badness)
    if lost:
        return lost[0]
    return min(clear, key=_badness) if last.met is not None else last


def _badness(one: Held) -> tuple[int, float]:
    order = {False: 0, None: 1, True: 2}[one.met]
    return order, 0.5 if one.probability is None else one.probability


def largest_gauge(record: Record, span: int | None = None) -> str:
    """The gauge that deflects most under the heaviest load of the test, of all or of those of one span.

    One that was not read there counts as if it had deflected like the others, by what the recorded member would: where
    it would be the largest, its missing reading is not passed over.
    """
    peak = record.heaviest
    slope = record.form(record.largest(peak), peak.start)
    size, calculated = np.abs(record.valued(slope)), np.abs(record.valued(slope, record.calculated))
    read = np.isfinite(size) & (calculated > 0)
    like = float(np.median(size[read] / calculated[read])) if read.any() else 1.0
    size = np.where(np.isnan(size), like * calculated, size)
    return record.gauges[int(np.where(record.place == (record.place if span is None else span), size, -1.0).argmax())]


def looked_for(seen: Seen, subject: Subject) -> Held:
    """A finding: met where the engineer looked and found nothing, unknown where nobody says."""
    found = subject.findings.get(seen.finding)
    return replace(
        unknown(Gate(key=seen.finding, measure="inspection", sense="at most", number=None, mark=seen.mark), "", ""),
        met=None if found is None else not found,
        reason=f"the book does not say whether {seen.finding} was looked for" if found is None else None,
    )
