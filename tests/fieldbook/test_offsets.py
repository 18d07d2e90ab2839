"""Offsets that move loads off the beam, told in the notes of a book."""

from collections.abc import Callable

import pytest

from fieldfit.fieldbook import Book

BookOf = Callable[..., Book]


def notes(book_of: BookOf, loads: list[list[object]], *offsets: float, member: str = "B1") -> list[str]:
    """The notes of a beam of 6 m with one load case V, put on it at each of the offsets (m)."""
    stages = [[member, f"s{n}", "V", offset] for n, offset in enumerate(offsets, start=1)]
    book = book_of(
        loads=[["member", "load case", "from [m]", "to [m]", "force [kN]"], *([member, "V", *row] for row in loads)],
        stages=[["member", "stage", "load case", "offset [m]"], *stages],
        readings=[["member", "stage", "at [m]", "deflection [mm]"], *(["B1", row[1], 3.0, 1.0] for row in stages)],
    )
    return [note for note in book.notes if note.startswith("stages")]


AXLES: list[list[object]] = [[0.0, "", 50], [1.5, "", 50]]


def test_axles_that_leave_the_beam_are_told_the_whole_case_first(book_of: BookOf) -> None:
    """At 5.0 the second axle stands at 6.5 of 6 m; 22.5 for 2.25 takes both off; -1.5 the first."""
    (note,) = notes(book_of, AXLES, 5.0, 22.5, -1.5, 4.5, 0.0)
    assert note == (
        "stages: offsets move loads off the beam, where they no longer count: all of V in stage s2 of B1 (row 3); "
        "1 of 2 loads of V in stage s1 of B1 (row 2); 1 of 2 loads of V in stage s3 of B1 (row 4)"
    )


def test_an_axle_at_the_very_end_is_on_the_beam(book_of: BookOf) -> None:
    assert notes(book_of, AXLES, 4.5) == []


@pytest.mark.parametrize(("offset", "told"), [(4.0, []), (4.1, ["1 of 1 loads"]), (6.0, ["all of V"])])
def test_a_spread_load_is_cut_or_gone(offset: float, told: list[str], book_of: BookOf) -> None:
    """From 0 to 2 m: it ends at 6, at 6.1, or begins at 6, where nothing of it is left."""
    found = notes(book_of, [[0.0, 2.0, 50]], offset)
    assert [words in note for words, note in zip(told, found, strict=True)] == [True] * len(told)


def test_many_are_counted(book_of: BookOf) -> None:
    (note,) = notes(book_of, AXLES, *(5.0 + 0.1 * n for n in range(8)), member="*")
    assert note.endswith("; and 3 more")
