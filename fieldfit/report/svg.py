"""SVG: a drawing as text that stands in a page or in a file of its own; all its texts are escaped."""

from html import escape

from fieldfit.report.canvas import Area, Drawing, Line, Mark, Points, Shape, Text, outline, simplified

__all__ = ["svg"]

FONT = "system-ui, 'Segoe UI', 'Helvetica Neue', Arial, sans-serif"


def svg(drawing: Drawing) -> str:
    """The drawing as an SVG element with its title and description."""
    width, height = f"{drawing.width:g}", f"{drawing.height:g}"
    shapes = "\n".join(map(_shape, drawing.shapes))
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {width} {height}" width="{width}" height="{height}" '
        f'role="img" font-family="{FONT}" font-size="12" fill="none" stroke-linejoin="round">\n'
        f"<title>{_safe(drawing.title)}</title><desc>{_safe(drawing.description)}</desc>\n{shapes}\n</svg>\n"
    )


def _safe(text: str) -> str:
    """Text escaped, without the characters that XML does not know."""
    return escape("".join(c if c in "\t\n" or (c >= " " and not "\ud800" <= c <= "\udfff") else "\ufffd" for c in text))


def _shape(shape: Shape) -> str:
    match shape:
        case Line():
            return _line(shape)
        case Area():
            return _area(shape)
        case Mark():
            return _mark(shape)
        case Text():
            return _text(shape)


def _line(line: Line) -> str:
    dash = f' stroke-dasharray="{" ".join(f"{part:g}" for part in line.dash)}"' if line.dash else ""
    return f'<path d="{_path(simplified(line.points))}" stroke="{line.colour}" stroke-width="{line.width:g}"{dash}/>'


def _area(area: Area) -> str:
    opacity = f' fill-opacity="{area.opacity:g}"' if area.opacity < 1 else ""
    edge = f' stroke="{area.colour}" stroke-width="{area.edge:g}"' if area.edge else ""
    return f'<path d="{_path(simplified(area.points))}Z" fill="{area.colour}"{opacity}{edge}/>'


def _mark(mark: Mark) -> str:
    paint = f'fill="{"#fff" if mark.hollow else mark.colour}" stroke="{mark.colour}"'
    if mark.shape == "circle":
        return f'<circle cx="{mark.x:.1f}" cy="{mark.y:.1f}" r="{mark.size:g}" {paint}/>'
    return f'<path d="{_path(outline(mark))}Z" {paint}/>'


def _text(text: Text) -> str:
    anchor = f' text-anchor="{text.anchor}"' if text.anchor != "start" else ""
    size = f' font-size="{text.size:g}"' if text.size != 12 else ""
    bold = ' font-weight="600"' if text.bold else ""
    turn = f' transform="rotate(-90 {text.x:.1f} {text.y:.1f})"' if text.turned else ""
    place = f'x="{text.x:.1f}" y="{text.y:.1f}"'
    return f'<text {place} fill="{text.colour}"{anchor}{size}{bold}{turn}>{_safe(text.text)}</text>'


def _path(points: Points) -> str:
    return "M" + "L".join(f"{_short(x)} {_short(y)}" for x, y in points)


def _short(value: float) -> str:
    return f"{value:.1f}".removesuffix(".0")
