"""The elastic curve: recorded and fitted, with the band of the fit and the readings of deflection."""

from collections.abc import Iterator

import numpy as np

from fieldfit.beam import Array
from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation
from fieldfit.report.axes import SIGNS, Entry, Frame, axis_shapes, ranged
from fieldfit.report.canvas import GREY, Area, Drawing, Line, Mark, Shape
from fieldfit.report.curves import changes, curves_of, loaded_stages, shown_stages
from fieldfit.report.figures.picture import LEFT, RIGHT, WIDTH, Picture, creep_words, in_units, keyed, stage_entries
from fieldfit.report.results import unit_of
from fieldfit.report.say import unexplained

__all__ = ["elastic_curve"]

HEIGHT = 240.0  # px, of the frame
SURE = 1.96  # standard uncertainties, of the bars of the readings


def elastic_curve(book: Book, found: Reconciliation) -> Picture | None:
    """Recorded (dashed) and fitted (full) elastic curves of up to five stages; None where no stage is used."""
    stages = shown_stages(found)
    if not stages:
        return None
    curves = curves_of(found, stages, "deflection")
    points = _points(found, stages)
    scale, length = in_units(book, "deflection", 1.0), in_units(book, "length", 1.0)
    bars = [edge * scale for _, value, u in points for edge in (*(value - SURE * u), *(value + SURE * u))]
    lines = [part * scale for part in (curves.recorded, curves.fitted) if part is not None]
    key, top = keyed([*stage_entries(found, stages), *_lines()])
    frame = Frame(
        left=LEFT,
        top=top + 8,
        right=RIGHT,
        bottom=top + 8 + HEIGHT,
        x=(0.0, float(found.subject.member.length[0]) * length),
        y=ranged([0.0, *bars, *np.concatenate(lines).ravel()]),
        down=True,
    )
    axes = axis_shapes(
        frame,
        f"distance from the left end [{unit_of(book, 'length')}]",
        f"deflection, down [{unit_of(book, 'deflection')}]",
    )
    shapes: list[Shape] = [*key, *axes, Line(frame.points(frame.x, (0.0, 0.0)), GREY, 1.0)]
    for place, (colour, _) in enumerate(SIGNS[: len(stages)]):
        ends = [(one if one is None else one[place] * scale) for one in (curves.recorded, curves.fitted, curves.reach)]
        shapes += _curves(frame, curves.at * length, ends, colour)
    unread = [not len(at) for at, *_ in points]
    for place, ((colour, shape), (at, value, u)) in enumerate(zip(SIGNS, points, strict=False)):
        shapes += _readings(frame, at * length, value * scale, SURE * u * scale, colour, shape)
        if unread[place]:
            lowest = int(np.abs(lines[-1][place]).argmax())
            x, y = float(curves.at[lowest] * length), float(lines[-1][place, lowest])
            shapes.append(Mark(frame.at_x(x), frame.at_y(y), shape, colour))
    return Picture(
        key="elastic-curve",
        heading="Elastic curve",
        caption=_caption(found, unread, curves.fitted is not None, curves.reach is not None),
        drawing=Drawing(
            width=WIDTH,
            height=frame.bottom + 42,
            title=f"Elastic curve of {found.subject.name}",
            description=_description(book, found, lines, stages),
            shapes=tuple(shapes),
        ),
    )


def _lines() -> list[Entry]:
    return [
        Entry(text="as recorded", colour=GREY, dash=(6, 4), width=1.3),
        Entry(text="fitted", colour=GREY, width=2.0),
    ]


def _curves(frame: Frame, at: Array, ends: list[Array | None], colour: str) -> Iterator[Shape]:
    """The band, then both curves."""
    on_record, fitted, reach = ends
    if fitted is not None and reach is not None:
        lower, upper = frame.points(list(at), list(fitted - reach)), frame.points(list(at), list(fitted + reach))
        yield Area([*lower, *reversed(upper)], colour, 0.2)
    if on_record is not None:
        yield Line(frame.points(list(at), list(on_record)), colour, 1.3, (6, 4))
    if fitted is not None:
        yield Line(frame.points(list(at), list(fitted)), colour, 2.0)


def _readings(frame: Frame, at: Array, value: Array, reach: Array, colour: str, shape: str) -> Iterator[Shape]:
    size = 4.0 if len(at) <= 60 else 2.2
    places = [frame.at_x(x) for x in at]
    for x, y, half in zip(places, value, reach, strict=True):
        ends = frame.at_y(y - half), frame.at_y(y + half)
        if np.isfinite(half) and abs(ends[1] - ends[0]) > 2 * size:
            yield Line(((x, ends[0]), (x, ends[1])), colour, 1.0)
            yield from (Line(((x - 3, end), (x + 3, end)), colour, 1.0) for end in ends)
    yield from (Mark(x, frame.at_y(y), shape, colour, size, hollow=True) for x, y in zip(places, value, strict=True))


def _points(found: Reconciliation, stages: list[int]) -> list[tuple[Array, Array, Array]]:
    """By stage: stations (m), deflections (m, down, zeros and datum taken off) and u (m) of its readings."""
    seen = found.subject.observations
    measured, _ = changes(found)
    drawn = (found.used_for == "fit") & seen.upright & np.isfinite(measured)
    each = [drawn & (seen.stage == stage) for stage in stages]
    return [(seen.at[here], (measured / -seen.sign)[here], found.u[here]) for here in each]


def _caption(found: Reconciliation, unread: list[bool], fitted: bool, banded: bool) -> str:
    if not fitted:
        return "Dashed line as recorded; nothing could be fitted, so the zeros and datum of the readings are not known."
    lost = "the model does not explain the readings" if unexplained(found) else "not every unknown is determined"
    band = " within its 95 % band" if banded else f" (its band is not known, as {lost})"
    used, shown = len(loaded_stages(found)), len(unread)
    some = f" {shown} of the {used} stages in the fit are drawn." if shown < used else ""
    full = " A full mark tells the curve of a stage in which no deflection was read." if any(unread) else ""
    bars = f"with bars of {SURE} standard uncertainties where these are larger than the mark."
    marks = "" if all(unread) else f" Open marks are readings, their zeros and datum taken off, {bars}"
    return f"Dashed line as recorded, full line as fitted{band}.{marks}{full}{creep_words(found)}{some}"


def _description(book: Book, found: Reconciliation, lines: list[Array], stages: list[int]) -> str:
    """The largest values in words."""
    unit = unit_of(book, "deflection")
    words = [
        f"{np.abs(part).max():.3g} {unit} {name}" for part, name in zip(lines, ("recorded", "fitted"), strict=False)
    ]
    names = ", ".join(found.subject.stages[stage].name for stage in stages)
    return f"Deflection along the member in stages {names}. Largest: {', '.join(words)}."
