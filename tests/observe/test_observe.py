"""From a book to subjects: signs, loads by stage, uncertainty, ledger, and what is refused."""

from collections.abc import Callable

import numpy as np
import pytest

from fieldfit.beam import combine, respond
from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import Book
from fieldfit.observe import Subject, observe

BookOf = Callable[..., Book]
GAUGES = ["member", "gauge", "at [m]", "measures", "positive sense", "below neutral axis [mm]"]


def subject_of(book: Book) -> Subject:
    (subject,) = observe(book)
    return subject


def deflection_down(subject: Subject, stage: int, at: float) -> float:
    """Deflection (mm, down) of the recorded member in a stage."""
    loads = combine(subject.loads, subject.stages[stage].factors[None, None])
    return float(-1000 * respond(subject.member, loads, np.array([[at]])).deflection[0, 0, 0])


def test_the_smallest_book_is_a_simple_beam_with_a_stage_a_load_case(book_of: BookOf) -> None:
    subject = subject_of(book_of())
    assert subject.supports == ("A", "B")
    np.testing.assert_array_equal(subject.member.support_at, [[0.0, 6.0]])
    assert [stage.name for stage in subject.stages] == ["P"]
    assert deflection_down(subject, 0, 3.0) == pytest.approx(11.25)  # P l3 / 48 EI
    assert subject.zero is None


def test_loads_of_every_kind_act_downward(book_of: BookOf) -> None:
    loads = [
        [
            "member",
            "load case",
            "from [m]",
            "to [m]",
            "force [kN]",
            "intensity [kN/m]",
            "intensity end [kN/m]",
            "moment [kN m]",
        ],
        ["B1", "total spread", 0, 6, 60, "", "", ""],
        ["B1", "uniform", 0, 6, "", 10, "", ""],
        ["B1", "triangle", 0, 6, "", 0, 10, ""],
        ["B1", "couple", 0, "", "", "", "", 30],
    ]
    subject = subject_of(book_of(loads=loads, readings=_reading("uniform")))
    uniform = 5 * 10e3 * 6.0**4 / 384 / 20e6 * 1000
    assert deflection_down(subject, 0, 3.0) == pytest.approx(uniform)
    assert deflection_down(subject, 1, 3.0) == pytest.approx(uniform)
    assert deflection_down(subject, 2, 3.0) == pytest.approx(uniform / 2)
    # An anticlockwise couple at the left end lifts the span: c l2 / 16 EI at midspan (handbook).
    assert deflection_down(subject, 3, 3.0) == pytest.approx(-30e3 * 36 / 16 / 20e6 * 1000)


def _reading(stage: str) -> list[list[object]]:
    return [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], ["B1", stage, 3.0, 8.4, 0.1]]


def test_a_stage_adds_its_load_cases_with_factor_offset_and_share(book_of: BookOf) -> None:
    subject = subject_of(
        book_of(
            members=[["member", "length [m]", "EI [kN m2]", "load share"], ["B1", 6.0, 20000, 0.5]],
            loads=[
                ["member", "load case", "from [m]", "force [kN]"],
                ["B1", "axle", 1.0, 50],
                ["B1", "P", 3.0, 50],
            ],
            stages=[
                ["member", "stage", "load case", "factor", "offset [m]"],
                ["B1", "both", "axle", 1, 2.0],
                ["B1", "both", "P", 2, ""],
                ["B1", "gone", "axle", 1, 7.0],
            ],
            readings=_reading("both"),
        )
    )
    assert deflection_down(subject, 0, 3.0) == pytest.approx(0.5 * 3 * 11.25)
    assert deflection_down(subject, 1, 3.0) == pytest.approx(0.0, abs=1e-12)


def test_what_is_imposed_acts_in_its_stage(book_of: BookOf) -> None:
    subject = subject_of(
        book_of(
            members=[["member", "length [m]", "EI [kN m2]", "depth [mm]"], ["B1", 6.0, 20000, 400]],
            stages=[["member", "stage", "load case"], ["B1", "cool", "P"], ["B1", "warm", "P"], ["B1", "sunk", "P"]],
            imposed=[
                ["member", "stage", "support", "settlement [mm]", "top minus bottom [K]", "expansion [1/K]"],
                ["B1", "warm", "", "", 10, 12e-6],
                ["B1", "sunk", "B", 4, "", ""],
            ],
            readings=_reading("cool"),
        )
    )
    cool = deflection_down(subject, 0, 3.0)
    # A hot top hogs: alpha dT l2 / 8 h upward at midspan; a settlement of one end shows by half in the middle.
    assert deflection_down(subject, 1, 3.0) - cool == pytest.approx(-12e-6 * 10 * 36 / (8 * 0.4) * 1000)
    assert deflection_down(subject, 2, 3.0) - cool == pytest.approx(2.0)


