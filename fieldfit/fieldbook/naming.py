"""Which file or sheet is which table, by its name."""

from collections.abc import Mapping

from fieldfit.errors import Fault
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.sheet import nearest, plain_name
from fieldfit.fieldbook.tables import TABLES

__all__ = ["HOW", "WORDS", "sort_names"]

HOW, WORDS = "how to fill in.txt", "words to choose from"  # what a blank book has beside its tables


def sort_names(names: Mapping[str, str | None]) -> tuple[dict[str, str], list[Fault], list[str]]:
    """The table of each file or sheet, faults and notes.

    `names` maps a file or sheet to the name its table would have, None where it cannot be a table. What is no
    table is left alone and noted, unless its name looks like a table's.
    """
    tables: dict[str, str] = {}
    faults, notes = [], []
    for source, name in names.items():
        table = plain_name(name) if name is not None else ""
        hint = nearest(table, list(TABLES)) if table and table not in TABLES else None
        if table in TABLES and table in tables.values():
            faults.append(fault("table twice", table, "one file or sheet for each table", value=source))
        elif table in TABLES:
            tables[source] = table
        elif hint:
            faults.append(fault("unknown table", "book", "a name of a table", value=source, hint=hint))
        elif source not in (HOW, WORDS):
            notes.append(f'"{source}" is no table of the book and was not read')
    if not tables:
        faults.append(fault("empty book", "book", f"tables named {', '.join(TABLES)}"))
    return tables, faults, notes
