"""Measures: what a gate holds against its number, each as a ratio at every gauge.

A measure that is taken several times in a test (at every load stage, for every pair of equal cycles) gives several
``Taking``. Deflections count by their size, so that a span that rises is judged like one that sags.
"""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from fieldfit.beam import Array
from fieldfit.judge.rules.ratios import Ratio
from fieldfit.judge.rules.record import SAME_LOAD, Cycle, Record

__all__ = ["MEASURES", "OF_ONE_CYCLE", "Taking", "deflection", "pairs"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Taking:
    """One taking of a measure: at which stages or cycles, its ratio (None: it cannot be taken, for the ``reason``).

    ``by_gauge`` names the stage of each gauge where it may not be the same for all. ``faint`` says what the ratio is
    called where its denominator is not clear of nothing, or ``positive`` and below. ``shows`` (G,) is how much of a
    largest deflection the gauges of the span show, by the record.
    """

    where: str
    ratio: Ratio | None
    reason: str = ""
    by_gauge: tuple[str, ...] = ()
    faint: str = "below measurable range"
    positive: bool = False
    shows: Array | None = None


def pairs(record: Record) -> list[tuple[Cycle, Cycle]]:
    """Successive cycles to the same largest load: A and B, C and D, and so on."""
    found, taken = [], -1
    tops = [record.top(cycle) for cycle in record.cycles]
    for first, second in pairwise(range(len(record.cycles))):
        if first > taken and abs(tops[first] - tops[second]) <= SAME_LOAD * max(tops[first], tops[second]):
            found.append((record.cycles[first], record.cycles[second]))
            taken = second
    return found


def _named(record: Record, stage: int) -> str:
    return f"stage {record.subject.stages[stage].name}"


def _maximum(record: Record, cycle: Cycle) -> Iterator[Taking]:
    """Largest deflection (m) of a cycle from its start."""
    yield _largest(record, cycle, cycle.start)


def _maximum_of_test(record: Record, _: Cycle) -> Iterator[Taking]:
    """Largest deflection (m) of the cycle of the heaviest load, from the start of the test."""
    yield _largest(record, record.heaviest, record.cycles[0].start)


def _largest(record: Record, cycle: Cycle, start: int | None) -> Taking:
    stages = record.largest(cycle)
    taking = deflection(record, cycle.full[-1], record.form(stages, start))
    return replace(taking, by_gauge=tuple(_named(record, stage) for stage in stages))


def deflection(record: Record, stage: int, slope: Array) -> Taking:
    """The size of a deflection (m) with its gradient (G, T), told as that of a stage."""
    top = record.valued(slope)
    side = np.where(top < 0, -1.0, 1.0)
    ratio = record.ratio(top * side, slope * side[:, None], np.ones(len(top)), np.zeros_like(slope))
    return Taking(where=_named(record, stage), ratio=ratio, shows=record.shown(slope))


def _fraction(record: Record, cycle: Cycle, stage: int, *, recovered: bool) -> Taking:
    """Residual over maximum, or what is left of it to one."""
    bottom, bottom_slope = record.maximum(cycle)
    slope = record.form(stage, cycle.start)
    top = record.valued(slope)
    if recovered:
        top, slope = bottom - top, bottom_slope - slope
    return Taking(where=_named(record, stage), ratio=record.ratio(top, slope, bottom, bottom_slope))


def _residual(record: Record, cycle: Cycle) -> Iterator[Taking]:
    yield _left(record, cycle, recovered=False)


def _recovery(record: Record, cycle: Cycle) -> Iterator[Taking]:
    yield _left(record, cycle, recovered=True)


def _left(record: Record, cycle: Cycle, *, recovered: bool) -> Taking:
    if cycle.recovery is None:
        return Taking(where="", ratio=None, reason=NO_RECOVERY)
    return _fraction(record, cycle, cycle.recovery, recovered=recovered)


NO_RECOVERY = "no stage of role recovery, with the load off as at the start"


def _last_residual(record: Record, _: Cycle) -> Iterator[Taking]:
    """Residual of the whole test, from its own start, over its largest deflection."""
    first, last = record.cycles[0], record.cycles[-1]
    if last.recovery is None:
        yield Taking(where="", ratio=None, reason=NO_RECOVERY)
        return
    bottom_slope = record.form(record.largest(record.heaviest), first.start)
    top_slope = record.form(last.recovery, first.start)
    bottom, top = record.valued(bottom_slope), record.valued(top_slope)
    yield Taking(where=_named(record, last.recovery), ratio=record.ratio(top, top_slope, bottom, bottom_slope))


def _linearity(record: Record, _: Cycle) -> Iterator[Taking]:
    """One less secant over reference secant, both from the start of the test, at every peak after the first.

    With the deflection p that the recorded member would have at the same load in the place of the load, the secant
    is p/d: the ratio of two is that of the loads where all stages load it alike, and right where they do not.
    """
    first = record.cycles[0]
    origin = first.start
    reference = record.form(record.largest(first), origin)
    d_ref, p_ref = record.valued(reference), record.valued(reference, record.calculated)
    for cycle in record.cycles[1:]:
        slope = record.form(record.largest(cycle), origin)
        d, p = record.valued(slope), record.valued(slope, record.calculated)
        top = p_ref * d - p * d_ref
        top_slope = p_ref[:, None] * slope - p[:, None] * reference
        name = _named(record, cycle.full[-1])
        yield Taking(where=name, ratio=record.ratio(top, top_slope, p_ref * d, p_ref[:, None] * slope))
    if len(record.cycles) < 2:
        yield Taking(where="", ratio=None, reason="no second cycle to compare the first with")


def _of_pair(record: Record, first: Cycle, second: Cycle) -> tuple[list[Array], list[Array]] | None:
    """Maximum and residual of both cycles of a pair, and their gradients."""
    if first.trough is None or second.trough is None:
        return None
    values, slopes = [], []
    for cycle in (first, second):
        top, slope = record.maximum(cycle)
        left = record.form(cycle.trough, cycle.start)
        values += [top, record.valued(left)]
        slopes += [slope, left]
    return values, slopes


PairRatio = Callable[[Record, list[Array], list[Array]], Ratio]


def _by_pair(ratio: PairRatio, *, positive: bool = False) -> "Measure":
    """A measure that is taken once for every pair of equal cycles."""

    def take(record: Record, _: Cycle) -> Iterator[Taking]:
        for first, second in pairs(record):
            name = f"cycles {first.name} and {second.name}"
            both = _of_pair(record, first, second)
            if both is None:
                yield Taking(where=name, ratio=None, reason=f"no reading with the load off in {name}")
            else:
                yield Taking(where=name, ratio=ratio(record, *both), faint="not determinable", positive=positive)
        if not pairs(record):
            yield Taking(where="", ratio=None, reason="no two successive cycles to the same load")

    return take


def _permanency_ratio(record: Record, values: list[Array], slopes: list[Array]) -> Ratio:
    """(DrB/DmB) / (DrA/DmA): products of readings, taken as linear about what was read."""
    most_a, left_a, most_b, left_b = values
    most_a_, left_a_, most_b_, left_b_ = slopes
    top, bottom = left_b * most_a, left_a * most_b
    top_slope = left_b_ * most_a[:, None] + left_b[:, None] * most_a_
    bottom_slope = left_a_ * most_b[:, None] + left_a[:, None] * most_b_
    return record.ratio(top, top_slope, bottom, bottom_slope)


def _repeatability(record: Record, values: list[Array], slopes: list[Array]) -> Ratio:
    """(DmB - DrB) / (DmA - DrA)."""
    most_a, left_a, most_b, left_b = values
    return record.ratio(most_b - left_b, slopes[2] - slopes[3], most_a - left_a, slopes[0] - slopes[1])


def _permanency(record: Record, values: list[Array], slopes: list[Array]) -> Ratio:
    """DrB / DmB."""
    return record.ratio(values[3], slopes[3], values[2], slopes[2])


def _gained(record: Record, values: list[Array], slopes: list[Array]) -> Ratio:
    """Recovery of the second cycle less that of the first: DrA/DmA - DrB/DmB."""
    most_a, left_a, most_b, left_b = values
    most_a_, left_a_, most_b_, left_b_ = slopes
    top = left_a * most_b - left_b * most_a
    top_slope = left_a_ * most_b[:, None] + left_a[:, None] * most_b_ - left_b_ * most_a[:, None]
    top_slope -= left_b[:, None] * most_a_
    bottom_slope = most_a_ * most_b[:, None] + most_a[:, None] * most_b_
    return record.ratio(top, top_slope, most_a * most_b, bottom_slope)


def _growth(record: Record, cycle: Cycle) -> Iterator[Taking]:
    """Growth of the deflection while the load was kept on, over the deflection when it had just been reached."""
    if cycle.kept is None or cycle.kept == cycle.full[0]:
        yield Taking(where="", ratio=None, reason="no stage of role hold after one of role load at the same load")
        return
    slope, bottom_slope = record.form(cycle.kept, cycle.full[0]), record.form(cycle.full[0], cycle.start)
    top, bottom = record.valued(slope), record.valued(bottom_slope)
    yield Taking(where=_named(record, cycle.kept), ratio=record.ratio(top, slope, bottom, bottom_slope))


def _elastic(record: Record, cycle: Cycle) -> Iterator[Taking]:
    """What was recovered over what the recorded member would deflect."""
    if cycle.trough is None:
        yield Taking(where="", ratio=None, reason="no stage of role unload or recovery, with the load off")
        return
    end = cycle.trough if cycle.recovery is None else cycle.recovery
    _, slope = record.maximum(cycle)
    calculated = record.valued(slope, record.calculated)
    slope = slope - record.form(end, cycle.start)
    ratio = record.ratio(record.valued(slope), slope, calculated, np.zeros_like(slope))
    yield Taking(where=_named(record, cycle.full[-1]), ratio=ratio)


def _gain(record: Record, _: Cycle) -> Iterator[Taking]:
    """Recovery of the repeat less that of the test."""
    first, second = record.heaviest, record.repeat
    both = None if second is None else _of_pair(record, first, second)
    if second is None or both is None:
        yield Taking(where="", ratio=None, reason="no reading with the load off in the test and in its repeat")
        return
    name = f"cycles {first.name} and {second.name}"
    yield Taking(where=name, ratio=_gained(record, *both), faint="not determinable")


Measure = Callable[[Record, Cycle], Iterator[Taking]]
MEASURES: Mapping[str, Measure] = {
    "maximum deflection": _maximum,
    "maximum deflection of the test": _maximum_of_test,
    "residual over maximum": _residual,
    "recovery": _recovery,
    "last residual over maximum": _last_residual,
    "deviation from linearity": _linearity,
    "permanency ratio": _by_pair(_permanency_ratio, positive=True),
    "repeatability": _by_pair(_repeatability),
    "permanency": _by_pair(_permanency),
    "gain of recovery": _gain,
    "growth under hold": _growth,
    "elastic over calculated": _elastic,
}
#: Measures of one cycle alone, the test or its repeat; the others are of all of them.
OF_ONE_CYCLE = (
    "maximum deflection",
    "deflection under design load",
    "residual over maximum",
    "recovery",
    "gain of recovery",
    "growth under hold",
    "elastic over calculated",
)
