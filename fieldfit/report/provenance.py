"""Provenance: what made a report, so that it can be made again."""

import platform
from importlib.metadata import version

from fieldfit import __version__
from fieldfit.fieldbook import Book

__all__ = ["provenance"]

ENGINES = ("numpy", "scipy", "pandas", "lmfit", "pint")


def provenance(book: Book) -> list[tuple[str, str]]:
    """The field book with its fingerprint, and the versions of everything that computed; the time stands apart."""
    return [
        ("field book", book.name),
        ("SHA-256 of the field book", book.sha256),
        ("fieldfit", __version__),
        ("Python", platform.python_version()),
        *((name, version(name)) for name in ENGINES),
    ]
