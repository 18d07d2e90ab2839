"""The reference page of field books, made from the declaration of tables: python -m fieldfit.fieldbook.reference."""

from collections.abc import Iterator

from fieldfit.fieldbook.blank import heading, note
from fieldfit.fieldbook.declare import Table
from fieldfit.fieldbook.tables import TABLES
from fieldfit.fieldbook.units import SPELLINGS

__all__ = ["reference"]

INTRODUCTION = """# Field books

A field book is a folder of CSV files, a file a table, or one Excel workbook (.xlsx), a sheet a table. The smallest
book is `members`, `loads` and `readings`. `fieldfit blank PATH` writes an empty one with an example row in every table.

- Units stand in the heading in square brackets, `EI [kN m2]`, `deflection [in]`; any unit of the right kind is
  accepted. Mass in a force column (kg, t, lb) means its weight, and the report says so.
- Loads, deflections and settlements are positive downward, levels upward.
- `*` in `member` stands for every member that has no rows of its own in that table.
- Readings may be wide: `member`, `stage`, then a column a gauge, `D1 [mm]`.
- A cell that is blank, `-` or `n/a` holds nothing. Decimal commas are accepted where the whole column agrees. What
  cannot be read for certain is refused, every fault at once, each with its table, row, column and value.

Invented books stand beside this page, each with the script that makes it and its truth; `published/` holds books
written from printed figures, with their source.
"""


def reference() -> str:
    """The page as Markdown text."""
    spellings = ", ".join(f"`{short}` for {meant}" for short, meant in SPELLINGS.items() if short != meant)
    return "\n".join([INTRODUCTION, *(line for table in TABLES.values() for line in _table(table)), *_units(spellings)])


def _table(table: Table) -> Iterator[str]:
    yield f"## {table.name}\n"
    yield table.meaning + (f" Left out: {table.left_out}" if table.left_out else "") + "\n"
    yield "| column | meaning |\n|---|---|"
    for column in table.columns:
        name = f"**{heading(column)}**" if column.required else heading(column)
        yield f"| {name} | {note(column)} |".replace(" Required. |", " |")
    yield ""


def _units(spellings: str) -> Iterator[str]:
    yield "## Trade spellings of units\n"
    yield f"Beside the plain names: {spellings}.\n"


if __name__ == "__main__":
    print(reference(), end="")  # noqa: T201
