"""Residuals over their own uncertainty, along the span and by stage: what the fitted member does not explain."""

from collections.abc import Iterator

import numpy as np

from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation
from fieldfit.report.axes import SIGNS, Entry, Frame, axis_shapes, bottom_axis, ranged, ticks
from fieldfit.report.canvas import FAINT, GREY, Area, Drawing, Line, Mark, Shape, Text, shortened
from fieldfit.report.curves import shown_stages
from fieldfit.report.figures.picture import LEFT, RIGHT, WIDTH, Picture, in_units, keyed, stage_entries
from fieldfit.report.results import unit_of

__all__ = ["residuals"]

HEIGHT, ROW = 140.0, 15.0  # px, of the frame along the span and of a stage in the other
NAMES = 140.0  # px, for names of stages
SURE = 1.96
NAMED = 12  # stages that find room for their names


def residuals(book: Book, found: Reconciliation) -> Picture | None:
    """Standardised residuals along the span and by stage; None where no reading has one."""
    known = np.isfinite(found.standardised)
    if not known.any():
        return None
    seen, value = found.subject.observations, found.standardised
    stages = sorted({int(stage) for stage in seen.stage[known]})
    shown = shown_stages(found)
    key, top = keyed([*stage_entries(found, shown), *_others(found, [one for one in stages if one not in shown])])
    size = 3.6 if known.sum() <= 120 else 2.0
    length = float(found.subject.member.length[0])
    y = ranged([-3.0, 3.0, *value[known]])
    across, top = (0.0, float(in_units(book, "length", length))), top + 22
    along = Frame(left=LEFT, right=RIGHT, x=across, y=y, top=top, bottom=top + HEIGHT)
    rows, top = (-0.5, len(stages) - 0.5), along.bottom + 66
    tall = ROW * min(len(stages), NAMED) + 10
    by_stage = Frame(left=NAMES, right=RIGHT, x=y, y=rows, down=True, top=top, bottom=top + tall)
    shapes: list[Shape] = [*key, *_band(along), *_sideways_band(by_stage)]
    shapes += axis_shapes(along, f"distance from the left end [{unit_of(book, 'length')}]", "residual / its own u")
    shapes += _stage_axis(by_stage, [found.subject.stages[stage].name for stage in stages])
    for n in np.flatnonzero(known)[np.argsort(seen.stage[known], kind="stable")]:
        stage = int(seen.stage[n])
        colour, shape = SIGNS[shown.index(stage)] if stage in shown else (GREY, "circle")
        x = along.at_x(float(in_units(book, "length", seen.at[n])))
        shapes.append(Mark(x, along.at_y(value[n]), shape, colour, size))
        shapes.append(Mark(by_stage.at_x(value[n]), by_stage.at_y(stages.index(stage)), shape, colour, size))
    return Picture(
        key="residuals",
        heading="Residuals",
        caption=_caption(found),
        drawing=Drawing(
            width=WIDTH,
            height=by_stage.bottom + 42,
            title=f"Residuals of {found.subject.name} along the span and by stage",
            description=f"{known.sum()} residuals over their own standard uncertainty, "
            f"from {value[known].min():.2g} to {value[known].max():.2g}.",
            shapes=tuple(shapes),
        ),
    )


def _others(found: Reconciliation, stages: list[int]) -> list[Entry]:
    """The entry of the stages without a sign of their own: the zero stages, and what is more than there are signs."""
    if not stages:
        return []
    text = found.subject.stages[stages[0]].name if len(stages) == 1 else f"{len(stages)} other stages"
    return [Entry(text=text, colour=GREY, shape="circle")]


def _band(frame: Frame) -> Iterator[Shape]:
    ends = [(frame.x[0], -SURE), (frame.x[1], -SURE), (frame.x[1], SURE), (frame.x[0], SURE)]
    yield Area([(frame.at_x(x), frame.at_y(y)) for x, y in ends], FAINT, 0.5)
    yield Text(frame.left, frame.top - 8, "along the span", bold=True)


def _sideways_band(frame: Frame) -> Iterator[Shape]:
    left, right = frame.at_x(-SURE), frame.at_x(SURE)
    yield Area([(left, frame.top), (right, frame.top), (right, frame.bottom), (left, frame.bottom)], FAINT, 0.5)
    yield Text(frame.left, frame.top - 8, "by stage", bold=True)


def _stage_axis(frame: Frame, names: list[str]) -> Iterator[Shape]:
    every = -(-len(names) // NAMED)
    heights = [frame.at_y(number) for number in range(len(names))]
    yield from (Line(((frame.left, y), (frame.right, y)), FAINT, 0.6) for y in heights)
    for y, name in list(zip(heights, names, strict=True))[::every]:
        yield Text(frame.left - 8, y + 4, shortened(name, NAMES - 10), "end", colour=GREY)
    yield from bottom_axis(frame, ticks(*frame.x, wanted=5))
    yield Line(((frame.left, frame.bottom), (frame.right, frame.bottom)), GREY, 0.8)
    middle = (frame.left + frame.right) / 2
    yield Text(middle, frame.bottom + 34, "residual / its own u", "middle", colour=GREY)


def _caption(found: Reconciliation) -> str:
    known = found.standardised[np.isfinite(found.standardised)]
    outside = int((np.abs(known) > SURE).sum())
    return (
        f"Measured less fitted, over the standard uncertainty of that difference. About 1 in 20 may lie outside the "
        f"grey band (±{SURE}); here {outside} of {len(known)} do. A pattern along the span or by stage says that the "
        "model lacks something."
    )
