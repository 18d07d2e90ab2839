"""What stages to come should read, as rows for the page and as a table with units in its headings."""

import math
from collections.abc import Iterator, Sequence
from typing import Any

import numpy as np
import pandas as pd

from fieldfit.fieldbook import Book
from fieldfit.fieldbook.declare import SENSES
from fieldfit.fieldbook.units import display
from fieldfit.fit import Expected
from fieldfit.report.words import DASH, decimals_of, fixed, number, plain

__all__ = ["expected_section", "expected_table"]

HALF_WIDTH = 3.92  # standard uncertainties from end to end of a 95 % band
LEAST = 1e-12  # m, rad, 1/m or strain: less than any gauge reads is rounding
NUMBERS = {"stop_low": "stop below", "low": "from", "expected": "expected", "high": "to", "stop_high": "stop above"}


def expected_section(book: Book, one: Expected) -> dict[str, Any]:
    """What the page says of one member: its notes, and a table a stage."""
    stages = dict.fromkeys(one.subject.observations.stage.tolist())
    return {
        "is_change": one.is_change,
        "left_out": one.left_out,
        "length_unit": book.units["length"],
        "stages": [{"name": one.subject.stages[stage].name, "groups": _groups(book, one, stage)} for stage in stages],
    }


def _groups(book: Book, one: Expected, stage: int) -> dict[str, list[dict[str, str]]]:
    """The rows of a stage under what their gauges count, with the unit."""
    groups: dict[str, list[dict[str, str]]] = {}
    for counts, row in _rows(book, one, stage):
        groups.setdefault(counts, []).append(row)
    return groups


def _rows(book: Book, one: Expected, stage: int) -> Iterator[tuple[str, dict[str, str]]]:
    seen = one.subject.observations
    at = (seen.at * display(book.units, "length", 1.0)[0]).tolist()
    decimals = decimals_of(at)
    for n in np.flatnonzero(seen.stage == stage).tolist():
        kind = _kind(one, n)
        shown, u = _values(book, one, n)
        texts = {
            name: number(value, u).replace("-", "−") if math.isfinite(u) else DASH for name, value in shown.items()
        }
        if not math.isfinite(u):
            texts["expected"] = plain(shown["expected"], 3).replace("-", "−")
        sense = SENSES[seen.quantity[n]][0 if seen.sign[n] == seen.usual[n] else 1]
        row = {
            **texts,
            "gauge": str(seen.gauge[n]),
            "at": fixed(at[n], decimals),
        }
        yield f"{seen.quantity[n]}, {sense} [{display(book.units, kind, 0.0)[1]}]", row


def _values(book: Book, one: Expected, n: int) -> tuple[dict[str, float], float]:
    """What a reading should be with its bounds, in the book's unit, and the standard uncertainty; rounding is zero."""
    values = {name: float(getattr(one, name)[n]) for name in NUMBERS}
    kept = {name: 0.0 if abs(value) < LEAST else value for name, value in values.items()}
    shown = {name: float(display(book.units, _kind(one, n), value)[0]) for name, value in kept.items()}
    return shown, (shown["high"] - shown["low"]) / HALF_WIDTH


def _kind(one: Expected, n: int) -> str:
    """Kind of quantity of a reading; a change of level is told like a deflection, a level like a height."""
    quantity = str(one.subject.observations.quantity[n])
    return "deflection" if quantity == "level" and one.is_change else quantity


def expected_table(book: Book, several: Sequence[Expected]) -> pd.DataFrame:
    """One row a gauge and stage to come, in the book's own units; columns for each quantity that is read."""
    rows = [_record(book, one, n) for one in several for n in range(len(one.expected))]
    return pd.DataFrame(rows)


def _record(book: Book, one: Expected, n: int) -> dict[str, Any]:
    seen, kind = one.subject.observations, _kind(one, n)
    unit = display(book.units, kind, 0.0)[1]
    what = f"{seen.quantity[n]} change" if one.is_change else str(seen.quantity[n])
    shown, _ = _values(book, one, n)
    numbers = {f"{what} {word} [{unit}]": shown[name] for name, word in NUMBERS.items()}
    return {
        "member": one.subject.name,
        "stage": one.subject.stages[seen.stage[n]].name,
        "gauge": str(seen.gauge[n]),
        f"at [{book.units['length']}]": float(display(book.units, "length", seen.at[n])[0]),
        **numbers,
    }
