"""Supports that may let go: the whole reaction counts, dead load that stood there before the test with it."""

from collections.abc import Callable

import pytest

from fieldfit.fieldbook import Book
from fieldfit.work import reconcile
from tests.outside.hermite import Beam, Force, Spread, Support, solve

BookOf = Callable[..., Book]
SPAN, EI, FORCE = 8.0, 20e6, 20e3  # m, N m2, N: at midspan of the first of two spans
HELD = [Support(at) for at in (0.0, SPAN, 2 * SPAN)]
READINGS = ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]
STAGES = ["member", "stage", "load case", "role"]
LETS_GO = "The fitted member would lift off C in stage P."
UNKNOWN = (
    "Under what the book puts on it in stage P, the fitted member pulls upward at C. No self-weight is stated among "
    "that, so whether it would lift off cannot be told."
)


def notes(book_of: BookOf, dead: dict[str, float], stages: list[list[object]] | None = None) -> list[str]:
    """What is said of lifting, where P was read and even dead loads (kN/m) of these natures are in the book."""
    true = solve(Beam(length=2 * SPAN, EI=EI, supports=HELD, forces=[Force(SPAN / 2, -FORCE)]))
    rows = [["B1", "P", x, -1000 * float(true.deflection(x)), 0.05] for x in (2.0, 4.0, 6.0, 12.0)]
    zero = [["B1", "zero", x, 0.0, 0.05] for x in (2.0, 4.0, 6.0, 12.0) if any("zero" in row for row in stages or [])]
    loads = [
        ["member", "load case", "from [m]", "to [m]", "force [kN]", "intensity [kN/m]", "nature"],
        ["B1", "P", SPAN / 2, "", FORCE / 1000, "", ""],
        *(["B1", nature, 0, 2 * SPAN, "", q, nature] for nature, q in dead.items()),
    ]
    book = book_of(
        members=[["member", "length [m]", "EI [N m2]", "tolerance [%]"], ["B1", 2 * SPAN, EI, 10]],
        supports=[["member", "support", "at [m]"], ["B1", "A", 0], ["B1", "B", SPAN], ["B1", "C", 2 * SPAN]],
        loads=loads,
        stages=[STAGES, *(stages or [["B1", "P", "P", "load"]])],
        readings=[READINGS, *zero, *rows],
    )
    (verdict,) = reconcile(book)
    return [warning for warning in verdict.warnings if "lift" in warning]


def at_C(q: float) -> float:
    """Reaction at C, N up, under P and an even load (N/m)."""
    loaded = Beam(2 * SPAN, EI, HELD, forces=[Force(SPAN / 2, -FORCE)], spreads=[Spread(0.0, 2 * SPAN, -q)])
    return float(solve(loaded).reactions[2])


def test_the_reactions_of_these_cases() -> None:
    """Handbook: -3 P/32 by the force and 3 q l/8 by the even load."""
    assert at_C(0.0) == pytest.approx(-3 * FORCE / 32)
    assert at_C(15e3) == pytest.approx(45e3 - 1875)
    assert at_C(0.5e3) == pytest.approx(1500 - 1875)


@pytest.mark.parametrize(
    ("dead", "said"),
    [
        ({"self-weight": 15}, []),
        ({"self-weight": 0.5}, [LETS_GO]),
        ({"self-weight": 0.4, "superimposed dead": 0.5}, []),
        ({}, [UNKNOWN]),
        ({"superimposed dead": 0.5}, [UNKNOWN]),
        ({"superimposed dead": 15}, []),
        ({"live": 15}, [UNKNOWN]),
    ],
)
def test_dead_load_that_stood_there_before_holds_a_support_down(
    book_of: BookOf, dead: dict[str, float], said: list[str]
) -> None:
    assert notes(book_of, dead) == said


@pytest.mark.parametrize(("q", "said"), [(15, []), (0.5, [LETS_GO])])
def test_dead_load_that_stages_carry_counts_once(book_of: BookOf, q: float, said: list[str]) -> None:
    stages = [["B1", "zero", "self-weight", "zero"], ["B1", "P", "self-weight", "load"], ["B1", "P", "P", "load"]]
    assert notes(book_of, {"self-weight": q}, stages) == said


def test_self_weight_of_another_stage_leaves_it_open(book_of: BookOf) -> None:
    stages = [["B1", "P", "P", "load"], ["B1", "dead", "self-weight", "unload"]]
    assert notes(book_of, {"self-weight": 15}, stages) == [UNKNOWN]
