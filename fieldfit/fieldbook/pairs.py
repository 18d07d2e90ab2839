"""Rows alike in several columns, such as member and gauge: every distinct pair of names once."""

from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd

__all__ = ["Pair", "distinct_pairs", "first_rows", "numbered", "places_of"]

Pair = tuple[str | None, str | None]


def distinct_pairs(left: "pd.Series[Any]", right: "pd.Series[Any]") -> tuple[npt.NDArray[np.intp], list[Pair]]:
    """The distinct pairs of two columns of names, None where a name is missing, and each row's place among them."""
    (first, firsts), (second, seconds) = _coded(left), _coded(right)
    wide = len(seconds)
    codes, numbers = pd.factorize(first * wide + second)
    places = zip(*(place.tolist() for place in np.divmod(numbers, wide)), strict=True)
    return codes, [(firsts[one], seconds[other]) for one, other in places]


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


def places_of(left: "pd.Series[Any]", right: "pd.Series[Any]", known: dict[Pair, int]) -> npt.NDArray[np.intp]:
    """What `known` says of the pair in each row, -1 where it says nothing."""
    if not known:
        return np.full(len(left), -1, dtype=np.intp)
    codes, pairs = distinct_pairs(left, right)
    return np.array([known.get(pair, -1) for pair in pairs], dtype=np.intp)[codes]


def numbered(*columns: npt.NDArray[np.integer | np.bool_]) -> npt.NDArray[np.int64]:
    """One number (n,) for each distinct row of columns of numbers from -1 on."""
    key = np.zeros(len(columns[0]), dtype=np.int64)
    for column in columns:
        key = key * (int(column.max(initial=0)) + 2) + column + 1
    return key
