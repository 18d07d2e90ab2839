"""Picture: a drawing with its place in the report and its caption; and what all figures share."""

from collections.abc import Sequence
from dataclasses import dataclass

from fieldfit.fieldbook import Book, display
from fieldfit.fit import Reconciliation
from fieldfit.report.axes import SIGNS, Entry, legend
from fieldfit.report.canvas import Drawing, Shape
from fieldfit.report.say import creeps

__all__ = ["LEFT", "RIGHT", "WIDTH", "Picture", "creep_words", "in_units", "keyed", "stage_entries"]

WIDTH = 460.0  # px, of every figure: readable on a phone, and two side by side on a screen or a sheet of A4
LEFT, RIGHT = 66.0, WIDTH - 14.0  # px, edges of a frame


@dataclass(frozen=True, slots=True, kw_only=True)
class Picture:
    """A drawing under a heading; ``key`` names it in file names, ``caption`` says what it shows."""

    key: str
    heading: str
    caption: str
    drawing: Drawing


def in_units(book: Book, kind: str, values):  # type: ignore[no-untyped-def]  # arrays and numbers alike
    """SI values (any shape) in the book's own unit."""
    return display(book.units, kind, values)[0]


def keyed(entries: Sequence[Entry]) -> tuple[list[Shape], float]:
    """The legend above a frame, and where (px) it ends."""
    return legend(entries, 8.0, WIDTH - 8.0, 0.0)


def stage_entries(found: Reconciliation, stages: list[int]) -> list[Entry]:
    """A legend entry for each stage, by its place among those shown."""
    names = [found.subject.stages[stage].name for stage in stages]
    return [Entry(text=name, colour=colour, shape=shape) for name, (colour, shape) in zip(names, SIGNS, strict=False)]


def creep_words(found: Reconciliation) -> str:
    """A sentence where the fitted curves are not elastic alone."""
    return " The fitted curve includes creep, the recorded one does not." if creeps(found) else ""
