"""Figures of a reconciled member: each a function from what was found to a drawing, with a caption in words."""

from collections.abc import Iterator

from fieldfit.fieldbook import Book
from fieldfit.fit import Reconciliation
from fieldfit.report.figures.beam import beam
from fieldfit.report.figures.curvature import curvature_diagram
from fieldfit.report.figures.elastic import elastic_curve
from fieldfit.report.figures.estimates import intervals
from fieldfit.report.figures.load_test import load_deflection, load_over_time, residuals_left
from fieldfit.report.figures.picture import Picture
from fieldfit.report.figures.plateaus import plateaus
from fieldfit.report.figures.ratios import ratios
from fieldfit.report.figures.residuals import residuals

__all__ = ["FIGURES", "Picture", "beam", "figures_of"]

FIGURES = {
    "beam": lambda book, found: beam(book, found.subject),
    "intervals": intervals,
    "elastic curve": elastic_curve,
    "ratios": ratios,
    "curvature": curvature_diagram,
    "residuals": residuals,
    "load over time": load_over_time,
    "load and deflection": load_deflection,
    "left after unloading": residuals_left,
    "plateaus": plateaus,
}


def figures_of(book: Book, found: Reconciliation) -> Iterator[Picture]:
    """Every figure of a member that has something to show."""
    for make in FIGURES.values():
        picture = make(book, found)
        if picture is not None:
            yield picture
