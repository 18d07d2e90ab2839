"""Level books: which sights of a set-up cannot be."""

from collections.abc import Callable

import pytest

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import Book

BookOf = Callable[..., Book]
HEADINGS = ["member", "stage", "set-up", "sight", "point", "staff [m]"]


def turned(book_of: BookOf, rows: list[list[object]]) -> Book:
    return book_of(
        gauges=[["member", "gauge", "at [m]", "measures"], ["B1", "L", 3.0, "level"]],
        levels=[HEADINGS, *rows],
        levelling=[["u [mm]"], [0.3]],
        benchmarks=[["benchmark", "height [m]"], ["BM", 50.0]],
        readings=None,
    )


@pytest.mark.parametrize(("member", "point"), [("", "TP"), ("B1", "L")])
def test_a_set_up_does_not_go_from_a_point_to_itself(member: str, point: str, book_of: BookOf) -> None:
    """A name used again for the next turning point would make two places one height."""
    rows: list[list[object]] = [
        ["", "P", "1", "backsight", "BM", 1.5],
        [member, "P", "1", "foresight", point, 0.5],
        [member, "P", "2", "backsight", point, 1.2],
        [member, "P", "2", "foresight", point, 0.3],
        [member, "P", "3", "backsight", point, 1.1],
        ["B1", "P", "3", "intermediate", "L", 0.9],
    ]
    with pytest.raises(FieldBookError, match=f"row 5.*got '{point}'.*each turning point has a name of its own"):
        turned(book_of, rows)


def test_a_benchmark_may_be_sighted_first_and_last_by_one_set_up(book_of: BookOf) -> None:
    rows: list[list[object]] = [
        ["", "P", "1", "backsight", "BM", 1.5],
        ["B1", "P", "1", "intermediate", "L", 0.9],
        ["", "P", "1", "foresight", "BM", 1.5003],
    ]
    assert len(turned(book_of, rows).tables["levels"]) == 3
