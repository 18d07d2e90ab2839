"""The reference page is the declaration, and nothing it has not."""

from functools import lru_cache
from pathlib import Path

from fieldfit.fieldbook import TABLES
from fieldfit.fieldbook.faults import FAULTS
from fieldfit.fieldbook.published import RULE_NUMBERS
from fieldfit.fieldbook.reference import OTHER_UNITS, reference
from fieldfit.fieldbook.units import DESIGN_UNITS

PAGE = Path(__file__).parents[2] / "datasets" / "README.md"


@lru_cache
def page() -> str:
    return reference()


def test_the_page_is_up_to_date() -> None:
    """Make it again with: python -m fieldfit.fieldbook.reference > datasets/README.md"""
    assert PAGE.read_text(encoding="utf-8") == page()


def test_every_table_and_column_is_described() -> None:
    for name, table in TABLES.items():
        section = page().partition(f"### {name}\n")[2].partition("\n##")[0]
        assert all(column.name in section and column.meaning in section for column in table.columns)


def test_every_rule_is_listed_with_its_numbers() -> None:
    section = page().partition("## Published rules of load tests\n")[2].partition("\n## ")[0]
    for rule, numbers in RULE_NUMBERS.items():
        (line,) = (line for line in section.splitlines() if line.startswith(f"| {rule} |"))
        assert all(name in line for name in numbers)


def test_every_kind_of_fault_is_described_with_what_is_said() -> None:
    lines = {line.split(" | ")[0].removeprefix("| "): line for line in page().splitlines() if line.startswith("| ")}
    for kind, sentence in FAULTS.items():
        assert sentence in lines[kind]
    shown = [kind for kind in FAULTS if "expected" in lines[kind].rpartition(" | ")[2]]
    unshown = {"already there", "cannot be opened", "station on a jump", "temperature missing", "uncertainty missing"}
    assert set(FAULTS) - set(shown) == unshown


def test_a_unit_is_shown_for_every_kind_of_quantity() -> None:
    assert set(OTHER_UNITS) == set(DESIGN_UNITS)
