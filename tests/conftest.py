"""Shared fixtures."""

from collections.abc import Callable
from pathlib import Path

import pytest

from fieldfit.fieldbook import Book, read_book
from tests.books import SIMPLE, Table, write_book


@pytest.fixture
def book_of(tmp_path: Path) -> Callable[..., Book]:
    """Read the simple book with some of its tables replaced or added; a table of None is left out."""

    def read(**tables: Table | None) -> Book:
        merged = {name: rows for name, rows in {**SIMPLE, **tables}.items() if rows is not None}
        return read_book(write_book(tmp_path / "book", merged))

    return read
