"""A block of text cells made a frame: numbers in SI, words in their declared spelling, defaults filled in."""

from dataclasses import dataclass, field, replace
from functools import lru_cache
from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.errors import Fault
from fieldfit.fieldbook.cells import (
    CellFault,
    Floats,
    as_categories,
    type_flags,
    type_names,
    type_numbers,
    type_times,
    type_words,
)
from fieldfit.fieldbook.declare import Column
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.sheet import Block, Cells, Heading, clean
from fieldfit.fieldbook.tables import TABLES
from fieldfit.fieldbook.units import DESIGN_UNITS, GRAVITY, Scale, UnitError, scale_of

__all__ = ["Typed", "by_kind", "of_kind", "plain", "type_block"]

LARGEST, SMALLEST = 1e18, 1e-15  # SI: no beam has a stiffness, a load or a station beyond these
Kinds = pd.Categorical  # kind of quantity of each row, missing where not known


@dataclass(slots=True, kw_only=True)
class Typed:
    """A table being typed: its frame so far, and what was found on the way.

    ``bad`` holds the (row, column) pairs already at fault, so that no second fault is told of the same cell;
    ``units`` the unit texts by kind of quantity as first met, ``other_units`` those of columns of several kinds.
    """

    block: Block
    frame: pd.DataFrame
    faults: list[Fault] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    bad: set[tuple[int, str]] = field(default_factory=set)
    units: dict[str, str] = field(default_factory=dict)
    other_units: dict[str, str] = field(default_factory=dict)

    def given(self, name: str) -> npt.NDArray[np.bool_]:
        """Which rows of the frame say something in a column, readable or not."""
        column = self.frame[name].array
        readable: npt.NDArray[np.bool_] = ~np.asarray(column.isna(), dtype=bool)
        if not any(column == name for _, column in self.bad):
            return readable
        written = [self.block.rows[~cells.blank] for _, cells in self.block.of(name)]
        return readable | np.isin(self.frame["row"], np.concatenate([*written, []]))

    def at_fault(self, name: str) -> npt.NDArray[np.bool_]:
        """Which rows of the frame already have a fault in a column."""
        return np.isin(self.frame["row"], [row for row, column in self.bad if column == name])

    def refuse(self, kind: str, row: int, name: str, expected: str, hint: str | None = None) -> None:
        """Note a fault of one cell, unless that cell has one."""
        if (row, name) not in self.bad:
            self.bad.add((row, name))
            self.faults.append(self.block.fault(kind, row, name, expected, hint))

    def refuse_all(self, found: list[CellFault], heading: Heading, cells: Cells) -> None:
        """Note the faults of cells below one heading."""
        for cell in found:
            row = int(self.block.rows[cell.place])
            self.bad.add((row, heading.name))
            self.faults.append(
                fault(
                    cell.kind,
                    self.block.table.name,
                    cell.expected,
                    row=row,
                    column=heading.text,
                    value=clean(cells[cell.place]),
                    hint=cell.hint,
                )
            )

    def refuse_heading(self, kind: str, heading: Heading, expected: str, hint: str | None = None) -> None:
        """Note a fault of a heading; its cells are not looked at."""
        self.bad.update((int(row), heading.name) for row in self.block.rows)
        table = self.block.table.name
        self.faults.append(
            fault(kind, table, expected, row=self.block.top, column=heading.text, value=heading.unit, hint=hint)
        )


def plain(values: pd.Categorical) -> npt.NDArray[np.object_]:
    """Categories as an object array with None where missing."""
    return np.append(values.categories.to_numpy(dtype=object), np.array([None], dtype=object))[values.codes]


def type_block(block: Block) -> Typed:
    """All columns typed, in the declared order; those whose kind of quantity is told elsewhere stay blank."""
    if not block.headings:
        return Typed(block=block, frame=_empty(block.table.name).copy())
    index = pd.RangeIndex(len(block.rows))
    typed = Typed(block=block, frame=pd.DataFrame({"row": block.rows}, index=index))
    columns = {}
    for column in block.table.columns:
        values = _column(typed, column)
        columns[column.name] = pd.Series(values, index=index, dtype=values.dtype, copy=False)  # objects stay objects
    for column in block.table.columns:
        if column.by in columns:
            values = by_kind(typed, column, _kinds(column, columns[column.by]))
            columns[column.name] = pd.Series(values, index=index, copy=False)
    typed.frame = pd.DataFrame({**columns, "row": block.rows}, index=index, copy=False)
    return typed


