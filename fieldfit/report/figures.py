"""Figures: the elastic curve of a member, recorded and fitted, with its readings."""

import io
from dataclasses import dataclass

import matplotlib
import numpy as np
from matplotlib.figure import Figure

from fieldfit.beam import Array, Stiffness, integrate, recorded, solve
from fieldfit.fieldbook import Book
from fieldfit.fieldbook.units import display
from fieldfit.fit import Reconciliation

__all__ = ["Picture", "elastic_curve"]

#: Okabe and Ito's palette, readable with any colour vision; each colour goes with a marker of its own.
COLOURS = ("#0072B2", "#D55E00", "#009E73", "#CC79A7", "#E69F00")
MARKERS = ("o", "s", "^", "D", "v")
STAGES_SHOWN = len(COLOURS)


@dataclass(frozen=True, slots=True, kw_only=True)
class Picture:
    """A figure as SVG text, with what it shows in words."""

    svg: str
    caption: str


def elastic_curve(book: Book, found: Reconciliation) -> Picture:
    """Recorded (dashed) and fitted (full) elastic curves of up to five stages, readings with error bars of 1.96 u.

    Readings are drawn with their zeros and datum taken off, so that they can be held against the curves.
    """
    subject = found.subject
    stages = _stages_to_show(found)
    x = np.linspace(0.0, float(subject.member.length[0]), 201)
    along, length_unit = display(book.units, "length", x)
    figure = Figure(figsize=(7.2, 3.4), layout="constrained")
    axes = figure.add_subplot()
    axes.axhline(0.0, color="0.75", linewidth=0.8)
    for place, stage in enumerate(stages):
        colour, marker = COLOURS[place], MARKERS[place]
        curve, _ = display(book.units, "deflection", _curve(found, stage, x, recorded(subject.member)))
        axes.plot(along, curve, color=colour, linestyle="--", linewidth=1.0)
        if found.stiffness is not None:
            fitted, _ = display(book.units, "deflection", _curve(found, stage, x, found.stiffness))
            axes.plot(along, fitted, color=colour, linewidth=1.8)
        at, value, u = (display(book.units, *pair)[0] for pair in _points(found, stage))
        label = subject.stages[stage].name
        axes.errorbar(at, value, 1.96 * u, fmt=marker, color=colour, capsize=3, markersize=5, label=label)
    axes.invert_yaxis()
    axes.set_xlabel(f"distance from the left end [{length_unit}]")
    axes.set_ylabel(f"deflection, down [{display(book.units, 'deflection', 0.0)[1]}]")
    axes.plot([], [], color="0.3", linestyle="--", linewidth=1.0, label="as recorded")
    axes.plot([], [], color="0.3", linewidth=1.8, label="fitted")
    axes.legend(fontsize=8, frameon=False, loc="center left", bbox_to_anchor=(1.0, 0.5), title="stage")
    used = len(np.unique(subject.observations.stage[found.used_for == "fit"]))
    shown = f" {len(stages)} of the {used} stages in the fit are drawn." if len(stages) < used else ""
    caption = (
        f"Elastic curve of {subject.name}: dashed as recorded, full line as fitted, "
        f"readings with bars of 1.96 standard uncertainties.{shown}"
    )
    return Picture(svg=_svg(figure), caption=caption)


def _stages_to_show(found: Reconciliation) -> list[int]:
    """Numbers of the stages to draw: those with readings in the fit, evenly picked, the heaviest last."""
    seen = found.subject.observations
    used = np.unique(seen.stage[found.used_for == "fit"])
    if len(used) <= STAGES_SHOWN:
        return [int(stage) for stage in used]
    picked = np.linspace(0, len(used) - 1, STAGES_SHOWN).round().astype(int)
    return [int(stage) for stage in used[picked]]


def _curve(found: Reconciliation, stage: int, x: Array, stiffness: Stiffness) -> Array:
    """Deflection (m, down) of a stage along x (S,)."""
    response = solve(integrate(found.subject.member, found.subject.loads, x[None]), stiffness)
    return -found.subject.stages[stage].factors @ response.deflection[0]


def _points(found: Reconciliation, stage: int) -> list[tuple[str, Array]]:
    """Stations (m), deflections (m, down) and u (m) of the deflection readings of a stage, zeros taken off."""
    seen = found.subject.observations
    here = (
        (seen.stage == stage) & (found.used_for == "fit") & np.isin(seen.quantity.astype(str), ("deflection", "level"))
    )
    down = (seen.value - found.fitted + found.response)[here] / -seen.sign[here]
    return [("length", seen.at[here]), ("deflection", down), ("deflection", found.u[here])]


def _svg(figure: Figure) -> str:
    """SVG text without a date and with settled identifiers, so that the same figure is the same bytes."""
    text = io.StringIO()
    with matplotlib.rc_context({"svg.hashsalt": "fieldfit", "svg.fonttype": "none", "font.family": "sans-serif"}):
        figure.savefig(text, format="svg", metadata={"Date": None, "Creator": None})
    svg = text.getvalue()
    return svg[svg.index("<svg") :]
