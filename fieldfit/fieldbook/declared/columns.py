"""Columns that several tables have."""

from collections.abc import Mapping

from fieldfit.fieldbook.declare import Column

__all__ = ["length_column", "member_column", "sureness", "value_column"]


def sureness(by: str, kinds: Mapping[str, str]) -> tuple[Column, ...]:
    """The three ways to state how sure a reading is."""
    return (
        Column(name="u", by=by, kinds=kinds, above=0.0, meaning="One standard uncertainty of a reading."),
        Column(
            name="plus or minus",
            by=by,
            kinds=kinds,
            above=0.0,
            meaning="Half width of a reading's tolerance band; its standard uncertainty is this over √3.",
        ),
        Column(name="resolution", by=by, kinds=kinds, above=0.0, meaning="The full step of the last figure read."),
    )


def member_column(meaning: str = "The member; * stands for every member with no rows of its own here.") -> Column:
    """The member that a row is of."""
    return Column(name="member", kind="name", required=True, meaning=meaning)


def length_column(name: str, meaning: str, *, required: bool = False) -> Column:
    """A station or another length."""
    return Column(name=name, kind="length", required=required, meaning=meaning)


def value_column(name: str, by: str, kinds: Mapping[str, str], meaning: str, above: float | None = None) -> Column:
    """A number whose kind of quantity another column of its row tells; without a unit it is in the design's own."""
    return Column(name=name, by=by, kinds=kinds, bare=True, above=above, meaning=meaning)
