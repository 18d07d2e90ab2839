"""Several unknowns: what is determined, what only bounded, what not at all; several minima; uneven intervals."""

from collections.abc import Callable

import numpy as np
import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import Estimate, actions_of, reconcile_member
from fieldfit.fit.design import design_of
from fieldfit.fit.least_squares import descend
from fieldfit.fit.model import model_of
from fieldfit.fit.starts import starts
from fieldfit.fit.unknowns import asked_unknowns
from fieldfit.fit.whitening import whitening_of
from fieldfit.observe import observe

BookOf = Callable[..., Book]
BOTH = [
    ["member", "unknown", "where"],
    ["B1", "EI", ""],
    ["B1", "rotational restraint", "A"],
    ["B1", "rotational restraint", "B"],
]
MIDSPAN = 11.25  # mm, P l3 / 48 EI of the simple book, its ends free to turn
DEFLECTION = ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]


def estimates(book: Book) -> dict[str, Estimate]:
    """Estimates by quantity and place."""
    (subject,) = observe(book)
    return {f"{e.quantity} {e.where}": e for e in reconcile_member(subject).estimates}


def test_a_midspan_reading_leaves_ei_between_pinned_and_fixed(book_of: BookOf) -> None:
    found = estimates(book_of(unknowns=BOTH, readings=[DEFLECTION, ["B1", "P", 3.0, 8.0, 0.05]]))
    EI = found["EI whole"]
    assert (EI.determined, EI.value, EI.ratio) == ("between", None, None)
    # Pinned at most 8.0 + 1.96 u, clamped (a quarter of the deflection) at least 8.0 - 1.96 u: handbook values.
    assert EI.ratio_high == pytest.approx(MIDSPAN / (8.0 - 1.96 * 0.05), rel=1e-3)
    assert EI.ratio_low == pytest.approx(MIDSPAN / 4 / (8.0 + 1.96 * 0.05), rel=1e-3)
    for support in ("A", "B"):
        assert found[f"rotational restraint {support}"].determined == "no"
        assert found[f"rotational restraint {support}"].fixity is None


def test_a_rotation_at_each_support_settles_it(book_of: BookOf) -> None:
    # Both ends clamped by half (r = 0.5 by 3EI/kl = 1, l = 6 m), P at midspan: kl/EI = 3, end moment Pl/8 over
    # 1 + 2EI/kl = 0.6 of the clamped one, midspan (1 - 0.75 x 0.6) of the simple, rotation M/k (slope deflection).
    P, length, EI = 50e3, 6.0, 20e6
    moment = 0.6 * P * length / 8
    turn = 1000 * moment / (3 * EI / length)  # mrad
    quarter = _deflection_between(P, length, EI, moment, 1.5)
    found = estimates(
        book_of(
            unknowns=BOTH,
            readings=[
                ["member", "stage", "at [m]", "deflection [mm]", "rotation [mrad]", "u [mm]", "u [mrad]"],
                ["B1", "P", 3.0, MIDSPAN * 0.55, "", 0.02, ""],
                ["B1", "P", 1.5, quarter, "", 0.02, ""],
                ["B1", "P", 0, "", -turn, "", 0.01],
                ["B1", "P", 6.0, "", turn, "", 0.01],
            ],
        )
    )
    assert {name: estimate.determined for name, estimate in found.items()} == dict.fromkeys(found, "yes")
    assert found["EI whole"].ratio == pytest.approx(1.0, rel=1e-4)
    assert found["rotational restraint A"].fixity == pytest.approx(0.5, abs=1e-4)
    assert found["rotational restraint B"].fixity == pytest.approx(0.5, abs=1e-4)


def _deflection_between(P: float, length: float, EI: float, moment: float, x: float) -> float:
    """Deflection (mm) left of a central load with equal hogging end moments: two handbook cases added."""
    load = P * x * (3 * length**2 - 4 * x**2) / 48 / EI
    return 1000 * (load - moment * x * (length - x) / 2 / EI)


def test_an_interval_keeps_its_uneven_sides(book_of: BookOf) -> None:
    EI = estimates(book_of(readings=[DEFLECTION, ["B1", "P", 3.0, MIDSPAN, 1.5]]))["EI whole"]
    assert EI.ratio is not None and EI.ratio_low is not None and EI.ratio_high is not None
    below, above = EI.ratio - EI.ratio_low, EI.ratio_high - EI.ratio
    # EI is inverse to the reading: 1 - 11.25/14.19 below, 11.25/8.31 - 1 above
    assert below == pytest.approx(1 - MIDSPAN / (MIDSPAN + 1.959964 * 1.5), rel=1e-4)
    assert above == pytest.approx(MIDSPAN / (MIDSPAN - 1.959964 * 1.5) - 1, rel=1e-4)
    assert above > 1.3 * below