@lru_cache
def _empty(table: str) -> pd.DataFrame:
    """The frame of a table that was left out."""
    columns = {column.name: np.empty(0, dtype=_dtype(column)) for column in TABLES[table].columns}
    return pd.DataFrame({**columns, "row": np.empty(0, dtype=np.int64)})


def _dtype(column: Column) -> "npt.DTypeLike":
    return np.float64 if column.is_number else bool if column.kind == "yes or no" else object


def _kinds(column: Column, words: "pd.Series[Any]") -> Kinds:
    """The kind of quantity of each row by the word in its deciding column."""
    codes, distinct = pd.factorize(words)
    return as_categories(np.array([*map(column.kinds.get, distinct), None], dtype=object), codes)


def _column(typed: Typed, column: Column) -> Any:
    """The values of a column: float64 for numbers, bool for yes or no, object otherwise."""
    pairs = [] if column.by else typed.block.of(column.name)
    for heading, _ in pairs[1:]:
        typed.refuse_heading("column twice", heading, f"one column {column.name}")
    if not pairs:
        return _blank(typed, column)
    if not column.is_number and pairs[0][0].unit is not None:
        typed.refuse_heading("unit not wanted", pairs[0][0], "a heading without unit", "these cells are no numbers")
        return _blank(typed, column)
    return _filled(typed, column, _values(typed, column, *pairs[0]))


def _blank(typed: Typed, column: Column) -> Any:
    """A column without cells: its default in every row."""
    count = len(typed.block.rows)
    if column.kind == "yes or no":
        return np.full(count, column.default == "yes")
    if column.is_number:
        return np.full(count, np.nan if column.default is None else column.default, dtype=np.float64)
    if typed.block.table.name == "readings":
        return pd.Categorical.from_codes(np.full(count, -1, dtype=np.int8), categories=pd.Index([], dtype=object))
    return np.full(count, column.default, dtype=object)


def _values(typed: Typed, column: Column, heading: Heading, cells: Cells) -> Any:
    """The cells below one heading by the column's kind."""
    if column.is_number:
        return _fixed_quantity(typed, column, heading, cells)
    values: Any
    if column.kind == "word":
        values, found = type_words(cells, column.words)
    elif column.kind == "yes or no":
        values, found = type_flags(cells)
    elif column.kind == "time":
        values, found = type_times(cells)
    else:
        values, found = type_names(cells, column.kind)
    typed.refuse_all(found, heading, cells)
    return values


def _filled(typed: Typed, column: Column, values: Any) -> Any:
    """Defaults where blank; a required cell that is blank is refused."""
    if isinstance(values, pd.Categorical) and typed.block.table.name != "readings":  # readings are many rows
        values = plain(values)
    blank = pd.isna(values)
    if column.required and blank.any() and typed.block.of(column.name):
        for row in typed.block.rows[blank]:
            typed.refuse("blank cell", int(row), column.name, f"a {column.name}", column.meaning)
    if column.default is not None:
        default = column.default == "yes" if column.kind == "yes or no" else column.default
        values[blank & ~typed.at_fault(column.name)] = default
    return values.astype(bool) if column.kind == "yes or no" else values


def _fixed_quantity(typed: Typed, column: Column, heading: Heading, cells: Cells) -> Floats:
    """Numbers of a column of one kind, SI."""
    scale = _scale(typed, column, heading)
    if scale is None:
        return np.full(len(cells), np.nan)
    if heading.unit is not None:
        typed.units.setdefault(column.kind, heading.unit)
    return _quantity(typed, column, heading, cells, np.full(len(cells), scale.factor), scale.shift)


def of_kind(typed: Typed, heading: Heading, cells: Cells, kind: str) -> Floats:
    """Numbers below a heading that the table does not declare, all of one kind, SI."""
    return _fixed_quantity(typed, Column(name=heading.name, kind=kind, meaning=""), heading, cells)


def _scale(typed: Typed, column: Column, heading: Heading) -> Scale | None:
    """The way to SI that a heading states, or None with a fault noted."""
    unit = DESIGN_UNITS[column.kind] if heading.unit is None and column.bare else heading.unit
    if unit is None:
        hint = f"such as {column.name} [{DESIGN_UNITS[column.kind]}]"
        typed.refuse_heading("unit missing", heading, "a unit in square brackets", hint)
        return None
    try:
        scale = scale_of(column.kind, unit)
    except UnitError as error:
        typed.refuse_heading(
            "unit of another kind" if error.known else "unknown unit", heading, error.expected, error.hint
        )
        return None
    if scale.weight:
        typed.notes.append(_weighed(typed, heading))
    return scale


