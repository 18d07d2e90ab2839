"""Checks."""

from collections.abc import Mapping
from fieldfit.fieldbook.typed import Typed


def check_book(tables: Mapping[str, Typed], given: set[str]) -> None:
    """Check."""
