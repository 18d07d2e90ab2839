"""Canvas: a drawing as a few plain shapes, in pixels from the top left, before it becomes SVG or a picture.

Figures are drawn as shapes rather than by a plotting library: text stays text, a page of 24 members stays small, and
a figure takes milliseconds.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from fieldfit.beam import Array

__all__ = [
    "FAINT",
    "GREY",
    "INK",
    "Area",
    "Drawing",
    "Line",
    "Mark",
    "Points",
    "Shape",
    "Text",
    "moved",
    "outline",
    "shortened",
    "simplified",
    "width_of",
]

INK, GREY, FAINT = "#1a1a1a", "#595959", "#d0d0d0"
CHARACTER = 0.6  # mean width of a character over its size, of a plain sans-serif
BOLD = 1.12  # how much wider bold type is
NEAR = 0.3  # px: points nearer than this to a straight line are not needed

Points = Sequence[tuple[float, float]]


@dataclass(frozen=True, slots=True)
class Line:
    """A line through points."""

    points: Points
    colour: str = INK
    width: float = 1.2
    dash: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class Area:
    """A filled outline, with an edge of so many pixels in the same colour."""

    points: Points
    colour: str = FAINT
    opacity: float = 1.0
    edge: float = 0.0


@dataclass(frozen=True, slots=True)
class Mark:
    """A sign at a point: circle, square, up, down or diamond; ``size`` is half its width."""

    x: float
    y: float
    shape: str = "circle"
    colour: str = INK
    size: float = 4.0
    hollow: bool = False


@dataclass(frozen=True, slots=True)
class Text:
    """A line of text whose baseline starts, has its middle or ends at a point; ``turned`` reads upward."""

    x: float
    y: float
    text: str
    anchor: str = "start"
    size: float = 12.0
    colour: str = INK
    bold: bool = False
    turned: bool = False


Shape = Line | Area | Mark | Text


@dataclass(frozen=True, slots=True, kw_only=True)
class Drawing:
    """Shapes in the order they are painted, with a title and a description for those who do not see them."""

    width: float
    height: float
    title: str
    description: str
    shapes: tuple[Shape, ...]


def width_of(text: str, size: float = 12.0, *, bold: bool = False) -> float:
    """About how wide (px) a text is."""
    return (
        (BOLD if bold else 1.0) * CHARACTER * size * sum(2.0 if ord(character) > 0x2E80 else 1.0 for character in text)
    )


def shortened(text: str, room: float, size: float = 12.0) -> str:
    """The text, with an ellipsis for its middle where it is wider than ``room`` px: names often differ at their end."""
    if width_of(text, size) <= room:
        return text
    for kept in range(len(text) - 1, 0, -1):
        end = kept // 3
        short = text[: kept - end] + "…" + text[len(text) - end :]
        if width_of(short, size) <= room:
            return short
    return "…"


def moved(shape: Shape, down: float) -> Shape:
    """The shape so many px further down."""
    match shape:
        case Line() | Area():
            return replace(shape, points=[(x, y + down) for x, y in shape.points])
        case Text() | Mark():
            return replace(shape, y=shape.y + down)


CORNERS = {
    "square": ((-0.9, -0.9), (0.9, -0.9), (0.9, 0.9), (-0.9, 0.9)),
    "up": ((0.0, -1.1), (1.1, 0.9), (-1.1, 0.9)),
    "down": ((0.0, 1.1), (1.1, -0.9), (-1.1, -0.9)),
    "diamond": ((0.0, -1.3), (1.3, 0.0), (0.0, 1.3), (-1.3, 0.0)),
}


def outline(mark: Mark) -> Points:
    """Corners of a mark that is no circle."""
    return [(mark.x + mark.size * x, mark.y + mark.size * y) for x, y in CORNERS[mark.shape]]


def simplified(points: Points) -> Points:
    """The points without those that lie on the way between the others (Douglas and Peucker 1973)."""
    given = np.asarray(points, dtype=float)
    keep = np.zeros(len(given), dtype=bool)
    keep[[0, -1]] = True
    open_ends = [(0, len(given) - 1)]
    while open_ends:
        first, last = open_ends.pop()
        if last - first < 2:
            continue
        off = _distance(given[first + 1 : last], given[first], given[last])
        worst = int(off.argmax())
        if off[worst] > NEAR:
            middle = first + 1 + worst
            keep[middle] = True
            open_ends += [(first, middle), (middle, last)]
    return [(float(x), float(y)) for x, y in given[keep]]


def _distance(points: Array, start: Array, end: Array) -> Array:
    """Distance (px) of points (n, 2) from the chord of two others, from the start where they coincide."""
    along = end - start
    length = float(np.hypot(*along))
    away = points - start
    if length == 0:
        return np.hypot(away[:, 0], away[:, 1])
    return np.abs(away[:, 0] * along[1] - away[:, 1] * along[0]) / length
