"""Estimates with their intervals, each on a scale of its own, against what is recorded and what is allowed.

Where the model does not explain the readings no interval holds: then none is drawn, and the best fits are hollow.
"""

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace

from fieldfit.fieldbook import Book
from fieldfit.fit import Estimate, Reconciliation
from fieldfit.report.axes import Frame, bottom_axis, ranged, ticks
from fieldfit.report.canvas import GREY, INK, Area, Drawing, Line, Mark, Shape, Text, shortened, width_of
from fieldfit.report.figures.picture import WIDTH, Picture, in_units
from fieldfit.report.results import kind_of, unit_of
from fieldfit.report.say import UNEXPLAINED, unexplained

__all__ = ["intervals"]

ROW = 60.0  # px
LEFT, RIGHT = 16.0, WIDTH - 16.0
BLUE, GREEN = "#0072B2", "#009E73"
BARS = "Each bar is a 95 % interval on a scale of its own; an arrow marks a side that is open."
NO_BARS = "Each hollow circle is a best fit on a scale of its own, and no interval of it holds."


@dataclass(frozen=True, slots=True, kw_only=True)
class _Row:
    """One estimate on its scale; None where a side is open or a value is not known."""

    name: str
    unit: str
    value: float | None
    low: float | None
    high: float | None
    recorded: float | None
    allowed: tuple[float, float]
    edges: tuple[float, float] | None = None


def intervals(book: Book, found: Reconciliation) -> Picture | None:
    """A row for each estimate that has at least one end, datums left out; None where none has.

    Where the model does not explain the readings, a row for each best fit.
    """
    lost = unexplained(found)
    rows = [_row(book, found, estimate) for estimate in found.estimates if not estimate.quantity.startswith("datum")]
    if lost:
        rows = [replace(row, low=None, high=None) for row in rows if row.value is not None]
    else:
        rows = [row for row in rows if row.low is not None or row.high is not None]
    if not rows:
        return None
    shapes: list[Shape] = [*_key(lost)]
    for number, row in enumerate(rows):
        shapes += _drawn(row, 26.0 + ROW * number, lost)
    return Picture(
        key="intervals",
        heading="Estimates without intervals" if lost else "Estimates with their intervals",
        caption=f"{NO_BARS if lost else BARS} The hollow triangle is the recorded value, the shaded stretch what the "
        f"book allows, by its tolerance on EI or by a limit.{f' {UNEXPLAINED}' if lost else ''}",
        drawing=Drawing(
            width=WIDTH,
            height=26.0 + ROW * len(rows),
            title=f"Estimates of {found.subject.name} {'without' if lost else 'with their'} intervals",
            description="; ".join(_words(row, lost) for row in rows) + ".",
            shapes=tuple(shapes),
        ),
    )


def _row(book: Book, found: Reconciliation, estimate: Estimate) -> _Row:
    name = ", ".join(part for part in (estimate.quantity, estimate.where, estimate.stage) if part and part != "whole")
    kind = kind_of(estimate)
    if kind == "EI":
        ends = estimate.ratio, estimate.ratio_low, estimate.ratio_high
        return _plain(f"{name} / recorded", "", ends, 1.0, _allowed(found, "EI ratio", estimate), None)
    if estimate.quantity == "rotational restraint":
        ends = estimate.fixity, estimate.fixity_low, estimate.fixity_high
        allowed = _allowed(found, "fixity", estimate)
        return _plain(f"fixity, {estimate.where}", "0 pinned, 1 fixed", ends, None, allowed, (-0.04, 1.04))
    shown = [None if one is None else float(in_units(book, kind, one)) for one in _si(estimate)]
    unit = "" if kind == "ratio" else unit_of(book, kind)
    least, most = (float(in_units(book, kind, end)) for end in _allowed(found, estimate.quantity, estimate))
    return _plain(name, unit, (shown[0], shown[1], shown[2]), shown[3], (least, most), None)


