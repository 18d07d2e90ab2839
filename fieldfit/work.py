"""The main job in one call: a book in, a verdict a member out."""

from collections.abc import Iterable, Iterator

from fieldfit.fieldbook import Book
from fieldfit.fit import reconcile_member
from fieldfit.judge import Verdict, judge_member
from fieldfit.observe import Subject, observe

__all__ = ["judged", "reconcile"]


def reconcile(book: Book) -> tuple[Verdict, ...]:
    """Fit every member of a book and judge it. Raises ModelError for a member that cannot be solved."""
    return tuple(judged(observe(book)))


def judged(subjects: Iterable[Subject]) -> Iterator[Verdict]:
    """Verdicts one by one, as they are reached."""
    return (judge_member(reconcile_member(subject)) for subject in subjects)
