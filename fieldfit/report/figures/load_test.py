"""Figures of a load test: load and deflection over time, load against deflection, and what was left at each gauge.

At most five gauges have a line, those that deflect most; what was left is shown for every gauge, along the span.
"""

from collections.abc import Iterator, Sequence

import numpy as np

from fieldfit.fieldbook import Book, display
from fieldfit.fit import Reconciliation
from fieldfit.judge.rules import Cycle, LoadTest, Record, load_test_of
from fieldfit.judge.rules.measures import MEASURES
from fieldfit.judge.rules.record import hours
from fieldfit.report.axes import SIGNS, Entry, Frame, axis_shapes, bottom_axis, ranged, ticks
from fieldfit.report.canvas import FAINT, GREY, INK, Area, Drawing, Line, Mark, Shape
from fieldfit.report.figures.picture import LEFT, RIGHT, WIDTH, Picture, in_units, keyed

__all__ = ["load_deflection", "load_over_time", "residuals_left"]

MOST, LOOPS = 5, 3  # gauges with a line of their own, over time and as loops
LIMIT = (6.0, 4.0)  # px, dashes of a limit
UNLOADING = (3.0, 3.0)
WIDEST = 40.0  # %: a wider interval of a residual runs out of the frame
LEAST = 5.0  # %: the scale reaches so far at least
NARROW = 4.0  # px: narrower bars are left to their mark and interval
WIDE = 26.0  # px, of a bar where there is room


def _test(found: Reconciliation) -> tuple[LoadTest, Record] | None:
    test = load_test_of(found)
    return None if test is None or test.record is None else (test, test.record)


def _unit(book: Book, kind: str) -> str:
    return display(book.units, kind, 1.0)[1]


def _shown(record: Record, most: int) -> list[int]:
    """The gauges that deflect most, in their order along the member."""
    size = np.nan_to_num(np.abs(record.maximum(record.heaviest)[0]))
    return sorted(np.argsort(-size, kind="stable")[:most].tolist())


def _entries(record: Record, gauges: Sequence[int]) -> list[Entry]:
    names = [record.gauges[gauge] for gauge in gauges]
    return [Entry(text=name, colour=colour, shape=shape) for name, (colour, shape) in zip(names, SIGNS, strict=False)]


def _moved(book: Book, record: Record, gauge: int) -> list[float]:
    """Deflection of a gauge in every stage, from the start of the test, in the book's unit."""
    start = record.cycles[0].start
    rest = 0.0 if start is None else record.read[start, gauge]
    return [float(one) for one in in_units(book, "deflection", record.read[:, gauge] - rest)]


def _loads(book: Book, record: Record) -> list[float]:
    return [float(one) for one in in_units(book, "moment", record.load)]


def load_over_time(book: Book, found: Reconciliation) -> Picture | None:
    """Moment at the critical section and deflections, stage by stage; None where there is no load test."""
    test = _test(found)
    if test is None:
        return None
    record = test[1]
    times, label = _times(record)
    gauges = _shown(record, MOST)
    key, top = keyed(_entries(record, gauges))
    across = ranged(times, least=1e-6)
    loads, moved = _loads(book, record), {gauge: _moved(book, record, gauge) for gauge in gauges}
    above = Frame(left=LEFT, right=RIGHT, top=top + 12, bottom=top + 102, x=across, y=ranged([0.0, *loads]))
    values = [0.0, *(value for line in moved.values() for value in line)]
    top, bottom = above.bottom + 20, above.bottom + 190
    below = Frame(left=LEFT, right=RIGHT, top=top, bottom=bottom, x=across, y=ranged(values), down=True)
    shapes: list[Shape] = list(key)
    shapes += axis_shapes(above, "", f"moment [{_unit(book, 'moment')}]", x_ticks=False)
    shapes += axis_shapes(below, label, f"deflection [{_unit(book, 'deflection')}]", x_ticks=False)
    marks = ticks(*across, wanted=5)
    shapes += bottom_axis(below, marks if label.startswith("hours") else [one for one in marks if one == round(one)])
    shapes.append(Line(above.points(times, loads), INK, 1.4))
    shapes += [Mark(x, y, "circle", INK, 2.5) for x, y in above.points(times, loads)]
    for (colour, shape), gauge in zip(SIGNS, gauges, strict=False):
        shapes += _path(below, times, moved[gauge], colour, shape)
    return Picture(
        key="load-test-time",
        heading="Load test: load and deflection over time",
        caption=f"Stages as marks. {_which(record, gauges)} The deflection is counted from the start of the test.",
        drawing=Drawing(
            width=WIDTH,
            height=below.bottom + 42,
            title=f"Load test of {record.subject.name} over time",
            description=f"{len(times)} stages; the largest moment is {max(loads):.4g} {_unit(book, 'moment')}.",
            shapes=tuple(shapes),
        ),
    )


