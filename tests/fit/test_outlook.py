"""What a planned test will determine: in closed form, against simulated tests, and what to measure next."""

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from fieldfit.fieldbook import Book, read_book
from fieldfit.fit import Outlook, outlook, reconcile_member
from fieldfit.observe import observe
from tests import simulate

BookOf = Callable[..., Book]
STAGES = [
    ["member", "stage", "load case", "factor", "role"],
    ["B1", "zero", "", "", "zero"],
    ["B1", "half", "P", 0.5, "load"],
    ["B1", "full", "P", 1, "load"],
    ["B1", "off", "", "", "recovery"],
]
PEAK = 11.25  # mm: 50 kN x 6^3 / (48 x 20000 kN m2)


def gauges(*rows: tuple[str, float, str, object]) -> list[list[object]]:
    heading: list[object] = ["member", "gauge", "at [m]", "measures", "u [mm]", "u [mrad]"]
    return [heading, *(["B1", *row[:3], *(("", row[3]) if row[2] == "rotation" else (row[3], ""))] for row in rows)]


def outlook_of(book_of: BookOf, **tables: object) -> Outlook:
    (subject,) = observe(book_of(**{"stages": STAGES, "readings": None, **tables}))
    return outlook(subject)


def test_the_interval_to_come_is_that_of_the_slope_through_three_stages(book_of: BookOf) -> None:
    """Zero free, factors 0, 1/2, 1: u of the deflection under the whole load is u / sqrt(sum (f - 1/2)²)."""
    found = outlook_of(book_of, gauges=gauges(("D", 3.0, "deflection", 0.05)))
    ((EI,),) = (one.estimates for one in found.foreseen)
    assert EI.determined == "yes"
    assert EI.ratio == pytest.approx(1.0)
    share = 1.959964 * 0.05 / np.sqrt(0.5) / PEAK
    assert EI.ratio_low == pytest.approx(1 / (1 + share), rel=1e-5)
    assert EI.ratio_high == pytest.approx(1 / (1 - share), rel=1e-5)


def test_it_is_what_tests_then_say_on_average(tmp_path: Path) -> None:
    """Half widths of EI over 30 simulated tests beside an unknown restraint at 0.3, which the book puts there too."""
    cause = simulate.one_restraint
    simulate.simulate(tmp_path / "book", cause, 120, 5)
    subjects = observe(read_book(tmp_path / "book"))
    widths = []
    for subject in subjects[2::4]:  # the truths in turn: EI 0.9, fixity 0.3
        EI = reconcile_member(subject).estimates[0]
        assert EI.ratio_low is not None and EI.ratio_high is not None
        widths.append((EI.ratio_high - EI.ratio_low) / 2)
    half_way = next(one for one in outlook(subjects[0]).foreseen if "half-way" in one.point).estimates[0]
    assert half_way.ratio_low is not None and half_way.ratio_high is not None
    expected = 0.9 * (half_way.ratio_high - half_way.ratio_low) / 2  # for an EI 0.9 of the record
    assert expected == pytest.approx(np.mean(widths), rel=0.35)  # fixity 0.5 instead of 0.3


def test_what_cannot_be_told_apart_is_said_and_the_reading_that_would(book_of: BookOf) -> None:
    """One deflection under one load cannot tell EI from a restraint; a further gauge can."""
    unknowns = [["member", "unknown", "where"], ["B1", "EI", ""], ["B1", "rotational restraint", "A"]]
    found = outlook_of(book_of, gauges=gauges(("D", 3.0, "deflection", 0.05)), unknowns=unknowns)
    assert {one.estimates[0].determined for one in found.foreseen} <= {"between", "no", "at most"}
    help_of_EI = next(one for one in found.helps if one.before.quantity == "EI")
    assert help_of_EI.gauge is not None and help_of_EI.after is not None
    assert help_of_EI.gauge.quantity == "rotation"
    assert help_of_EI.gauge.at == 0.0
    before, after = help_of_EI.before, help_of_EI.after
    assert after.ratio_high is not None and after.ratio_low is not None
    assert before.ratio_high is not None and before.ratio_low is not None
    assert after.ratio_high - after.ratio_low < 0.1 * (before.ratio_high - before.ratio_low)


def test_a_gauge_told_to_help_narrows_the_interval_as_told(book_of: BookOf) -> None:
    one = ("D", 1.5, "deflection", 0.2)
    before = outlook_of(book_of, gauges=gauges(one))
    (helps,) = before.helps
    assert (helps.gauge is not None and helps.after is not None and not helps.gauge.is_usual) or helps.gauge
    row = ("more", helps.gauge.at, helps.gauge.quantity, helps.gauge.u * 1000)
    after = outlook_of(book_of, gauges=gauges(one, row)).foreseen[0].estimates[0]
    assert after.ratio_low == pytest.approx(helps.after.ratio_low, rel=1e-6)
    assert after.ratio_high == pytest.approx(helps.after.ratio_high, rel=1e-6)


def test_where_the_load_is_what_is_not_known_no_gauge_helps(book_of: BookOf) -> None:
    loads = [["member", "load case", "from [m]", "force [kN]", "u [%]"], ["B1", "P", 3.0, 50, 5]]
    (helps,) = outlook_of(book_of, gauges=gauges(("D", 3.0, "deflection", 0.02)), loads=loads).helps
    assert helps.gauge is None
    assert helps.load == "load P"


def test_a_temperature_difference_that_is_not_known_counts_too(book_of: BookOf) -> None:
    members = [["member", "length [m]", "EI [kN m2]", "depth [mm]"], ["B1", 6, 20000, 400]]
    heading = ["member", "stage", "top minus bottom [K]", "top minus bottom u [K]", "expansion [1/K]"]
    imposed = [heading, ["B1", "full", 5, 5, 1.2e-5], ["B1", "half", 5, 5, 1.2e-5]]
    plain = {"members": members, "gauges": gauges(("D", 3.0, "deflection", 0.02))}
    sure, unsure = (outlook_of(book_of, **plain, imposed=rows).foreseen[0].estimates[0] for rows in (None, imposed))
    assert sure.u is not None and unsure.u is not None
    assert unsure.u > 10 * sure.u


def test_without_u_nothing_is_promised(book_of: BookOf) -> None:
    found = outlook_of(book_of, gauges=gauges(("D", 3.0, "deflection", 0.05), ("E", 2.0, "deflection", "")))
    assert found.foreseen == ()
    assert "no u is given for E. Give u, plus or minus or resolution" in found.silent


def test_stages_that_only_serve_rules_add_nothing(book_of: BookOf) -> None:
    kept = [*STAGES, ["B1", "kept", "P", 1, "hold"]]
    table = gauges(("D", 3.0, "deflection", 0.05))
    first, second = (outlook_of(book_of, gauges=table, stages=stages).foreseen[0] for stages in (STAGES, kept))
    assert second.estimates[0].ratio_high == pytest.approx(first.estimates[0].ratio_high)
    (subject,) = observe(book_of(stages=[STAGES[0], STAGES[1]], gauges=table, readings=None))
    assert "determine nothing" in outlook(subject).silent
