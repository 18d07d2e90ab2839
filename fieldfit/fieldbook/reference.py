"""The reference page of field books, made from the declaration of tables: python -m fieldfit.fieldbook.reference."""

import tempfile
from collections.abc import Iterator, Mapping
from pathlib import Path

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook.blank import heading, note
from fieldfit.fieldbook.book import read_book
from fieldfit.fieldbook.broken import BROKEN, write_broken
from fieldfit.fieldbook.declare import TEXT_KINDS, Column, Table
from fieldfit.fieldbook.faults import FAULTS
from fieldfit.fieldbook.published import RULE_NUMBERS
from fieldfit.fieldbook.tables import TABLES
from fieldfit.fieldbook.units import DESIGN_UNITS, SPELLINGS, scale_of

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

## How a book may look

- **CSV folder**: `members.csv`, `loads.csv`, ...; separated by commas, semicolons or tabs (`.tsv` too); UTF-8, with or
  without byte-order mark, UTF-16 with one, or Windows-1252 (Latin-1), of which a note is made. Cells may be quoted.
- **Workbook**: sheets named for their tables, in any order and any case. What is named for no table is left alone and
  noted; a name that is almost a table's is refused. What is hidden is read like the rest, and noted.
- **Around the table**: title rows above the headings, blank rows and columns anywhere, rows of a single cell below the
  table after a blank row. Such rows are noted as text. Headings stand within the first 50 rows; case, underscores and
  spacing do not count.
- **Numbers**: `1200`, `1.2e3`, `1 200`, `1,200.5`, `1'200`, numbers stored as text, no-break spaces, any minus sign. A
  comma is read by its whole column: some cell must show whether it is a decimal comma, else the column is refused.
  `5 %` in a column of shares is 0.05. A cell never holds its unit.
- **Formulas** count by the value that the spreadsheet stored; none is ever worked out.
- **Merged cells**: words merged downwards hold for every row; merged numbers are refused.
- **Times**: `2024-05-14`, `2024-05-14 10:30`, `2024-05-14T10:30:00+02:00`, `10:30`, and dates of a spreadsheet.
- **Limits**: files of 200 MB, 20 million cells of a CSV file, 5 million of a sheet, names of 100 characters, texts of
  2000. A workbook that unpacks out of proportion is refused unopened.

## The tables

