"""The kinds of fault a field book can have, by name."""

from collections.abc import Mapping
from types import MappingProxyType

from fieldfit.errors import Fault

__all__ = ["FAULTS", "fault"]

FAULTS: Mapping[str, str] = MappingProxyType(
    {
        # the book and its files
        "no such book": "The path leads nowhere.",
    }
)


def fault(
    kind: str,
    table: str,
    expected: str,
    *,
    row: int | None = None,
    column: str | None = None,
    value: str | None = None,
    hint: str | None = None,
) -> Fault:
    """A fault of a declared kind; long values are shortened for the message."""
    shown = value if value is None or len(value) <= 60 else value[:57] + "..."
    return Fault(kind=kind, table=table, expected=expected, row=row, column=column, value=shown, hint=hint)