def test_springs_are_read_as_fixity_and_flexibility(book_of: BookOf) -> None:
    supports = [
        [
            "member",
            "support",
            "at [m]",
            "vertical",
            "bearing stiffness [kN/mm]",
            "rotation",
            "rotational stiffness [kN m/rad]",
        ],
        ["B1", "left", 0, "rigid", "", "spring", 10000],
        ["B1", "right", 6, "spring", 25, "fixed", ""],
    ]
    member = subject_of(book_of(supports=supports)).member
    assert member.support_fixity[0] == pytest.approx([0.5, 1.0])  # r = 1/(1 + 3EI/(k l)), 3EI/l = 10 000 kN m
    assert member.support_flexibility[0] == pytest.approx([0.0, 1 / 25e6])


def test_u_is_the_root_of_squares_of_what_is_given_and_the_step(book_of: BookOf) -> None:
    readings = [
        ["member", "stage", "at [m]", "deflection [mm]", "u [mm]", "plus or minus [mm]", "resolution [mm]"],
        ["B1", "P", 2.0, 8.4, 0.1, "", 0.2],
        ["B1", "P", 3.0, 8.4, "", 0.3, ""],
        ["B1", "P", 4.0, 8.4, "", "", 0.6],
    ]
    seen = subject_of(book_of(readings=readings)).observations
    # JCGM 100:2008, F.2.2.1 and 4.3.7: step / sqrt 12, half width / sqrt 3
    np.testing.assert_allclose(seen.u * 1e3, [np.hypot(0.1, 0.057735), 0.173205, 0.173205], rtol=1e-5)
    assert list(seen.u_from) == ["given", "given", "resolution"]


def test_what_a_reading_says_of_its_uncertainty_comes_before_what_its_gauge_says(book_of: BookOf) -> None:
    gauges = [
        ["member", "gauge", "at [m]", "u [mm]", "plus or minus [mm]", "resolution [mm]"],
        ["B1", "D1", 2.0, 0.05, "", ""],
        ["B1", "D2", 3.0, "", 0.3, 0.2],
    ]
    readings = [
        ["member", "stage", "gauge", "deflection [mm]", "u [mm]", "plus or minus [mm]", "resolution [mm]"],
        ["B1", "P", "D1", 8.4, "", 1.0, ""],
        ["B1", "P2", "D1", 8.4, "", "", "", ""],
        ["B1", "P", "D2", 12.3, 0.05, "", "", ""],
        ["B1", "P2", "D2", 12.3, "", "", 0.6, ""],
    ]
    stages = [["member", "stage", "load case"], ["B1", "P", "P"], ["B1", "P2", "P"]]
    seen = subject_of(book_of(gauges=gauges, stages=stages, readings=readings)).observations
    known = [1 / 3**0.5, 0.05, (0.05**2 + 0.2**2 / 12) ** 0.5, (0.3**2 / 3 + 0.6**2 / 12) ** 0.5]
    assert seen.u * 1000 == pytest.approx(known)


LOADS_WITH_U = [
    "member", "load case", "from [m]", "to [m]", "force [kN]", "intensity [kN/m]", "intensity end [kN/m]", "u [%]",
]  # fmt: skip


@pytest.mark.parametrize(
    ("rows", "u"),
    [
        # A triangle is as uncertain as its u says, from whichever end it rises.
        ([[0, 6, "", 0, 30, 10]], 0.1),
        ([[0, 6, "", 30, 0, 10]], 0.1),
        ([[0, 6, "", -10, 20, 10]], 0.1),
        # 30 kN as a point and 30 kN as a triangle: 3 kN of 60.
        ([[3, "", 30, "", "", 10], [0, 6, "", 0, 10, ""]], 0.05),
        ([[3, "", 30, "", "", ""], [0, 6, "", 10, 0, 10]], 0.05),
        # -10 to 20 kN/m turns round at 2 m: 10 kN up and 40 kN down, beside 50 kN as a point.
        ([[3, "", 50, "", "", 10], [0, 6, "", -10, 20, ""]], 0.05),
        ([[3, "", 50, "", "", 10], [0, 6, "", 20, -10, 10]], 0.005**0.5),
        # Both even and trapezoidal: 24 and 36 kN.
        ([[0, 6, "", 4, "", 10], [0, 6, "", 3, 9, 5]], (2.4**2 + 1.8**2) ** 0.5 / 60),
    ],
)
def test_the_rows_of_a_load_case_are_weighed_by_what_they_carry(
    book_of: BookOf, rows: list[list[object]], u: float
) -> None:
    subject = subject_of(book_of(loads=[LOADS_WITH_U, *(["B1", "P", *row] for row in rows)]))
    assert subject.load_u["P"] == pytest.approx(u)


