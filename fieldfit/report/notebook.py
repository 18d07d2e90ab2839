"""What a notebook shows: the answer and the estimates as the report rounds them; all texts escaped."""

from collections.abc import Sequence
from html import escape

import pandas as pd

from fieldfit.fieldbook import Book
from fieldfit.judge import Verdict
from fieldfit.report.rows import estimate_row
from fieldfit.report.say import headline, unexplained
from fieldfit.report.words import MARKS

__all__ = ["findings_html"]

COLUMNS = {"recorded": "recorded", "value": "estimate", "u": "standard uncertainty", "interval": "95 % interval"}
COLUMNS |= {"over": "over recorded, or fixity", "determined": "determined"}


def findings_html(book: Book, verdicts: Sequence[Verdict]) -> str:
    """The answer in a sentence, and a row an estimate."""
    rows = [row for verdict in verdicts for row in _rows(book, verdict)]
    return f"<p>{escape(headline(verdicts))}</p>{pd.DataFrame(rows).to_html(index=False, border=0, justify='left')}"


def _rows(book: Book, verdict: Verdict) -> list[dict[str, str]]:
    found, said = verdict.reconciliation, f"{MARKS[verdict.verdict]} {verdict.verdict}"
    shown = [estimate_row(book, estimate, lost=unexplained(found)) for estimate in found.estimates]
    return [
        {
            "member": found.subject.name,
            "verdict": said,
            "quantity": row["name"] + (f" [{row['unit']}]" if row["unit"] else ""),
            **{heading: row[name] for name, heading in COLUMNS.items()},
        }
        for row in shown
    ]
