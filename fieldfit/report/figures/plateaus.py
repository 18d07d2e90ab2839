"""What the gauges read over the time of the test, with the windows of the stages and the means that were taken."""

from collections.abc import Iterator, Mapping

import numpy as np

from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation
from fieldfit.fit.settling import Unsettled, unsettled
from fieldfit.observe import Subject, Trace
from fieldfit.report.axes import SIGNS, Entry, Frame, axis_shapes, ranged
from fieldfit.report.canvas import FAINT, GREY, INK, Area, Drawing, Line, Mark, Shape, Text, shortened, width_of
from fieldfit.report.figures.picture import LEFT, RIGHT, WIDTH, Picture, in_units, keyed
from fieldfit.report.results import unit_of
from fieldfit.report.words import number, plain

__all__ = ["plateaus"]

HEIGHT = 240.0  # px, of the frame
OWN = [sign for sign in SIGNS if sign[0] != "#000000"]  # signs of gauges; black is for the means
HOUR = 3600.0  # s


def plateaus(book: Book, found: Reconciliation) -> Picture | None:
    """Readings over time; None where no stage was read several times with the time beside it."""
    subject = found.subject
    seen = subject.observations
    timed = (seen.count > 2) & np.isfinite(seen.time)
    traces = _shown(subject, str(seen.quantity[timed][0])) if timed.any() else []
    if not traces:
        return None
    quantity, start = traces[0].quantity, min(float(trace.time[0]) for trace in traces)
    signs = dict(zip([trace.gauge for trace in traces], OWN, strict=False))
    entries = [Entry(text=gauge, colour=colour, shape=shape) for gauge, (colour, shape) in signs.items()]
    key, top = keyed([*entries, Entry(text="mean of a stage", colour=INK, width=2.4)])
    ends = [float(in_units(book, quantity, one)) for trace in traces for one in (trace.least.min(), trace.most.max())]
    last = max(float(trace.time[-1]) for trace in traces)
    frame = Frame(
        left=LEFT,
        right=RIGHT,
        top=top + 22,
        bottom=top + 22 + HEIGHT,
        x=(0.0, (last - start) / HOUR),
        y=ranged(ends),
    )
    shapes: list[Shape] = [*key, *_windows(subject, frame, start)]
    shapes += axis_shapes(frame, "hours since the first reading", f"{quantity} [{unit_of(book, quantity)}]")
    for trace in traces:
        shapes += _trace(book, frame, trace, start, signs[trace.gauge][0])
    shapes += _means(book, found, frame, signs, start)
    return Picture(
        key="plateaus",
        heading="Readings over time",
        caption=_caption(book, found, traces),
        drawing=Drawing(
            width=WIDTH,
            height=frame.bottom + 42,
            title=f"Readings of {subject.name} over time",
            description=f"{len(traces)} gauges over {plain((last - start) / HOUR, 2)} hours, stages shaded.",
            shapes=tuple(shapes),
        ),
    )


def _shown(subject: Subject, quantity: str) -> list[Trace]:
    """The traces of a quantity that move most, as many as there are colours, in their order."""
    own = [trace for trace in subject.traces if trace.quantity == quantity and trace.time[-1] > trace.time[0]]
    largest = sorted(own, key=lambda trace: float(trace.least.min() - trace.most.max()))[: len(OWN)]
    return [trace for trace in own if any(trace is one for one in largest)]


def _windows(subject: Subject, frame: Frame, start: float) -> Iterator[Shape]:
    """A shaded stretch for each stage that has a window, with its name where there is room."""
    for stage in subject.stages:
        if not np.isfinite(sum(stage.window)):
            continue
        left, right = (min(max(frame.at_x((end - start) / HOUR), frame.left), frame.right) for end in stage.window)
        if right - left < 1:
            continue
        yield Area([(left, frame.top), (right, frame.top), (right, frame.bottom), (left, frame.bottom)], FAINT, 0.5)
        name = shortened(stage.name, right - left)
        if width_of(name) <= right - left:
            yield Text((left + right) / 2, frame.top - 6, name, "middle", colour=GREY)


def _trace(book: Book, frame: Frame, trace: Trace, start: float, colour: str) -> Iterator[Shape]:
    """The middle of what was read as a line, the least to the most as a band."""
    hours = ((trace.time - start) / HOUR).tolist()
    least, most = (in_units(book, trace.quantity, values).tolist() for values in (trace.least, trace.most))
    if least != most:
        yield Area([*frame.points(hours, most), *reversed(frame.points(hours, least))], colour, 0.3)
    middle = [(a + b) / 2 for a, b in zip(least, most, strict=True)]
    yield Line(frame.points(hours, middle), colour, 1.2)


def _means(
    book: Book, found: Reconciliation, frame: Frame, signs: Mapping[str, tuple[str, str]], start: float
) -> Iterator[Shape]:
    """A line over each stage's window at the mean of each gauge, with the gauge's sign on it."""
    seen = found.subject.observations
    for n in np.flatnonzero(np.isin(seen.gauge.astype(str), [*signs]) & (seen.stage >= 0) & (seen.count > 1)):
        stage = found.subject.stages[int(seen.stage[n])]
        if np.isfinite(sum(stage.window)):
            y = frame.at_y(float(in_units(book, str(seen.quantity[n]), seen.value[n])))
            left, right = (frame.at_x((end - start) / HOUR) for end in stage.window)
            yield Line([(left, y), (right, y)], INK, 2.4)
            colour, shape = signs[str(seen.gauge[n])]
            place = [*signs].index(str(seen.gauge[n])) + 0.5
            yield Mark(left + (right - left) * place / len(signs), y, shape, colour, 3.6)


def _caption(book: Book, found: Reconciliation, traces: list[Trace]) -> str:
    every = len({trace.gauge for trace in found.subject.traces if trace.quantity == traces[0].quantity})
    which = f"The {len(traces)} of {every} gauges that move most" if every > len(traces) else "All gauges"
    moving = [_unsettled(book, each) for each in unsettled(found.subject)]
    settled = (
        "; ".join(moving) + "." if moving else "No stage moved by more than 5 % of its increment in its last third."
    )
    return f"{which} over the time of the test; stages are shaded, black lines are the means taken. {settled}"


def _unsettled(book: Book, each: Unsettled) -> str:
    change, increment = (float(in_units(book, each.quantity, one)) for one in (each.change, each.increment))
    return (
        f"Not settled: stage {each.stage}, where {each.gauge} moved by {number(change, change / 10)} "
        f"{unit_of(book, each.quantity)} in the last third, of {number(increment, change / 10)}"
    )
