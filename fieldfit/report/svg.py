"""SVG: a drawing as text, in a page or in a file of its own; all its texts are escaped.

Neighbours that are painted alike share one group, which halves the size of a page.
"""

from collections.abc import Sequence
from html import escape
from itertools import groupby, pairwise

from fieldfit.report.canvas import Area, Drawing, Line, Mark, Points, Shape, Text, outline, simplified

__all__ = ["inline_svg", "svg", "svg_file"]

FONT = "system-ui, 'Segoe UI', 'Helvetica Neue', Arial, sans-serif"


def inline_svg(drawing: Drawing) -> str:
    """The drawing as an SVG element for a page whose style says how figures are written."""
    size = f"{drawing.width:g} {drawing.height:g}"
    shapes = "\n".join(_group(paint, list(alike)) for paint, alike in groupby(drawing.shapes, key=_paint))
    title, description = _safe(drawing.title), _safe(drawing.description)
    return (
        f'<svg viewBox="0 0 {size}" role="img">\n<title>{title}</title><desc>{description}</desc>\n{shapes}\n</svg>\n'
    )


def svg(drawing: Drawing) -> str:
    """The drawing as an SVG file."""
    return svg_file(drawing, inline_svg(drawing))


def svg_file(drawing: Drawing, inline: str) -> str:
    """An SVG file of a drawing that is an element of a page already."""
    own = (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{drawing.width:g}" height="{drawing.height:g}" '
        f'font-family="{FONT}" font-size="12" fill="none" stroke-linejoin="round" '
    )
    return own + inline.removeprefix("<svg ")


def _safe(text: str) -> str:
    """Text escaped, without the characters that XML does not know."""
    return escape("".join(c if c in "\t\n" or (c >= " " and not "\ud800" <= c <= "\udfff") else "\ufffd" for c in text))


def _paint(shape: Shape) -> str:
    """The attributes that a shape may share with its neighbours."""
    match shape:
        case Line():
            dash = f' stroke-dasharray="{" ".join(f"{part:g}" for part in shape.dash)}"' if shape.dash else ""
            return f'stroke="{shape.colour}" stroke-width="{shape.width:g}"{dash}'
        case Area():
            opacity = f' fill-opacity="{shape.opacity:g}"' if shape.opacity < 1 else ""
            edge = f' stroke="{shape.colour}" stroke-width="{shape.edge:g}"' if shape.edge else ""
            return f'fill="{shape.colour}"{opacity}{edge}'
        case Mark():
            return f'fill="{"#fff" if shape.hollow else shape.colour}" stroke="{shape.colour}"'
        case Text():
            anchor = f' text-anchor="{shape.anchor}"' if shape.anchor != "start" else ""
            size = f' font-size="{shape.size:g}"' if shape.size != 12 else ""
            bold = ' font-weight="600"' if shape.bold else ""
            return f'fill="{shape.colour}"{anchor}{size}{bold}'


def _group(paint: str, shapes: Sequence[Shape]) -> str:
    """Shapes painted alike: lines as one path, others one by one in a group."""
    lines = [_path(simplified(shape.points)) for shape in shapes if isinstance(shape, Line)]
    if lines:
        return f'<path d="{"".join(lines)}" {paint}/>'
    if len(shapes) == 1:
        return _element(shapes[0], f" {paint}")
    return f"<g {paint}>{''.join(_element(shape, '') for shape in shapes)}</g>"


def _element(shape: Shape, paint: str) -> str:
    match shape:
        case Mark(shape="circle"):
            return f'<circle cx="{_short(shape.x)}" cy="{_short(shape.y)}" r="{shape.size:g}"{paint}/>'
        case Mark():
            return f'<path d="{_path(outline(shape))}Z"{paint}/>'
        case Text():
            place = f'x="{_short(shape.x)}" y="{_short(shape.y)}"'
            turn = f' transform="rotate(-90 {_short(shape.x)} {_short(shape.y)})"' if shape.turned else ""
            return f"<text {place}{paint}{turn}>{_safe(shape.text)}</text>"
        case _:
            return f'<path d="{_path(simplified(shape.points))}Z"{paint}/>'


def _path(points: Points) -> str:
    """A line to tenths of a pixel: where it starts, then each step, which is shorter than where it leads."""
    places = [(round(10 * x), round(10 * y)) for x, y in points]
    if len(places) == 2:
        (x, y), (to_x, to_y) = places
        if y == to_y:
            return f"M{_tenths(x)} {_tenths(y)}H{_tenths(to_x)}"
        if x == to_x:
            return f"M{_tenths(x)} {_tenths(y)}V{_tenths(to_y)}"
    steps = " ".join(
        f"{_tenths(x - from_x)} {_tenths(y - from_y)}" for (from_x, from_y), (x, y) in pairwise(places)
    ).replace(" -", "-")
    return f"M{_tenths(places[0][0])} {_tenths(places[0][1])}" + (f"l{steps}" if steps else "")


def _tenths(value: int) -> str:
    return f"{value / 10:g}"


def _short(value: float) -> str:
    return f"{value:.1f}".removesuffix(".0")