def _weighed(typed: Typed, heading: Heading) -> str:
    table = typed.block.table.name
    return f"{table}: {heading.name} given in {heading.unit} was taken as its weight (g = {GRAVITY} m/s2)"


def _quantity(
    typed: Typed, column: Column, heading: Heading, cells: Cells, factors: Floats, shift: float = 0.0
) -> Floats:
    """Numbers below one heading in SI, `factors` for each row; in a column of shares the cell 5% is 0.05."""
    bare = cells
    if column.kind in {"percent", "ratio"} and cells.numbers is None:
        factors = np.where(cells.are(lambda text: clean(text).endswith("%")), 0.01, factors)
        distinct = np.array([clean(text).removesuffix("%") for text in cells.distinct], dtype=object)
        bare = replace(cells, distinct=distinct)
    numbers, found = type_numbers(bare)
    typed.refuse_all(found, heading, cells)
    values: Floats = (numbers + shift) * factors
    return _bounded(typed, column, values)


def _bounded(typed: Typed, column: Column, values: Floats) -> Floats:
    """NaN, with a fault noted, for every number that its column's bound or reason excludes."""
    size = np.abs(values)
    beyond = size > LARGEST
    if column.above is not None:
        low = values <= column.above
        for row in typed.block.rows[low]:
            typed.refuse("not positive", int(row), column.name, "a number above 0")
        beyond |= (size < SMALLEST) & ~low
        values = np.where(low, np.nan, values)
    for row in typed.block.rows[beyond]:
        expected = f"a size from {SMALLEST:g} to {LARGEST:g} in SI units"
        typed.refuse("beyond reason", int(row), column.name, expected, "check the exponent and the unit")
    return np.where(beyond, np.nan, values)


def by_kind(typed: Typed, column: Column, kinds: Kinds) -> Floats:
    """A column whose rows differ in kind of quantity, SI; it may stand several times with different units.

    `kinds` is missing where the kind of a row is not known (and a fault is already told).
    """
    values, known = np.full(len(kinds), np.nan), kinds.codes >= 0
    for heading, cells in typed.block.of(column.name):
        factors = _factors(typed, column, heading)
        if factors is None:
            continue
        by_row = np.array([*(factors.get(kind, np.nan) for kind in kinds.categories), np.nan])[kinds.codes]
        written, fitting = ~cells.blank, ~np.isnan(by_row)
        for place in np.flatnonzero(written & known & ~fitting).tolist():
            _refuse_kind(typed, heading, int(typed.block.rows[place]), str(kinds[place]))
        for row in typed.block.rows[written & ~np.isnan(values)]:
            typed.refuse("stated twice", int(row), column.name, f"one {column.name} a row")
        values = np.where(written, _quantity(typed, column, heading, cells, by_row), values)
        _use_units(typed, heading, {kinds.categories[code] for code in np.unique(kinds.codes[written & fitting])})
    return values


def _factors(typed: Typed, column: Column, heading: Heading) -> dict[str, float] | None:
    """The factor to SI for every kind that a heading's unit fits; None, with a fault noted, where it fits none."""
    kinds = dict.fromkeys(column.kinds.values())
    if heading.unit is None and column.bare:
        return {kind: scale_of(kind, DESIGN_UNITS[kind]).factor for kind in kinds}
    if heading.unit is None:
        hint = f"such as {column.name} [mm] or {column.name} [mrad]"
        typed.refuse_heading("unit missing", heading, "a unit in square brackets", hint)
        return None
    factors, errors = {}, []
    for kind in kinds:
        try:
            factors[kind] = scale_of(kind, heading.unit).factor
        except UnitError as error:
            errors.append(error)
    if factors:
        return factors
    expected = f"a unit of {', '.join(kinds)}" if errors[0].known else errors[0].expected
    refused = "unit of another kind" if errors[0].known else "unknown unit"
    typed.refuse_heading(refused, heading, expected, errors[0].hint)
    return None


def _refuse_kind(typed: Typed, heading: Heading, row: int, kind: str) -> None:
    """Note a number that stands below a unit of another kind than its row's."""
    expected = f"a unit of {kind} such as {DESIGN_UNITS[kind]}, as this row is one of {kind}"
    typed.refuse("unit of another row", row, heading.name, expected)


def _use_units(typed: Typed, heading: Heading, kinds: set[str]) -> None:
    if heading.unit is not None:
        for kind in kinds:
            typed.other_units.setdefault(kind, heading.unit)
