"""Provenance: what made a report, so that it can be made again."""

import platform
from importlib.metadata import version

from fieldfit.fieldbook import Book

__all__ = ["VERSION", "provenance"]

VERSION = version("fieldfit")
ENGINES = ("numpy", "scipy", "pandas", "lmfit", "pint")


def provenance(book: Book) -> list[tuple[str, str]]:
    """The field book with its fingerprint, and the versions of everything that computed; the time stands apart."""
    return [
        ("field book", book.name),
        ("SHA-256 of the field book", book.sha256),
        ("fieldfit", VERSION),
        ("Python", platform.python_version()),
        *((name, version(name)) for name in ENGINES),
    ]
