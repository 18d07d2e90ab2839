"""Limits on what a fit estimates: each ends in a check, and a probability never contradicts a bound."""

from collections.abc import Callable

import pytest

from fieldfit.fieldbook import Book
from fieldfit.judge import Check, Verdict
from fieldfit.work import reconcile

BookOf = Callable[..., Book]
Table = list[list[object]]
READINGS: Table = [
    ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"],
    # P x (3 l2 - 4 x2) / 48 EI and P l3 / 48 EI, EI as recorded
    ["B1", "P", 1.5, 7.734375, 0.1],
    ["B1", "P", 3.0, 11.25, 0.1],
    ["B1", "P", 4.5, 7.734375, 0.1],
]
LIMITS = ["member", "limit", "where", "at least", "at most"]
NOTHING = "was not among the unknowns: nothing was fitted to hold it against"


def judged(book_of: BookOf, **tables: Table) -> Verdict:
    (verdict,) = reconcile(book_of(**{"readings": READINGS, **tables}))
    return verdict


def check(verdict: Verdict, name: str, where: str) -> Check:
    (found,) = [one for one in verdict.checks if (one.check, one.where) == (name, where)]
    return found


@pytest.mark.parametrize(
    ("limit", "where", "at_least", "what"),
    [
        ("fixity", "A", 0.5, "fixity at A"),
        ("bearing stiffness", "B", 20, "bearing stiffness at B"),
        ("EI ratio", "mid", 1.5, "EI of mid"),
    ],
)
def test_a_limit_without_an_unknown_is_not_assessed(
    book_of: BookOf, limit: str, where: str, at_least: float, what: str
) -> None:
    zones: Table = [["member", "zone", "from [m]", "to [m]"], ["B1", "mid", 2, 4]]
    verdict = judged(book_of, zones=zones, limits=[LIMITS, ["B1", limit, where, at_least, ""]])
    found = check(verdict, limit, where)
    assert (found.verdict, found.reason) == ("not assessed", f"{what} {NOTHING}")
    assert (found.value, found.probability_within) == (None, None)
    assert check(verdict, "EI ratio", "whole").verdict == "within"
    assert verdict.verdict == "not assessed"


def test_a_tolerance_without_an_unknown_is_not_assessed(book_of: BookOf) -> None:
    unknowns: Table = [["member", "unknown", "where"], ["B1", "rotational restraint", "A"]]
    verdict = judged(book_of, unknowns=unknowns, limits=[LIMITS, ["B1", "deflection", "", "", 20]])
    found = check(verdict, "EI ratio", "whole")
    assert (found.verdict, found.reason) == ("not assessed", f"EI {NOTHING}")
    assert (found.at_least, found.at_most) == (pytest.approx(0.9), pytest.approx(1.1))
    assert check(verdict, "deflection", "1").verdict == "within"
    assert verdict.verdict == "not assessed"


def test_a_tolerance_holds_for_the_rest_of_a_member_with_one_unknown_zone(book_of: BookOf) -> None:
    zones: Table = [["member", "zone", "from [m]", "to [m]"], ["B1", "mid", 2, 4]]
    unknowns: Table = [["member", "unknown", "where"], ["B1", "EI", "mid"]]
    verdict = judged(book_of, zones=zones, unknowns=unknowns)
    assert check(verdict, "EI ratio", "mid").verdict == "within"
    found = check(verdict, "EI ratio", "whole")
    assert (found.verdict, found.reason) == ("not assessed", f"EI of the rest of the member {NOTHING}")


def test_zones_that_leave_nothing_of_a_member_leave_nothing_to_assess(book_of: BookOf) -> None:
    zones: Table = [["member", "zone", "from [m]", "to [m]"], ["B1", "left", 0, 3], ["B1", "right", 3, 6]]
    unknowns: Table = [["member", "unknown", "where"], ["B1", "EI", "left"], ["B1", "EI", "right"]]
    verdict = judged(book_of, zones=zones, unknowns=unknowns)
    assert [one.where for one in verdict.checks] == ["left", "right"]


def test_a_limit_for_everywhere_is_one_for_every_support(book_of: BookOf) -> None:
    unknowns: Table = [["member", "unknown", "where"], ["B1", "EI", ""], ["B1", "rotational restraint", "A"]]
    verdict = judged(book_of, unknowns=unknowns, limits=[LIMITS, ["B1", "fixity", "", "", 0.9]])
    assert check(verdict, "fixity", "A").verdict == "within"
    assert check(verdict, "fixity", "B").reason == f"fixity at B {NOTHING}"


