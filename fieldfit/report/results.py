"""Result tables: the SI record for machines, and the members and readings in the book's own units for people."""

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import asdict
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array
from fieldfit.fieldbook import Book
from fieldfit.fieldbook.units import DESIGN_UNITS, display, from_si
from fieldfit.fit import Estimate
from fieldfit.judge import Check, Verdict
from fieldfit.report.actions import Action
from fieldfit.report.levels import level_record, levelled_of
from fieldfit.report.load_tests import load_test_record
from fieldfit.report.provenance import VERSION
from fieldfit.report.words import typeset

__all__ = [
    "FORMAT",
    "actions_table",
    "checks_table",
    "estimate_record",
    "in_unit",
    "in_units_of_each",
    "kind_of",
    "members_table",
    "readings_table",
    "result_record",
    "safe_cells",
    "unit_of",
    "without_nan",
]

FORMAT = 1
#: Kind of quantity of each estimate: what it is converted as.
KINDS = {
    "EI": "EI",
    "rotational restraint": "rotational stiffness",
    "bearing stiffness": "bearing stiffness",
    "settlement": "settlement",
    "datum shift": "deflection",
    "datum tilt": "rotation",
    "load": "ratio",
    "temperature curvature": "curvature",
    "camber": "camber",
    "creep factor": "ratio",
}


def kind_of(estimate: Estimate) -> str:
    """Kind of quantity of an estimate; an apparent EI is one of EI."""
    return estimate.kind or KINDS["EI" if estimate.quantity.startswith("apparent EI") else estimate.quantity]


def result_record(book: Book, verdicts: Sequence[Verdict], actions: Sequence[Sequence[Action]]) -> dict[str, Any]:
    """Everything found, SI-based, as plain values for results.json; missing numbers are None."""
    record = {
        "format": FORMAT,
        "fieldfit": VERSION,
        "book": {"name": book.name, "sha256": book.sha256},
        "members": [_member(*of_member) for of_member in zip(verdicts, actions, strict=True)],
        "levelling": level_record(levelled_of(verdicts)),
    }
    return without_nan(record)


def _member(verdict: Verdict, actions: Sequence[Action]) -> dict[str, Any]:
    found = verdict.reconciliation
    noise = found.profile.noise if found.profile else None
    tested = noise.tested if noise else None
    return {
        "member": found.subject.name,
        "verdict": verdict.verdict,
        "explanation": None,
        "estimates": [estimate_record(estimate) for estimate in found.estimates],
        "correlations": dict(found.correlations),
        "fit": {
            "chi_square": tested.chi_square if tested else None,
            "degrees_of_freedom": tested.spare if tested else noise.spare if noise else None,
            "p": noise.p if noise else None,
            "u_source": noise.source if noise else None,
            "explains_readings": noise.explains_readings if noise else None,
        },
        "explanations": None,
        "checks": [_check(check) for check in verdict.checks],
        "actions": [_action(action) for action in actions],
        "load_test": load_test_record(verdict),
        "readings": list(_readings(verdict)),
        "warnings": list(verdict.warnings),
        "cautions": list(verdict.cautions),
    }


def estimate_record(estimate: Estimate) -> dict[str, Any]:
    """One estimate in the design's units."""
    record = asdict(estimate)
    kind = kind_of(estimate)
    unit = DESIGN_UNITS[kind]
    for name in ("value", "u", "low", "high", "recorded"):
        if record[name] is not None:
            record[name] = from_si(kind, unit, record[name])
    del record["number"]
    return record | {"unit": unit}


def _check(check: Check) -> dict[str, Any]:
    record = asdict(check)
    kind = record.pop("kind")
    unit = DESIGN_UNITS[kind]
    for name in ("value", "u", "low", "high", "at_least", "at_most"):
        if record[name] is not None:
            record[name] = from_si(kind, unit, record[name])
    return record | {"unit": unit}


def _action(action: Action) -> dict[str, Any]:
    record = asdict(action)
    unit = DESIGN_UNITS[record.pop("kind")]
    for name in ("recorded", "fitted", "u"):
        if record[name] is not None:
            record[name] = from_si(action.kind, unit, record[name])
    return record | {"unit": unit}


def _readings(verdict: Verdict) -> Iterable[dict[str, Any]]:
    found = verdict.reconciliation
    seen = found.subject.observations
    residual = seen.value - found.fitted
    columns = zip(
        map(found.subject.stage_name, seen.stage),
        seen.gauge,
        seen.at.tolist(),
        seen.quantity,
        seen.count.tolist(),
        *(
            in_units_of_each(DESIGN_UNITS, seen.quantity, values).tolist()
            for values in (found.u, seen.value, found.as_recorded, found.fitted, residual)
        ),
        found.standardised.tolist(),
        found.used_for,
        found.why,
        strict=True,
    )
    for stage, gauge, at, quantity, count, u, measured, as_recorded, fitted, left, *rest in columns:
        standardised, used_for, why = rest
        yield {
            "stage": stage,
            "gauge": gauge,
            "at_m": at,
            "quantity": quantity,
            "unit": DESIGN_UNITS[quantity],
            "count": int(count),
            "u": u,
            "measured": measured,
            "as_recorded": as_recorded,
            "fitted": fitted,
            "residual": left,
            "standardised": standardised,
            "used_for": used_for,
            "why": why,
        }


