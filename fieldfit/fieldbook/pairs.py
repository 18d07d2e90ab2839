"""Rows alike in several columns, such as member and gauge: every distinct pair of names once."""

from collections.abc import Sequence
from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd

__all__ = ["alike", "distinct_pairs", "first_rows", "numbered", "places_of"]

_ROOM = 4  # places for each row, in a table that stands for every pair there could be
Pair = tuple[str | None, str | None]


def distinct_pairs(left: "pd.Series[Any]", right: "pd.Series[Any]") -> list[Pair]:
    """The distinct pairs of two columns of names, in their order, None where a name is missing."""
    (first, firsts), (second, seconds) = _coded(left), _coded(right)
    numbers = pd.unique(first * len(seconds) + second)
    places = zip(*(place.tolist() for place in np.divmod(numbers, len(seconds))), strict=True)
    return [(firsts[one], seconds[other]) for one, other in places]


def _coded(column: "pd.Series[Any]") -> tuple[npt.NDArray[np.int64], list[str | None]]:
    """The distinct names of a column, the first of them None, and each row's place among them."""
    words = column.array
    if isinstance(words, pd.Categorical):
        return words.codes.astype(np.int64) + 1, [None, *words.categories]
    codes, distinct = pd.factorize(column.to_numpy(dtype=object))
    return codes + 1, [None, *distinct]


def first_rows(codes: npt.NDArray[np.intp]) -> npt.NDArray[np.intp]:
    """The first row of every code from 0 to the largest."""
    rows = np.empty(codes.max(initial=-1) + 1, dtype=np.intp)
    rows[codes[::-1]] = np.arange(len(codes) - 1, -1, -1)
    return rows


def places_of(
    left: "pd.Series[Any]", right: "pd.Series[Any]", known: tuple[Sequence[str | None], Sequence[str | None]]
) -> npt.NDArray[np.intp]:
    """For each row the place of its pair of names among known ones, the first if several are the same; else -1."""
    (first, firsts), (second, seconds) = _coded(left), _coded(right)
    ones, others = (
        pd.Index(names, dtype=object).get_indexer(pd.Index(each, dtype=object))
        for names, each in zip((firsts, seconds), known, strict=True)
    )
    there, wide = np.flatnonzero((ones > 0) & (others > 0)), len(seconds)
    numbers, asked = ones[there] * wide + others[there], first * wide + second
    if wide * len(firsts) < _ROOM * len(asked):
        places = np.full(wide * len(firsts), -1, dtype=np.intp)
        places[numbers[::-1]] = there[::-1]
        return places[asked]
    distinct = ~pd.Index(numbers).duplicated()
    return np.append(there[distinct], -1)[pd.Index(numbers[distinct]).get_indexer(asked)]


def numbered(*columns: npt.NDArray[np.integer | np.bool_]) -> npt.NDArray[np.int64]:
    """One number (n,) for each distinct row of columns of numbers from -1 on."""
    key = np.zeros(len(columns[0]), dtype=np.int64)
    for column in columns:
        least = int(column.min(initial=0))
        key = key * (int(column.max(initial=0)) - least + 1) + (column.astype(np.int64) - least)
    return key


def alike(numbers: npt.NDArray[np.int64]) -> npt.NDArray[np.bool_]:
    """Which of numbers (n,) from 0 on stand more than once; they are counted in a table where that is small."""
    if numbers.max(initial=0) < _ROOM * len(numbers):
        shared: npt.NDArray[np.bool_] = (np.bincount(numbers) > 1)[numbers]
        return shared
    return np.array(pd.Series(numbers).duplicated(keep=False), dtype=bool)  # pandas' own cannot be written to
