"""Rows: the numbers of a member as texts, rounded and in the book's own units."""

import math
from collections.abc import Iterator

from fieldfit.fieldbook import Book
from fieldfit.fieldbook.units import display
from fieldfit.fit import Estimate
from fieldfit.judge import Check, Verdict
from fieldfit.report.curves import changes
from fieldfit.report.results import in_unit, kind_of
from fieldfit.report.say import allowed, ratio_u
from fieldfit.report.words import DASH, number, percent, plain, span_of

__all__ = ["check_row", "estimate_row", "reading_rows"]


def estimate_row(book: Book, estimate: Estimate) -> dict[str, str]:
    """One estimate."""
    kind = kind_of(estimate)
    shown = {name: in_unit(book, kind, getattr(estimate, name)) for name in ("value", "u", "low", "high", "recorded")}
    u = shown["u"] or _coarse(shown["low"], shown["high"], shown["recorded"])
    over = ""
    if kind == "EI":
        over = number(estimate.ratio, ratio_u(estimate))
    elif estimate.quantity == "rotational restraint":
        over = f"fixity {span_of(estimate.fixity_low, estimate.fixity_high, 0.01)}"
    unit = display(book.units, kind, 0.0)[1]
    return {
        "name": _placed(estimate.quantity, estimate.where, estimate.stage),
        "unit": "" if kind == "ratio" else unit,
        "recorded": plain(shown["recorded"]) if shown["recorded"] is not None else _unrecorded(estimate),
        "value": number(shown["value"], u),
        "u": plain(shown["u"], 2),
        "interval": span_of(shown["low"], shown["high"], u),
        "over": over,
        "determined": _how(estimate),
    }


def _unrecorded(estimate: Estimate) -> str:
    """What an infinite stiffness on record is called."""
    return {"rotational restraint": "fixed", "bearing stiffness": "rigid"}.get(estimate.quantity, DASH)


def _placed(name: str, where: str, stage: str | None) -> str:
    place = "" if where == "whole" else f", {where}"
    return name + place + (f", {stage}" if stage else "")


def _coarse(*values: float | None) -> float:
    """A hundredth of the largest of some values: to round what has no uncertainty of its own."""
    return 0.01 * max([abs(value) for value in values if value], default=1.0)


def _how(estimate: Estimate) -> str:
    """Whether an estimate is determined, with what its ends rest on where that is not the readings alone."""
    held = "; held up by what the book expects alone" if "expected" in (estimate.low_ends, estimate.high_ends) else ""
    near = "; a bound is near" if estimate.bounded else ""
    return f"{estimate.determined}{held}{near}"


def check_row(book: Book, check: Check) -> dict[str, str]:
    """One check, with its margin to the nearer limit."""
    names = ("value", "u", "low", "high", "at_least", "at_most")
    shown = {name: in_unit(book, check.kind, getattr(check, name)) for name in names}
    u = shown["u"] or _coarse(shown["value"], shown["low"], shown["high"])
    unit = "" if check.kind == "ratio" else f" {display(book.units, check.kind, 0.0)[1]}"
    return {
        "name": _placed(check.check, check.where, check.stage),
        "verdict": check.verdict,
        "value": number(shown["value"], u) + (unit if shown["value"] is not None else ""),
        "interval": span_of(shown["low"], shown["high"], u),
        "allowed": allowed(shown["at_least"], shown["at_most"]) + unit,
        "margin": _margin(shown["value"], u, shown["at_least"], shown["at_most"], unit),
        "probability": percent(check.probability_within),
        "source": check.source + (f", {check.edition}" if check.edition else ""),
        "reason": check.reason or "",
    }


def _margin(value: float | None, u: float, at_least: float | None, at_most: float | None, unit: str) -> str:
    """Distance of the value from the nearer limit, in words."""
    if value is None or (at_least is None and at_most is None):
        return DASH
    room = min(math.inf if at_least is None else value - at_least, math.inf if at_most is None else at_most - value)
    return f"{number(abs(room), u)}{unit} {'inside' if room >= 0 else 'outside'}"


def reading_rows(book: Book, verdict: Verdict) -> Iterator[dict[str, str]]:
    """The ledger: every reading of a member, in the book's order."""
    found = verdict.reconciliation
    seen = found.subject.observations
    measured, on_record = changes(found)
    for n, quantity in enumerate(seen.quantity):
        si = (seen.value[n], found.u[n], found.as_recorded[n], found.fitted[n])
        value, u, as_recorded, fitted = (float(display(book.units, quantity, one)[0]) for one in si)
        clear = abs(on_record[n]) > 2 * found.u[n]
        yield {
            "stage": found.subject.stages[seen.stage[n]].name,
            "gauge": str(seen.gauge[n]),
            "at": plain(float(display(book.units, "length", seen.at[n])[0])),
            "unit": display(book.units, quantity, 0.0)[1],
            "measured": number(value, u) if math.isfinite(u) else plain(value),
            "u": plain(u, 2),
            "as_recorded": number(as_recorded, u) if math.isfinite(u) else plain(as_recorded),
            "fitted": number(fitted, u),
            "over": number(measured[n] / on_record[n], found.u[n] / abs(on_record[n])) if clear else DASH,
            "standardised": plain(found.standardised[n], 2),
            "used_for": str(found.used_for[n]),
            "why": str(found.why[n]),
        }
