"""The reference page is the declaration, and nothing it has not."""

from pathlib import Path

from fieldfit.fieldbook import TABLES
from fieldfit.fieldbook.reference import reference

PAGE = Path(__file__).parents[2] / "datasets" / "README.md"


def test_the_page_is_up_to_date() -> None:
    """Make it again with: python -m fieldfit.fieldbook.reference > datasets/README.md"""
    assert PAGE.read_text(encoding="utf-8") == reference()


def test_every_table_and_column_is_described() -> None:
    page = reference()
    for name, table in TABLES.items():
        section = page.partition(f"## {name}\n")[2].partition("\n## ")[0]
        assert all(column.name in section and column.meaning in section for column in table.columns)
