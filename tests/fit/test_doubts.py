"""Doubts: what was taken for granted is said, and only then."""

from collections.abc import Callable

import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import assumptions
from fieldfit.observe import observe

BookOf = Callable[..., Book]

EXACT = "Loads were taken as exact"
RIGID = "taken as rigid without a gauge there"
ONE_CASE = "All stages carry one load case"
SMALL = "The loads under which readings were taken reach"
LOADS = ["member", "load case", "from [m]", "force [kN]"]
READINGS = ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]
STAGES = ["member", "stage", "load case", "factor", "role"]


def said(book: Book) -> str:
    (subject,) = observe(book)
    return "\n".join(assumptions(subject))


def test_loads_without_uncertainty_are_taken_as_exact(book_of: BookOf) -> None:
    assert EXACT in said(book_of())
    assert EXACT not in said(book_of(loads=[[*LOADS, "u [%]"], ["B1", "P", 3.0, 50, 2]]))
    share = [["member", "length [m]", "EI [kN m2]", "load share u"], ["B1", 6.0, 20000, 0.05]]
    assert EXACT not in said(book_of(members=share))


def test_rigid_supports_that_nobody_measured_are_named(book_of: BookOf) -> None:
    assert f"Supports A and B were {RIGID}" in said(book_of())
    at_A = [READINGS, ["B1", "P", 0.0, 0.1, 0.1], ["B1", "P", 3.0, 12.3, 0.1]]
    assert f"Support B was {RIGID}" in said(book_of(readings=at_A))
    asked = [["member", "unknown", "where"], ["B1", "EI", ""], *(["B1", "bearing stiffness", name] for name in "AB")]
    assert RIGID not in said(book_of(unknowns=asked))


def test_a_reading_that_is_not_used_measures_no_support(book_of: BookOf) -> None:
    rows = [[*READINGS, "use"], ["B1", "P", 0.0, 0.1, 0.1, "no"], ["B1", "P", 3.0, 12.3, 0.1, ""]]
    assert f"Supports A and B were {RIGID}" in said(book_of(readings=rows))


@pytest.mark.parametrize(
    ("stages", "is_said"),
    [
        ([["P", "P", 1, "load"], ["more", "P", 2, "load"]], True),
        ([["P", "P", 1, "load"], ["more", "Q", 1, "load"]], False),
        # Self weight stands throughout, so that the tank alone makes what is read.
        ([["before", "Q", 1, "zero"], ["P", "Q", 1, "load"], ["P", "P", 1, "load"], ["more", "Q", 1, "load"],
          ["more", "P", 2, "load"]], True),
        # A service stage that nobody read adds no second load case to the readings.
        ([["P", "P", 1, "load"], ["more", "P", 2, "load"], ["service", "Q", 1, "load"]], True),
    ],
)  # fmt: skip
def test_one_load_case_is_said_to_hide_a_wrong_load(book_of: BookOf, stages: list[list[object]], is_said: bool) -> None:
    rows = [["B1", stage, 3.0, 12.3, 0.1] for stage in ("P", "more")]
    rows += [["B1", "before", 3.0, 0.0, 0.1]] * any(row[0] == "before" for row in stages)
    book = book_of(
        loads=[LOADS, ["B1", "P", 3.0, 50], ["B1", "Q", 2.0, 30]],
        stages=[STAGES, *(["B1", *row] for row in stages)],
        readings=[READINGS, *rows],
    )
    assert (ONE_CASE in said(book)) is is_said


def service(book_of: BookOf, intensity: float, spans: int = 1, stages: dict[str, float] | None = None) -> Book:
    """A midspan load of 50 kN read on 6 m spans, and an even service load that nobody read."""
    length = 6.0 * spans
    return book_of(
        members=[["member", "length [m]", "EI [kN m2]"], ["B1", length, 20000]],
        supports=[["member", "at [m]"], *(["B1", 6.0 * n] for n in range(spans + 1))],
        loads=[[*LOADS, "to [m]", "intensity [kN/m]"], ["B1", "P", 3.0, 50, "", ""],
               ["B1", "even", 0, "", length, intensity]],
        stages=[STAGES, ["B1", "P", "P", 1, "load"],
                *(["B1", name, "even", factor, "load"] for name, factor in (stages or {"service": 1}).items())],
    )  # fmt: skip


