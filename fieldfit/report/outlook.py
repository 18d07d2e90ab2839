"""What a planned test will determine, as sentences, rows, a table and a record."""

from collections.abc import Iterator, Sequence
from typing import Any

import pandas as pd

from fieldfit.fieldbook import Book
from fieldfit.fieldbook.units import display
from fieldfit.fit import Candidate, Estimate, Help, Outlook
from fieldfit.report.results import estimate_record, in_unit, kind_of, unit_of
from fieldfit.report.rows import estimate_row, placed
from fieldfit.report.say import ratio_span
from fieldfit.report.words import DASH, MINUS, NARROW, number, plain

__all__ = ["outlook_record", "outlook_section", "outlook_sentences", "outlook_table"]

GAUGES = {
    "deflection": "deflection gauge",
    "level": "levelled point",
    "rotation": "tiltmeter",
    "curvature": "pair of strain gauges, top and bottom,",
}
UNLIKE = 1.25  # how many times longer one side of an interval is, from which on both are told
LINEAR = (
    "Intervals are those of readings without noise, at one temperature: a real test scatters about them, and what the "
    "warming of gauges costs is extra."
)


def outlook_sentences(book: Book, one: Outlook) -> list[str]:
    """What the test will say of each unknown, in sentences, and what to measure next."""
    if one.silent:
        return [one.silent]
    first = one.foreseen[0]
    said = [_promise(book, [found.estimates[n] for found in one.foreseen]) for n in range(len(first.estimates))]
    return [*said, *(_advice(book, each) for each in one.helps)]


def _promise(book: Book, cases: Sequence[Estimate]) -> str:
    """How well an estimate will be known over all design points."""
    name = _name(cases[0])
    words = [*dict.fromkeys(case.determined for case in cases)]
    known = [(half, text) for case in cases if case.determined == "yes" for half, text in [_half_width(book, case)]]
    better = " or better" if len({text for _, text in known}) > 1 else ""
    width = f"to {max(known)[1]}{better} (95 %)" if known else ""
    if all("expected" in (case.low_ends, case.high_ends) for case in cases):
        return f"{name} will be known no better than the book expects it beforehand."
    if words == ["yes"]:
        return f"{name} will be determined {width}."
    if words == ["no"]:
        return f"{name} will not be determined by these gauges in these stages."
    told = ", or ".join(f"{WORDS[word]}{f' {width}' if word == 'yes' else ''}" for word in words)
    return f"{name} will be {told}{', depending on what the supports really are' if len(words) > 1 else ''}."


def _name(case: Estimate) -> str:
    name = placed(case.quantity, case.where, case.stage)
    return name[:1].upper() + name[1:]


WORDS = {
    "yes": "determined",
    "between": "held between limits only",
    "at least": "bounded from below only",
    "at most": "bounded from above only",
    "no": "not determined",
}


def _half_width(book: Book, case: Estimate) -> tuple[float, str]:
    """Half of a 95 % interval and how it reads: of EI in per cent of the record, else in the book's unit.

    An EI whose sides differ reads with both. NaN and a dash where the interval is open.
    """
    kind = kind_of(case)
    if kind == "EI" and case.ratio_low is not None and case.ratio_high is not None:
        half = (case.ratio_high - case.ratio_low) / 2
        return half, _per_cent(case.ratio, case.ratio_low, case.ratio_high)
    if case.determined not in ("yes", "between"):
        return float("nan"), DASH
    if case.fixity_low is not None and case.fixity_high is not None:
        half = (case.fixity_high - case.fixity_low) / 2
        return half, f"± {number(half, half)} of fixity"
    low, high = in_unit(book, kind, case.low), in_unit(book, kind, case.high)
    if low is None or high is None:
        return float("nan"), DASH
    half = (high - low) / 2
    return half, f"± {number(half, half)} {'' if kind == 'ratio' else unit_of(book, kind)}".rstrip()


def _per_cent(ratio: float | None, low: float, high: float) -> str:
    """An interval of EI over the recorded (its ends and its value) in per cent of the record about its value."""
    half = (high - low) / 2
    down, up = (half, half) if ratio is None else (ratio - low, high - ratio)
    if max(down, up) < UNLIKE * min(down, up):
        return f"± {plain(100.0 * half, 2)}{NARROW}%"
    return f"{MINUS}{plain(100.0 * down, 2)}/+{plain(100.0 * up, 2)}{NARROW}%"