@pytest.mark.parametrize(("share", "u", "fraction"), [(0.25, 0.025, 0.1), ("", 0.05, 0.05), (0.5, "", 0.0)])
def test_the_uncertainty_of_a_share_is_that_of_the_share_itself(
    book_of: BookOf, share: object, u: object, fraction: float
) -> None:
    head = ["member", "length [m]", "EI [kN m2]", "load share", "load share u"]
    assert subject_of(book_of(members=[head, ["B1", 6.0, 20000, share, u]])).share_u == pytest.approx(fraction)


def test_every_reading_is_in_the_ledger_with_its_reason(book_of: BookOf) -> None:
    book = book_of(
        stages=[
            ["member", "stage", "load case", "role"],
            ["B1", "up", "P", "load"],
            ["B1", "left on", "P", "hold"],
            ["B1", "off", "", "unload"],
            ["B1", "after", "", "recovery"],
        ],
        readings=[
            ["member", "stage", "at [m]", "deflection [mm]", "u [mm]", "use"],
            ["B1", "up", 3.0, 11.0, 0.1, "yes"],
            ["B1", "left on", 3.0, 11.2, 0.1, "no"],
            ["B1", "off", 3.0, 0.4, 0.1, "yes"],
            ["B1", "after", 3.0, 0.2, 0.1, "yes"],
        ],
    )
    seen = subject_of(book).observations
    assert list(seen.used_for) == ["fit", "none", "rule", "rule"]
    assert list(seen.why) == ["", "set aside in the book (use: no)", "stage unload", "stage recovery"]


@pytest.mark.parametrize(
    ("measures", "sense", "sign", "lever"),
    [("deflection", "", -1, 1), ("deflection", "up", 1, 1), ("level", "", 1, 1), ("strain", "compression", -1, 0.2)],
)
def test_the_sense_of_a_gauge(book_of: BookOf, measures: str, sense: str, sign: int, lever: float) -> None:
    unit = {"deflection": "mm", "level": "m", "strain": "microstrain"}[measures]
    gauges = [[*GAUGES, f"u [{unit}]"], ["B1", "G", 2.5, measures, sense, 200 if measures == "strain" else "", 0.1]]
    readings = [["member", "stage", "gauge", f"{measures} [{unit}]"], ["B1", "P", "G", 5]]
    seen = subject_of(book_of(gauges=gauges, readings=readings)).observations
    assert (seen.sign[0], seen.lever[0]) == (sign, pytest.approx(lever))


def test_readings_on_a_jump_are_refused_with_their_row(book_of: BookOf) -> None:
    with pytest.raises(FieldBookError) as refused:
        observe(
            book_of(
                hinges=[["member", "at [m]"], ["B1", 4.0]],
                supports=[["member", "support", "at [m]"], ["B1", "A", 0], ["B1", "B", 3], ["B1", "C", 6]],
                loads=[["member", "load case", "from [m]", "moment [kN m]"], ["B1", "P", 2.0, 50]],
                readings=[
                    ["member", "stage", "at [m]", "rotation [mrad]", "curvature [1/km]", "u [mrad]", "u [1/km]"],
                    ["B1", "P", 4.0, 1.0, "", 0.1, ""],
                    ["B1", "P", 2.0, "", 1.0, "", 0.1],
                    ["B1", "P", 2.5, "", 1.0, "", 0.1],
                ],
            )
        )
    assert [(fault.table, fault.row, fault.column) for fault in refused.value.faults] == [
        ("readings", 2, "at"),
        ("readings", 3, "at"),
    ]


@pytest.mark.parametrize(
    ("rotation", "unknown", "refused"),
    [("", "rotational restraint", True), ("fixed", "bearing stiffness", True), ("", "bearing stiffness", False)],
)
@pytest.mark.parametrize("measures", ["curvature [1/km]", "strain [microstrain]"])
def test_a_gauge_on_a_support_that_may_be_restrained_is_refused(
    book_of: BookOf, measures: str, rotation: str, unknown: str, refused: bool
) -> None:
    kind, unit = measures.split(" ")
    book = book_of(
        supports=[
            ["member", "support", "at [m]", "rotation"],
            ["B1", "A", 0, ""],
            ["B1", "B", 3, rotation],
            ["B1", "C", 6, ""],
        ],
        loads=[["member", "load case", "from [m]", "force [kN]"], ["B1", "P", 2.0, 50]],
        gauges=[
            ["member", "gauge", "at [m]", "measures", "below neutral axis [mm]", f"u {unit}"],
            ["B1", "G", 3.0, kind, 200 if kind == "strain" else "", 0.1],
            ["B1", "H", 0.0, kind, 200 if kind == "strain" else "", 0.1],
        ],
        readings=[["member", "stage", "gauge", measures], ["B1", "P", "G", 1.0], ["B1", "P", "H", 1.0]],
        unknowns=[["member", "unknown", "where"], ["B1", "EI", ""], ["B1", unknown, "B"]],
    )
    if not refused:
        assert len(observe(book)) == 1
        return
    with pytest.raises(FieldBookError) as found:
        observe(book)
    assert [(fault.kind, fault.row) for fault in found.value.faults] == [("station on a jump", 2)]


