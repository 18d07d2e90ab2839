"""The factor K of a diagnostic bridge test: from strain, with its uncertainty, and from nothing else."""

import numpy as np
import pytest

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import Book
from fieldfit.judge.rules import Outcome
from fieldfit.judge.rules.outcome import Held
from fieldfit.work import reconcile
from tests.load_tests import ONE, book_of, load_test, one, strained

NOT_EXTRAPOLATED = {"behaviour extrapolates to 1.33 W": "no"}
GIVEN = (["calculated rating factor", "", 0.95], ["test over rating", "", 0.5])
LOADS = ["member", "load case", "from [m]", "force [kN]", "u [%]"]


def outcome_of(book: Book) -> Outcome:
    (outcome,) = load_test(book).outcomes
    return outcome


def K_of(book: Book) -> Held:
    (held,) = outcome_of(book).gates
    return held


def test_the_greatest_strain_decides_whatever_its_stage_and_gauge() -> None:
    """V2 bends H more than V1 bends G: K is from H in V2, where 66.7 are calculated."""
    read = [("zero", "G", 3), ("zero", "H", -2), ("V1", "G", 63), ("V1", "H", 38), ("V2", "G", 53), ("V2", "H", 68)]
    held = K_of(strained(read, limits=GIVEN))
    assert (held.where, held.at) == ("H", "stage V2")
    assert held.value == pytest.approx(1 + 0.8 * (66.6667 / 70 - 1))


@pytest.mark.parametrize(("load_u", "share_u"), [(0.0, ""), (4.0, ""), (4.0, 0.01)])
def test_its_uncertainty_is_that_of_a_monte_carlo(load_u: float, share_u: float | str) -> None:
    """Readings of 2 microstrain each and the vehicle's weight drawn anew, or the quarter of it that the girder takes:
    JCGM 101.
    """
    loads = [LOADS, ["B", "P", 3.0, 80 if share_u else 20, load_u if load_u and not share_u else ""]]
    head = ["member", "length [m]", "EI [kN m2]", "load share", "load share u"]
    members = [head, ["B", 6.0, 60000, 0.25 if share_u else 1, share_u]]
    held = K_of(strained([("zero", "G", 0), ("V1", "G", 80)], limits=GIVEN, u=2.0, loads=loads, members=members))
    draw = np.random.default_rng(1)
    measured = 80 + 2.0 * np.hypot(1, 1) * draw.standard_normal(400_000)
    calculated = 100 * (1 + load_u / 100 * draw.standard_normal(400_000))
    K = 1 + 0.8 * (calculated / measured - 1)
    # 400,000 draws: standard error of a deviation 0.1 %; the linear u lacks terms of the order u_rel² = 0.1 %.
    assert held.u == pytest.approx(K.std(), rel=0.01)
    assert (held.low, held.high) == pytest.approx(np.quantile(K, [0.025, 0.975]), abs=0.002)
    assert held.probability == pytest.approx((K >= 1 / 0.95).mean(), abs=0.002)


def test_what_is_imposed_is_no_part_of_the_share() -> None:
    """A curvature of 0.2/km stands for 40 of 140 microstrain, which no doubt about the share of 100 touches."""
    head = ["member", "length [m]", "EI [kN m2]", "load share u"]
    found = strained(
        [("zero", "G", 0), ("V1", "G", 120)],
        limits=GIVEN,
        u=2.0,
        members=[head, ["B", 6.0, 60000, 0.1]],
        imposed=[["member", "stage", "curvature [1/km]"], ["B", "V1", 0.2]],
    )
    held = K_of(found)
    assert held.value == pytest.approx(1 + 0.8 * (140 / 120 - 1))
    assert held.u == pytest.approx(0.8 * np.hypot(10 / 120, 140 / 120**2 * 2.0 * 2**0.5), rel=1e-3)


def test_a_reading_that_may_be_the_greatest_is_not_passed_over() -> None:
    read = [("zero", "G", 0), ("zero", "H", 0), ("V1", "H", 40), ("V2", "G", 53), ("V2", "H", 53)]
    outcome = outcome_of(strained(read, limits=GIVEN))
    assert (outcome.result, outcome.reason) == ("not assessed", "a reading of G is missing")
    unzeroed = [("zero", "H", 0), ("V1", "G", 80), ("V1", "H", 40)]
    assert outcome_of(strained(unzeroed, limits=GIVEN)).result == "not assessed"


def test_strain_lost_in_the_noise_or_of_the_wrong_sense_gives_no_factor() -> None:
    assert outcome_of(strained([("zero", "G", 0), ("V1", "G", 2)], limits=GIVEN)).reason == "below measurable range"
    assert outcome_of(strained([("zero", "G", 0), ("V1", "G", -2)], limits=GIVEN)).reason == "below measurable range"
    assert "opposite sense" in outcome_of(strained([("zero", "G", 0), ("V1", "G", -80)], limits=GIVEN)).reason


