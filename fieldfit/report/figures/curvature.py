"""The curvature diagram M/EI of the fitted member, with the area between two stations said in a sentence."""

import numpy as np

from fieldfit.beam import Array
from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation
from fieldfit.report.axes import Entry, Frame, axis_shapes, ranged
from fieldfit.report.canvas import GREY, INK, Area, Drawing, Line, Shape, Text
from fieldfit.report.curves import Curves, area_u, curves_of, fitted_area, heaviest
from fieldfit.report.figures.picture import LEFT, RIGHT, WIDTH, Picture, creep_words, in_units, keyed
from fieldfit.report.results import unit_of
from fieldfit.report.words import number, plain

__all__ = ["curvature_diagram"]

HEIGHT = 170.0  # px, of the frame
NAMED = 60.0  # px: a narrower area is named by the legend alone
BLUE, ORANGE = "#0072B2", "#E69F00"


def curvature_diagram(book: Book, found: Reconciliation) -> Picture | None:
    """M/EI of the heaviest stage, the area from a support to the largest deflection shaded; None where unfitted."""
    stage = heaviest(found)
    if stage is None or found.stiffness is None:
        return None
    curves = curves_of(found, [stage], "curvature")
    start, end = _stretch(found, curves_of(found, [stage], "deflection"))
    turned = fitted_area(found, stage, start, end), area_u(found, stage, start, end)
    if curves.fitted is None:
        return None
    key, top = keyed(_entries())
    scale, length = in_units(book, "curvature", 1.0), in_units(book, "length", 1.0)
    at, on_record, fitted = curves.at * length, curves.recorded[0] * scale, curves.fitted[0] * scale
    frame = Frame(
        left=LEFT,
        top=top + 8,
        right=RIGHT,
        bottom=top + 8 + HEIGHT,
        x=(0.0, float(at[-1])),
        y=ranged([0.0, *on_record, *fitted], room=0.1),
        down=True,
    )
    labels = f"distance from the left end [{unit_of(book, 'length')}]", f"M/EI, sagging [{unit_of(book, 'curvature')}]"
    shapes: list[Shape] = [*key, *axis_shapes(frame, *labels)]
    shapes += _shaded(frame, at, fitted, (start * length, end * length))
    shapes.append(Line(frame.points(frame.x, (0.0, 0.0)), GREY, 1.0))
    shapes.append(Line(frame.points(list(at), list(on_record)), GREY, 1.3, (6, 4)))
    shapes.append(Line(frame.points(list(at), list(fitted)), BLUE, 2.0))
    name = found.subject.stages[stage].name
    said = _sentence(book, found, start, end, turned)
    return Picture(
        key="curvature",
        heading="Curvature diagram",
        caption=f"M/EI in stage “{name}”, in which the recorded member would deflect most. {said}{creep_words(found)}",
        drawing=Drawing(
            width=WIDTH,
            height=frame.bottom + 42,
            title=f"Curvature diagram of {found.subject.name} in stage {name}",
            description=said,
            shapes=tuple(shapes),
        ),
    )


def _entries() -> list[Entry]:
    return [
        Entry(text="fitted", colour=BLUE, width=2.0),
        Entry(text="as recorded", colour=GREY, dash=(6, 4), width=1.3),
        Entry(text="area between the two stations", colour=ORANGE, shape="square"),
    ]


def _stretch(found: Reconciliation, curves: Curves) -> tuple[float, float]:
    """From the support or hinge on the left of the largest deflection to it; from it to the next where none is."""
    deflection = curves.recorded[0] if curves.fitted is None else curves.fitted[0]
    lowest = float(curves.at[int(np.abs(deflection).argmax())])
    member = found.subject.member
    marks = np.sort(np.concatenate([member.support_at[0], member.hinge_at[0]]))
    before, after = marks[marks < lowest], marks[marks > lowest]
    if before.size:
        return float(before[-1]), lowest
    return lowest, float(after[0]) if after.size else float(member.length[0])


def _shaded(frame: Frame, at: Array, fitted: Array, ends: tuple[float, float]) -> list[Shape]:
    inside = (at >= ends[0]) & (at <= ends[1])
    x = [ends[0], *at[inside], ends[1]]
    y = [0.0, *fitted[inside], 0.0]
    uprights = [Line(frame.points((end, end), frame.y), INK, 0.8, (2, 3)) for end in ends]
    middle = (frame.at_x(ends[0]) + frame.at_x(ends[1])) / 2
    if frame.at_x(ends[1]) - frame.at_x(ends[0]) < NAMED:
        return [Area(frame.points(x, y), ORANGE, 0.45), *uprights]
    label = Text(middle, frame.at_y(0.0) + (14 if np.median(fitted[inside]) >= 0 else -5), "area", "middle", bold=True)
    return [Area(frame.points(x, y), ORANGE, 0.45), *uprights, label]


def _sentence(book: Book, found: Reconciliation, start: float, end: float, turned: tuple[float, float | None]) -> str:
    """The first moment-area theorem for the shaded area."""
    unit, length = unit_of(book, "rotation"), unit_of(book, "length")
    a, b = (f"{plain(in_units(book, 'length', at), 3)} {length}" for at in (start, end))
    size, u = (None if one is None else abs(float(in_units(book, "rotation", one))) for one in turned)
    value = number(size, u) if u else plain(size, 2)
    spread = f" (standard uncertainty {number(u, u)} {unit})" if u else ""
    way = "anticlockwise" if turned[0] >= 0 else "clockwise"
    hinged = np.any((found.subject.member.hinge_at[0] > start) & (found.subject.member.hinge_at[0] < end))
    kink = " The kink at a hinge between them is not part of it." if hinged else ""
    return (
        f"The shaded area from {a} to {b}, where the fitted member deflects most, is {value} {unit}"
        f"{spread}: by the first moment-area theorem the member turns by that much, {way}, between the two "
        f"stations.{kink}"
    )
