"""One table as it lies in the file: columns of cells, each cell with the row number its spreadsheet shows."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from difflib import get_close_matches

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.errors import Fault
from fieldfit.fieldbook.declare import Column, Table
from fieldfit.fieldbook.faults import fault

__all__ = [
    "BLANKS",
    "Block",
    "Cells",
    "Heading",
    "Merge",
    "Sheet",
    "Texts",
    "clean",
    "is_blank",
    "letters",
    "nearest",
    "plain_name",
]

Texts = npt.NDArray[np.object_]  # one column of cells, shape (rows,), str
Merge = tuple[int, int, int, int]  # first row, first column, last row, last column; indices into the grid

BLANKS = frozenset({"", "-", "–", "—", "n/a", "N/A", "n.a."})


@dataclass(frozen=True, slots=True, kw_only=True)
class Cells:
    """One column of cells (n,), each distinct text kept once: ``distinct`` and the ``codes`` (n,) into it.

    Where a column below its heading holds nothing but plain numbers and blank cells, ``numbers`` (n,) holds them,
    NaN where blank. Their codes are negative, -1 for the first cell of the column in the file, and ``written``
    fetches the texts of that column for the few cells that are asked for.
    """

    codes: npt.NDArray[np.intp]
    distinct: Texts
    numbers: npt.NDArray[np.float64] | None = None
    written: Callable[[], Texts] | None = None

    @classmethod
    def of(cls, texts: Texts) -> "Cells":
        """Return a column of texts."""
        codes, distinct = pd.factorize(texts)
        return cls(codes=codes, distinct=distinct)

    def __len__(self) -> int:
        """Return the number of cells."""
        return len(self.codes)

    def __getitem__(self, place: int) -> str:
        """Return the text of one cell."""
        code = self.codes[place]
        return str(self.distinct[code] if code >= 0 or self.written is None else self.written()[~code])

    def words(self, count: int) -> list[str]:
        """Return the texts of the first cells, blank for plain numbers."""
        return [str(self.distinct[code]) if code >= 0 else "" for code in self.codes[:count].tolist()]

    def take(self, rows: slice | npt.NDArray[np.int64]) -> "Cells":
        """Return some of the cells."""
        numbers = None if self.numbers is None else self.numbers[rows]
        return replace(self, codes=self.codes[rows], numbers=numbers)

    def are(self, what: Callable[[str], bool]) -> npt.NDArray[np.bool_]:
        """Return whether that is so of every cell, (n,), asked once for each distinct text."""
        return np.array([*map(what, self.distinct)], dtype=bool)[self.codes]

    @property
    def there(self) -> npt.NDArray[np.bool_]:
        """Which of the distinct texts (distinct,) stand in these cells; a heading's own may not."""
        found = np.zeros(len(self.distinct), dtype=bool)
        found[self.codes[self.codes >= 0]] = True
        return found

    def is_blank(self, place: int) -> bool:
        """Return whether one cell says nothing."""
        return is_blank(self[place]) if self.numbers is None else bool(np.isnan(self.numbers[place]))

    @property
    def blank(self) -> npt.NDArray[np.bool_]:
        """Which cells say nothing: only white space, - or n/a."""
        return self.are(is_blank) if self.numbers is None else np.isnan(self.numbers)


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """The grid of one table: ``columns`` of equal length, and ``rows``, the spreadsheet's row numbers.

    ``by_comma``: its file parts cells by commas, so that a comma within a cell may have parted it.
    """

    table: str
    columns: tuple[Cells, ...]
    rows: npt.NDArray[np.int64]
    merged: tuple[Merge, ...] = ()
    by_comma: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Heading:
    """One heading: its place in the grid, the text as written, the declared column (or None) and the unit text."""

    place: int
    text: str
    name: str
    unit: str | None
    column: Column | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Block:
    """The records of a table: cells by heading, blank rows left out; ``top`` is the heading's row number."""

    table: Table
    headings: tuple[Heading, ...]
    cells: tuple[Cells, ...]
    rows: npt.NDArray[np.int64]
    top: int
    by_comma: bool = False

    def of(self, name: str) -> list[tuple[Heading, Cells]]:
        """The headings of one column, each with its cells."""
        pairs = zip(self.headings, self.cells, strict=True)
        return [(heading, cells) for heading, cells in pairs if heading.name == name]

    def place(self, row: int, name: str) -> tuple[Heading | None, str | None]:
        """The heading and the text of the cell of a column in a spreadsheet row; None where there is none."""
        index = int(np.searchsorted(self.rows, row))
        pairs = self.of(name)
        for heading, cells in pairs:
            if clean(cells[index]):
                return heading, clean(cells[index])
        return (pairs[0][0] if pairs else None), None

    def fault(self, kind: str, row: int, name: str, expected: str, hint: str | None = None) -> Fault:
        """A fault of the cell of a declared column in a spreadsheet row."""
        heading, text = self.place(row, name)
        shown = heading.text if heading else name
        return fault(kind, self.table.name, expected, row=row, column=shown, value=text, hint=hint)


def clean(text: str) -> str:
    """Text without outer space, inner white space (no-break space too) as single spaces."""
    return " ".join(text.split())


def is_blank(text: str) -> bool:
    """Whether a cell says that there is nothing to say."""
    return text.strip() in BLANKS


def plain_name(text: str) -> str:
    """A heading or word reduced to what is compared: case, underscores and spacing do not count."""
    return clean(text.replace("_", " ")).casefold()


def nearest(name: str, known: Sequence[str]) -> str | None:
    """A hint naming the nearest known names, or None."""
    plain = {plain_name(candidate): candidate for candidate in known}
    close = get_close_matches(plain_name(name), list(plain), n=2, cutoff=0.6)
    return f"did you mean {' or '.join(plain[match] for match in close)}?" if close else None


def letters(place: int) -> str:
    """A name by place as a spreadsheet names its columns: 0 is A, 25 is Z, 26 is AA."""
    name, place = "", place + 1
    while place:
        place, rest = divmod(place - 1, 26)
        name = chr(ord("A") + rest) + name
    return name
