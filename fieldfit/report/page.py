"""The report page: plain sentences first, then the member's numbers, in the book's own units.

One self-contained file that asks for nothing: its style, figures and the little script that sorts and hides rows are
in it, and its own policy forbids everything else.
"""

import base64
import hashlib
from collections.abc import Sequence
from datetime import datetime
from typing import Any

from fieldfit.fieldbook import Book
from fieldfit.fieldbook.units import display
from fieldfit.judge import CAUTIONS, VERDICTS, Verdict
from fieldfit.report.actions import Action
from fieldfit.report.expected import expected_section
from fieldfit.report.illustrate import Illustration
from fieldfit.report.levels import level_section
from fieldfit.report.load_tests import load_test_rows
from fieldfit.report.provenance import provenance
from fieldfit.report.rows import action_row, check_row, estimate_row, reading_groups
from fieldfit.report.say import (
    answer,
    common_warnings,
    correlated,
    findings_by_verdict,
    fit_words,
    headline,
    ledger_words,
    settled,
    stiffness_of,
    unexplained,
)
from fieldfit.report.templates import asset, template
from fieldfit.report.words import MARKS

__all__ = ["page"]

TESTED = "load-test"  # keys of figures that stand with the rules of load tests
SIGNATURES = ("Readings taken by", "Reconciled by", "Reviewed by (licensed engineer)")


def page(
    book: Book,
    verdicts: Sequence[Verdict],
    actions: Sequence[Sequence[Action]],
    drawn: Sequence[Sequence[Illustration]],
    time: datetime,
) -> str:
    """The report as one self-contained HTML text. Every text of the book is escaped."""
    script = asset("page.js")
    common = common_warnings(verdicts)
    return template("page.html").render(
        book=book,
        style=asset("page.css"),
        sheet_style=asset("sheet.css"),
        script=script,
        script_hash=base64.b64encode(hashlib.sha256(script.encode()).digest()).decode(),
        headline=headline(verdicts),
        left_out=_left_out(book, verdicts),
        findings=list(findings_by_verdict(book, verdicts)),
        common=common,
        levels=level_section(book, verdicts),
        cautions=CAUTIONS,
        marks=MARKS,
        verdicts=VERDICTS,
        job=_job(book),
        members=[
            {"id": f"member-{number}", **_member(book, *of_member, common)}
            for number, of_member in enumerate(zip(verdicts, actions, drawn, strict=True), start=1)
        ],
        length_unit=display(book.units, "length", 0.0)[1],
        provenance=provenance(book),
        signatures=SIGNATURES,
        time=time.strftime("%Y-%m-%d %H:%M %z"),
    )


def _left_out(book: Book, verdicts: Sequence[Verdict]) -> str:
    """A sentence where only some members of the book were asked for."""
    every = len(book.tables["members"])
    return f"Only {len(verdicts)} of the {every} members of the book were asked for." if len(verdicts) < every else ""


def _job(book: Book) -> list[tuple[str, str]]:
    table = book.tables["job"]
    return [
        (str(item), "" if value is None else str(value))
        for item, value in zip(table["item"], table["value"], strict=True)
    ]


def _member(
    book: Book,
    verdict: Verdict,
    actions: Sequence[Action],
    figures: Sequence[Illustration],
    common: Sequence[str],
) -> dict[str, Any]:
    found = verdict.reconciliation
    lost = unexplained(found)
    return {
        "name": found.subject.name,
        "verdict": verdict.verdict,
        "answer": answer(verdict),
        "settled": settled(book, verdict),
        "warnings": [text for text in verdict.warnings if text not in common],
        "stiffness": stiffness_of(verdict),
        "ahead": None if found.ahead is None else expected_section(book, found.ahead),
        "figures": [one for one in figures if not one.key.startswith(TESTED)],
        "test_figures": [one for one in figures if one.key.startswith(TESTED)],
        "estimates": [estimate_row(book, estimate, lost=lost) for estimate in found.estimates],
        "correlated": correlated(verdict),
        "checks": [check_row(book, check, lost=lost) for check in verdict.checks],
        "load_test": load_test_rows(book, verdict),
        "fit": fit_words(verdict),
        "actions": [action_row(book, action, lost=lost) for action in actions],
        "actions_stage": actions[0].stage if actions else "",
        "ledger_groups": list(reading_groups(book, verdict)),
        "ledger": ledger_words(verdict),
    }