def test_a_better_minimum_than_the_first_is_found(book_of: BookOf) -> None:
    # Readings that no beam explains, so that the sum of squares has a minimum with both ends free and a better one
    # with both clamped.
    rows = [("P", 2.0, 7.88176), ("Q", 3.0, 2.55860), ("Q", 2.0, 7.57420), ("Q", 7.0, -1.16036), ("P", 5.0, 23.63891)]
    book = book_of(
        members=[["member", "length [m]", "EI [kN m2]"], ["B1", 8.0, 20000]],
        loads=[["member", "load case", "from [m]", "force [kN]"], ["B1", "P", 3.0, 40], ["B1", "Q", 5.0, 30]],
        unknowns=BOTH,
        readings=[DEFLECTION, *(["B1", stage, at, value, 0.1] for stage, at, value in rows)],
    )
    (subject,) = observe(book)
    model = model_of(subject, asked_unknowns(subject))
    seen = subject.observations
    white = whitening_of(seen, np.ones(len(seen), dtype=bool), believed=True)
    design = design_of(model, seen.value, white, ())
    problem = design.problem()
    first = descend(problem, next(starts(design)))
    found = reconcile_member(subject).profile
    assert found is not None
    assert found.minimum.sum_of_squares < 0.95 * first.cost


@pytest.mark.parametrize(
    ("values", "u"),
    [((0.0, 0.0, 0.0), 0.1), ((0.0, 0.0, 0.0), None), ((11.25, 11.25, 11.25), None), ((-9.0, -11.25, -9.0), 0.1)],
    ids=["all zero", "all zero, no u", "no scatter at all", "the wrong way"],
)
def test_records_that_say_nothing_are_not_assessed(book_of: BookOf, values: tuple[float, ...], u: float | None) -> None:
    heading = DEFLECTION if u else DEFLECTION[:-1]
    places = (3.0 - 1e-9, 3.0, 3.0 + 1e-9) if min(values) > 0 else (2.0, 3.0, 4.0)
    rows = [["B1", "P", at, value, u][: len(heading)] for at, value in zip(places, values, strict=True)]
    EI = estimates(book_of(readings=[heading, *rows]))["EI whole"]
    assert EI.determined == "no"
    assert (EI.value, EI.u, EI.low, EI.high) == (None, None, None, None)


def test_what_the_book_expects_alone_is_said_to_hold_an_estimate_up(book_of: BookOf) -> None:
    unknowns = [
        ["member", "unknown", "where", "expected", "expected u"],
        ["B1", "EI", "", "", ""],
        ["B1", "load", "P", 1, 0.05],
    ]
    found = estimates(book_of(unknowns=unknowns, readings=[DEFLECTION, ["B1", "P", 3.0, MIDSPAN, 0.01]]))
    assert (found["load P"].low_ends, found["load P"].high_ends) == ("expected", "expected")
    EI = found["EI whole"]
    assert EI.determined == "yes"
    assert EI.u is not None and EI.value is not None
    assert EI.u / EI.value == pytest.approx(np.hypot(0.05, 0.01 / MIDSPAN), rel=1e-3)  # load and reading together


def test_load_u_carries_into_the_estimate_without_being_asked(book_of: BookOf) -> None:
    loads = [["member", "load case", "from [m]", "force [kN]", "u [%]"], ["B1", "P", 3.0, 50, 5]]
    found = estimates(book_of(loads=loads, readings=[DEFLECTION, ["B1", "P", 3.0, MIDSPAN, 0.01]]))
    EI = found["EI whole"]
    assert EI.u is not None and EI.value is not None
    assert EI.u / EI.value == pytest.approx(0.05, rel=1e-2)


