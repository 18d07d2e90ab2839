"""The answer for a terminal: a table of members, then what was assumed, by member."""

from collections.abc import Iterator, Sequence

from rich import box
from rich.console import Console
from rich.table import Table
from rich.text import Text

from fieldfit.judge import CAUTIONS, Verdict
from fieldfit.observe.naming import first_named
from fieldfit.report.say import headline, stiffness_of
from fieldfit.report.words import DASH, MARKS, printable

__all__ = ["say_findings"]

HEADINGS = ("member", "verdict", "EI / recorded", "95 % interval", "decided by")
STYLES = {"within": "green", "beyond": "bold red", "undecided": "blue", "not assessed": "dim"}
NAMED = 3  # members named beside a note that several share


def say_findings(verdicts: Sequence[Verdict], console: Console) -> None:
    """Print the answer; plain text in aligned columns where the console is no terminal."""
    console.print(headline(verdicts), markup=False, highlight=False, soft_wrap=True)
    if console.is_terminal:
        console.print(_table(verdicts))
    else:
        console.print("\n".join(_plain(verdicts)), markup=False, highlight=False, soft_wrap=True)
    for line in _notes(verdicts):
        console.print(line, markup=False, highlight=False, soft_wrap=True)
    console.print(CAUTIONS[0], markup=False, highlight=False, soft_wrap=True)


def _rows(verdicts: Sequence[Verdict]) -> Iterator[tuple[str, ...]]:
    """A row for each EI of a member, its name and verdict on the first."""
    for verdict in verdicts:
        name = printable(verdict.reconciliation.subject.name)
        first = name, f"{MARKS[verdict.verdict]} {verdict.verdict}", printable(_decided(verdict))
        for number, (place, ratio, span) in enumerate(stiffness_of(verdict) or [("", DASH, DASH)]):
            shown = first if number == 0 else ("", "", "")
            yield shown[0], shown[1], printable(f"{place}: {ratio}" if place else ratio), span, shown[2]


def _decided(verdict: Verdict) -> str:
    check = next((check for check in verdict.checks if check.verdict == verdict.verdict), None)
    if check is None:
        return "no limit to hold it against"
    place = "" if check.where == "whole" else f" {check.where}"
    return f"{check.check}{place}" + (f": {check.reason}" if check.reason else "")


def _table(verdicts: Sequence[Verdict]) -> Table:
    table = Table(box=box.SIMPLE_HEAD, pad_edge=False)
    for number, heading in enumerate(HEADINGS):
        table.add_column(heading, justify="right" if number in (2, 3) else "left", overflow="fold")
    for row in _rows(verdicts):
        style = STYLES.get(row[1].partition(" ")[2], "")
        table.add_row(Text(row[0]), Text(row[1], style=style), *map(Text, row[2:]))
    return table


def _plain(verdicts: Sequence[Verdict]) -> Iterator[str]:
    rows = [HEADINGS, *_rows(verdicts)]
    widths = [max(len(row[place]) for row in rows) for place in range(len(HEADINGS))]
    for row in rows:
        yield "  " + "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip()


def _notes(verdicts: Sequence[Verdict]) -> Iterator[str]:
    """Every warning once, with the members it is of where these are not all."""
    owners: dict[str, list[str]] = {}
    for verdict in verdicts:
        for text in dict.fromkeys(verdict.warnings):
            owners.setdefault(text, []).append(verdict.reconciliation.subject.name)
    for text, names in owners.items():
        whose = "" if len(names) == len(verdicts) else f" ({first_named(names, NAMED)})"
        yield printable(f"Note{whose}: {text}")
