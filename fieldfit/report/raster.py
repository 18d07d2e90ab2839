"""Raster: a drawing by matplotlib, as a figure for a notebook or as the bytes of a PNG."""

import io
from typing import Any

from matplotlib.figure import Figure

from fieldfit.report.canvas import Area, Drawing, Line, Mark, Shape, Text, outline

__all__ = ["Figure", "figure", "png"]

POINTS = 0.75  # points a pixel
PIXELS = 96.0  # pixels an inch
ANCHORS = {"start": "left", "middle": "center", "end": "right"}


def figure(drawing: Drawing) -> Figure:
    """The drawing as a matplotlib figure."""
    made = Figure(figsize=(drawing.width / PIXELS, drawing.height / PIXELS), dpi=PIXELS)
    axes: Any = made.add_axes((0.0, 0.0, 1.0, 1.0))
    axes.set(xlim=(0, drawing.width), ylim=(drawing.height, 0))
    axes.axis("off")
    for place, shape in enumerate(drawing.shapes):
        _add(axes, shape, place)
    return made


def png(drawing: Drawing, scale: float = 3.0) -> bytes:
    """The drawing as a PNG at so many times its size in pixels."""
    out = io.BytesIO()
    figure(drawing).savefig(out, format="png", dpi=scale * PIXELS, metadata={"Software": None})
    return out.getvalue()


def _add(axes: Any, shape: Shape, place: int) -> None:
    match shape:
        case Line():
            x, y = zip(*shape.points, strict=True)
            # matplotlib counts dashes in line widths.
            dash = (0, tuple(part / shape.width for part in shape.dash)) if shape.dash else "-"
            axes.plot(x, y, color=shape.colour, linewidth=POINTS * shape.width, linestyle=dash, zorder=place)
        case Area():
            x, y = zip(*shape.points, strict=True)
            edge = {"edgecolor": shape.colour if shape.edge else "none", "linewidth": POINTS * shape.edge}
            axes.fill(x, y, facecolor=shape.colour, alpha=shape.opacity, zorder=place, **edge)
        case Mark():
            _add_mark(axes, shape, place)
        case Text():
            _add_text(axes, shape, place)


def _add_text(axes: Any, text: Text, place: int) -> None:
    axes.text(
        text.x,
        text.y,
        text.text.replace("$", r"\$"),  # a dollar sign would start a formula
        fontsize=POINTS * text.size,
        ha=ANCHORS[text.anchor] if not text.turned else "center",
        va="baseline" if not text.turned else "center",
        rotation=90 if text.turned else 0,
        color=text.colour,
        weight="bold" if text.bold else "normal",
        zorder=place,
    )


def _add_mark(axes: Any, mark: Mark, place: int) -> None:
    fill = "white" if mark.hollow else mark.colour
    if mark.shape == "circle":
        look = {"markerfacecolor": fill, "markeredgecolor": mark.colour, "markeredgewidth": POINTS}
        axes.plot([mark.x], [mark.y], "o", markersize=POINTS * 2 * mark.size, zorder=place, **look)
        return
    x, y = zip(*outline(mark), strict=True)
    axes.fill(x, y, facecolor=fill, edgecolor=mark.colour, linewidth=POINTS, zorder=place)
