"""The main job in one call: a book in, findings out."""

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from pathlib import Path
from typing import TYPE_CHECKING

import pandas as pd

from fieldfit.errors import FieldfitError
from fieldfit.fieldbook import Book
from fieldfit.fit import Expected, Outlook, before_test, outlook, reconcile_member
from fieldfit.judge import Verdict, judge_member
from fieldfit.observe import Subject, observe
from fieldfit.report import (
    FIGURES,
    checks_table,
    expected_table,
    findings_html,
    headline,
    members_table,
    outlook_sentences,
    outlook_table,
    readings_table,
    write_plan,
    write_report,
)

if TYPE_CHECKING:
    from fieldfit.report.raster import Figure

__all__ = [
    "Findings",
    "NothingPlannedError",
    "Plan",
    "UnknownFigureError",
    "UnknownMemberError",
    "among",
    "judged",
    "plan",
    "reconcile",
]


class _UnknownError(FieldfitError, KeyError):
    """A name that is not there; unlike a KeyError's, its message is not quoted."""

    def __str__(self) -> str:
        return str(self.args[0])


class UnknownMemberError(_UnknownError):
    """A member was asked for that the book does not have."""


class UnknownFigureError(_UnknownError):
    """A figure was asked for that the report does not have."""


class NothingPlannedError(FieldfitError, ValueError):
    """A book has no gauge, or no stage to read it in."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Findings:
    """A reconciled book: the verdict of every member, by number or by name, and the tables made of them."""

    book: Book
    verdicts: tuple[Verdict, ...]

    def __iter__(self) -> Iterator[Verdict]:
        return iter(self.verdicts)

    def __len__(self) -> int:
        return len(self.verdicts)

    def __getitem__(self, which: int | str) -> Verdict:
        if isinstance(which, int):
            return self.verdicts[which]
        by_name = {verdict.reconciliation.subject.name: verdict for verdict in self.verdicts}
        if which not in by_name:
            raise UnknownMemberError(_unknown(which, list(by_name)))
        return by_name[which]

    @property
    def estimates(self) -> pd.DataFrame:
        """One row an estimate, in the book's own units."""
        return members_table(self.book, self.verdicts)

    @property
    def checks(self) -> pd.DataFrame:
        """One row a check, in the book's own units."""
        return checks_table(self.book, self.verdicts)

    @property
    def readings(self) -> pd.DataFrame:
        """The ledger: one row a reading, in the book's own units."""
        return readings_table(self.book, self.verdicts)

    def plot(self, member: int | str = 0, figure: str = "elastic curve") -> "Figure | None":
        """A figure of the report as matplotlib's, by its name in ``FIGURES``; None where there is nothing to draw.

        Raises UnknownMemberError and UnknownFigureError.
        """
        from fieldfit.report.raster import figure as drawn  # noqa: PLC0415  # matplotlib takes long to import

        if figure not in FIGURES:
            raise UnknownFigureError(f"there is no figure {figure!r}; there are {', '.join(FIGURES)}")
        picture = FIGURES[figure](self.book, self[member].reconciliation)
        return None if picture is None else drawn(picture.drawing)

    def write(self, out: str | Path | None = None, *, png: bool = False) -> Path:
        """Write every result file to a folder, reports/<book name> if left out; return the report's path."""
        return write_report(self.book, self.verdicts, Path(out or Path("reports") / self.book.name), png=png)

    def _repr_html_(self) -> str:
        return findings_html(self.book, self.verdicts)

    def __repr__(self) -> str:
        return headline(self.verdicts)


def reconcile(book: Book) -> Findings:
    """Fit every member of a book and judge it. Raises ModelError for a member that cannot be solved."""
    return Findings(book=book, verdicts=tuple(judged(observe(book))))


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """What the gauges of a book should read before anything is read, and what that will determine, by member."""

    book: Book
    expected: tuple[Expected, ...]
    outlooks: tuple[Outlook, ...]

    @property
    def table(self) -> pd.DataFrame:
        """One row a gauge and stage, in the book's own units."""
        return expected_table(self.book, self.expected)

    @property
    def outlook(self) -> pd.DataFrame:
        """What the test will determine, one row an estimate and design point, in the book's own units."""
        return outlook_table(self.book, self.outlooks)

    @property
    def says(self) -> dict[str, list[str]]:
        """What the test will determine and what to measure next, in sentences by member."""
        return {one.subject.name: outlook_sentences(self.book, one) for one in self.outlooks}

    def _repr_html_(self) -> str:
        return self.table.to_html(index=False, na_rep="–", border=0, justify="left", float_format="{:.4g}".format)

    def write(self, out: str | Path | None = None) -> Path:
        """Write the site sheet to a folder, reports/<book name> plan if left out; return its path."""
        folder = Path(out or Path("reports") / f"{self.book.name} plan")
        return write_plan(self.book, self.expected, self.outlooks, folder)


def plan(book: Book, members: Sequence[str] = ()) -> Plan:
    """What every gauge should read and what that will determine, by what the book knows beforehand.

    Any readings in it are not looked at.

    Raises UnknownMemberError, ModelError for a member that cannot be solved, and NothingPlannedError where no gauge of
    the gauges table has a stage to be read in.
    """
    subjects = among(observe(book), members)
    found = tuple(before_test(subject) for subject in subjects)
    if not any(len(one.expected) for one in found):
        raise NothingPlannedError(f"{book.name}: nothing to expect; give a table of gauges, and stages with loads")
    return Plan(book=book, expected=found, outlooks=tuple(map(outlook, subjects)))


def judged(subjects: Iterable[Subject]) -> Iterator[Verdict]:
    """Verdicts one by one, as they are reached."""
    return (judge_member(reconcile_member(subject)) for subject in subjects)


def among(subjects: Sequence[Subject], names: Sequence[str]) -> tuple[Subject, ...]:
    """The members of these names, all where none is given. Raises UnknownMemberError."""
    known = [subject.name for subject in subjects]
    for name in names:
        if name not in known:
            raise UnknownMemberError(_unknown(name, known))
    return tuple(subject for subject in subjects if not names or subject.name in names)


def _unknown(name: str, known: Sequence[str]) -> str:
    near = get_close_matches(name, known, n=1)
    hint = f"did you mean {near[0]}?" if near else f"it has {', '.join(known[:10])}"
    return f"the book has no member {name!r} ({hint})"