A column in bold is required wherever its table is there.
"""

OTHER_UNITS: Mapping[str, tuple[str, ...]] = {
    "length": ("mm", "cm", "ft", "in"),
    "depth": ("m", "cm", "in"),
    "EI": ("kNm2", "MN m2", "N mm2", "kip-in2", "lb ft2"),
    "E": ("MPa", "N/mm2", "ksi", "psi"),
    "I": ("mm4", "m4", "in4"),
    "GA": ("MN", "kip", "lb"),
    "force": ("N", "kgf", "t", "lb", "kip"),
    "intensity": ("N/mm", "kg/m", "plf", "klf", "kip/ft"),
    "moment": ("kNm", "N mm", "kip-in", "k-ft"),
    "bearing stiffness": ("N/mm", "MN/m", "kip/in"),
    "rotational stiffness": ("MN m/rad", "kip-in/rad"),
    "deflection": ("cm", "in", "um", "mil"),
    "level": ("mm", "ft"),
    "rotation": ("rad", "urad", "deg", "arcsec"),
    "curvature": ("1/m", "mrad/m", "1/ft"),
    "strain": ("μstrain", "ue", "strain"),
    "settlement": ("cm", "in"),
    "camber": ("cm", "in"),
    "temperature": ("°C", "degF", "K"),
    "temperature difference": ("degC", "degF"),
    "expansion": ("1/degC", "microstrain/K", "10^-6/K", "1/degF"),
    "deflection per kelvin": ("um/K", "in/degF"),
    "level per kelvin": ("um/K", "in/degF"),
    "rotation per kelvin": ("urad/K", "mrad/degF"),
    "curvature per kelvin": ("1/m/K",),
    "strain per kelvin": ("microstrain/degF",),
    "deflection rate": ("um/h", "in/h"),
    "level rate": ("um/h", "in/h"),
    "rotation rate": ("urad/h",),
    "curvature rate": ("1/m/h",),
    "strain rate": ("microstrain/min",),
    "percent": ("1",),
    "ratio": ("%",),
}
_SAYS = {"name": "a name", "text": "text", "word": "a word", "time": "a date or time"}


def reference() -> str:
    """The page as Markdown text."""
    tables = (line for table in TABLES.values() for line in _table(table))
    return "\n".join([INTRODUCTION, *tables, *_rules(), *_units(), *_faults()])


def _table(table: Table) -> Iterator[str]:
    yield f"### {table.name}\n"
    yield table.meaning + (f" Left out: {table.left_out}" if table.left_out else "") + "\n"
    yield "| column | holds | meaning |\n|---|---|---|"
    for column in table.columns:
        name = f"**{heading(column)}**" if column.required else heading(column)
        yield f"| {name} | {_holds(column)} | {note(column)} |".replace(" Required. |", " |").replace(
            " May be left out. |", " |"
        )
    yield ""


def _holds(column: Column) -> str:
    """What the cells of a column are: a kind of quantity, or a kind of text."""
    if column.by:
        return f"what {column.by} says"
    return _SAYS.get(column.kind, column.kind) if column.kind in TEXT_KINDS else f"a number: {column.kind}"


def _rules() -> Iterator[str]:
    yield "## Published rules of load tests\n"
    yield (
        "A row of `limits` with the rule alone asks for it. A row with one of its numbers in `where` puts another "
        "number in the place of the published one: times in hours, shares as plain numbers (0.25 for 25 %), spans over "
        "deflections as their denominators. Some are no published numbers and must be given: the span over the "
        "deflection at design load of IBC 1708.2.2 (with its stage), and the calculated rating factor and the test "
        "over the rating load's effect of AASHTO MBE factor K, which also asks `inspections` whether behaviour "
        "extrapolates.\n"
    )
    yield "| rule | its numbers |\n|---|---|"
    for rule, numbers in RULE_NUMBERS.items():
        yield f"| {rule} | {', '.join(f'{name} ({side})' for name, side in numbers.items())} |"
    yield ""


def _units() -> Iterator[str]:
    yield "## Units\n"
    yield "A unit is names with one-digit exponents, `kN m2`, `kN-m`, `kN·m²`, then names divided by, `N/mm2`.\n"
    yield "| kind of quantity | as in this page | also, among others |\n|---|---|---|"
    for kind, others in OTHER_UNITS.items():
        known = [f"`{unit}`" for unit in others if scale_of(kind, unit)]
        yield f"| {kind} | `{DESIGN_UNITS[kind]}` | {', '.join(known)} |"
    spellings = ", ".join(f"`{short}` for {meant}" for short, meant in SPELLINGS.items() if short != meant)
    yield f"\nTrade spellings, beside the plain names: {spellings}.\n"


def _faults() -> Iterator[str]:
    yield "## Kinds of fault\n"
    yield "Each with what fieldfit says of a small book that has it.\n"
    yield "| kind | what it means | for example |\n|---|---|---|"
    for kind, sentence in FAULTS.items():
        yield f"| {kind} | {sentence} | {_example(kind)} |"
    yield ""


def _example(kind: str) -> str:
    """The message of a small book with this fault, really read; empty where reading alone cannot find it."""
    if kind not in BROKEN:
        return ""
    with tempfile.TemporaryDirectory() as folder:
        try:
            read_book(write_broken(kind, Path(folder)))
        except FieldBookError as refused:
            return f"`{refused.faults[0]}`".replace(f"{folder}/", "").replace("|", "\\|")
    return ""


if __name__ == "__main__":
    print(reference(), end="")  # noqa: T201
