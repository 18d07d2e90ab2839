"""What can go wrong, as one family.

::

    FieldfitError
    ├── FieldBookError (ValueError)   the user's data: every fault of the book at once
    └── ModelError (ValueError)       a beam that cannot be solved

A programmer's mistake stays a plain TypeError or AssertionError, outside the family.
"""

from collections.abc import Sequence
from dataclasses import dataclass

__all__ = ["Fault", "FieldBookError", "FieldfitError", "ModelError"]


class FieldfitError(Exception):
    """Anything fieldfit refuses with a reason meant for its user."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """One fault of a field book.

    ``row`` is the row a spreadsheet shows (the heading of a plain CSV file is row 1); None where the fault
    is of a whole table. ``column`` and ``value`` are as the user wrote them. ``kind`` names the sort of fault
    by a fixed phrase, for programs and for the reference page.
    """

    table: str
    expected: str
    row: int | None = None
    column: str | None = None
    value: str | None = None
    hint: str | None = None
    kind: str = ""

    def __str__(self) -> str:
        """One line: where, what was found, what was expected, a hint."""
        where = [f"row {self.row}" if self.row is not None else "", f"[{self.column}]" if self.column else ""]
        place = " ".join(part for part in where if part)
        found = f"got {self.value!r}, " if self.value is not None else ""
        hint = f" ({self.hint})" if self.hint else ""
        return f"{self.table}{', ' + place if place else ''}: {found}expected {self.expected}{hint}"


class FieldBookError(FieldfitError, ValueError):
    """The field book cannot be used; ``faults`` lists every reason found."""

    def __init__(self, book: str, faults: Sequence[Fault]) -> None:
        self.book = book
        self.faults = tuple(faults)
        super().__init__("\n".join([f"{book}: {len(self.faults)} fault(s)", *map(str, self.faults)]))


class ModelError(FieldfitError, ValueError):
    """A beam that cannot be solved; the message names the member and what is missing."""