def test_a_test_load_that_is_a_small_share_of_a_service_load_is_said(book_of: BookOf) -> None:
    # Midspan: P l / 4 = 75 kN m against w l2 / 8 = 4.5 w kN m, so 42 % at 40 kN/m and 60 % at 28 kN/m.
    assert f"{SMALL} 42% of the moment of stage service at 0.5 of" in said(service(book_of, 40.0))


def test_of_several_stages_that_nobody_read_the_heaviest_is_named_and_the_others_counted(book_of: BookOf) -> None:
    text = said(service(book_of, 40.0, stages={"one": 0.9, "two": 1.2, "three": 1.0, "four": 0.5}))
    assert text.count(SMALL) == 1
    assert "35% of the moment of stage two at 0.5 of the length" in text
    assert "(and less than half of that of 2 more)" in text


def test_a_test_load_near_the_service_load_is_not(book_of: BookOf) -> None:
    assert SMALL not in said(service(book_of, 28.0))


def test_the_section_is_where_the_service_load_bends_most(book_of: BookOf) -> None:
    # Two spans: w l2 / 8 = 4.5 w hogging over the middle support; P at one midspan gives 3 P l / 32 = 28.1 kN m there.
    assert f"{SMALL} 31% of the moment of stage service at 0.5 of" in said(service(book_of, 20.0, spans=2))


def stated(book_of: BookOf, natures: list[list[object]], stages: list[list[object]] | None = None) -> Book:
    """A midspan load of 50 kN read on 6 m, and even loads of a nature: name, intensity (kN/m), nature."""
    head = [*LOADS, "to [m]", "intensity [kN/m]", "nature"]
    loads = [
        head,
        ["B1", "P", 3.0, 50, "", "", ""],
        *(["B1", name, 0, "", 6, q, nature] for name, q, nature in natures),
    ]
    stages = stages or [["P", "P", 1, "load"]]
    return book_of(loads=loads, stages=[STAGES, *(["B1", *row] for row in stages)])


def test_loads_of_a_nature_are_what_a_small_test_is_held_against(book_of: BookOf) -> None:
    # P l / 4 = 75 kN m against w l2 / 8 = 4.5 w: live 40 kN/m. Dead load in place was there when the gauges were set.
    natures = [["G", 100, "self-weight"], ["Q", 40, "live"]]
    assert f"{SMALL} 42% of the moment of the service loads (live) at 0.5 of" in said(stated(book_of, natures))
    assert SMALL not in said(stated(book_of, [["G", 100, "self-weight"], ["Q", 28, "live"]]))
    assert SMALL not in said(stated(book_of, [["G", 100, "self-weight"]]))


def test_dead_load_that_comes_with_a_stage_counts_and_that_of_the_zero_stage_does_not(book_of: BookOf) -> None:
    natures = [["G", 20, "superimposed dead"], ["Q", 20, "live"]]
    # 75 + 90 kN m read of 180 come; with the dead load on at zero 75 of 90.
    carried = [["P", "P", 1, "load"], ["P", "G", 1, "load"]]
    assert SMALL not in said(stated(book_of, natures, carried))
    assert f"{SMALL} 42% of the moment of the service loads (superimposed dead, live)" in said(
        stated(book_of, natures, [["P", "P", 1, "load"], ["dead", "G", 1, "unload"]])
    )
    at_zero = [["before", "G", 1, "zero"], *carried]
    assert SMALL not in said(stated(book_of, natures, at_zero))
    assert f"{SMALL} 42% of the moment of the service loads (live)" in said(
        stated(book_of, [["G", 20, "superimposed dead"], ["Q", 40, "live"]], at_zero)
    )


def test_a_service_stage_that_carries_them_says_it_for_them(book_of: BookOf) -> None:
    text = said(stated(book_of, [["Q", 40, "live"]], [["P", "P", 1, "load"], ["service", "Q", 0.9, "load"]]))
    assert f"{SMALL} 46% of the moment of stage service at 0.5 of" in text
    assert "the service loads" not in text


def test_without_a_stage_that_nobody_read_nothing_is_compared(book_of: BookOf) -> None:
    assert SMALL not in said(book_of())