def _times(record: Record) -> tuple[list[float], str]:
    """Hours since the first stage where every stage has its time, else the number of the stage."""
    stages = record.subject.stages
    at = [hours(stage, last=stage.role in ("hold", "recovery")) for stage in stages]
    if np.isfinite(at).all():
        return [one - at[0] for one in at], "hours since the first stage"
    return [float(number) for number in range(1, len(stages) + 1)], "stage, in the book's order (not all have a time)"


def _path(frame: Frame, x: Sequence[float], y: Sequence[float], colour: str, shape: str) -> Iterator[Shape]:
    """A line through the values that were read, with a mark at each."""
    places = [(frame.at_x(a), frame.at_y(b)) for a, b in zip(x, y, strict=True) if np.isfinite(b)]
    if len(places) > 1:
        yield Line(places, colour, 1.4)
    yield from (Mark(a, b, shape, colour, 3.6) for a, b in places)


def _which(record: Record, gauges: Sequence[int]) -> str:
    if len(gauges) == len(record.gauges):
        return ""
    return f"The {len(gauges)} of {len(record.gauges)} gauges that deflect most are shown."


def load_deflection(book: Book, found: Reconciliation) -> Picture | None:
    """Moment against deflection, loading and unloading; None where there is no load test."""
    test = _test(found)
    if test is None:
        return None
    record = test[1]
    gauges = _shown(record, LOOPS)
    loading = Entry(text="loading", colour=GREY)
    key, top = keyed([*_entries(record, gauges), loading, Entry(text="unloading", colour=GREY, dash=UNLOADING)])
    loads, moved = _loads(book, record), {gauge: _moved(book, record, gauge) for gauge in gauges}
    across = ranged([0.0, *(value for line in moved.values() for value in line)])
    frame = Frame(left=LEFT, right=RIGHT, top=top + 12, bottom=top + 232, x=across, y=ranged([0.0, *loads]))
    shapes: list[Shape] = list(key)
    shapes += axis_shapes(frame, f"deflection [{_unit(book, 'deflection')}]", f"moment [{_unit(book, 'moment')}]")
    for (colour, shape), gauge in zip(SIGNS, gauges, strict=False):
        read = [number for number in range(len(loads)) if np.isfinite(moved[gauge][number])]
        places = frame.points([moved[gauge][number] for number in read], [loads[number] for number in read])
        for place in range(1, len(read)):
            falls = loads[read[place]] < loads[read[place - 1]]
            shapes.append(Line(places[place - 1 : place + 1], colour, 1.4, UNLOADING if falls else ()))
        shapes += [Mark(x, y, shape, colour, 3.6) for x, y in places]
    return Picture(
        key="load-test-loops",
        heading="Load test: load against deflection",
        caption=f"{_which(record, gauges)} A straight line that comes back on itself is elastic; one that bends over "
        "softens, and what does not come back is left.".strip(),
        drawing=Drawing(
            width=WIDTH,
            height=frame.bottom + 42,
            title=f"Load against deflection of {record.subject.name}",
            description=f"{len(gauges)} gauges in {len(loads)} stages.",
            shapes=tuple(shapes),
        ),
    )


