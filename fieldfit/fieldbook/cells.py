"""Cells of one column, typed by what the column declares.

Every distinct text is looked at once, and columns of plain numbers not at all. What is not a plain number: blanks,
thousands separators, decimal commas, and what is refused. A comma is read by the whole column: some cell must prove
it to be a decimal comma or a thousands separator and none may prove the other; a column that proves neither is
refused, never guessed.
"""

import re
import unicodedata
from collections.abc import Callable, Mapping, Sequence
from datetime import datetime
from typing import NamedTuple

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.fieldbook.sheet import BLANKS, Cells, Texts, clean, is_blank, nearest, plain_name

__all__ = [
    "CellFault",
    "Floats",
    "as_categories",
    "full_times",
    "type_flags",
    "type_names",
    "type_numbers",
    "type_times",
    "type_words",
]

Floats = npt.NDArray[np.float64]

_NUMBER_BLANKS = {*BLANKS, "na", "NA", "nan", "NaN", "NAN"}
_MOST_WORDS = 12  # of a list that a message names in full
_LONGEST = {"name": 100, "text": 2000}
_ERRORS = ("#DIV/0!", "#N/A", "#NAME?", "#NULL!", "#NUM!", "#REF!", "#VALUE!")

_INTEGER = re.compile(r"[+-]?\d+")
_POINT = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d{1,3})?")
_POINT_GROUPS = re.compile(r"[+-]?[1-9]\d{0,2}(,\d{3})+(\.\d*)?|[+-]?[1-9]\d{0,2}([ '’]\d{3})+(\.\d*)?")
_COMMA = re.compile(r"[+-]?(\d+,\d*|,\d+)([eE][+-]?\d{1,3})?")
_COMMA_GROUPS = re.compile(r"[+-]?[1-9]\d{0,2}(\.\d{3})+,\d*|[+-]?[1-9]\d{0,2}([ '’]\d{3})+,\d*")
_WITH_UNIT = re.compile(r"[+-]?(\d+([.,]\d*)?|[.,]\d+) ?[A-Za-z%°µμ\"'][\w%°/^ -]*")
_DATE = re.compile(r"\d{4}-\d\d-\d\d([T ].*)?|\d{1,2}[./]\d{1,2}[./]\d{2,4}|\d{1,2}:\d\d(:\d\d)?")


Refusal = tuple[str, str, str | None]  # kind of fault, what was expected, hint

_FORMULA: Refusal = ("formula", "a stored value", "formulas are never worked out; save their values")
_NO_NUMBER: Refusal = ("not a number", "a number or a blank cell", None)
_REFUSALS: tuple[tuple[re.Pattern[str], Refusal], ...] = (
    (
        re.compile("|".join(map(re.escape, _ERRORS))),
        ("spreadsheet error", "a number", "the spreadsheet shows an error value in this cell"),
    ),
    (re.compile("=.*"), _FORMULA),
    (_DATE, ("date for a number", "a number", "a spreadsheet may have turned a number into a date")),
    (_WITH_UNIT, ("unit in the cell", "a number alone", "the unit stands in the heading")),
)


class CellFault(NamedTuple):
    """A cell that cannot be read: its place in the column, the kind of fault, what was expected, a hint."""

    place: int
    kind: str
    expected: str
    hint: str | None = None


def type_numbers(cells: Cells) -> tuple[Floats, list[CellFault]]:
    """Numbers of a column, NaN where blank or at fault."""
    if cells.numbers is not None:
        return cells.numbers, []
    values = _plain_numbers(cells.distinct)
    odd = np.flatnonzero(~np.isfinite(values))
    tidy = [_tidy_number(text) for text in cells.distinct[odd]]
    if all(text in _NUMBER_BLANKS for text in tidy):
        return values[cells.codes], []
    readers = _readers(tidy, cells.distinct)
    refused: dict[int, Refusal] = {}
    for code, text in zip(odd.tolist(), tidy, strict=True):
        values[code], why = _read(text, readers)
        if why:
            refused[code] = why
    return values[cells.codes], _faults(cells, refused)


def _faults(cells: Cells, refused: Mapping[int, Refusal]) -> list[CellFault]:
    """A fault for every cell whose text, by its code, is refused."""
    places = np.flatnonzero(np.isin(cells.codes, [*refused])) if refused else ()
    return [CellFault(int(place), *refused[int(cells.codes[place])]) for place in places]


Reader = Callable[[str], float | None]


def _plain_numbers(texts: Texts) -> Floats:
    """Numbers as a computer writes them, NaN or infinite for every other cell; all at once where all are plain."""
    try:
        values: Floats = texts.astype(np.float64)
    except ValueError:
        return np.array(pd.to_numeric(pd.Series(texts, dtype=object), errors="coerce"), dtype=np.float64)
    if "_" in "".join(texts):  # Python takes 1_000 for a number
        values[["_" in text for text in texts]] = np.nan
    return values