def test_support_gauges_and_chord_correction_agree_for_a_simple_span(book_of: BookOf) -> None:
    # Worked example: 12.40 mm at midspan, ends down 0.90 and 1.70 mm: 11.10 mm of bending (standard chord rule).
    unknowns = [
        ["member", "unknown", "where", "stage"],
        ["B1", "EI", "", ""],
        ["B1", "settlement", "A", "P"],
        ["B1", "settlement", "B", "P"],
    ]
    rows = [["B1", "P", 0.0, 0.90, 0.05], ["B1", "P", 3.0, 12.40, 0.05], ["B1", "P", 6.0, 1.70, 0.05]]
    found = estimates(book_of(unknowns=unknowns, readings=[DEFLECTION, *rows]))
    EI = found["EI whole"]
    assert EI.ratio == pytest.approx(MIDSPAN / 11.10, rel=1e-6)
    assert found["settlement A"].value == pytest.approx(0.90e-3, rel=1e-6)
    assert EI.u is not None and EI.value is not None
    assert EI.u / EI.value == pytest.approx(1.2247 * 0.05 / 11.10, rel=1e-3)  # u of the chord at midspan: 1.22 u


def test_a_settled_middle_support_bends_a_continuous_beam(book_of: BookOf) -> None:
    """B. K. Sarkar, Strength of Materials, Problem 12.8: two spans of 4 m, 3 kN/m, EI 200 kN m2, prop 2 cm low.

    Printed: prop 14.625 kN, against 15 kN when level; ends 4.69 kN.
    """
    from fieldfit.beam import combine, respond  # noqa: PLC0415

    book = book_of(
        members=[["member", "length [m]", "EI [kN m2]"], ["B1", 8.0, 200]],
        supports=[["member", "support", "at [m]"], ["B1", "A", 0], ["B1", "B", 4], ["B1", "C", 8]],
        loads=[["member", "load case", "from [m]", "to [m]", "intensity [kN/m]"], ["B1", "P", 0, 8, 3]],
        imposed=[["member", "stage", "support", "settlement [mm]"], ["B1", "P", "B", 20]],
        readings=[DEFLECTION, ["B1", "P", 2.0, 1.0, 0.1]],
    )
    (subject,) = observe(book)
    loads = combine(subject.loads, subject.stages[0].factors[None, None])
    reaction = respond(subject.member, loads, np.array([[2.0]])).reaction[0, 0]
    assert reaction / 1000 == pytest.approx([4.6875, 14.625, 4.6875], abs=5e-4)


def test_settlement_of_a_continuous_beam_is_told_from_its_stiffness(book_of: BookOf) -> None:
    """The same worked example, read: deflections by superposing its even load and its printed prop of 14.625 kN."""

    def sag(x: float) -> float:  # mm; w = 3 kN/m on 8 m, EI = 200 kN m2, x within the left half
        even, prop = 3 * x * (512 - 16 * x**2 + x**3) / 4800, 14.625 * x * (192 - 4 * x**2) / 9600
        return 1000 * (even - prop)

    rows = [["B1", "P", at, sag(min(at, 8 - at)), 0.01] for at in (0.0, 1.0, 2.0, 4.0, 6.0, 8.0)]
    book = book_of(
        members=[["member", "length [m]", "EI [kN m2]"], ["B1", 8.0, 220]],  # on record 10 % too stiff
        supports=[["member", "support", "at [m]"], ["B1", "A", 0], ["B1", "B", 4], ["B1", "C", 8]],
        loads=[["member", "load case", "from [m]", "to [m]", "intensity [kN/m]"], ["B1", "P", 0, 8, 3]],
        unknowns=[["member", "unknown", "where", "stage"], ["B1", "EI", "", ""], ["B1", "settlement", "B", "P"]],
        readings=[DEFLECTION, *rows],
    )
    (subject,) = observe(book)
    found = reconcile_member(subject)
    EI, settled = found.estimates
    assert EI.value == pytest.approx(200e3, rel=1e-4)
    assert settled.value == pytest.approx(0.02, rel=1e-4)
    _, fitted = actions_of(found)
    assert fitted is not None
    assert fitted.reaction[0] / 1000 == pytest.approx([4.6875, 14.625, 4.6875], abs=2e-3)


def test_a_shape_survey_without_camber_gives_only_an_apparent_ei(book_of: BookOf) -> None:
    rows = [["B1", "P", at, 10 - y / 1000, 0.2] for at, y in ((0, 0), (1.5, 7.8), (3, 11.3), (4.5, 7.7), (6, 0))]
    (estimate,) = estimates(book_of(readings=[["member", "stage", "at [m]", "level [m]", "u [mm]"], *rows])).values()
    assert estimate.quantity == "apparent EI (assumes straight when built, no creep)"
    assert estimate.ratio == pytest.approx(1.0, rel=0.05)
