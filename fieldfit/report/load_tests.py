"""Load tests in the report: outcomes as records for machines, as a table, and as rows and sentences for the page."""

from collections.abc import Iterator, Sequence
from typing import Any

import numpy as np
import pandas as pd

from fieldfit.fieldbook import Book, display
from fieldfit.fieldbook.units import DESIGN_UNITS, from_si
from fieldfit.judge import Verdict
from fieldfit.judge.rules import (
    MARKS_SAID,
    Behaviour,
    Held,
    LoadTest,
    Outcome,
    Ratio,
    Record,
    StageStiffness,
    corrected_gauges,
    largest_gauge,
)
from fieldfit.observe.naming import first_named
from fieldfit.report.words import DASH, fixed, number, percent, plain, span_of

__all__ = ["load_test_record", "load_test_rows", "load_tests_table"]

MET = {True: "met", False: "not met", None: "not known"}
NAMED = 3  # pairs of mirrored gauges named one by one
FACTORS = ("factor K",)  # ratios that nobody gives in percent
SHOWN = 12  # stages whose stiffness is listed on the page


def load_test_record(verdict: Verdict) -> dict[str, Any] | None:
    """The load test of a member for results.json, SI-based; None where it has none."""
    test = verdict.load_test
    if test is None:
        return None
    behaviour = test.behaviour
    stiffness = behaviour.stiffness if behaviour else None
    return {
        "critical_section_m": test.record.section if test.record else None,
        "gauges": list(test.record.gauges) if test.record else [],
        "supports_taken_off": test.record.chord if test.record else None,
        "corrected_for_temperature": list(corrected_gauges(verdict.reconciliation.subject)),
        "rules": [_rule_record(outcome) for outcome in test.outcomes],
        "stiffness_by_stage": _stiffness_record(test, stiffness),
        "by_gauge": _gauges_record(test),
        "one_EI_p": stiffness.p if stiffness else None,
        "trend_p": stiffness.trend_p if stiffness else None,
        "trend": None if not stiffness or stiffness.trend_p is None else "softer" if stiffness.softer else "stiffer",
        "mirrored": [
            {
                "left": pair.left,
                "right": pair.right,
                "difference_mm": 1000 * pair.difference,
                "u_mm": None if pair.u is None else 1000 * pair.u,
                "agree": pair.agree,
            }
            for pair in (behaviour.mirrored if behaviour else ())
        ],
    }


def _rule_record(outcome: Outcome) -> dict[str, Any]:
    rule = outcome.rule
    return {
        "rule": rule.name,
        "edition": rule.edition,
        "clause": rule.clause,
        "source": rule.source,
        "result": outcome.result,
        "verdict": outcome.verdict,
        "reason": outcome.reason,
        "decided_by": None if outcome.decided_by is None else outcome.decided_by.key,
        "gates": [_held_record(held) for held in outcome.gates],
        "at_every_gauge": [_held_record(held) for held in outcome.every],
        "conditions": [{"says": one.says, "met": one.met} for one in outcome.conditions],
        "notes": list(outcome.notes),
    }


def _held_record(held: Held) -> dict[str, Any]:
    unit = DESIGN_UNITS[held.kind]
    numbers = {name: getattr(held, name) for name in ("value", "u", "low", "high", "limit")}
    return {
        "gate": held.name,
        "symbol": held.symbol or None,
        "number": held.key,
        "gauge": held.where or None,
        "at": held.at or None,
        **{name: None if one is None else float(from_si(held.kind, unit, one)) for name, one in numbers.items()},
        "unit": unit,
        "sense": held.sense,
        "met": held.met,
        "probability": held.probability,
        "of_repeat": held.of_repeat,
        "number_from_book": held.overridden,
        "certainty": MARKS_SAID[held.mark] or "read in the source named",
        "reason": held.reason,
    }


def _stiffness_record(test: LoadTest, stiffness: StageStiffness | None) -> list[dict[str, Any]]:
    if stiffness is None or test.record is None:
        return []
    names = [test.record.subject.stages[number].name for number in stiffness.stages]
    parts = zip(names, stiffness.ratio, stiffness.u, strict=True)
    return [{"stage": name, "EI_over_fitted": float(ratio), "u": float(u)} for name, ratio, u in parts]


def _gauges_record(test: LoadTest) -> list[dict[str, Any]]:
    """Secants over the first stage's, linearity and permanence of every gauge."""
    if test.record is None or test.behaviour is None:
        return []
    stiffness, count = test.behaviour.stiffness, len(test.record.gauges)
    secants = np.empty((0, count)) if stiffness is None else stiffness.secant
    return [
        {
            "gauge": name,
            "at_m": float(test.record.at[place]),
            "secant_over_first": secants[:, place].tolist(),
            "linearity": linear,
            "permanence": left,
        }
        for (place, name), linear, left in zip(
            enumerate(test.record.gauges),
            _ratio_records(test.behaviour.linearity, count),
            _ratio_records(test.behaviour.permanence, count),
            strict=True,
        )
    ]


