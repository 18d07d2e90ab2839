"""Write the report: every result file of one reconciled book."""

import json
from collections.abc import Sequence
from datetime import datetime
from pathlib import Path

from fieldfit.fieldbook import Book
from fieldfit.judge import Verdict
from fieldfit.report.actions import every_action
from fieldfit.report.expected import expected_table
from fieldfit.report.folder import replace_folder
from fieldfit.report.illustrate import Illustration, illustrations
from fieldfit.report.levels import levelled_of, sights_table
from fieldfit.report.page import page
from fieldfit.report.results import members_table, readings_table, result_record, safe_cells
from fieldfit.report.spreadsheet import spreadsheet

__all__ = ["write_report"]


def write_report(book: Book, verdicts: Sequence[Verdict], out: Path, *, png: bool = False) -> Path:
    """Write every result file to folder ``out``, figures as PNG too if asked for; return the report's path.

    Raises OutputError where ``out`` holds something else.
    """
    time = datetime.now().astimezone()
    actions = every_action(verdicts)
    record = result_record(book, verdicts, actions)
    drawn = [illustrations(book, verdict.reconciliation, png=png) for verdict in verdicts]
    files: dict[str, str | bytes] = {
        "results.json": json.dumps(record, indent=1, ensure_ascii=False, allow_nan=False) + "\n",
        "members.csv": safe_cells(members_table(book, verdicts)).to_csv(index=False, lineterminator="\n"),
        "readings.csv": safe_cells(readings_table(book, verdicts)).to_csv(index=False, lineterminator="\n"),
        "results.xlsx": spreadsheet(book, verdicts, actions, time),
        "report.html": page(book, verdicts, actions, drawn, time),
    }
    ahead = [found.ahead for found in (one.reconciliation for one in verdicts) if found.ahead is not None]
    if ahead:
        files["next_stages.csv"] = safe_cells(expected_table(book, ahead)).to_csv(
            index=False, lineterminator="\n", float_format="%.7g"
        )
    levels = levelled_of(verdicts)
    if levels is not None:
        files["levels.csv"] = safe_cells(sights_table(book, levels)).to_csv(index=False, lineterminator="\n")
    for number, several in enumerate(drawn, start=1):
        files |= _figure_files(number, several)
    replace_folder(out, files)
    return out / "report.html"


def _figure_files(number: int, several: Sequence[Illustration]) -> dict[str, str | bytes]:
    """Figures of a member under its number: no text of a book becomes a file name."""
    files: dict[str, str | bytes] = {}
    for one in several:
        stem = f"figures/member-{number:03d}-{one.key}"
        files[f"{stem}.svg"] = one.svg
        if one.png is not None:
            files[f"{stem}.png"] = one.png
    return files
