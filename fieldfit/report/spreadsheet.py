"""The result tables as one workbook, formatted to be printed as an appendix."""

import math
from collections.abc import Iterable, Sequence
from datetime import datetime
from typing import Any

import pandas as pd

from fieldfit.fieldbook import Book
from fieldfit.judge import CAUTIONS, Verdict
from fieldfit.report.actions import Action
from fieldfit.report.levels import levelled_of, sights_table
from fieldfit.report.load_tests import load_tests_table
from fieldfit.report.provenance import provenance
from fieldfit.report.results import actions_table, checks_table, members_table, readings_table, safe_cells
from fieldfit.report.say import answer, headline
from fieldfit.report.words import decimals_of
from fieldfit.report.workbook import Cell, Sheet, workbook

__all__ = ["spreadsheet"]

RULE = ["rule", "edition", "clause", "source"]
ROUNDED = ("u", "value", "low", "high", "measured", "as recorded", "fitted", "residual")  # by their row's u
SHOWN = dict.fromkeys(("ratio", "ratio low", "ratio high"), "0.0000") | {"standardised": "0.0"}
SHOWN |= {"probability within": '[>0.999]"> 99.9 %";[<0.001]"< 0.1 %";0.0%'}


def spreadsheet(book: Book, verdicts: Sequence[Verdict], actions: Sequence[Sequence[Action]], time: datetime) -> bytes:
    """The workbook: answers, estimates, checks, the ledger, assumptions, the job, provenance."""
    tables = {
        "Answers": _answers(verdicts),
        "Estimates": members_table(book, verdicts),
        "Checks": checks_table(book, verdicts),
        **_load_tests(book, verdicts),
        "Reactions and moments": actions_table(book, verdicts, actions),
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


def _load_tests(book: Book, verdicts: Sequence[Verdict]) -> dict[str, pd.DataFrame]:
    """Every gate at every gauge, and apart what is the same for all gates of a rule; nothing without a load test."""
    table = load_tests_table(book, verdicts)
    if table.empty:
        return {}
    return {"Load tests": table.drop(columns=RULE[1:]), "Rules": table[RULE].drop_duplicates(ignore_index=True)}


def _two_columns(rows: Iterable[tuple[str, str]]) -> pd.DataFrame:
    return pd.DataFrame(rows, columns=["item", "value"])


def _sheet(title: str, table: pd.DataFrame, book: Book) -> Sheet:
    """A table as a sheet without its empty columns, numbers rounded to the u of their row where they have one."""
    table = table.drop(columns=[name for name in table if len(table) and table[name].isin(["", None, math.nan]).all()])
    names = [str(name) for name in table.columns]
    columns = [table[name].astype(object).where(table[name].notna(), None).tolist() for name in table.columns]
    blank = [None] * len(table)
    u = columns[names.index("u")] if "u" in names else blank
    made = [
        _places(column)
        if name.startswith("at [")
        else [_cell(name, value, one if name in ROUNDED else None) for value, one in zip(column, u, strict=True)]
        for name, column in zip(names, columns, strict=True)
    ]
    return Sheet(
        title=title,
        foot=f"{book.name}: {title}",
        headings=names,
        rows=list(zip(*made, strict=True)),
    )


def _places(column: Sequence[float]) -> list[Cell]:
    """Places along a member, all with the decimals that the finest of them has."""
    shown = _format(decimals_of(column))
    return [Cell(one, shown) for one in column]


def _cell(name: str, value: Any, u: float | None) -> Any:
    """A number with two digits of its uncertainty, or as its column is shown; what is no number stays as it is."""
    if not isinstance(value, float):
        return value
    if not math.isfinite(value):
        return None
    decimals = max(0, 1 - math.floor(math.log10(u))) if u else decimals_of([value])
    return Cell(value, SHOWN.get(name, _format(decimals)))


def _format(decimals: int) -> str:
    return f"0.{'0' * min(decimals, 12)}" if decimals else "0"
