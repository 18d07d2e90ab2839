"""Write the report: every result file of one reconciled book."""

import json
from collections.abc import Sequence
from datetime import datetime
from pathlib import Path

from fieldfit.fieldbook import Book
from fieldfit.judge import Verdict
from fieldfit.report.folder import replace_folder
from fieldfit.report.page import page
from fieldfit.report.results import members_table, readings_table, result_record, safe_cells

__all__ = ["write_report"]


def write_report(book: Book, verdicts: Sequence[Verdict], out: Path) -> Path:
    """Write results.json, members.csv, readings.csv and report.html to folder ``out``; return the report's path.

    Raises OutputError where ``out`` holds something else.
    """
    record = result_record(book, verdicts)
    files = {
        "results.json": json.dumps(record, indent=1, ensure_ascii=False, allow_nan=False) + "\n",
        "members.csv": safe_cells(members_table(book, verdicts)).to_csv(index=False, lineterminator="\n"),
        "readings.csv": safe_cells(readings_table(book, verdicts)).to_csv(index=False, lineterminator="\n"),
        "report.html": page(book, verdicts, datetime.now().astimezone()),
    }
    replace_folder(out, files)
    return out / "report.html"
