"""Limits on deflections: both ways of a span count, and what the record alone says is not judged."""

from collections.abc import Callable

import pytest

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import Book
from fieldfit.judge import Check
from fieldfit.work import reconcile

BookOf = Callable[..., Book]
Table = list[list[object]]
HEADING = ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]
COUPLE: Table = [["member", "load case", "from [m]", "moment [kN m]"], ["B1", "M", 3.3, -100]]
# A couple of 100 kN m at 0.55 l of a beam of 6 m and 20000 kN m2 (M l2/EI = 180 mm; `tests/beam/test_sag.py`):
LARGER, SMALLER = 2.8394, 0.3248  # mm, 180 c**1.5 / (9 sqrt(3)), c = 0.3925 on the left and 0.0925 on the right
AT_1_5 = 2.475  # mm, M x (c l2 - x2) / (6 l EI)
APPARENT = "only an apparent EI is known: the book declares no camber or no creep"


def checks(book: Book, *names: str) -> list[Check]:
    (verdict,) = reconcile(book)
    return [one for one in verdict.checks if one.check in names]


def bent(book_of: BookOf, at_most: float, moment: float = -100, u: float = 0.05) -> Check:
    """A beam under a couple, clockwise unless said: its left part rises, its right one sags less."""
    up = 1.0 if moment > 0 else -1.0
    (found,) = checks(
        book_of(
            loads=[COUPLE[0], ["B1", "M", 3.3, moment]],
            readings=[HEADING, ["B1", "M", 1.5, up * AT_1_5, u]],
            limits=[["member", "limit", "at most [mm]"], ["B1", "deflection", at_most]],
        ),
        "deflection",
    )
    return found


@pytest.mark.parametrize(
    ("moment", "at_most", "word", "reason"),
    [
        (-100, 0.25, "beyond", "upward; above its limit"),
        (-100, 2.5, "beyond", "upward; above its limit"),
        (-100, 3.2, "within", "upward"),
        (-100, 2.85, "undecided", "upward"),
        (100, 0.25, "beyond", "above its limit"),
        (100, 2.5, "beyond", "above its limit"),
        (100, 3.2, "within", None),
    ],
)
def test_the_larger_way_decides(book_of: BookOf, moment: float, at_most: float, word: str, reason: str | None) -> None:
    found = bent(book_of, at_most, moment)
    assert (found.verdict, found.reason) == (word, reason)
    assert found.value == pytest.approx(LARGER / 1000, rel=1e-4)


def test_the_probability_is_of_the_way_that_decides(book_of: BookOf) -> None:
    """The reading's u of 0.05 mm is 0.05 x 2.8394 / 2.475 mm of the rise, which one above the limit meets by Phi(1)."""
    u = 0.05 * LARGER / AT_1_5
    found = bent(book_of, LARGER + u)
    assert found.u == pytest.approx(u / 1000, rel=1e-3)
    assert found.probability_within == pytest.approx(0.841345, abs=1e-3)
    assert (found.low, found.high) == (
        pytest.approx((LARGER - 1.959964 * u) / 1000, rel=1e-3),
        pytest.approx((LARGER + 1.959964 * u) / 1000, rel=1e-3),
    )


def test_a_tip_that_rises_is_judged_like_one_that_sags(book_of: BookOf) -> None:
    """P l3 / 48 EI = 3.333 mm in a span of 4 m, and the tip of 2 m beyond it rises by 2 P l2 / 16 EI = 5 mm."""
    tables: dict[str, Table] = {
        "supports": [["member", "support", "at [m]"], ["B1", "A", 0], ["B1", "B", 4]],
        "loads": [["member", "load case", "from [m]", "force [kN]"], ["B1", "P", 2, 50]],
        "readings": [HEADING, ["B1", "P", 2, 3.3333, 0.02], ["B1", "P", 6, -5.0, 0.02]],
    }
    span, tip = checks(
        book_of(**tables, limits=[["member", "limit", "at most [mm]"], ["B1", "deflection", 4]]), "deflection"
    )
    assert (span.verdict, span.reason, span.value) == ("within", None, pytest.approx(3.3333e-3, rel=1e-3))
    assert (tip.verdict, tip.reason) == ("beyond", "upward; above its limit")
    assert (tip.value, tip.probability_within) == (pytest.approx(5e-3, rel=1e-3), pytest.approx(0.0, abs=1e-6))
    # 4 m over 1000, and twice 2 m over 1000
    span, tip = checks(book_of(**tables, limits=[["member", "limit", "at least"], ["B1", "span/n", 1000]]), "span/n")
    assert (span.verdict, tip.verdict, tip.at_most) == ("within", "beyond", pytest.approx(4e-3))


def test_a_published_limit_is_of_both_ways(book_of: BookOf) -> None:
    """20 kN/m on the span of 4 m: 5 w l4 / 384 EI = 3.333 mm down, and the tip 2 w l3 / 24 EI = 5.333 mm up."""
    name = "ACI 318-19 floor live l/360"
    heading = ["member", "load case", "from [m]", "to [m]", "force [kN]", "intensity [kN/m]", "nature"]
    book = book_of(
        supports=[["member", "support", "at [m]"], ["B1", "A", 0], ["B1", "B", 4]],
        loads=[heading, ["B1", "P", 2, "", 50, "", ""], ["B1", "S", 0, 4, "", 20, "live"]],
        stages=[["member", "stage", "load case"], ["B1", "P", "P"]],
        readings=[HEADING, ["B1", "P", 2, 3.3333, 0.02]],
        limits=[["member", "limit", "at least"], ["B1", name, 1000]],
    )
    span, tip = checks(book, name)
    assert (span.verdict, span.reason) == ("within", "by the fitted member under live load")
    assert (tip.verdict, tip.reason) == ("beyond", "upward; by the fitted member under live load")
    assert (span.value, tip.value) == (pytest.approx(3.3333e-3, rel=1e-3), pytest.approx(5.3333e-3, rel=1e-3))


