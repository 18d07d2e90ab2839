"""Rows alike: numbers and pairs of names told apart the same way in a small table and in a large one."""

import numpy as np
import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldfit.fieldbook import alike, first_rows, numbered, places_of
from fieldfit.fieldbook.pairs import distinct_pairs

NAMES = st.lists(st.tuples(st.sampled_from(["a", "b", "c", None]), st.sampled_from(["x", "y", None])), max_size=12)


@pytest.mark.parametrize("far", [4, 10**12], ids=["counted", "hashed"])
def test_numbers_that_stand_more_than_once(far: int) -> None:
    found = alike(np.array([far, 1, 0, far, 2]))
    assert found.tolist() == [True, False, False, True, False]
    found &= np.array([False, True, True, True, True])  # callers go on with it
    assert found.tolist() == [False, False, False, True, False]


@given(st.lists(st.tuples(st.integers(-1, 3), st.booleans(), st.integers(-1, 10**6)), min_size=1, max_size=12))
def test_rows_share_a_number_if_they_are_alike(rows: list[tuple[int, bool, int]]) -> None:
    columns = zip(*rows, strict=True)
    numbers = numbered(*(np.array(column) for column in columns))
    assert [int(n) == int(m) for n in numbers for m in numbers] == [a == b for a in rows for b in rows]
    assert alike(numbers).tolist() == [rows.count(row) > 1 for row in rows]


@given(NAMES, NAMES, st.sampled_from([object, "category"]))
def test_pairs_are_found_among_known_ones(rows: list[tuple[str, str]], known: list[tuple[str, str]], kind: str) -> None:
    left, right = (pd.Series([row[n] for row in rows], dtype=object).astype(kind) for n in (0, 1))
    sure = [None if None in pair else pair for pair in known]
    expected = [-1 if None in row or row not in sure else sure.index(row) for row in rows]
    assert places_of(left, right, ([a for a, _ in known], [b for _, b in known])).tolist() == expected
    assert distinct_pairs(left, right) == list(dict.fromkeys(rows))


def test_the_first_row_of_every_code() -> None:
    assert first_rows(np.array([1, 0, 1, 2, 0])).tolist() == [1, 0, 3]
