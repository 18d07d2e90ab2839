"""Rows: the numbers of a member as texts, rounded and in the book's own units."""

import math
from collections.abc import Iterator

import numpy as np

from fieldfit.fieldbook import Book
from fieldfit.fieldbook.units import display
from fieldfit.fit import Estimate, Reconciliation
from fieldfit.judge import Check, Verdict
from fieldfit.judge.rules import RULES
from fieldfit.report.actions import Action
from fieldfit.report.curves import changes
from fieldfit.report.results import in_unit, in_units_of_each, kind_of, unit_of
from fieldfit.report.say import NONE, allowed, check_name, ratio_u
from fieldfit.report.words import DASH, decimals_of, fixed, number, percent, plain, span_of

__all__ = ["action_row", "check_row", "estimate_row", "placed", "reading_groups"]

NOWHERE = "in no stage"
ASIDE = "set aside"
USES = {"fit": "used for the fit", "rule": "kept for the rules of load tests", "none": ASIDE}


def estimate_row(book: Book, estimate: Estimate, *, lost: bool) -> dict[str, str]:
    """One estimate; the value of the best fit alone where the model is lost: no interval holds then."""
    kind = kind_of(estimate)
    shown = {name: in_unit(book, kind, getattr(estimate, name)) for name in ("value", "u", "low", "high", "recorded")}
    u = shown["u"] or _coarse(shown["low"], shown["high"], shown["recorded"])
    over = ""
    if kind == "EI":
        over = plain(estimate.ratio, 2) if lost else number(estimate.ratio, ratio_u(estimate))
    elif estimate.quantity == "rotational restraint":
        span = span_of(estimate.fixity_low, estimate.fixity_high, 0.01)
        over = f"fixity {plain(estimate.fixity, 2) if lost else span}"
    return {
        "name": placed(estimate.quantity, estimate.where, estimate.stage),
        "unit": "" if kind == "ratio" else unit_of(book, kind),
        "recorded": plain(shown["recorded"]) if shown["recorded"] is not None else _unrecorded(estimate),
        "value": plain(shown["value"], 2) if lost else number(shown["value"], u),
        "u": DASH if lost else number(shown["u"], shown["u"]),
        "interval": NONE if lost else span_of(shown["low"], shown["high"], u),
        "over": over,
        "determined": DASH if lost else _how(estimate),
    }


def _unrecorded(estimate: Estimate) -> str:
    """What an infinite stiffness on record is called."""
    return {"rotational restraint": "fixed", "bearing stiffness": "rigid"}.get(estimate.quantity, DASH)


def placed(name: str, where: str, stage: str | None) -> str:
    """A quantity with its place and stage, in words."""
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


def check_row(book: Book, check: Check, *, lost: bool) -> dict[str, str]:
    """One check, with its margin to the nearer limit; a rule of load tests rests on readings, not on the model."""
    is_rule = check.check in RULES
    lost = lost and not is_rule
    names = ("value", "u", "low", "high", "at_least", "at_most")
    shown = {name: in_unit(book, check.kind, getattr(check, name)) for name in names}
    u = shown["u"] or _coarse(shown["value"], shown["low"], shown["high"])
    return {
        "name": check_name(check),
        "unit": "" if check.kind == "ratio" else unit_of(book, check.kind),
        "verdict": check.verdict,
        "value": plain(shown["value"], 2) if lost else number(shown["value"], u),
        "interval": NONE if lost else span_of(shown["low"], shown["high"], u),
        "allowed": allowed(shown["at_least"], shown["at_most"]),
        "margin": DASH if lost else _margin(shown["value"], u, shown["at_least"], shown["at_most"]),
        "probability": DASH if check.verdict == "not assessed" else percent(check.probability_within),
        "source": "edition, clause and source below"
        if is_rule
        else ", ".join(filter(None, (check.source, check.edition))),
        "reason": check.reason or "",
    }


def _margin(value: float | None, u: float, at_least: float | None, at_most: float | None) -> str:
    """Distance of the value from the nearer limit, in words."""
    if value is None or (at_least is None and at_most is None):
        return DASH
    room = min(math.inf if at_least is None else value - at_least, math.inf if at_most is None else at_most - value)
    return f"{number(abs(room), u)} {'inside' if room >= 0 else 'outside'}"


def action_row(book: Book, action: Action, *, lost: bool) -> dict[str, str]:
    """One reaction or moment, as recorded and as fitted."""
    recorded, fitted, u = (in_unit(book, action.kind, one) for one in (action.recorded, action.fitted, action.u))
    return {
        "name": placed(action.action, action.where, None),
        "unit": unit_of(book, action.kind),
        "recorded": plain(recorded),
        "fitted": plain(fitted, 2) if lost else number(fitted, u),
        "u": DASH if lost else number(u, u),
    }


def reading_groups(book: Book, verdict: Verdict) -> Iterator[tuple[str, str, list[dict[str, str]]]]:
    """The ledger in the book's order: a stage, what its readings are and were used for, and those readings."""
    found = verdict.reconciliation
    seen = found.subject.observations
    units = {kind: unit_of(book, kind) for kind in set(seen.quantity)}
    groups: dict[tuple[int, str, str], list[dict[str, str]]] = {}
    for n, row in enumerate(_reading_rows(book, found)):
        kind, why = str(seen.quantity[n]), str(found.why[n])
        use = why if why.startswith(ASIDE) else ": ".join(filter(None, (USES[str(found.used_for[n])], why)))
        groups.setdefault((int(seen.stage[n]), f"{kind} [{units[kind]}]", use), []).append(row)
    for stage, what, use in sorted(groups, key=lambda group: group[0]):
        yield found.subject.stage_name(stage) or NOWHERE, f"{what}, {use}", groups[stage, what, use]


def _reading_rows(book: Book, found: Reconciliation) -> Iterator[dict[str, str]]:
    seen = found.subject.observations
    measured, on_record = changes(found)
    clear = np.abs(on_record) > 2 * found.u
    with np.errstate(divide="ignore", invalid="ignore"):
        over, over_u = measured / on_record, found.u / np.abs(on_record)
    value, u, as_recorded, fitted = (
        in_units_of_each(book.units, seen.quantity, si).tolist()
        for si in (seen.value, found.u, found.as_recorded, found.fitted)
    )
    at = (seen.at * display(book.units, "length", 1.0)[0]).tolist()
    decimals = decimals_of(at)
    for n, gauge in enumerate(seen.gauge):
        rounded = math.isfinite(u[n])
        yield {
            "gauge": str(gauge),
            "at": fixed(at[n], decimals),
            "measured": number(value[n], u[n]) if rounded else plain(value[n]),
            "u": number(u[n], u[n]),
            "as_recorded": number(as_recorded[n], u[n]) if rounded else plain(as_recorded[n]),
            "fitted": number(fitted[n], u[n]),
            "over": number(float(over[n]), float(over_u[n])) if clear[n] else DASH,
            "standardised": fixed(found.standardised[n], 1) if np.isfinite(found.standardised[n]) else DASH,
        }
