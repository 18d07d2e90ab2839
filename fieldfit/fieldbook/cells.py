"""Cells of one column, typed by what the column declares.

Good columns pass in one vectorised step. Only cells that this step cannot read are looked at one by one: blanks,
thousands separators, decimal commas, and what is refused. A comma is read by the whole column: some cell must prove
it to be a decimal comma or a thousands separator and none may prove the other; a column that proves neither is
refused, never guessed.
"""

import re
import unicodedata
from collections.abc import Callable, Sequence
from datetime import datetime
from typing import NamedTuple

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.fieldbook.sheet import BLANKS, Texts, clean, is_blank, nearest, plain_name

__all__ = ["CellFault", "Floats", "type_flags", "type_names", "type_numbers", "type_times", "type_words"]

Floats = npt.NDArray[np.float64]

_NUMBER_BLANKS = {*BLANKS, "na", "NA", "nan", "NaN", "NAN"}
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


def type_numbers(texts: Texts) -> tuple[Floats, list[CellFault]]:
    """Numbers of a column, NaN where blank or at fault."""
    values = _plain_numbers(texts)
    odd = np.flatnonzero(~np.isfinite(values))
    if not len(odd):
        return values, []
    codes, distinct = pd.factorize(texts[odd])
    tidy = [_tidy_number(text) for text in distinct]
    if all(text in _NUMBER_BLANKS for text in tidy):
        return values, []
    readers = _readers(tidy, texts)
    read = [_read(text, readers) for text in tidy]
    values[odd] = np.array([value for value, _ in read])[codes]
    return values, [
        CellFault(int(index), *refused) for index, code in zip(odd, codes, strict=True) if (refused := read[code][1])
    ]


Reader = Callable[[str], float | None]


def _plain_numbers(texts: Texts) -> Floats:
    """Numbers as a computer writes them, NaN or infinite for every other cell; all at once where all are plain."""
    try:
        values: Floats = texts.astype(np.float64)
    except ValueError:
        values = np.array(pd.to_numeric(pd.Series(texts, dtype=object), errors="coerce"), dtype=np.float64)
    else:
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


def _readers(odd: Sequence[str], texts: Texts) -> tuple[Reader, ...]:
    """The readings of decimal marks that the column leaves open: point, comma, both (unproved) or none (at odds)."""
    if not any("," in text for text in odd):
        return (_with_point,)
    cells = {_tidy_number(text) for text in pd.unique(pd.Series(texts, dtype=object))}
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


def _by_distinct(texts: Texts, read: Callable[[str], tuple[object, Refusal | None]]) -> tuple[Texts, list[CellFault]]:
    """Every distinct text read once; None where blank or at fault."""
    codes, distinct = pd.factorize(texts)
    results = [(None, None) if is_blank(text) else read(text) for text in distinct]
    values = np.empty(len(results), dtype=object)
    values[:] = [value for value, _ in results]
    at_fault = np.array([refused is not None for _, refused in results], dtype=bool)
    faults = [
        CellFault(int(index), *refused)
        for index in np.flatnonzero(at_fault[codes])
        if (refused := results[codes[index]][1]) is not None
    ]
    return values[codes], faults


def _hidden(text: str) -> str | None:
    """The name of the first character nobody can see."""
    for character in text:
        if unicodedata.category(character) in {"Cc", "Cf", "Co", "Cs", "Cn"}:
            return unicodedata.name(character, f"U+{ord(character):04X}")
    return None


def type_names(texts: Texts, kind: str) -> tuple[pd.Categorical, list[CellFault]]:
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

    codes, distinct = pd.factorize(texts)
    tidied, found = _by_distinct(distinct, read)
    recoded, names = pd.factorize(tidied)
    values = pd.Categorical.from_codes(recoded[codes], categories=pd.Index(names, dtype=object))
    at_fault = {refused.place: refused for refused in found}
    places = np.flatnonzero(np.isin(codes, list(at_fault))) if at_fault else ()
    return values, [at_fault[codes[place]]._replace(place=int(place)) for place in places]


def type_words(texts: Texts, words: Sequence[str]) -> tuple[Texts, list[CellFault]]:
    """Words of a fixed list, in the list's own spelling, None where blank."""
    known = {plain_name(word): word for word in words}

    def read(text: str) -> tuple[object, Refusal | None]:
        word = known.get(plain_name(text))
        return word, None if word else ("unknown word", " or ".join(words), nearest(clean(text), words))

    return _by_distinct(texts, read)


def type_flags(texts: Texts) -> tuple[Texts, list[CellFault]]:
    """Yes or no as True or False (a spreadsheet's TRUE and FALSE too), None where blank."""
    known = {"yes": True, "y": True, "true": True, "no": False, "n": False, "false": False}

    def read(text: str) -> tuple[object, Refusal | None]:
        flag = known.get(plain_name(text))
        return flag, None if flag is not None else ("not yes or no", "yes or no", None)

    return _by_distinct(texts, read)


def type_times(texts: Texts) -> tuple[Texts, list[CellFault]]:
    """Dates and times as ISO 8601 text, None where blank; times written in full pass in one step."""
    values = texts.copy()
    full: npt.NDArray[np.bool_] = np.zeros(len(texts), dtype=bool)
    for mark in "T ":
        good = np.flatnonzero(~full & _are_full_times(texts, mark)) if not full.all() else np.arange(0)
        full[good] = True
        if mark == " ":
            values[good] = [text.replace(" ", "T") for text in texts[good]]
    rest = np.flatnonzero(~full)
    values[rest], faults = _by_distinct(texts[rest], _time)
    return values, [found._replace(place=int(rest[found.place])) for found in faults]


def _are_full_times(texts: Texts, mark: str) -> npt.NDArray[np.bool_]:
    """Which cells read like 2024-05-14T10:30:00, with that mark between date and time."""
    parsed = pd.to_datetime(pd.Series(texts, dtype=object), format=f"%Y-%m-%d{mark}%H:%M:%S", errors="coerce")
    full = np.fromiter(map(len, texts), dtype=np.int64, count=len(texts)) == 19
    return full & parsed.notna().to_numpy(dtype=bool)


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