def residuals_left(book: Book, found: Reconciliation) -> Picture | None:
    """What was left of the maximum deflection at every gauge, along the span; None where nothing was read."""
    test = _test(found)
    if test is None:
        return None
    record = test[1]
    cycles = [cycle for cycle in record.cycles if cycle.recovery is not None][: len(SIGNS)]
    limits = _limits(test[0])
    if not cycles:
        return None
    entries = [
        Entry(text=f"cycle {cycle.name}" if len(record.cycles) > 1 else "left after recovery", colour=c, shape=s)
        for cycle, (c, s) in zip(cycles, SIGNS, strict=False)
    ]
    entries += [Entry(text=name, colour=GREY, dash=LIMIT) for name in limits]
    key, top = keyed(entries)
    bars = [list(_bars(record, cycle)) for cycle in cycles]
    ends = [end for several in bars for _, *span, clear in several if clear and _tells(span) for end in span]
    y = ranged([0.0, LEAST, *ends, *limits.values()])
    length = float(record.subject.member.length[0])
    across = (0.0, float(in_units(book, "length", length)))
    frame = Frame(left=LEFT, right=RIGHT, top=top + 12, bottom=top + 232, x=across, y=y)
    shapes: list[Shape] = list(key)
    shapes += axis_shapes(frame, f"distance from the left end [{_unit(book, 'length')}]", "left of the maximum [%]")
    heights = [frame.at_y(limit) for limit in limits.values()]
    shapes += [Line(((frame.left, y), (frame.right, y)), GREY, 1.2, LIMIT) for y in heights]
    wide = min(WIDE, 0.7 * (frame.right - frame.left) / max(1, len(record.gauges)) / len(cycles))
    for place, (several, (colour, shape)) in enumerate(zip(bars, SIGNS, strict=False)):
        shift = (place - (len(cycles) - 1) / 2) * (wide + 1)
        for at, *span, clear in several:
            x = frame.at_x(float(in_units(book, "length", at))) + shift
            shapes += _bar(frame, x, wide, (colour, shape), span) if clear else _lost(frame, x, wide, shape)
    lost = sum(not clear for several in bars for *_, clear in several)
    return Picture(
        key="load-test-left",
        heading="Load test: what was left",
        caption=_left_caption(lost),
        drawing=Drawing(
            width=WIDTH,
            height=frame.bottom + 42,
            title=f"Residual over maximum deflection of {record.subject.name}",
            description=f"{len(record.gauges)} gauges, {len(cycles)} cycles with a reading after recovery.",
            shapes=tuple(shapes),
        ),
    )


def _left_caption(lost: int) -> str:
    unclear = f" A hollow mark on the zero line: below measurable range ({lost})." if lost else ""
    return (
        "Residual over maximum deflection, each cycle from its own start, with its 95 % interval; dashed, the share "
        f"that a rule allows.{unclear}"
    )


def _bars(record: Record, cycle: Cycle) -> Iterator[tuple[float, float, float, float, bool]]:
    """Station (m), residual over maximum with its interval (%), and whether it is measurable, of each gauge."""
    (taking,) = MEASURES["residual over maximum"](record, cycle)
    if taking.ratio is None:
        return
    low, high = taking.ratio.interval()
    parts = zip(record.at, taking.ratio.value, low, high, taking.ratio.is_measurable, strict=True)
    for at, value, least, most, clear in parts:
        if np.isfinite(value) or not clear:
            yield float(at), 100 * float(value), 100 * float(least), 100 * float(most), bool(clear)


def _tells(span: Sequence[float]) -> bool:
    """Whether an interval is narrow enough to set the scale."""
    return bool(span[2] - span[1] <= WIDEST)


def _lost(frame: Frame, x: float, wide: float, shape: str) -> Iterator[Shape]:
    yield Mark(x, frame.at_y(0.0), shape, GREY, min(3.6, wide / 2 + 1), hollow=True)


def _bar(frame: Frame, x: float, wide: float, sign: tuple[str, str], span: Sequence[float]) -> Iterator[Shape]:
    """A bar from nothing to the value, its interval, and a mark at its end that tells the cycle without colour."""
    colour, shape = sign
    value, low, high = span
    zero, end, low_y, high_y = (min(max(frame.at_y(one), frame.top), frame.bottom) for one in (0.0, value, low, high))
    half = wide / 2
    if wide > NARROW:
        yield Area([(x - half, zero), (x + half, zero), (x + half, end), (x - half, end)], FAINT)
    if np.isfinite(low) and np.isfinite(high):
        yield Line(((x, low_y), (x, high_y)), colour, 1.4)
    yield Mark(x, end, shape, colour, min(3.6, wide / 2 + 1.2))


def _limits(test: LoadTest) -> dict[str, float]:
    """The share (%) of the maximum that each rule lets stay, by what its legend says."""
    found: dict[str, float] = {}
    for outcome in test.outcomes:
        for gate in outcome.gates:
            if gate.limit is not None and gate.measure in ("residual over maximum", "recovery"):
                share = 100 * (gate.limit if gate.measure != "recovery" else 1.0 - gate.limit)
                found[f"{outcome.rule.name}{', repeat' if gate.of_repeat else ''}: {share:g} %"] = share
    return dict(list(found.items())[:MOST])
