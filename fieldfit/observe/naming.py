"""Names in a sentence: the first of them, and how many more there are."""

from collections.abc import Sequence

__all__ = ["first_named"]


def first_named(names: Sequence[str], most: int = 4) -> str:
    """The first names, ``most`` of them, and the number of the rest."""
    more = f" and {len(names) - most} more" if len(names) > most else ""
    return ", ".join(names[:most]) + more
