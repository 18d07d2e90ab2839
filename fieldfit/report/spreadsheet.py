"""The result tables as one workbook, formatted to be printed as an appendix."""

import io
import math
from collections.abc import Iterable, Sequence
from datetime import datetime
from typing import Any

import pandas as pd
from openpyxl import Workbook
from openpyxl.cell.cell import ILLEGAL_CHARACTERS_RE
from openpyxl.styles import Alignment, Border, Font, PatternFill, Side
from openpyxl.utils import get_column_letter

from fieldfit.fieldbook import Book
from fieldfit.judge import CAUTIONS, Verdict
from fieldfit.report.provenance import provenance
from fieldfit.report.results import actions_table, checks_table, members_table, readings_table, safe_cells
from fieldfit.report.say import answer, headline

__all__ = ["spreadsheet"]

HEADING = {"font": Font(bold=True), "fill": PatternFill("solid", fgColor="F0F1F3")}
WRAPPED = Alignment(wrap_text=True, vertical="top")
HEADING |= {"border": Border(bottom=Side(style="thin")), "alignment": WRAPPED}
WIDEST = 44  # characters of a column; longer texts wrap
ROUNDED = ("value", "low", "high", "recorded", "measured", "as recorded", "fitted", "residual")  # by their row's u
DIGITS = {"u": 2, "ratio": 4, "ratio low": 4, "ratio high": 4, "fixity": 2, "fixity low": 2, "fixity high": 2}
DIGITS |= {"standardised": 2, "probability within": 3, "at least": 4, "at most": 4}


def spreadsheet(book: Book, verdicts: Sequence[Verdict], time: datetime) -> bytes:
    """The workbook: answers, estimates, checks, the ledger, assumptions, the job, provenance."""
    workbook = Workbook()
    workbook.remove(workbook.worksheets[0])
    workbook.properties.creator = "fieldfit"
    workbook.properties.created = workbook.properties.modified = time.replace(tzinfo=None)
    tables = {
        "Answers": _answers(verdicts),
        "Estimates": members_table(book, verdicts),
        "Checks": checks_table(book, verdicts),
        "Reactions and moments": actions_table(book, verdicts),
        "Readings": readings_table(book, verdicts),
        "Assumptions": _assumptions(book, verdicts),
        "Job": _two_columns(zip(book.tables["job"]["item"], book.tables["job"]["value"], strict=True)),
        "Made from": _two_columns([*provenance(book), ("written", time.strftime("%Y-%m-%d %H:%M %z"))]),
    }
    for title, table in tables.items():
        _fill(workbook.create_sheet(title), safe_cells(table), f"{book.name}: {title}")
    out = io.BytesIO()
    workbook.save(out)
    return out.getvalue()


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


def _fill(sheet: Any, table: pd.DataFrame, title: str) -> None:
    """Headings that stay in sight and repeat on every printed page, then the rows."""
    names = [str(name) for name in table.columns]
    sheet.append([_cell(name) for name in names])
    records = table.astype(object).where(table.notna(), None).to_numpy().tolist()
    for record in records:
        sheet.append([_cell(value) for value in record])
    for place, name in enumerate(names, start=1):
        _column(sheet, place, name, names, records)
    sheet.freeze_panes = "B2"
    sheet.auto_filter.ref = sheet.dimensions
    sheet.print_title_rows = "1:1"
    sheet.page_setup.orientation = "landscape"
    sheet.page_setup.fitToWidth, sheet.page_setup.fitToHeight = 1, 0
    sheet.sheet_properties.pageSetUpPr.fitToPage = True
    sheet.oddFooter.left.text, sheet.oddFooter.right.text = ILLEGAL_CHARACTERS_RE.sub("", title), "&P of &N"


def _column(sheet: Any, place: int, name: str, names: list[str], records: list[list[Any]]) -> None:
    """Width, heading and number formats of one column."""
    heading = sheet.cell(row=1, column=place)
    for attribute, value in HEADING.items():
        setattr(heading, attribute, value)
    u = names.index("u") if name in ROUNDED and "u" in names else None
    longest = len(name) / 2
    for row, record in enumerate(records, start=2):
        value, cell = record[place - 1], sheet.cell(row=row, column=place)
        if isinstance(value, str):
            longest = max(longest, len(value))
            if len(value) > WIDEST:
                cell.alignment = WRAPPED
        elif isinstance(value, float):
            cell.number_format = _shown(value, record[u] if u is not None else None, DIGITS.get(name, 5))
            longest = max(longest, 10)
    sheet.column_dimensions[get_column_letter(place)].width = min(longest, WIDEST) + 2


def _shown(value: float, u: float | None, digits: int) -> str:
    """Number format with two digits of the uncertainty, or so many of the value; the cell keeps every digit."""
    size, kept = (u, 2) if u else (abs(value), digits)
    decimals = max(0, kept - 1 - math.floor(math.log10(size))) if size else 0
    return "0" if not decimals else f"0.{'0' * min(decimals, 12)}"


def _cell(value: Any) -> Any:
    return ILLEGAL_CHARACTERS_RE.sub("\N{REPLACEMENT CHARACTER}", value) if isinstance(value, str) else value