def test_no_deflection_is_judged_from_an_apparent_EI(book_of: BookOf) -> None:
    """Straight when built it is not: the camber of 8 mm hides most of a sag of 11.25 mm."""
    heights = ((0, 0.0), (1.5, 7.734), (3, 11.25), (4.5, 7.734), (6, 0.0))
    rows = [["B1", "P", at, 10 - y / 1000 + 0.032 * at * (6 - at) / 36, 0.3] for at, y in heights]
    heading = ["member", "load case", "from [m]", "to [m]", "force [kN]", "intensity [kN/m]", "nature"]
    names = ("EI ratio", "deflection", "span/n", "ACI 318-19 floor live l/360")
    book = book_of(
        loads=[heading, ["B1", "P", 3, "", 50, "", ""], ["B1", "S", 0, 6, "", 10, "live"]],
        stages=[["member", "stage", "load case"], ["B1", "P", "P"]],
        readings=[["member", "stage", "at [m]", "level [m]", "u [mm]"], *rows],
        limits=[
            ["member", "limit", "at least", "at most"],
            ["B1", "deflection", "", 9],
            ["B1", "span/n", 700, ""],
            ["B1", names[3], "", ""],
        ],
    )
    found = checks(book, *names)
    assert [one.check for one in found] == [*names]
    assert {(one.verdict, one.probability_within, one.reason) for one in found} == {("not assessed", None, APPARENT)}


def test_the_deflection_of_the_record_is_no_finding(book_of: BookOf) -> None:
    """A soft bearing tilts the chord of a simple span; what the span sags from it is the record's EI alone."""
    book = book_of(
        unknowns=[["member", "unknown", "where"], ["B1", "bearing stiffness", "B"]],
        readings=[HEADING, ["B1", "P", 3, 12.5, 0.1], ["B1", "P", 6, 2.5, 0.1]],
        limits=[["member", "limit", "at most [mm]"], ["B1", "deflection", 20]],
    )
    (found,) = checks(book, "deflection")
    assert found.verdict == "not assessed"
    assert "it is that of the record, and nothing was fitted to hold against it" in str(found.reason)


def test_a_limit_without_a_fit_is_not_assessed(book_of: BookOf) -> None:
    book = book_of(
        readings=[HEADING[:-1], ["B1", "P", 3, 11.25]],
        limits=[["member", "limit", "at most [mm]"], ["B1", "deflection", 20]],
    )
    (found,) = checks(book, "deflection")
    assert (found.verdict, found.reason) == ("not assessed", "the readings do not determine it")


def test_a_limit_of_a_stage_without_load_is_not_assessed(book_of: BookOf) -> None:
    stages: Table = [["member", "stage", "load case", "role"], ["B1", "zero", "", "zero"], ["B1", "P", "P", "load"]]
    book = book_of(
        stages=stages,
        readings=[HEADING, ["B1", "zero", 3, 0.0, 0.1], ["B1", "P", 3, 11.25, 0.1]],
        limits=[["member", "limit", "stage", "at most [mm]"], ["B1", "deflection", "zero", 20]],
    )
    (found,) = checks(book, "deflection")
    assert (found.verdict, found.stage, found.reason) == ("not assessed", "zero", "the limit is of no stage under load")


def test_a_limit_of_every_stage_leaves_out_those_that_carry_nothing(book_of: BookOf) -> None:
    rows = [["zero", "", "zero"], ["P", "P", "load"], ["back", "", "recovery"]]
    book = book_of(
        stages=[["member", "stage", "load case", "role"], *(["B1", *row] for row in rows)],
        readings=[
            HEADING,
            *(["B1", stage, 3, read, 0.1] for stage, read in (("zero", 0), ("P", 11.25), ("back", 0.4))),
        ],
        limits=[["member", "limit", "at most [mm]"], ["B1", "deflection", 20]],
    )
    assert [one.stage for one in checks(book, "deflection")] == ["P"]


def test_a_limit_of_a_span_to_a_support_that_holds_nothing_is_not_assessed(book_of: BookOf) -> None:
    book = book_of(
        supports=[
            ["member", "support", "at [m]", "vertical", "rotation"],
            ["B1", "A", 0, "", ""],
            ["B1", "B", 3, "none", "fixed"],
            ["B1", "C", 6, "", ""],
        ],
        limits=[["member", "limit", "where", "at most [mm]"], ["B1", "deflection", "A-B", 20]],
    )
    (found,) = checks(book, "deflection")
    assert found.verdict == "not assessed"
    assert found.reason == "A-B is no span between supports that hold the member up (they are A-C)"


@pytest.mark.parametrize(
    ("row", "said"),
    [
        (["B1", "deflection", "", -3], "the size of a deflection"),
        (["B1", "span/n", "", 500], "the span over the deflection goes in the column at least"),
    ],
)
def test_a_limit_that_could_not_be_meant_is_refused(book_of: BookOf, row: list[object], said: str) -> None:
    with pytest.raises(FieldBookError, match=said):
        book_of(limits=[["member", "limit", "at least", "at most"], row])