@pytest.mark.parametrize("tolerance", [10, 5, 7])
def test_an_EI_that_cannot_leave_its_tolerance_is_within_for_certain(book_of: BookOf, tolerance: int) -> None:
    """The book's own bounds lie within the tolerance or at it; the best fit stands at the upper one."""
    members: Table = [["member", "length [m]", "EI [kN m2]", "tolerance [%]"], ["B1", 6.0, 20000, tolerance]]
    unknowns: Table = [["member", "unknown", "low", "high"], ["B1", "EI", 1 - min(tolerance, 7) / 100, 1.05]]
    readings: Table = [READINGS[0], ["B1", "P", 3.0, 11.25 / 1.06, 0.3]]
    found = check(judged(book_of, members=members, unknowns=unknowns, readings=readings), "EI ratio", "whole")
    assert (found.verdict, found.probability_within) == ("within", 1.0)


def test_an_EI_that_cannot_come_within_is_beyond_for_certain(book_of: BookOf) -> None:
    unknowns: Table = [["member", "unknown", "low", "high"], ["B1", "EI", 1.2, 1.5]]
    readings: Table = [READINGS[0], ["B1", "P", 3.0, 11.25 / 1.21, 0.3]]
    found = check(judged(book_of, unknowns=unknowns, readings=readings), "EI ratio", "whole")
    assert (found.verdict, found.probability_within) == ("beyond", 0.0)


def test_a_pinned_support_is_never_below_no_fixity(book_of: BookOf) -> None:
    unknowns: Table = [["member", "unknown", "where"], ["B1", "EI", ""], ["B1", "rotational restraint", "A"]]
    verdict = judged(book_of, unknowns=unknowns, limits=[LIMITS, ["B1", "fixity", "A", 0, 0.9]])
    found = check(verdict, "fixity", "A")
    assert (found.verdict, found.probability_within) == ("within", pytest.approx(1.0, abs=1e-6))


@pytest.mark.parametrize("at_least", [0, 7, 8])
def test_a_bearing_is_never_softer_than_the_book_lets_it(book_of: BookOf, at_least: float) -> None:
    """A stiffness of 10 kN/mm under a reaction of 25 kN: 2.5 mm at B, x/6 of it between; it cannot be below 8."""
    rows = [[at, 50 * at * (108 - 4 * at**2) / 48 / 20 + 2.5 * at / 6] for at in (1.0, 2.0, 3.0)]
    rows += [[at, 50 * (6 - at) * (108 - 4 * (6 - at) ** 2) / 48 / 20 + 2.5 * at / 6] for at in (4.0, 5.0)]
    readings: Table = [READINGS[0], *(["B1", "P", at, round(y, 6), 0.3] for at, y in rows)]
    unknowns: Table = [["member", "unknown", "where", "low [kN/mm]"], ["B1", "EI", "", ""]]
    unknowns += [["B1", "bearing stiffness", "B", 8]]
    limits: Table = [["member", "limit", "where", "at least [kN/mm]"], ["B1", "bearing stiffness", "B", at_least]]
    found = check(judged(book_of, readings=readings, unknowns=unknowns, limits=limits), "bearing stiffness", "B")
    assert (found.verdict, found.probability_within) == ("within", 1.0)


@pytest.mark.parametrize(
    ("stage", "at_most", "word", "probability"),
    [("", 5, "within", 1.0), ("P", 2, "beyond", 0.0), ("P", 3.1, "undecided", 0.841345)],
)
def test_a_settlement_is_held_against_its_limit(
    book_of: BookOf, stage: str, at_most: float, word: str, probability: float
) -> None:
    """B goes down by 3 mm, read there alone, with a u of 0.1 mm."""
    verdict = judged(
        book_of,
        readings=[READINGS[0], ["B1", "P", 6.0, 3.0, 0.1]],
        unknowns=[["member", "unknown", "where", "stage"], ["B1", "settlement", "B", "P"]],
        limits=[[*LIMITS[:3], "stage", "at most [mm]"], ["B1", "settlement", "B", stage, at_most]],
    )
    found = check(verdict, "settlement", "B")
    assert (found.verdict, found.stage) == (word, "P")
    assert found.value == pytest.approx(3e-3, abs=1e-6)
    assert found.probability_within == pytest.approx(probability, abs=1e-3)