def _allowed(found: Reconciliation, limit: str, estimate: Estimate) -> tuple[float, float]:
    """What the book allows (SI), all its limits of a name and the tolerance together; infinite without one."""
    asked = [row for row in found.subject.limits if row.limit == limit and row.where in (None, estimate.where)]
    least = [row.at_least for row in asked if row.at_least is not None]
    most = [row.at_most for row in asked if row.at_most is not None]
    tolerance = found.subject.tolerance
    if limit == "EI ratio" and math.isfinite(tolerance):
        least, most = [*least, 1.0 - tolerance], [*most, 1.0 + tolerance]
    return max(least, default=-math.inf), min(most, default=math.inf)


def _si(estimate: Estimate) -> tuple[float | None, ...]:
    return estimate.value, estimate.low, estimate.high, estimate.recorded


def _plain(
    name: str,
    unit: str,
    ends: tuple[float | None, float | None, float | None],
    recorded: float | None,
    allowed: tuple[float, float],
    edges: tuple[float, float] | None,
) -> _Row:
    value, low, high = ends
    return _Row(name=name, unit=unit, value=value, low=low, high=high, recorded=recorded, allowed=allowed, edges=edges)


def _key(lost: bool) -> Iterator[Shape]:
    if not lost:
        yield Line(((LEFT, 10), (LEFT + 24, 10)), BLUE, 5.0)
    yield Mark(LEFT + 12, 10, "circle", BLUE, 5.0, hollow=lost)
    yield Text(LEFT + 32, 14, "best fit, no interval" if lost else "estimate, 95 % interval")
    yield Mark(LEFT + 224, 10, "up", INK, 5.0, hollow=True)
    yield Text(LEFT + 236, 14, "recorded")
    yield Area([(LEFT + 318, 5), (LEFT + 342, 5), (LEFT + 342, 15), (LEFT + 318, 15)], GREEN, 0.3)
    yield Text(LEFT + 350, 14, "allowed")


def _drawn(row: _Row, top: float, lost: bool) -> Iterator[Shape]:
    """One row: its name, its scale, what is allowed, the interval, the value, the record."""
    limits = [end for end in row.allowed if math.isfinite(end)]
    known = [end for end in (row.value, row.low, row.high, row.recorded, *limits) if end is not None]
    x = row.edges or ranged(known, least=0.02 * max(abs(end) for end in known), room=0.12)
    frame = Frame(left=LEFT, right=RIGHT, top=top + 16, bottom=top + 40, x=x, y=(0.0, 1.0))
    unit = f" [{row.unit}]" if row.unit else ""
    yield Text(LEFT, top + 11, shortened(row.name, RIGHT - LEFT - width_of(unit)) + unit)
    if limits:
        a, b = (min(max(frame.at_x(end), LEFT), RIGHT) for end in row.allowed)
        yield Area([(a, frame.top + 2), (b, frame.top + 2), (b, frame.bottom - 2), (a, frame.bottom - 2)], GREEN, 0.3)
    yield Line(((LEFT, frame.bottom), (RIGHT, frame.bottom)), GREY, 0.8)
    yield from bottom_axis(frame, ticks(*x, wanted=5), 11.0)
    y = (frame.top + frame.bottom) / 2
    if not lost:
        yield from _bar(row, frame, y)
    if row.value is not None:
        yield Mark(frame.at_x(row.value), y, "circle", BLUE, 5.0, hollow=lost)
    if row.recorded is not None:
        yield Mark(frame.at_x(row.recorded), y, "up", INK, 5.0, hollow=True)


def _bar(row: _Row, frame: Frame, y: float) -> Iterator[Shape]:
    ends = [
        LEFT if row.low is None else frame.at_x(row.low),
        RIGHT if row.high is None else frame.at_x(row.high),
    ]
    yield Line(((ends[0], y), (ends[1], y)), BLUE, 5.0)
    for end, given, way in ((ends[0], row.low, -1), (ends[1], row.high, 1)):
        if given is None:
            yield Area([(end + way * 8, y), (end - way * 4, y - 7), (end - way * 4, y + 7)], BLUE)
        else:
            yield Line(((end, y - 6), (end, y + 6)), BLUE, 2.0)


def _words(row: _Row, lost: bool) -> str:
    if lost:
        return f"{row.name}: best fit {row.value:.4g} {row.unit}".rstrip() + ", no interval holds"
    low, high = ("open" if end is None else f"{end:.4g}" for end in (row.low, row.high))
    return f"{row.name}: from {low} to {high} {row.unit}".rstrip()