def _advice(book: Book, each: Help) -> str:
    name = placed(each.before.quantity, each.before.where, each.before.stage)
    under = "" if each.point == "as the book has it" else f", with {each.point}"
    if each.gauge is None or each.after is None:
        said = f"None of {each.tried} further gauges tried would take a twentieth off the uncertainty of {name}{under}."
    else:
        said = (
            f"What to measure next: of {each.tried} further gauges tried, {_described(book, each.gauge)} helps {name} "
            f"most{under}: {_outcome(book, each.after)} instead of {_outcome(book, each.before)}."
        )
    return said + (f" {_limit(each.load)}" if each.load else "")


def _limit(load: str) -> str:
    which = "the member's share of the load" if load == "load all" else load
    return f"Most of what is left comes from the uncertainty of {which}: know it better before adding gauges."


def _described(book: Book, gauge: Candidate) -> str:
    at = f"{plain(float(display(book.units, 'length', gauge.at)[0]))} {book.units['length']}"
    u = f"{plain(in_unit(book, gauge.quantity, gauge.u), 2)} {unit_of(book, gauge.quantity)}"
    known = ", a usual figure without a source" if gauge.is_usual else ", as the book's own"
    return f"a {GAUGES[gauge.quantity]} at {at} (u {u}{known})"


def _outcome(book: Book, case: Estimate) -> str:
    """An estimate to come in a few words."""
    if case.determined == "no":
        return WORDS["no"]
    if case.determined == "yes":
        return _half_width(book, case)[1]
    word = f"{WORDS[case.determined]}, "
    if kind_of(case) == "EI":
        return f"{word}{ratio_span(case)} of the record"
    row = estimate_row(book, case, lost=False)
    span = row["over"] or f"{row['interval']} {row['unit']}".rstrip()
    return word + span


def outlook_section(book: Book, one: Outlook) -> dict[str, Any]:
    """What the page says of one member: its sentences, and a table a design point."""
    points = [
        {
            "name": found.point,
            "rows": [
                {**estimate_row(book, case, lost=False), "half": _half_width(book, case)[1].removeprefix("± ")}
                for case in found.estimates
            ],
        }
        for found in one.foreseen
    ]
    return {"sentences": outlook_sentences(book, one), "points": points, "note": LINEAR if points else ""}


COLUMNS = ["member", "point", "quantity", "where", "stage", "determined", "unit", "low", "high", "half width"]
COLUMNS += ["ratio low", "ratio high", "fixity low", "fixity high"]


def outlook_table(book: Book, several: Sequence[Outlook]) -> pd.DataFrame:
    """One row an estimate and design point, in the book's own units."""
    rows = [_cells(book, one, point, case) for one in several for point, case in _cases(one)]
    return pd.DataFrame(rows, columns=COLUMNS)


def _cases(one: Outlook) -> Iterator[tuple[str, Estimate]]:
    return ((found.point, case) for found in one.foreseen for case in found.estimates)


def _cells(book: Book, one: Outlook, point: str, case: Estimate) -> dict[str, Any]:
    kind = kind_of(case)
    low, high = in_unit(book, kind, case.low), in_unit(book, kind, case.high)
    return {
        "member": one.subject.name,
        "point": point,
        "quantity": case.quantity,
        "where": case.where,
        "stage": case.stage,
        "determined": case.determined,
        "unit": "" if kind == "ratio" else display(book.units, kind, 1.0)[1],
        "low": low,
        "high": high,
        "half width": None if low is None or high is None else (high - low) / 2,
        "ratio low": case.ratio_low,
        "ratio high": case.ratio_high,
        "fixity low": case.fixity_low,
        "fixity high": case.fixity_high,
    }


def outlook_record(book: Book, one: Outlook) -> dict[str, Any]:
    """The same for results.json, SI-based; the sentences in the book's units."""
    return {
        "member": one.subject.name,
        "foreseen": [
            {"point": found.point, "estimates": [estimate_record(case) for case in found.estimates]}
            for found in one.foreseen
        ],
        "says": outlook_sentences(book, one),
    }
