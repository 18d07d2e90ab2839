"""Axes: a frame that places values on a drawing, with round ticks, and the signs that tell stages apart."""

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from fieldfit.report.canvas import FAINT, GREY, Line, Mark, Shape, Text, shortened, width_of

__all__ = ["SIGNS", "Entry", "Frame", "axis_shapes", "bottom_axis", "legend", "ranged", "ticks"]

#: Okabe and Ito's palette, readable with any colour vision; each colour goes with a shape of its own.
SIGNS = (
    ("#0072B2", "circle"),
    ("#D55E00", "square"),
    ("#009E73", "up"),
    ("#CC79A7", "diamond"),
    ("#000000", "down"),
)
ROUND = (1.0, 2.0, 2.5, 5.0, 10.0)
LINE = 17.0  # px from one line of a legend to the next


@dataclass(frozen=True, slots=True, kw_only=True)
class Frame:
    """A rectangle of a drawing (px) and the values at its edges; ``down`` lets y grow downward."""

    left: float
    top: float
    right: float
    bottom: float
    x: tuple[float, float]
    y: tuple[float, float]
    down: bool = False

    def at_x(self, value: float) -> float:
        """Place (px) of a value along x."""
        return self.left + (value - self.x[0]) / (self.x[1] - self.x[0]) * (self.right - self.left)

    def at_y(self, value: float) -> float:
        """Place (px) of a value along y, kept within a frame's height of the frame."""
        share = (value - self.y[0]) / (self.y[1] - self.y[0])
        share = min(max(share, -1.0), 2.0)
        return self.top + (share if self.down else 1.0 - share) * (self.bottom - self.top)

    def points(self, x: Sequence[float], y: Sequence[float]) -> list[tuple[float, float]]:
        """Places (px) of values."""
        return [(self.at_x(a), self.at_y(b)) for a, b in zip(x, y, strict=True)]


def ranged(values: Sequence[float], *, least: float = 0.0, room: float = 0.06) -> tuple[float, float]:
    """A range that holds the finite values with some room, and is at least so wide."""
    finite = [value for value in values if math.isfinite(value)] or [0.0]
    low, high = min(finite), max(finite)
    wide = max(high - low, least, 1e-12 * max(abs(low), abs(high)), 1e-300)
    spare = (wide - (high - low)) / 2 + room * wide
    return low - spare, high + spare


def ticks(low: float, high: float, wanted: int = 5) -> list[float]:
    """Round values within a range, about so many."""
    rough = (high - low) / max(wanted, 1)
    power = 10.0 ** math.floor(math.log10(rough))
    step = next(power * size for size in ROUND if power * size >= rough * (1 - 1e-9))
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    return [step * number for number in range(first, last + 1)]


def tick_texts(values: Sequence[float]) -> list[str]:
    """Tick values with the decimals their step needs."""
    if len(values) < 2:
        return [f"{value:.4g}" for value in values]
    step = values[1] - values[0]
    largest = max(abs(value) for value in values)
    if largest >= 1e6 or largest < 1e-4:
        return [f"{value:.3g}" for value in values]
    decimals = max(0, -math.floor(math.log10(step) + 1e-9) + (0 if _is_whole(step) else 1))
    return [f"{value + 0.0:.{decimals}f}".replace("-", "−") for value in values]


def _is_whole(step: float) -> bool:
    """Whether the leading digit of a step says it all: 2.5 needs one more."""
    lead = step / 10.0 ** math.floor(math.log10(step) + 1e-9)
    return abs(lead - round(lead)) < 1e-6


def axis_shapes(frame: Frame, x_label: str, y_label: str, *, x_ticks: bool = True) -> Iterator[Shape]:
    """Grid, ticks and labels of a frame."""
    tall, wide = frame.bottom - frame.top, frame.right - frame.left
    values = ticks(*frame.y, wanted=max(2, int(tall / 36)))
    heights = [frame.at_y(value) for value in values]
    yield from (Line(((frame.left, y), (frame.right, y)), FAINT, 0.8) for y in heights)
    for y, text in zip(heights, tick_texts(values), strict=True):
        yield Text(frame.left - 6, y + 4, text, "end", colour=GREY)
    if x_ticks:
        yield from bottom_axis(frame, ticks(*frame.x, wanted=max(2, int(wide / 70))))
    yield Line(((frame.left, frame.bottom), (frame.right, frame.bottom)), GREY, 0.8)
    if x_label:
        yield Text((frame.left + frame.right) / 2, frame.bottom + 34, x_label, "middle", colour=GREY)
    yield Text(frame.left - 52, (frame.top + frame.bottom) / 2, y_label, "middle", colour=GREY, turned=True)


def bottom_axis(frame: Frame, values: Sequence[float], size: float = 12.0) -> Iterator[Shape]:
    """Ticks with their values below a frame."""
    places = [frame.at_x(value) for value in values]
    yield from (Line(((x, frame.bottom), (x, frame.bottom + 4)), GREY, 0.8) for x in places)
    for x, text in zip(places, tick_texts(values), strict=True):
        yield Text(x, frame.bottom + 5 + size, text, "middle", size, GREY)


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """One entry of a legend: a mark, or a stretch of line, and what it means."""

    text: str
    colour: str
    shape: str | None = None
    dash: tuple[float, ...] = ()
    width: float = 1.8


def legend(entries: Sequence[Entry], left: float, right: float, top: float) -> tuple[list[Shape], float]:
    """Entries side by side on as many lines as they need; the shapes, and where (px) the legend ends."""
    shapes: list[Shape] = []
    x, y = left, top + 12.0
    for entry in entries:
        text = shortened(entry.text, min(230.0, right - left - 30))
        wide = 26 + width_of(text) + 14
        if x > left and x + wide > right:
            x, y = left, y + LINE
        if entry.shape:
            shapes.append(Mark(x + 10, y - 4, entry.shape, entry.colour))
        else:
            shapes.append(Line(((x, y - 4), (x + 20, y - 4)), entry.colour, entry.width, entry.dash))
        shapes.append(Text(x + 26, y, text))
        x += wide
    return shapes, y + 6