def without_nan(value: Any) -> Any:
    """The same record with None for every number that is not finite, and plain Python numbers."""
    if isinstance(value, dict):
        return {key: without_nan(part) for key, part in value.items()}
    if isinstance(value, list | tuple):
        return [without_nan(part) for part in value]
    if isinstance(value, np.generic):
        value = value.item()
    return None if isinstance(value, float) and not math.isfinite(value) else value


def members_table(book: Book, verdicts: Sequence[Verdict]) -> pd.DataFrame:
    """One row an estimate, in the book's own units."""
    rows = []
    for verdict in verdicts:
        for estimate in verdict.reconciliation.estimates:
            kind = kind_of(estimate)
            shown = {name: in_unit(book, kind, getattr(estimate, name)) for name in VALUES}
            rows.append(
                {
                    "member": verdict.reconciliation.subject.name,
                    "verdict": verdict.verdict,
                    "quantity": estimate.quantity,
                    "where": estimate.where,
                    "stage": estimate.stage,
                    "determined": estimate.determined,
                    "unit": display(book.units, kind, 1.0)[1],
                    **shown,
                    **{name.replace("_", " "): getattr(estimate, name) for name in SHARES},
                }
            )
    return pd.DataFrame(rows)


VALUES = ("recorded", "value", "u", "low", "high")
SHARES = ("ratio", "ratio_low", "ratio_high", "fixity", "fixity_low", "fixity_high")


def in_unit(book: Book, kind: str, value: float | None) -> float | None:
    """An SI value in the book's own unit of its kind."""
    return None if value is None else float(display(book.units, kind, value)[0])


def unit_of(book: Book, kind: str) -> str:
    """The book's own unit of a kind of quantity, as it is printed."""
    return typeset(display(book.units, kind, 1.0)[1])


def in_units_of_each(units: Mapping[str, str], kinds: NDArray[np.object_], values: Array) -> Array:
    """SI values (n,), each in the unit that a book gives its own kind (n,)."""
    out = np.empty(len(values))
    for kind in set(kinds):
        here = kinds == kind
        out[here] = display(units, kind, values[here])[0]
    return out


def actions_table(book: Book, verdicts: Sequence[Verdict], actions: Sequence[Sequence[Action]]) -> pd.DataFrame:
    """Reactions and moments as recorded and as fitted, one row each, in the book's own units."""
    rows = [
        {
            "member": verdict.reconciliation.subject.name,
            "stage": action.stage,
            "action": action.action,
            "where": action.where,
            "unit": display(book.units, action.kind, 1.0)[1],
            **{name: in_unit(book, action.kind, getattr(action, name)) for name in ("recorded", "fitted", "u")},
        }
        for verdict, several in zip(verdicts, actions, strict=True)
        for action in several
    ]
    return pd.DataFrame(rows, columns=ACTION_COLUMNS)


ACTION_COLUMNS = ["member", "stage", "action", "where", "unit", "recorded", "fitted", "u"]


def checks_table(book: Book, verdicts: Sequence[Verdict]) -> pd.DataFrame:
    """One row a check, in the book's own units."""
    rows = []
    for verdict in verdicts:
        for check in verdict.checks:
            shown = {name.replace("_", " "): in_unit(book, check.kind, getattr(check, name)) for name in LIMITED}
            rows.append(
                {
                    "member": verdict.reconciliation.subject.name,
                    "check": check.check,
                    "where": check.where,
                    "stage": check.stage,
                    "verdict": check.verdict,
                    "unit": "" if check.kind == "ratio" else display(book.units, check.kind, 1.0)[1],
                    **shown,
                    "probability within": check.probability_within,
                    "source": check.source,
                    "edition": check.edition,
                    "reason": check.reason,
                }
            )
    return pd.DataFrame(rows, columns=CHECK_COLUMNS)


LIMITED = ("value", "u", "low", "high", "at_least", "at_most")
CHECK_COLUMNS = ["member", "check", "where", "stage", "verdict", "unit", "value", "u", "low", "high", "at least"]
CHECK_COLUMNS += ["at most", "probability within", "source", "edition", "reason"]


def readings_table(book: Book, verdicts: Sequence[Verdict]) -> pd.DataFrame:
    """The ledger: every reading of the book with its fitted value, in the book's own units."""
    parts = []
    for verdict in verdicts:
        found = verdict.reconciliation
        seen = found.subject.observations
        columns = {"u": found.u, "measured": seen.value, "as recorded": found.as_recorded, "fitted": found.fitted}
        units = {kind: display(book.units, kind, 1.0)[1] for kind in set(seen.quantity)}
        table = pd.DataFrame(
            {
                "member": found.subject.name,
                "stage": [found.subject.stage_name(number) for number in seen.stage],
                "gauge": seen.gauge,
                f"at [{book.units['length']}]": display(book.units, "length", seen.at)[0],
                "quantity": seen.quantity,
                "unit": [units[kind] for kind in seen.quantity],
                "readings": seen.count.astype(int),
            }
        )
        for name, values in columns.items():
            table[name] = in_units_of_each(book.units, seen.quantity, values)
        table["residual"] = table["measured"] - table["fitted"]
        parts.append(table.assign(standardised=found.standardised, **{"used for": found.used_for}, why=found.why))
    return pd.concat(parts, ignore_index=True)


def safe_cells(table: pd.DataFrame) -> pd.DataFrame:
    """The same table with an apostrophe before any text that a spreadsheet would take for a formula."""
    return table.map(lambda cell: f"'{cell}" if isinstance(cell, str) and cell[:1] in "=+-@\t\r" and cell else cell)
