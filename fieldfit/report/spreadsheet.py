"""The result tables as one workbook, formatted to be printed as an appendix."""

import math
from collections.abc import Iterable, Sequence
from datetime import datetime
from typing import Any

import pandas as pd

from fieldfit.fieldbook import Book
from fieldfit.judge import CAUTIONS, Verdict
from fieldfit.report.levels import levelled_of, sights_table
from fieldfit.report.load_tests import load_tests_table
from fieldfit.report.provenance import provenance
from fieldfit.report.results import actions_table, checks_table, members_table, readings_table, safe_cells
from fieldfit.report.say import answer, headline
from fieldfit.report.workbook import Cell, Sheet, workbook

__all__ = ["spreadsheet"]

WIDEST = 44  # characters of a column; longer texts wrap
ROUNDED = ("value", "low", "high", "recorded", "measured", "as recorded", "fitted", "residual")  # by their row's u
DIGITS = {"u": 2, "ratio": 4, "ratio low": 4, "ratio high": 4, "fixity": 2, "fixity low": 2, "fixity high": 2}
DIGITS |= {"standardised": 2, "probability within": 3, "at least": 4, "at most": 4}


def spreadsheet(book: Book, verdicts: Sequence[Verdict], time: datetime) -> bytes:
    """The workbook: answers, estimates, checks, the ledger, assumptions, the job, provenance."""
    tables = {
        "Answers": _answers(verdicts),
        "Estimates": members_table(book, verdicts),
        "Checks": checks_table(book, verdicts),
        **({"Load tests": load_tests_table(book, verdicts)} if any(one.load_test for one in verdicts) else {}),
        "Reactions and moments": actions_table(book, verdicts),
        "Readings": readings_table(book, verdicts),
        "Assumptions": _assumptions(book, verdicts),
        "Job": _two_columns(zip(book.tables["job"]["item"], book.tables["job"]["value"], strict=True)),
        "Made from": _two_columns([*provenance(book), ("written", time.strftime("%Y-%m-%d %H:%M %z"))]),
    }
    levels = levelled_of(verdicts)
    if levels is not None:
        tables["Levels"] = sights_table(book, levels)
    sheets = [_sheet(title, safe_cells(table), book) for title, table in tables.items()]
    return workbook(sheets, time)


def _answers(verdicts: Sequence[Verdict]) -> pd.DataFrame:
    rows = [("all", "", headline(verdicts)), *(("caution", "", caution) for caution in CAUTIONS)]
    rows += [(verdict.reconciliation.subject.name, verdict.verdict, answer(verdict)) for verdict in verdicts]
    return pd.DataFrame(rows, columns=["member", "verdict", "answer"])


def _assumptions(book: Book, verdicts: Sequence[Verdict]) -> pd.DataFrame:
    rows = [("book", note) for note in book.notes]
    rows += [(verdict.reconciliation.subject.name, text) for verdict in verdicts for text in verdict.warnings]
    return pd.DataFrame(rows, columns=["member", "assumed or noted"])


def _two_columns(rows: Iterable[tuple[str, str]]) -> pd.DataFrame:
    return pd.DataFrame(rows, columns=["item", "value"])


def _sheet(title: str, table: pd.DataFrame, book: Book) -> Sheet:
    """A table as a sheet, its numbers rounded to the u of their row where they have one."""
    names = [str(name) for name in table.columns]
    columns = [table[name].astype(object).where(table[name].notna(), None).tolist() for name in table.columns]
    blank = [None] * len(table)
    u = columns[names.index("u")] if "u" in names else blank
    made = [
        [
            _cell(value, one if name in ROUNDED else None, DIGITS.get(name, 5))
            for value, one in zip(column, u, strict=True)
        ]
        for name, column in zip(names, columns, strict=True)
    ]
    return Sheet(
        title=title,
        foot=f"{book.name}: {title}",
        headings=names,
        rows=list(zip(*made, strict=True)),
        widths=[_width(name, column) for name, column in zip(names, made, strict=True)],
        longest=WIDEST,
    )


def _width(name: str, column: Sequence[Any]) -> float:
    """Characters that a column needs."""
    texts = max((len(value) for value in column if isinstance(value, str)), default=0)
    numbers = 10 if any(isinstance(value, Cell) for value in column) else 0
    return min(max(len(name) / 2, texts, numbers), WIDEST) + 2


def _cell(value: Any, u: float | None, digits: int) -> Any:
    """A number with two digits of its uncertainty, or so many of its own; what is no number stays as it is."""
    if not isinstance(value, float):
        return value
    if not math.isfinite(value):
        return None
    size, kept = (u, 2) if u else (abs(value), digits)
    decimals = max(0, kept - 1 - math.floor(math.log10(size))) if size else 0
    return Cell(float(value), f"0.{'0' * min(decimals, 12)}" if decimals else "0")
