"""The report page: plain sentences first, then the member's numbers, in the book's own units."""

from collections import Counter
from collections.abc import Sequence
from datetime import datetime
from typing import Any

import jinja2

from fieldfit import __version__
from fieldfit.fieldbook import Book
from fieldfit.fieldbook.units import display
from fieldfit.fit import Estimate
from fieldfit.judge import CAUTIONS, VERDICTS, Check, Verdict
from fieldfit.report.figures import elastic_curve
from fieldfit.report.words import MARKS, number, percent, plain, span_of

__all__ = ["answer", "headline", "page"]


def page(book: Book, verdicts: Sequence[Verdict], time: datetime) -> str:
    """The report as one self-contained HTML text. Every text of the book is escaped."""
    templates = jinja2.Environment(
        loader=jinja2.PackageLoader("fieldfit.report", "."), autoescape=True, undefined=jinja2.StrictUndefined
    )
    return templates.get_template("page.html").render(
        book=book,
        headline=headline(verdicts),
        cautions=CAUTIONS,
        marks=MARKS,
        members=[_member(book, verdict) for verdict in verdicts],
        EI_unit=display(book.units, "EI", 0.0)[1],
        length_unit=display(book.units, "length", 0.0)[1],
        version=__version__,
        time=time.strftime("%Y-%m-%d %H:%M"),
    )


def headline(verdicts: Sequence[Verdict]) -> str:
    """The answer for all members in one sentence."""
    counted = Counter(verdict.verdict for verdict in verdicts)
    parts = [f"{counted[word]} {word}" for word in VERDICTS if counted[word]]
    noun = "member" if len(verdicts) == 1 else "members"
    return f"{len(verdicts)} {noun} assessed for stiffness against the tolerance on record: {', '.join(parts)}."


def answer(verdict: Verdict) -> str:
    """What the readings say of a member, in plain sentences."""
    said = []
    for estimate, check in zip(verdict.reconciliation.estimates, verdict.checks, strict=True):
        said.append(_stiffness(estimate))
        if check.verdict == "not assessed":
            said.append(f"Not assessed: {check.reason}.")
        elif check.at_least is not None and check.at_most is not None:
            limits = f"{plain(check.at_least, 3)} to {plain(check.at_most, 3)}"
            side = f" ({check.reason})" if check.reason else ""
            chance = percent(check.probability_within)
            said.append(f"Against {limits} times the record it is {check.verdict}{side}; probability within: {chance}.")
    return " ".join(said)


def _stiffness(estimate: Estimate) -> str:
    part = "The member's EI" if estimate.where == "whole" else f"EI of {estimate.where}"
    if estimate.ratio is None or estimate.u is None:
        span = span_of(estimate.ratio_low, estimate.ratio_high, 0.01)
        return f"The readings do not determine {part[0].lower()}{part[1:]} (over the recorded: {span})."
    u = estimate.u / estimate.recorded
    interval = span_of(estimate.ratio_low, estimate.ratio_high, u)
    return f"{part} is {number(estimate.ratio, u)} times the recorded value (95 % interval {interval})."


def _member(book: Book, verdict: Verdict) -> dict[str, Any]:
    found = verdict.reconciliation
    picture = elastic_curve(book, found)
    used = Counter(found.used_for)
    total = len(found.used_for)
    return {
        "name": found.subject.name,
        "verdict": verdict.verdict,
        "answer": answer(verdict),
        "warnings": verdict.warnings,
        "svg": picture.svg,
        "caption": picture.caption,
        "estimates": [_estimate(book, *pair) for pair in zip(found.estimates, verdict.checks, strict=True)],
        "fit": _fit_words(verdict),
        "readings": list(_readings(book, verdict)),
        "ledger": f"{total} readings in the book: {used['fit']} used for the fit, {used['rule']} kept for the rules of "
        f"load tests, {used['none']} set aside.",
    }


def _estimate(book: Book, estimate: Estimate, check: Check) -> dict[str, str]:
    ratio_u = estimate.u / estimate.recorded if estimate.u is not None else 0.01
    shown = {name: _shown(book, getattr(estimate, name)) for name in ("value", "u", "low", "high", "recorded")}
    allowed = "–" if check.at_least is None else f"{plain(check.at_least, 3)} to {plain(check.at_most, 3)}"
    return {
        "where": estimate.where,
        "ratio": number(estimate.ratio, ratio_u),
        "ratio_interval": span_of(estimate.ratio_low, estimate.ratio_high, ratio_u),
        "allowed": allowed,
        "probability": percent(check.probability_within),
        "recorded": plain(shown["recorded"]),
        "value": number(shown["value"], shown["u"]),
        "u": plain(shown["u"], 2),
        "interval": span_of(shown["low"], shown["high"], shown["u"] or 0.01 * (shown["recorded"] or 1.0)),
        "determined": estimate.determined,
    }


def _shown(book: Book, value: float | None) -> float | None:
    return None if value is None else float(display(book.units, "EI", value)[0])


def _fit_words(verdict: Verdict) -> str:
    fit = verdict.reconciliation.profile
    if fit is None:
        return (
            "Nothing could be fitted: there is no reading left to judge the scatter by. Give the readings a standard "
            "uncertainty (u), a half width (plus or minus) or their resolution."
        )
    source = {
        "given": "the uncertainty given in the book",
        "scatter": "the scatter of the readings about the fit",
        "resolution": "the resolution of the readings, as a floor",
    }[fit.noise.source]
    test = "" if fit.noise.p is None else f", probability of as much or more {percent(fit.noise.p)}"
    scatter = f"chi-square {plain(fit.noise.chi_square, 3)} on {fit.noise.spare} degrees of freedom{test}"
    return f"Intervals rest on {source}" + ("." if fit.noise.source == "scatter" else f"; {scatter}.")


def _readings(book: Book, verdict: Verdict) -> list[dict[str, str]]:
    found = verdict.reconciliation
    seen = found.subject.observations
    rows = []
    for n, quantity in enumerate(seen.quantity):
        si = {
            "measured": seen.value[n],
            "u": found.u[n],
            "as_recorded": found.as_recorded[n],
            "fitted": found.fitted[n],
        }
        shown = {name: float(display(book.units, quantity, value)[0]) for name, value in si.items()}
        over = seen.value[n] / found.as_recorded[n] if found.as_recorded[n] else None
        rows.append(
            {
                "stage": found.subject.stages[seen.stage[n]].name,
                "gauge": seen.gauge[n],
                "at": plain(float(display(book.units, "length", seen.at[n])[0])),
                "unit": display(book.units, quantity, 0.0)[1],
                "measured": number(shown["measured"], shown["u"]),
                "u": plain(shown["u"], 2),
                "as_recorded": number(shown["as_recorded"], shown["u"]),
                "fitted": number(shown["fitted"], shown["u"]),
                "over": plain(over, 3),
                "standardised": plain(found.standardised[n], 2),
                "used_for": found.used_for[n],
                "why": found.why[n],
            }
        )
    return rows
