"""What a table and a column declare, and the words whose kind of quantity depends on them."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

from fieldfit.fieldbook.published import DEFLECTION_LIMITS, RULE_NUMBERS

__all__ = ["GAUGE_KINDS", "KELVIN_KINDS", "LIMIT_KINDS", "SENSES", "TEXT_KINDS", "UNKNOWN_KINDS", "Column", "Table"]

TEXT_KINDS = ("name", "text", "word", "yes or no", "time")  # every other kind is a kind of quantity with units

GAUGE_KINDS: Mapping[str, str] = MappingProxyType(
    {word: word for word in ("deflection", "level", "rotation", "curvature", "strain")}
)
KELVIN_KINDS: Mapping[str, str] = MappingProxyType({word: f"{word} per kelvin" for word in GAUGE_KINDS})
UNKNOWN_KINDS: Mapping[str, str] = MappingProxyType(
    {
        "EI": "ratio",
        "rotational restraint": "ratio",
        "bearing stiffness": "bearing stiffness",
        "settlement": "settlement",
        "load": "ratio",
        "datum shift": "deflection",
        "datum tilt": "rotation",
        "temperature curvature": "curvature",
        "camber": "camber",
        "creep factor": "ratio",
        "temperature coefficient": "ratio",
    }
)
LIMIT_KINDS: Mapping[str, str] = MappingProxyType(
    {
        "EI ratio": "ratio",
        "fixity": "ratio",
        "bearing stiffness": "bearing stiffness",
        "settlement": "settlement",
        "deflection": "deflection",
        "span/n": "ratio",
        **dict.fromkeys(RULE_NUMBERS, "ratio"),
        **dict.fromkeys(DEFLECTION_LIMITS, "ratio"),
    }
)
SENSES: Mapping[str, tuple[str, str]] = MappingProxyType(  # the first is the default
    {
        "deflection": ("down", "up"),
        "level": ("up", "down"),
        "rotation": ("anticlockwise", "clockwise"),
        "curvature": ("sagging", "hogging"),
        "strain": ("tension", "compression"),
    }
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column: ``kind`` is one of TEXT_KINDS, a kind of quantity, or empty where ``by`` decides.

    ``by`` names the column whose word picks the kind of quantity from ``kinds``; such a column may stand
    several times with different units. ``bare``: the heading needs no unit. ``above`` and ``least`` bound the
    numbers from below (SI), the first without the bound itself.
    """

    name: str
    meaning: str
    kind: str = ""
    required: bool = False
    default: str | float | None = None
    words: tuple[str, ...] = ()
    by: str = ""
    kinds: Mapping[str, str] = field(default_factory=dict)
    bare: bool = False
    above: float | None = None
    least: float | None = None

    @property
    def is_number(self) -> bool:
        """Whether the cells hold numbers."""
        return self.kind not in TEXT_KINDS


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """One table: its columns, the columns that name a record, and example rows (column or heading to text)."""

    name: str
    meaning: str
    columns: tuple[Column, ...]
    key: tuple[str, ...] = ()
    left_out: str = ""
    example: tuple[Mapping[str, str], ...] = ()

    def column(self, name: str) -> Column:
        """The column of that name; KeyError where there is none."""
        for column in self.columns:
            if column.name == name:
                return column
        raise KeyError(name)

    @property
    def names(self) -> tuple[str, ...]:
        """Names of all columns, in order."""
        return tuple(column.name for column in self.columns)