def _tidy_number(text: str) -> str:
    """White space single and outside gone, every kind of minus sign as one."""
    tidy = clean(text)
    return re.sub(r"^[−–‐‑](?=[\d.,])", "-", tidy)


def _with_point(text: str) -> float | None:
    """A number with a decimal point; commas, spaces and apostrophes part thousands."""
    if _POINT.fullmatch(text):
        return float(text)
    return float(re.sub(r"[, '’]", "", text)) if _POINT_GROUPS.fullmatch(text) else None


def _with_comma(text: str) -> float | None:
    """A number with a decimal comma; points, spaces and apostrophes part thousands."""
    if _INTEGER.fullmatch(text):
        return float(text)
    if _COMMA.fullmatch(text):
        return float(text.replace(",", "."))
    return float(re.sub(r"[. '’]", "", text).replace(",", ".")) if _COMMA_GROUPS.fullmatch(text) else None


def _readers(odd: Sequence[str], distinct: Texts) -> tuple[Reader, ...]:
    """The readings of decimal marks that the column leaves open: point, comma, both (unproved) or none (at odds)."""
    if not any("," in text for text in odd):
        return (_with_point,)
    cells = {_tidy_number(text) for text in distinct}
    point = {text for text in cells if _with_point(text) is not None}
    comma = {text for text in cells if _with_comma(text) is not None}
    proved = bool(point - comma), bool(comma - point)
    if proved == (True, True):
        return ()
    return ((_with_point,), (_with_comma,))[proved[1]] if any(proved) else (_with_point, _with_comma)


def _read(text: str, readers: tuple[Reader, ...]) -> tuple[float, Refusal | None]:
    """One odd cell: its number, NaN where blank, or why it is refused."""
    if text in _NUMBER_BLANKS:
        return np.nan, None
    found = {value for reader in readers if (value := reader(text)) is not None}
    if len(found) == 1:
        value = found.pop()
        return (value, None) if np.isfinite(value) else (np.nan, ("too large", "a number a computer can hold", None))
    return np.nan, _refusal(text, readers, ambiguous=len(found) > 1)


def _refusal(text: str, readers: tuple[Reader, ...], *, ambiguous: bool) -> Refusal:
    """Why a cell is no number."""
    if ambiguous:
        hint = "the comma may be a decimal mark or part thousands; write it with a decimal point"
        return "ambiguous comma", "a number that can be read one way only", hint
    if not readers and (_with_point(text) is not None or _with_comma(text) is not None):
        hint = "some cells of this column have a decimal comma, others a decimal point"
        return "mixed decimal marks", "one decimal mark in the whole column", hint
    return next((refusal for pattern, refusal in _REFUSALS if pattern.fullmatch(text)), _NO_NUMBER)


def _by_distinct(cells: Cells, read: Callable[[str], tuple[object, Refusal | None]]) -> tuple[Texts, list[CellFault]]:
    """Every distinct text read once, (distinct,); None where blank or at fault; and the faults of the cells."""
    values = np.full(len(cells.distinct), None, dtype=object)
    refused: dict[int, Refusal] = {}
    for code in np.flatnonzero(cells.there).tolist():
        text = cells.distinct[code]
        if is_blank(text):
            continue
        values[code], why = read(text)
        if why:
            refused[code] = why
    return values, _faults(cells, refused)


def _hidden(text: str) -> str | None:
    """The name of the first character nobody can see."""
    if text.isprintable():
        return None
    for character in text:
        if unicodedata.category(character) in {"Cc", "Cf", "Co", "Cs", "Cn"}:
            return unicodedata.name(character, f"U+{ord(character):04X}")
    return None


def type_names(cells: Cells, kind: str) -> tuple[pd.Categorical, list[CellFault]]:
    """Names or free text, white space tidied, missing where blank; categories, as long tables repeat few names."""

    def read(text: str) -> tuple[object, Refusal | None]:
        tidy = clean(text)
        hidden = _hidden(tidy)
        if hidden:
            return None, ("hidden character", "text without hidden characters", f"it holds {hidden}")
        if len(tidy) > _LONGEST[kind]:
            return None, ("too long", f"at most {_LONGEST[kind]} characters", None)
        if tidy.startswith("="):
            return None, _FORMULA
        if tidy in _ERRORS:
            return None, ("spreadsheet error", "text", "the spreadsheet shows an error value in this cell")
        return tidy, None

    if _tidy(cells.distinct, _LONGEST[kind]):
        names = cells.distinct.copy()
        names[~cells.there] = None
        return as_categories(names, cells.codes), []
    values, faults = _by_distinct(cells, read)
    return as_categories(values, cells.codes), faults