def test_scatter_does_not_stand_in_where_some_readings_have_a_u(book_of: BookOf) -> None:
    readings = [
        ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"],
        ["B1", "P", 2.0, 8.4, 0.1],
        ["B1", "P", 3.0, 8.4, ""],
    ]
    with pytest.raises(FieldBookError, match="scatter can stand in only") as refused:
        observe(book_of(readings=readings))
    assert [fault.row for fault in refused.value.faults] == [3]


def few_of_many(book_of: BookOf, rows: list[list[object]]) -> Book:
    """A few readings of several members, each of another gauge and stage: most of what could be read is not."""
    return book_of(
        members=[["member", "length [m]", "EI [kN m2]"], *([f"B{n}", 6, 20000] for n in (1, 2, 3))],
        loads=[["member", "load case", "from [m]", "force [kN]"], ["*", "P", 3, 50]],
        stages=[["member", "stage", "load case", "factor"], *(["*", f"s{n}", "P", n] for n in range(1, 6))],
        readings=[["member", "stage", "gauge", "at [m]", "time", "deflection [mm]", "u [mm]"], *rows],
    )


FEW: list[list[object]] = [
    ["B1", "s1", "D1", 3, "2024-05-14T10:00", 11.3, 0.1],
    ["B1", "s1", "D1", 3, "2024-05-14T10:01", 11.5, 0.1],
    ["B2", "s3", "D2", 2, "2024-05-14T10:00", 21.0, 0.1],
    ["B3", "s5", "D3", 1, "2024-05-14T10:00", 17.0, 0.1],
]


def test_repeats_among_few_of_many_are_averaged(book_of: BookOf) -> None:
    seen = [subject.observations for subject in observe(few_of_many(book_of, FEW))]
    assert [one.count.tolist() for one in seen] == [[2.0], [1.0], [1.0]]
    assert seen[0].value == pytest.approx([11.4e-3])


def test_a_row_said_twice_among_few_of_many_is_refused(book_of: BookOf) -> None:
    with pytest.raises(FieldBookError) as refused:
        few_of_many(book_of, [*FEW, FEW[-1]])
    assert [(fault.kind, fault.row) for fault in refused.value.faults] == [("row twice", 6)]


@pytest.mark.parametrize(
    ("cycles", "purposes"),
    [
        (["", "", "", ""], ["fit", "fit", "fit", "fit"]),
        (["", "1", "", "2"], ["fit", "fit", "fit", "rule"]),
        (["1", "", "2", ""], ["fit", "fit", "rule", "rule"]),
    ],
)
def test_a_blank_cycle_is_that_of_the_stage_before(book_of: BookOf, cycles: list[str], purposes: list[str]) -> None:
    rows = [("z", "zero", 0.0), ("P1", "load", 1.0), ("z2", "zero", 0.0), ("P2", "load", 1.0)]
    stages = [["member", "stage", "load case", "factor", "role", "cycle"]]
    for (name, role, factor), cycle in zip(rows, cycles, strict=True):
        stages.append(["B1", name, "P" if factor else "", factor or "", role, cycle])
    readings = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]]
    readings += [["B1", name, 3.0, 11.25 * factor, 0.1] for name, _, factor in rows]
    (subject,) = observe(book_of(stages=stages, readings=readings))
    assert subject.observations.used_for.tolist() == purposes


def test_a_gauge_still_to_be_read_is_refused_on_a_jump(book_of: BookOf) -> None:
    gauges = [["member", "gauge", "at [m]", "measures", "u [mrad]"], ["B1", "R", 3.0, "rotation", 0.05]]
    fixed = [["member", "at [m]", "rotation"], ["B1", 0, "fixed"], ["B1", 6, "fixed"]]
    with pytest.raises(FieldBookError) as found:
        observe(book_of(hinges=[["member", "at [m]"], ["B1", 3.0]], supports=fixed, gauges=gauges, readings=None))
    assert [(fault.table, fault.row) for fault in found.value.faults] == [("gauges", 2)]
