"""What a book asks to be determined: its unknowns, each tied to its place in the member."""

from dataclasses import dataclass

import pandas as pd

__all__ = ["Asked", "asked"]


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


def asked(rows: pd.DataFrame) -> tuple[Asked, ...]:
    """The unknowns of one member; one EI for the member where the book names none."""
    if not len(rows):
        return (Asked(quantity="EI"),)
    return tuple(
        Asked(
            quantity=row["unknown"],
            where=row["where"],
            stage=row["stage"],
            **{name.replace(" ", "_"): _number(row[name]) for name in ("low", "high", "expected", "expected u")},
        )
        for row in rows.to_dict("records")
    )


def _number(value: float) -> float | None:
    return None if pd.isna(value) else float(value)
