"""The level book in the report: how its runs closed, and every sight with what became of it."""

import math
from collections import Counter
from collections.abc import Sequence
from typing import Any

import pandas as pd
from scipy import stats

from fieldfit.fieldbook import Book
from fieldfit.fieldbook.units import display
from fieldfit.judge import Verdict
from fieldfit.observe import Levelled, Run
from fieldfit.report.words import number, percent, plain

__all__ = ["level_record", "level_section", "levelled_of", "sights_table"]


def levelled_of(verdicts: Sequence[Verdict]) -> Levelled | None:
    """The adjusted level book that all members share, None where there is none."""
    return verdicts[0].reconciliation.subject.levelled if verdicts else None


def level_section(book: Book, verdicts: Sequence[Verdict]) -> dict[str, Any] | None:
    """What the report page says of the level book; None where there is none."""
    found = levelled_of(verdicts)
    if found is None:
        return None
    return {
        "ledger": _ledger(found),
        "test": _test(found),
        "unit": display(book.units, "deflection", 0.0)[1],
        "length_unit": book.units["length"],
        "runs": [_run_row(book, run) for run in found.runs],
    }


def _ledger(found: Levelled) -> str:
    used = Counter(found.sights["use"])
    checked = int((found.sights["redundancy"] > 0.01).sum())
    return (
        f"{len(found.sights)} sights in the level book: {used[True]} used, {used[False]} set aside. They gave "
        f"{len(found.heights)} heights of points on members; an error of {checked} of the sights would show."
    )


def _test(found: Levelled) -> str:
    misfit = found.misfit
    if not misfit.spare:
        return "No sight is checked by another: the levels hold as they were read."
    p = percent(float(stats.chi2.sf(misfit.chi_square, misfit.spare)))
    return (
        f"Adjusted by least squares, all stages together, with every correlation carried into the fit; chi-square "
        f"{plain(misfit.chi_square, 3)} on {misfit.spare} degrees of freedom, probability of as much or more {p}."
    )


def _run_row(book: Book, run: Run) -> dict[str, str]:
    misclosure, u, allowed = (
        float(display(book.units, "deflection", one)[0]) for one in (run.misclosure, run.u, run.allowed)
    )
    return {
        "stage": run.stage,
        "route": f"{run.start} to {run.end or 'its last point'}",
        "set_ups": str(run.set_ups),
        "length": plain(float(display(book.units, "length", run.length)[0]), 3),
        "misclosure": number(misclosure, u).replace("-", "−"),
        "u": plain(u, 2),
        "allowed": number(allowed, u),
        "says": _says(run),
    }


def _closed(run: Run) -> bool:
    return math.isfinite(run.misclosure)


def _says(run: Run) -> str:
    """How a run closed, in words."""
    if not _closed(run):
        word = "not checked: it ends on no known height"
    elif run.is_beyond:
        word = "▲ beyond"
    else:
        word = "● within" if math.isfinite(run.allowed) else "closed; the book allows no amount"
    return word if run.used else f"{word}; sights set aside"


def sights_table(book: Book, found: Levelled) -> pd.DataFrame:
    """Every sight of the level book, a row each, in the book's own units."""
    sights = found.sights
    small, high, long = (display(book.units, kind, 0.0)[1] for kind in ("deflection", "level", "length"))

    def shown(kind: str, name: str) -> Any:
        return display(book.units, kind, sights[name].to_numpy(dtype=float))[0]

    return pd.DataFrame(
        {
            "stage": sights["stage"],
            "set-up": sights["set-up"],
            "member": sights["member"],
            "sight": sights["sight"],
            "point": sights["point"],
            f"staff [{high}]": shown("level", "staff"),
            f"distance [{long}]": shown("length", "distance"),
            f"u [{small}]": shown("deflection", "u"),
            f"residual [{small}]": shown("deflection", "residual"),
            "redundancy": sights["redundancy"],
            "used for": sights["use"].map({True: "fit", False: "none"}),
            "why": sights["use"].map({True: "", False: "set aside in the book (use: no)"}),
            "remark": sights["remark"],
        }
    ).reset_index(drop=True)


def level_record(found: Levelled | None) -> dict[str, Any] | None:
    """The level book for results.json: runs and sights in m."""
    if found is None:
        return None
    names = ["stage", "set-up", "member", "sight", "point", "staff", "distance", "u", "residual", "redundancy", "use"]
    return {
        "unit": "m",
        "chi_square": found.misfit.chi_square,
        "degrees_of_freedom": found.misfit.spare,
        "runs": [
            {name: getattr(run, name) for name in ("stage", "start", "end", "set_ups", "length")}
            | {"misclosure": run.misclosure, "u": run.u, "allowed": run.allowed, "used": run.used}
            for run in found.runs
        ],
        "sights": found.sights[names].to_dict("records"),
    }
