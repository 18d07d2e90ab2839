"""Pairs of names in two columns of categories, such as member and gauge: every distinct pair once."""

from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd

__all__ = ["Pair", "distinct_pairs", "first_rows", "places_of"]

Pair = tuple[str | None, str | None]


def distinct_pairs(left: "pd.Series[Any]", right: "pd.Series[Any]") -> tuple[npt.NDArray[np.intp], list[Pair]]:
    """The distinct pairs of two categorical columns, None where a name is missing, and each row's place among them."""
    names = [[*column.cat.categories, None] for column in (left, right)]  # a missing name has the code -1
    wide = len(names[1])
    first = left.cat.codes.to_numpy(dtype=np.int64) % len(names[0])
    codes, numbers = pd.factorize(first * wide + right.cat.codes.to_numpy(dtype=np.int64) % wide)
    return codes, [(names[0][number // wide], names[1][number % wide]) for number in numbers.tolist()]


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