def test_deflections_do_not_take_the_place_of_strains() -> None:
    outcome = outcome_of(book_of(one(3.6, 0.1), ONE, limits=[["AASHTO MBE factor K", "", "", "", ""]]))
    assert (outcome.result, outcome.verdict) == ("not assessed", "not assessed")
    assert "deflections do not take the place of strains" in outcome.reason
    assert outcome.gates[0].value is None


def test_curvature_stands_for_strain_where_no_strain_was_read() -> None:
    """30 kN m over 60000 kN m2 are 0.5 1/km."""
    book = strained(
        [],
        limits=GIVEN,
        gauges=[["member", "gauge", "at [m]", "measures", "u [1/km]"], ["B", "C", 3.0, "curvature", 0.005]],
        readings_table=[
            ["member", "stage", "gauge", "curvature [1/km]"], ["B", "zero", "C", 0], ["B", "V1", "C", 0.4]
        ],
    )  # fmt: skip
    assert K_of(book).value == pytest.approx(1.20)
    assert "The greatest curvature measured is 0.4 1/km" in " ".join(outcome_of(book).notes)


def test_every_number_from_memory_is_said_to_be() -> None:
    read = [("zero", "G", 0), ("V1", "G", 80)]
    outcome = outcome_of(strained(read, limits=GIVEN))
    assert outcome.gates[0].mark == "memory M"
    assert {"rating factor: number from memory.", "Kb: number from memory: confirm with the clause."} <= {
        *outcome.notes
    }
    given = outcome_of(strained(read, limits=[*GIVEN, ["Kb", "", 0.5]], findings={}))
    assert given.gates[0].value == pytest.approx(1.125)
    assert given.gates[0].mark == "memory H"
    assert "The book gives 0.5 for Kb in the place of the published number." in given.notes
    assert "The book gives 0.5 for test over rating." in given.notes
    asked = outcome_of(strained(read, limits=[*GIVEN, ["rating factor", "", 1.2]]))
    assert asked.gates[0].overridden
    assert asked.gates[0].limit == pytest.approx(1.2 / 0.95)


def test_without_a_calculated_rating_factor_K_stands_alone() -> None:
    """Its value is shown among the checks, and held against nothing."""
    (verdict,) = reconcile(strained([("zero", "G", 0), ("V1", "G", 80)], limits=GIVEN[1:]))
    (check,) = (check for check in verdict.checks if check.check == "AASHTO MBE factor K")
    assert (check.value, check.at_least, check.verdict) == (pytest.approx(1.2), None, "not assessed")
    assert check.u == pytest.approx(0.8 * 100 / 80**2 * 2**0.5, rel=1e-6)
    assert check.reason is not None
    assert "calculated rating factor" in check.reason


def test_a_softer_member_is_named_even_where_K_gives_no_debit() -> None:
    outcome = outcome_of(strained([("zero", "G", 0), ("V1", "G", 125)], limits=GIVEN, findings=NOT_EXTRAPOLATED))
    assert outcome.gates[0].value == 1.0
    assert "The member strains more than calculated" in " ".join(outcome.notes)


def test_no_more_than_all_of_the_benefit_counts() -> None:
    with pytest.raises(FieldBookError, match=r"\[at least\]: got '1.2', expected a share up to 1 "):
        strained([("zero", "G", 0), ("V1", "G", 80)], limits=[["Kb", "", 1.2]])


def test_strains_are_corrected_for_the_temperature_of_their_gauge() -> None:
    """60 microstrain read 20 K colder than zero, at 1 microstrain/K, are 80: K = 1 + 0.8 (100/80 - 1) = 1.2."""
    head = ["member", "gauge", "at [m]", "measures", "below neutral axis [mm]", "u [microstrain]"]
    head += ["temperature coefficient [microstrain/K]", "temperature coefficient u [microstrain/K]"]
    rows = [["member", "stage", "gauge", "strain [microstrain]", "temperature [degC]"]]
    rows += [["B", "zero", "G", 0, 20], ["B", "V1", "G", 60, 0]]
    gauges = [head, ["B", "G", 3.0, "strain", 200, 1.0, 1.0, 0.01]]
    outcome = outcome_of(strained([], limits=GIVEN, gauges=gauges, readings_table=rows))
    assert outcome.gates[0].value == pytest.approx(1.2)


def test_each_run_of_a_vehicle_is_measured_from_its_own_start() -> None:
    """A second cycle that starts 20 microstrain off brings 70 and not 90."""
    book = strained(
        [("zero", "G", 0), ("V1", "G", 80), ("zero 2", "G", 20), ("again", "G", 90)],
        limits=GIVEN,
        stages_table=[
            ["member", "stage", "load case", "role", "cycle"],
            ["B", "zero", "", "zero", "1"], ["B", "V1", "P", "load", "1"],
            ["B", "zero 2", "", "zero", "2"], ["B", "again", "P", "load", "2"],
        ],
    )  # fmt: skip
    assert K_of(book).at == "stage V1"
    assert K_of(book).value == pytest.approx(1.20)
