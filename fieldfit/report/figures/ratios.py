"""Measured over as-recorded, by gauge and stage: the first thing an engineer looks at."""

from collections.abc import Iterator, Sequence

import numpy as np

from fieldfit.beam import Array
from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation
from fieldfit.report.axes import SIGNS, Frame, axis_shapes, ranged
from fieldfit.report.canvas import GREY, INK, Drawing, Line, Mark, Shape, Text, shortened, width_of
from fieldfit.report.curves import changes, loaded_stages, shown_stages
from fieldfit.report.figures.picture import LEFT, RIGHT, WIDTH, Picture, keyed, stage_entries
from fieldfit.report.say import creeps
from fieldfit.report.words import plain

__all__ = ["ratios"]

HEIGHT = 190.0  # px, of the frame
CLEAR = 4.0  # a reading expected to be fewer standard uncertainties than this says nothing as a ratio
SURE = 1.96
FRAMED = (-2.0, 6.0)  # ratios beyond are drawn at the edge of the frame


def ratios(book: Book, found: Reconciliation) -> Picture | None:  # noqa: ARG001  # all figures are called alike
    """A mark for each reading clear of its uncertainty, gauges side by side in the order of their stations."""
    stages = shown_stages(found)
    points = _Points.of(found, stages)
    if not len(points.value):
        return None
    gauges = _gauges(found, points)
    key, top = keyed(stage_entries(found, stages))
    frame = Frame(
        left=LEFT,
        top=top + 8,
        right=RIGHT,
        bottom=top + 8 + HEIGHT,
        x=(0.0, float(len(gauges))),
        y=_range(points),
    )
    shapes: list[Shape] = [*key, *axis_shapes(frame, "", "measured / as recorded", x_ticks=False)]
    shapes.append(Line(frame.points(frame.x, (1.0, 1.0)), INK, 1.2))
    names, lowest = _names(frame, gauges)
    shapes += names
    shapes += _marks(frame, points, gauges, len(stages))
    median = float(np.median(points.value))
    return Picture(
        key="ratios",
        heading="Measured over as recorded",
        caption=_caption(found, points, len(stages)),
        drawing=Drawing(
            width=WIDTH,
            height=lowest + 6,
            title=f"Measured over as-recorded readings of {found.subject.name}",
            description=f"{len(points.value)} ratios of {len(gauges)} gauges; median {median:.3f}, "
            f"from {points.value.min():.3f} to {points.value.max():.3f}.",
            shapes=tuple(shapes),
        ),
    )


def _range(points: "_Points") -> tuple[float, float]:
    """A range for the readings and their bars that a ratio to next to nothing does not stretch."""
    ends = np.clip([points.value - points.reach, points.value + points.reach], *FRAMED)
    return ranged([1.0, *ends.ravel()], least=0.1)


class _Points:
    """Readings to draw: gauge, place of the stage among those shown, ratio, half width of its bar; all (n,)."""

    def __init__(self, gauge: Sequence[str], stage: Array, value: Array, reach: Array, left_out: int) -> None:
        self.gauge, self.stage, self.value, self.reach, self.left_out = gauge, stage, value, reach, left_out

    @classmethod
    def of(cls, found: Reconciliation, stages: Sequence[int]) -> "_Points":
        seen = found.subject.observations
        measured, on_record = changes(found)
        wanted = np.isin(seen.stage, stages) & np.isfinite(measured)
        clear = wanted & (np.abs(on_record) > CLEAR * found.u)
        place = {stage: number for number, stage in enumerate(stages)}
        return cls(
            gauge=[str(gauge) for gauge in seen.gauge[clear]],
            stage=np.array([place[stage] for stage in seen.stage[clear]], dtype=float),
            value=measured[clear] / on_record[clear],
            reach=SURE * found.u[clear] / np.abs(on_record[clear]),
            left_out=int(wanted.sum() - clear.sum()),
        )


def _gauges(found: Reconciliation, points: _Points) -> list[str]:
    """Gauges with a mark, by station."""
    seen = found.subject.observations
    at = {str(gauge): float(place) for gauge, place in zip(seen.gauge, seen.at, strict=True)}
    return sorted(set(points.gauge), key=lambda gauge: (at[gauge], gauge))


def _names(frame: Frame, gauges: list[str]) -> tuple[list[Shape], float]:
    """Names below their slots: side by side, else on two lines, else every so many; and how far (px) down they go."""
    slot = (frame.right - frame.left) / len(gauges)
    widest = min(max(map(width_of, gauges)) + 8, 130.0)
    lanes = 1 if widest <= slot else 2
    every = max(1, int(np.ceil(widest / (lanes * slot))))
    shapes: list[Shape] = []
    for number, gauge in enumerate(gauges[::every]):
        x = frame.at_x(number * every + 0.5)
        room = min(widest, 2 * (frame.right + 14 - x), 2 * x)
        y = frame.bottom + 16 + 15 * (number % lanes)
        shapes.append(Line(((x, frame.bottom), (x, y - 11)), GREY, 0.6))
        shapes.append(Text(x, y, shortened(gauge, room), "middle", colour=GREY))
    lowest = frame.bottom + 21 + 15 * lanes
    some = f"gauge, from left to right along the member ({len(gauges)} in all)"
    shapes.append(Text((frame.left + frame.right) / 2, lowest, some, "middle", colour=GREY))
    return shapes, lowest


def _marks(frame: Frame, points: _Points, gauges: list[str], stages: int) -> Iterator[Shape]:
    place = {gauge: number for number, gauge in enumerate(gauges)}
    slot = (frame.right - frame.left) / len(gauges)
    size = float(np.clip(slot / (2 * stages + 1), 1.6, 4.0))
    spread = min(0.7, 12.0 * stages / slot)
    for number in range(stages):
        mine = np.flatnonzero(points.stage == number)
        colour, shape = SIGNS[number]
        aside = 0.5 + spread * ((number + 0.5) / stages - 0.5)
        x = [frame.at_x(place[points.gauge[int(n)]] + aside) for n in mine]
        low, value, high = (
            [frame.at_y(float(one)) for one in np.clip((points.value + way * points.reach)[mine], *frame.y)]
            for way in (-1, 0, 1)
        )
        out = (points.value[mine] < frame.y[0]) | (points.value[mine] > frame.y[1])
        yield from (Line(((at, a), (at, b)), colour, 1.0) for at, a, b in zip(x, low, high, strict=True))
        yield from (
            Mark(at, y, shape, colour, size, hollow=bool(beyond)) for at, y, beyond in zip(x, value, out, strict=True)
        )


def _caption(found: Reconciliation, points: _Points, shown: int) -> str:
    used = len(loaded_stages(found))
    some = f" {shown} of the {used} stages in the fit are drawn." if shown < used else ""
    small = (
        f" {points.left_out} readings expected to be smaller than {CLEAR:g} standard uncertainties are left out."
        if points.left_out
        else ""
    )
    creep = " Readings hold creep; what is as recorded does not." if creeps(found) else ""
    out = points.value[(points.value < FRAMED[0]) | (points.value > FRAMED[1])]
    ends = f"from {plain(out.min(), 2)} to {plain(out.max(), 2)}" if len(out) else ""
    far = f" {len(out)} hollow marks at the edge stand for ratios beyond it, {ends}." if len(out) else ""
    return (
        "1 is what the recorded member would read under the recorded load; above 1 it moved more. Zeros and datum are "
        f"taken off; bars are {SURE} standard uncertainties of the reading.{creep}{far}{small}{some}"
    )