def _tidy(texts: Texts, longest: int) -> bool:
    """Whether every text is a short word of signs that can be seen, so that none needs a look of its own."""
    every = "".join(texts)
    plain = every.isprintable() and not any(sign in every for sign in " =#") and BLANKS.isdisjoint(texts)
    return plain and max(map(len, texts), default=0) <= longest


def as_categories(values: Texts, codes: npt.NDArray[np.intp], *, known: bool = False) -> pd.Categorical:
    """Texts by their codes, missing where None; distinct texts that say the same are one category.

    `known`: each is there and says something of its own.
    """
    if not known:
        recoded, values = pd.factorize(values)
        codes = recoded[codes]
    kind = pd.CategoricalDtype(pd.Index(values, dtype=object))
    return pd.Categorical.from_codes(codes, dtype=kind, validate=False)


def type_words(cells: Cells, words: Sequence[str]) -> tuple[pd.Categorical, list[CellFault]]:
    """Words of a fixed list, in the list's own spelling, None where blank."""
    known = {plain_name(word): word for word in words}
    short = len(words) <= _MOST_WORDS
    expected = " or ".join(words) if short else f"a word of its list, such as {', '.join(words[:5])}"
    all_of_them = None if short else f"all {len(words)} words stand in the note on this column of a blank book"

    def read(text: str) -> tuple[object, Refusal | None]:
        word = known.get(plain_name(text))
        hints = [hint for hint in (nearest(clean(text), words), all_of_them) if hint]
        return word, None if word else ("unknown word", expected, " ".join(hints) or None)

    values, faults = _by_distinct(cells, read)
    return as_categories(values, cells.codes), faults


def type_flags(cells: Cells) -> tuple[Texts, list[CellFault]]:
    """Yes or no as True or False (a spreadsheet's TRUE and FALSE too), None where blank."""
    known = {"yes": True, "y": True, "true": True, "no": False, "n": False, "false": False}

    def read(text: str) -> tuple[object, Refusal | None]:
        flag = known.get(plain_name(text))
        return flag, None if flag is not None else ("not yes or no", "yes or no", None)

    values, faults = _by_distinct(cells, read)
    return values[cells.codes], faults


def type_times(cells: Cells) -> tuple[pd.Categorical, list[CellFault]]:
    """Dates and times as ISO 8601 text, missing where blank; a column of times written in full passes in one step."""
    there = cells.there
    texts = cells.distinct[there]
    if full_times(texts) is not None and (cells.codes >= 0).all():
        marked = np.array([text[10] for text in texts]) != "T"
        texts[marked] = [f"{text[:10]}T{text[11:]}" for text in texts[marked]]
        return as_categories(texts, (np.cumsum(there) - 1)[cells.codes], known=not marked.any()), []
    values, faults = _by_distinct(cells, _time)
    return as_categories(values, cells.codes), faults


def full_times(texts: Texts) -> npt.NDArray[np.datetime64] | None:
    """Times if every text is one like 2024-05-14T10:30:00, also with a space between date and time, else None."""
    words = texts.astype(np.str_)
    if not len(words) or words.dtype.itemsize != 4 * len(_FULL):
        return None
    signs = words.view(np.uint32).reshape(len(words), -1)
    digits = (signs >= ord("0")) & (signs <= ord("9"))
    if not all((digits[:, n] if mark == "0" else np.isin(signs[:, n], [*map(ord, mark)])).all() for n, mark in _FULL):
        return None
    try:
        return words.astype("datetime64[s]")
    except ValueError:  # no such day or hour
        return None


_FULL = [*enumerate([*"0000-00-00", "T ", *"00:00:00"])]  # a digit for each 0


_TIME = re.compile(
    r"(\d{4}-\d\d-\d\d)(?:[T ](\d\d:\d\d)(:\d\d(?:\.\d{1,9})?)?(Z|[+-]\d\d:?\d\d)?)?|(\d\d:\d\d)(:\d\d)?"
)


def _time(text: str) -> tuple[object, Refusal | None]:
    """One time; seconds are written out, so that one moment has one spelling."""
    tidy = clean(text)
    match = _TIME.fullmatch(tidy)
    if match is None or not _on_calendar(tidy if match[1] else f"2000-01-01T{tidy}"):
        hint = "day and month of 03/04/2024 cannot be told apart" if _DATE.fullmatch(tidy) else None
        return None, ("not a time", "a date or time such as 2024-05-14 or 2024-05-14T10:30:00", hint)
    if match[5]:
        return match[5] + (match[6] or ":00"), None
    if not match[2]:
        return match[1], None
    return f"{match[1]}T{match[2]}{match[3] or ':00'}{match[4] or ''}", None


def _on_calendar(text: str) -> bool:
    try:
        datetime.fromisoformat(text)
    except ValueError:
        return False
    return True