def _ratio_records(ratio: Ratio | None, count: int) -> list[dict[str, Any] | None]:
    """A ratio at every gauge, its value null where its denominator is below measurable range."""
    if ratio is None:
        return [None] * count
    clear = ratio.is_measurable
    parts = (ratio.value, ratio.u, *ratio.interval())
    columns = (np.where(clear, part, np.nan).tolist() for part in parts)
    names = ("value", "u", "low", "high", "measurable")
    return [dict(zip(names, row, strict=True)) for row in zip(*columns, clear.tolist(), strict=True)]


COLUMNS = ["member", "rule", "result", "gate", "gauge", "at", "unit", "value", "u", "low", "high", "sense", "limit"]
COLUMNS += ["met", "probability within", "certainty", "reason", "edition", "clause", "source"]


def load_tests_table(book: Book, verdicts: Sequence[Verdict]) -> pd.DataFrame:
    """One row a gate at every gauge, in the book's own units."""
    rows = [
        _table_row(book, verdict, outcome, held)
        for verdict in verdicts
        for outcome in (verdict.load_test.outcomes if verdict.load_test else ())
        for held in _each(outcome)
    ]
    return pd.DataFrame(rows, columns=COLUMNS)


def _each(outcome: Outcome) -> Iterator[Held]:
    """Every gate at every gauge, then the findings."""
    yield from outcome.every
    yield from (held for held in outcome.gates if held.measure == "inspection")


def _table_row(book: Book, verdict: Verdict, outcome: Outcome, held: Held) -> dict[str, Any]:
    return {
        "member": verdict.reconciliation.subject.name,
        "rule": outcome.rule.name,
        "result": outcome.result,
        "gate": _gate(held),
        "gauge": held.where,
        "at": held.at,
        "unit": "" if held.kind == "ratio" else display(book.units, held.kind, 1.0)[1],
        **{name: _shown(book, held, name) for name in ("value", "u", "low", "high", "limit")},
        "sense": held.sense if held.limit is not None else "",
        "met": MET[held.met],
        "probability within": held.probability,
        "certainty": _certainty(held),
        "reason": held.reason or "",
        "edition": outcome.rule.edition,
        "clause": outcome.rule.clause,
        "source": outcome.rule.source,
    }


def _shown(book: Book, held: Held, name: str) -> float | None:
    value: float | None = getattr(held, name)
    return None if value is None else float(display(book.units, held.kind, value)[0])


def _gate(held: Held) -> str:
    return f"{held.name} (waives the rest)" if held.waives else held.name


def _certainty(held: Held) -> str:
    return "number given in the field book" if held.overridden else MARKS_SAID[held.mark]


def load_test_rows(book: Book, verdict: Verdict) -> dict[str, Any] | None:
    """What the page shows of a load test; None where the member has none."""
    test = verdict.load_test
    if test is None:
        return None
    return {
        "sentences": list(_sentences(book, test)),
        "rules": [_rule_rows(book, outcome) for outcome in test.outcomes],
        "stiffness": _stiffness_rows(test),
    }


def _rule_rows(book: Book, outcome: Outcome) -> dict[str, Any]:
    rule = outcome.rule
    return {
        "name": rule.name,
        "verdict": outcome.verdict,
        "result": outcome.result,
        "reason": outcome.reason,
        "source": f"{rule.edition}, {rule.clause}. Source: {rule.source}.",
        "gates": [_gate_row(book, held) for held in outcome.gates],
        "conditions": [(MET[one.met], f"{one.says[0].upper()}{one.says[1:]}") for one in outcome.conditions],
        "notes": outcome.notes,
    }


def _gate_row(book: Book, held: Held) -> dict[str, str]:
    """A gate with its margin, in the book's own units; shares in percent."""
    scale, unit = 1.0, ""
    if held.kind != "ratio":
        unit = f" {display(book.units, held.kind, 0.0)[1]}"
    elif held.measure not in FACTORS:
        scale, unit = 100.0, " %"
    names = ("value", "u", "low", "high", "limit")
    shown = {name: None if (one := _shown(book, held, name)) is None else scale * one for name in names}
    value, u, limit = shown["value"], shown["u"], shown["limit"]
    rounded = u if u else 0.01 * abs(value or limit or 1.0)
    return {
        "name": f"{_gate(held)}, {held.symbol}" if held.symbol else _gate(held),
        "met": MET[held.met],
        "value": DASH if value is None else f"{number(value, rounded)}{unit}",
        "interval": DASH if shown["low"] is None and shown["high"] is None else _interval(shown, rounded, unit),
        "limit": DASH if limit is None else f"{held.sense} {plain(limit, 4)}{unit}",
        "margin": _margin(held, value, limit, rounded, unit),
        "probability": percent(held.probability),
        "where": ", ".join(part for part in (held.where, held.at) if part) or DASH,
        "why": "; ".join(part for part in (held.reason, held.formula, _certainty(held)) if part),
    }


