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
from fieldfit.report.results import in_unit, kind_of
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
        length_unit=display(book.units, "length", 0.0)[1],
        version=__version__,
        time=time.strftime("%Y-%m-%d %H:%M"),
    )


def headline(verdicts: Sequence[Verdict]) -> str:
    """The answer for all members in one sentence."""
    counted = Counter(verdict.verdict for verdict in verdicts)
    parts = [f"{counted[word]} {word}" for word in VERDICTS if counted[word]]
    noun = "member" if len(verdicts) == 1 else "members"
    return f"{len(verdicts)} {noun} held against the limits of the book: {', '.join(parts)}."


def answer(verdict: Verdict) -> str:
    """What the readings say of a member, in plain sentences: stiffness first, then its checks."""
    found = verdict.reconciliation
    said = [_stiffness(estimate) for estimate in found.estimates if kind_of(estimate) == "EI"]
    return " ".join([*said, *map(_judged, verdict.checks)])


def _stiffness(estimate: Estimate) -> str:
    part = "The member's EI" if estimate.where == "whole" else f"EI of {estimate.where}"
    if estimate.ratio is None or estimate.u is None:
        span = span_of(estimate.ratio_low, estimate.ratio_high, 0.01)
        return f"The readings do not determine {part[0].lower()}{part[1:]} (over the recorded: {span})."
    u = _ratio_u(estimate)
    interval = span_of(estimate.ratio_low, estimate.ratio_high, u)
    apparent = ", as it appears," if estimate.quantity != "EI" else ""
    return f"{part}{apparent} is {number(estimate.ratio, u)} times the recorded value (95 % interval {interval})."


def _ratio_u(estimate: Estimate) -> float:
    return 0.01 if estimate.u is None or not estimate.recorded else estimate.u / estimate.recorded


def _judged(check: Check) -> str:
    place = "" if check.where == "whole" else f" of {check.where}"
    stage = f" in stage {check.stage}" if check.stage else ""
    name = f"{check.check}{place}{stage}"
    if check.verdict == "not assessed":
        return f"{name} is not assessed: {check.reason}."
    side = f" ({check.reason})" if check.reason else ""
    return f"{name} is {check.verdict}{side}; probability within: {percent(check.probability_within)}."


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
        "estimates": [_estimate(book, estimate) for estimate in found.estimates],
        "checks": [_check(book, check) for check in verdict.checks],
        "fit": _fit_words(verdict),
        "readings": list(_readings(book, verdict)),
        "ledger": f"{total} readings in the book: {used['fit']} used for the fit, {used['rule']} kept for the rules of "
        f"load tests, {used['none']} set aside.",
    }


def _estimate(book: Book, estimate: Estimate) -> dict[str, str]:
    kind = kind_of(estimate)
    shown = {name: in_unit(book, kind, getattr(estimate, name)) for name in ("value", "u", "low", "high", "recorded")}
    u = shown["u"] or _coarse(shown["low"], shown["high"], shown["recorded"])
    fixity = ""
    if estimate.quantity == "rotational restraint":
        fixity = span_of(estimate.fixity_low, estimate.fixity_high, 0.01)
    return {
        "name": f"{estimate.quantity}, {estimate.where}" + (f", {estimate.stage}" if estimate.stage else ""),
        "unit": display(book.units, kind, 0.0)[1],
        "recorded": plain(shown["recorded"]),
        "value": number(shown["value"], u),
        "u": plain(shown["u"], 2),
        "interval": span_of(shown["low"], shown["high"], u),
        "over": number(estimate.ratio, _ratio_u(estimate)) if kind == "EI" else fixity and f"fixity {fixity}",
        "determined": _how(estimate),
    }


def _coarse(*values: float | None) -> float:
    """A hundredth of the largest of some values: to round what has no uncertainty of its own."""
    return 0.01 * max([abs(value) for value in values if value], default=1.0)


def _how(estimate: Estimate) -> str:
    """Whether an estimate is determined, with what its ends rest on where that is not the readings alone."""
    held = "; held up by what the book expects alone" if "expected" in (estimate.low_ends, estimate.high_ends) else ""
    near = "; a bound is near" if estimate.bounded else ""
    return f"{estimate.determined}{held}{near}"


def _check(book: Book, check: Check) -> dict[str, str]:
    shown = {
        name: in_unit(book, check.kind, getattr(check, name))
        for name in ("value", "u", "low", "high", "at_least", "at_most")
    }
    u = shown["u"] or _coarse(shown["value"], shown["low"], shown["high"])
    unit = "" if check.kind == "ratio" else f" {display(book.units, check.kind, 0.0)[1]}"
    return {
        "name": f"{check.check}, {check.where}" + (f", {check.stage}" if check.stage else ""),
        "verdict": check.verdict,
        "value": number(shown["value"], u) + (unit if shown["value"] is not None else ""),
        "interval": span_of(shown["low"], shown["high"], u),
        "allowed": _allowed(shown["at_least"], shown["at_most"]) + unit,
        "probability": percent(check.probability_within),
        "source": check.source,
        "reason": check.reason or "",
    }


def _allowed(at_least: float | None, at_most: float | None) -> str:
    if at_least is None and at_most is None:
        return "–"
    if at_least is None:
        return f"at most {plain(at_most, 3)}"
    return f"at least {plain(at_least, 3)}" if at_most is None else f"{plain(at_least, 3)} to {plain(at_most, 3)}"


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
