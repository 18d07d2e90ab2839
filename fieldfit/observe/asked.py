"""What a book asks of a member: unknowns to be determined, and limits to be met."""

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

__all__ = ["Asked", "Limit", "asked", "limits"]

Rows = Sequence[Mapping[str, Any]]


@dataclass(frozen=True, slots=True, kw_only=True)
class Asked:
    """One unknown of a book: bounds and expectation in SI (ratios plain), None where the book says nothing.

    ``where`` is a zone, a support, a load case or a span by its name; None the whole member.
    """

    quantity: str
    where: str | None = None
    stage: str | None = None
    low: float | None = None
    high: float | None = None
    expected: float | None = None
    expected_u: float | None = None


def asked(rows: Rows) -> tuple[Asked, ...]:
    """The unknowns of one member; one EI for the member where the book names none."""
    if not rows:
        return (Asked(quantity="EI"),)
    return tuple(
        Asked(
            quantity=row["unknown"],
            where=row["where"],
            stage=row["stage"],
            **{name.replace(" ", "_"): _number(row[name]) for name in ("low", "high", "expected", "expected u")},
        )
        for row in rows
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """One limit of a book in SI (ratios plain), None on a side that has none or for a place or stage left open."""

    limit: str
    where: str | None
    stage: str | None
    at_least: float | None
    at_most: float | None


def limits(rows: Rows) -> tuple[Limit, ...]:
    """The limits of one member."""
    return tuple(
        Limit(
            limit=row["limit"],
            where=row["where"],
            stage=row["stage"],
            at_least=_number(row["at least"]),
            at_most=_number(row["at most"]),
        )
        for row in rows
    )


def _number(value: float) -> float | None:
    return None if math.isnan(value) else float(value)
