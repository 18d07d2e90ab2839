"""Verdicts: within, beyond on a named side, undecided, not assessed."""

from collections.abc import Callable

import pytest

from fieldfit.fieldbook import Book
from fieldfit.judge import Check, worst
from fieldfit.judge.verdict import EXTRA_STIFFNESS
from fieldfit.work import reconcile

MIDSPAN = 11.25  # mm, P l3 / 48 EI of the simple book
BookOf = Callable[..., Book]


def check(book_of: BookOf, reading: float, u: float, tolerance: object = 10) -> Check:
    members = [["member", "length [m]", "EI [kN m2]", "tolerance [%]"], ["B1", 6.0, 20000, tolerance]]
    readings = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], ["B1", "P", 3.0, reading, u]]
    (verdict,) = reconcile(book_of(members=members, readings=readings))
    return verdict.checks[0]


@pytest.mark.parametrize(
    ("ratio", "word", "side"),
    [
        (1.0, "within", None),
        (0.8, "beyond", "softer than recorded"),
        (1.25, "beyond", "stiffer than recorded"),
        (0.9, "undecided", None),
        (1.1, "undecided", None),
    ],
)
def test_both_sides_of_the_tolerance(book_of: BookOf, ratio: float, word: str, side: str | None) -> None:
    found = check(book_of, MIDSPAN / ratio, 0.05)
    assert (found.verdict, found.reason) == (word, side)
    assert (found.at_least, found.at_most) == (pytest.approx(0.9), pytest.approx(1.1))


def test_the_probability_is_that_of_the_profile(book_of: BookOf) -> None:
    # A reading r with u = 0.2 mm; EI ratio below 0.9 means a true deflection above 12.5 mm, above 1.1 below 10.227 mm.
    # r = 12.5: half below, and the other limit 11 u away: 0.5
    assert check(book_of, 12.5, 0.2).probability_within == pytest.approx(0.5, abs=1e-6)
    # r = 12.3: one u inside, Phi(1) = 0.841345 (any table of the normal distribution)
    assert check(book_of, 12.3, 0.2).probability_within == pytest.approx(0.841345, abs=1e-5)


def test_no_tolerance_is_not_assessed(book_of: BookOf) -> None:
    found = check(book_of, MIDSPAN, 0.05, tolerance="")
    assert (found.verdict, found.reason) == ("not assessed", "the book gives no tolerance")


def test_nothing_determined_is_not_assessed(book_of: BookOf) -> None:
    found = check(book_of, 1.0, 5.0)
    assert (found.verdict, found.reason) == ("not assessed", "the readings do not determine EI")


def test_an_ei_far_from_the_record_sends_one_to_the_units_first(book_of: BookOf) -> None:
    """Ten times the record, as of an I too small, and a hundredth of it, as of kg for kN; not 0.4 and 2.5 times."""
    heads = ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]
    for ratio, said in ((10.0, "more than three times"), (0.01, "less than a third of"), (0.4, ""), (2.5, "")):
        (verdict,) = reconcile(book_of(readings=[heads, ["B1", "P", 3.0, MIDSPAN / ratio, 0.002 * MIDSPAN / ratio]]))
        hints = [text for text in verdict.warnings if "units of the loads, of E and of I" in text]
        assert bool(hints) == bool(said)
        assert all(said in text for text in hints)
        assert not hints or verdict.warnings.index(hints[0]) < [*verdict.warnings, EXTRA_STIFFNESS].index(
            EXTRA_STIFFNESS
        )


def test_an_unexplained_record_is_not_assessed(book_of: BookOf) -> None:
    rows = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], ["B1", "P", 1.5, 12.0, 0.1]]
    (verdict,) = reconcile(book_of(readings=[*rows, ["B1", "P", 3.0, 9.0, 0.1]]))
    assert verdict.verdict == "not assessed"
    assert "does not explain the readings" in str(verdict.checks[0].reason)


def test_a_stiffer_member_carries_its_caution(book_of: BookOf) -> None:
    rows = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], ["B1", "P", 3.0, MIDSPAN / 1.25, 0.05]]
    (verdict,) = reconcile(book_of(readings=rows))
    assert EXTRA_STIFFNESS in verdict.warnings


def test_the_member_is_the_worst_of_its_checks() -> None:
    assert worst(["within", "undecided", "not assessed"]) == "undecided"
    assert worst(["within", "not assessed"]) == "not assessed"
    assert worst(["within", "beyond", "undecided"]) == "beyond"
    assert worst([]) == "not assessed"