def _interval(shown: dict[str, float | None], u: float, unit: str) -> str:
    return span_of(shown["low"], shown["high"], u) + unit


def _margin(held: Held, value: float | None, limit: float | None, u: float, unit: str) -> str:
    """Distance from the limit, in words."""
    if value is None or limit is None or held.met is None:
        return DASH
    room = value - limit if held.sense == "at least" else limit - value
    return f"{number(abs(room), u)}{unit} {'inside' if held.met else 'outside'}"


def _sentences(book: Book, test: LoadTest) -> Iterator[str]:
    """How the test was taken and how the member behaved."""
    if test.record is None or test.behaviour is None:
        return
    at, unit = display(book.units, "length", test.record.section)
    taken = "from the chord between the gauges at the supports" if test.record.chord else "as read, supports included"
    count = len(test.record.gauges)
    yield (
        f"{count} gauge{'s' if count > 1 else ''} of deflection, taken {taken}; loads are given as the moment at the "
        f"critical section, {plain(float(at), 3)} {unit} from the left end."
    )
    warmed = corrected_gauges(test.record.subject)
    if warmed:
        yield f"Corrected for the temperature of the gauge, by its coefficient in the book: {first_named(warmed)}."
    if test.behaviour.stiffness is not None:
        yield test.behaviour.stiffness.says
    yield from _of_largest(test.record, test.behaviour)
    if test.behaviour.mirrored:
        yield _symmetry(book, test)


def _of_largest(record: Record, behaviour: Behaviour) -> Iterator[str]:
    """How straight the load-deflection line of the gauge that deflects most is, and what was left there."""
    name = largest_gauge(record)
    place = record.gauges.index(name)
    for ratio, said in (
        (behaviour.linearity, "the secant at full load is {} of that of the first load stage"),
        (behaviour.permanence, "{} of the maximum was left in the first cycle"),
    ):
        if ratio is None or not np.isfinite(ratio.value[place]) or not ratio.is_measurable[place]:
            continue
        low, high = (100 * float(end[place]) for end in ratio.interval())
        value, known = 100 * float(ratio.value[place]), bool(np.isfinite([low, high]).all())
        u = 100 * float(ratio.u[place]) if known else 0.01 * abs(value)
        sure = f" (95 % interval {span_of(low, high, u)} %)" if known else ""
        yield f"At {name}, which deflects most, {said.format(f'{number(value, u)} %')}{sure}."


def _symmetry(book: Book, test: LoadTest) -> str:
    """Whether gauges that mirror each other read the same at full load."""
    pairs = test.behaviour.mirrored if test.behaviour else ()
    odd = sorted((pair for pair in pairs if pair.agree is False), key=lambda pair: -abs(pair.difference))
    if not odd:
        known = all(pair.agree for pair in pairs)
        said = "agree within their uncertainty" if known else "have no uncertainty to compare them by"
        return f"Mirrored gauges ({len(pairs)} pair{'s' if len(pairs) > 1 else ''}) {said} at full load."
    named = []
    for pair in odd[:NAMED]:
        difference, unit = display(book.units, "deflection", abs(pair.difference))
        u = float(display(book.units, "deflection", pair.u or 0.0)[0])
        named.append(f"{pair.left} and {pair.right} differ by {number(float(difference), u)} {unit}")
    more = f" and {len(odd) - NAMED} more pairs" if len(odd) > NAMED else ""
    return (
        f"Mirrored gauges do not agree at full load, though the load is symmetric: {'; '.join(named)}{more}. A softer "
        "half, a support that gives, a gauge or the place of the load may be the cause."
    )


def _stiffness_rows(test: LoadTest) -> list[tuple[str, str, str]]:
    """Stage, EI over fitted, and the largest loss of secant stiffness, by stage."""
    stiffness = test.behaviour.stiffness if test.behaviour else None
    if stiffness is None or test.record is None:
        return []
    most = int(np.nan_to_num(np.abs(test.record.read[stiffness.stages[-1]])).argmax())
    shown = [plain(float(one), 3) for one in stiffness.secant[:, most]]
    decimals = max(len(text.partition(".")[2]) for text in shown)
    rows = []
    for place, stage in list(enumerate(stiffness.stages))[-SHOWN:]:
        u = float(stiffness.u[place])
        ratio, secant = float(stiffness.ratio[place]), float(stiffness.secant[place, most])
        told = fixed(secant, decimals) if np.isfinite(secant) else DASH
        said = f"{number(ratio, u)} (u {plain(u, 2)})" if np.isfinite(u) and u > 0 else plain(ratio, 3)
        rows.append((test.record.subject.stages[stage].name, said, told))
    return rows
