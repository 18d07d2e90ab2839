"""What a book imposes and asks for at once: the unknown is the whole of it, and creep leaves it alone."""

from collections.abc import Callable

import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import Estimate, Reconciliation, reconcile_member
from fieldfit.observe import observe

BookOf = Callable[..., Book]
LENGTH, DEPTH, ALPHA = 8.0, 0.5, 10e-6  # m, m, 1/K
MEMBERS = [["member", "length [m]", "EI [kN m2]", "depth [mm]"], ["B1", LENGTH, 40000, 1000 * DEPTH]]
LOADS = [["member", "load case", "from [m]", "force [kN]"], ["B1", "P", 4.0, 60]]
BENT = 60 * LENGTH**3 / 48 / 40000 * 1000  # mm at midspan: P l3 / 48 EI
SHAPE = {2.0: 11 / 16, 4.0: 1.0, 6.0: 11 / 16}  # of it, by station
READINGS = ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]
UNKNOWNS = ["member", "unknown", "where", "stage", "low [mm]", "high [mm]", "expected [mm]", "expected u [mm]"]
EI_ROW = ["B1", "EI", "", "", "", "", "", ""]
SETTLED = ["member", "stage", "support", "settlement [mm]"]
STAGES = ["member", "stage", "load case", "role"]


def fitted(book: Book) -> Reconciliation:
    (subject,) = observe(book)
    return reconcile_member(subject)


def estimate(found: Reconciliation, quantity: str, stage: str | None = None) -> Estimate:
    (one,) = [e for e in found.estimates if e.quantity == quantity and e.stage == stage]
    return one


def sunk(stage: str, settlement: float, u: float = 0.1, stations: tuple[float, ...] = (2, 4, 6, 8)) -> list[object]:
    """Deflections (mm) under P where support B has settled by so much (mm): half of it shows at midspan."""
    return [["B1", stage, x, BENT * SHAPE.get(x, 0.0) + settlement * x / LENGTH, u] for x in stations]


@pytest.mark.parametrize(
    ("imposed", "moved"),
    [
        ([SETTLED, ["B1", "late", "B", 10]], {x: 10 * x / LENGTH for x in SHAPE}),
        (
            [["member", "stage", "top minus bottom [K]", "expansion [1/K]"], ["B1", "late", 15, ALPHA]],
            {x: -ALPHA * 15 / DEPTH * x * (LENGTH - x) / 2 * 1000 for x in SHAPE},
        ),
        ([["member", "stage", "curvature [1/km]"], ["B1", "", 2]], {x: 2 * x * (LENGTH - x) / 2 for x in SHAPE}),
    ],
)
def test_creep_multiplies_what_loads_do_and_nothing_that_is_imposed(
    book_of: BookOf, imposed: list[list[object]], moved: dict[float, float]
) -> None:
    """A simple beam: (1 + creep) times the elastic deflection, and the imposed movement once."""
    everywhere = imposed[1][1] == ""
    rows = [["B1", "P", x, BENT * share + moved[x] * everywhere, 0.1] for x, share in SHAPE.items()]
    rows += [["B1", "late", x, 1.5 * BENT * share + moved[x], 0.1] for x, share in SHAPE.items()]
    unknowns = [["member", "unknown", "stage"], ["B1", "EI", ""], ["B1", "creep factor", "late"]]
    stages = [STAGES, ["B1", "P", "P", "load"], ["B1", "late", "P", "load"]]
    tables = {"members": MEMBERS, "loads": LOADS, "stages": stages, "imposed": imposed, "unknowns": unknowns}
    found = fitted(book_of(**tables, readings=[READINGS, *rows]))
    assert estimate(found, "EI").ratio == pytest.approx(1.0, rel=1e-5)
    assert estimate(found, "creep factor", "late").value == pytest.approx(0.5, rel=1e-5)


def settlement_book(book_of: BookOf, row: list[object], readings: list[object]) -> Book:
    """5 mm imposed at B, and its settlement asked for with a low, high, expected and expected u (mm)."""
    unknowns = [UNKNOWNS, EI_ROW, ["B1", "settlement", "B", "P", *row]]
    tables = {"members": MEMBERS, "loads": LOADS, "imposed": [SETTLED, ["B1", "P", "B", 5]], "unknowns": unknowns}
    return book_of(**tables, readings=[READINGS, *readings])


def test_a_settlement_imposed_and_asked_for_is_found_as_a_whole(book_of: BookOf) -> None:
    found = fitted(settlement_book(book_of, ["", "", "", ""], sunk("P", 7.0)))
    settled = estimate(found, "settlement", "P")
    assert settled.value == pytest.approx(7e-3, rel=1e-6)
    assert settled.recorded == pytest.approx(5e-3)
    assert estimate(found, "EI").ratio == pytest.approx(1.0, rel=1e-6)
    assert found.as_recorded[-1] * 1000 == pytest.approx(5.0)


def test_what_is_expected_of_a_settlement_is_expected_of_the_whole(book_of: BookOf) -> None:
    """5 +- 0.5 mm expected and 7 +- 0.5 mm read at the support itself: 6 mm, with u 0.5/sqrt 2."""
    readings = sunk("P", 7.0, u=0.5, stations=(4, 8))
    settled = estimate(fitted(settlement_book(book_of, ["", "", 5, 0.5], readings)), "settlement", "P")
    assert settled.value == pytest.approx(6e-3, rel=1e-4)
    assert settled.u == pytest.approx(0.5e-3 / 2**0.5, rel=1e-3)


def test_the_bounds_of_a_settlement_are_those_of_the_whole(book_of: BookOf) -> None:
    free = estimate(fitted(settlement_book(book_of, [6, 8, "", ""], sunk("P", 7.0))), "settlement", "P")
    assert free.value == pytest.approx(7e-3, rel=1e-6)
    held = estimate(fitted(settlement_book(book_of, ["", 6, "", ""], sunk("P", 7.0))), "settlement", "P")
    assert held.high == pytest.approx(6e-3)
    assert held.high_ends == "bound"


def test_what_is_imposed_in_one_stage_is_not_in_the_settlement_of_another(book_of: BookOf) -> None:
    unknowns = [["member", "unknown", "where", "stage"], ["B1", "EI", "", ""]]
    unknowns += [["B1", "settlement", "B", stage] for stage in ("P", "Q")]
    stages = [STAGES, *(["B1", stage, "P", "load"] for stage in ("P", "Q"))]
    tables = {"members": MEMBERS, "loads": LOADS, "stages": stages, "unknowns": unknowns}
    rows = [*sunk("P", 7.0), *sunk("Q", 2.0)]
    found = fitted(book_of(**tables, imposed=[SETTLED, ["B1", "P", "B", 5]], readings=[READINGS, *rows]))
    one, other = estimate(found, "settlement", "P"), estimate(found, "settlement", "Q")
    assert (one.value, other.value) == (pytest.approx(7e-3, rel=1e-5), pytest.approx(2e-3, rel=1e-5))
    assert (one.recorded, other.recorded) == (pytest.approx(5e-3), 0.0)


@pytest.mark.parametrize("u", ["", 2])
def test_a_temperature_curvature_imposed_and_asked_for_is_found_as_a_whole(book_of: BookOf, u: object) -> None:
    """Hot top by 8 K on record, 10 K in truth: -alpha dT / h, hogging, and no difference beside it."""
    head = ["member", "stage", "top minus bottom [K]", "top minus bottom u [K]", "expansion [1/K]"]
    true = -ALPHA * 10 / DEPTH
    rows = [["B1", "P", x, BENT * share + true * x * (LENGTH - x) / 2 * 1000, 0.05] for x, share in SHAPE.items()]
    unknowns = [["member", "unknown", "stage"], ["B1", "EI", ""], ["B1", "temperature curvature", "P"]]
    found = fitted(
        book_of(
            members=MEMBERS,
            loads=LOADS,
            imposed=[head, ["B1", "P", 8, u, ALPHA]],
            unknowns=unknowns,
            readings=[READINGS, *rows],
        )
    )
    assert [one.quantity for one in found.estimates] == ["EI", "temperature curvature"]
    curved = found.estimates[1]
    assert curved.value == pytest.approx(true, rel=1e-5)
    assert curved.recorded == pytest.approx(-ALPHA * 8 / DEPTH)
    assert "temperature difference over the depth was taken as exact" not in " ".join(found.warnings)


def test_a_curvature_imposed_on_a_part_stays_beside_that_of_the_whole(book_of: BookOf) -> None:
    """The left half bent by 2/km: by unit loads half of what the whole would do at midspan, two thirds at 2 m."""
    part = {2.0: 2 / 3, 4.0: 1 / 2, 6.0: 1 / 3}
    rows = [
        ["B1", "P", x, BENT * share + (2 * part[x] + 1.5) * x * (LENGTH - x) / 2, 0.05] for x, share in SHAPE.items()
    ]
    found = fitted(
        book_of(
            members=MEMBERS,
            loads=LOADS,
            imposed=[["member", "stage", "from [m]", "to [m]", "curvature [1/km]"], ["B1", "P", 0, 4, 2]],
            unknowns=[["member", "unknown", "stage"], ["B1", "EI", ""], ["B1", "temperature curvature", "P"]],
            readings=[READINGS, *rows],
        )
    )
    curved = estimate(found, "temperature curvature", "P")
    assert curved.value == pytest.approx(1.5e-3, rel=1e-5)
    assert curved.recorded == 0.0


def test_recorded_is_what_the_book_says_of_a_gauge_and_nothing_of_a_camber(book_of: BookOf) -> None:
    gauges = [
        ["member", "gauge", "at [m]", "u [mm]", "temperature coefficient [mm/K]", "temperature coefficient u [mm/K]"],
        ["B1", "D1", 4.0, 0.1, 0.02, 0.005],
    ]
    rows = [["B1", "zero", "D1", 0.0, 10], ["B1", "P", "D1", BENT + 0.2, 20]]
    warm = fitted(
        book_of(
            members=MEMBERS,
            loads=LOADS,
            stages=[STAGES, ["B1", "zero", "", "zero"], ["B1", "P", "P", "load"]],
            gauges=gauges,
            readings=[["member", "stage", "gauge", "deflection [mm]", "temperature [degC]"], *rows],
        )
    )
    assert estimate(warm, "temperature coefficient").recorded == pytest.approx(0.02e-3)
    heights = [["B1", "P", x, 10 - y / 1000, 0.2] for x, y in ((0, 0), (2, 11 / 16 * BENT), (4, BENT), (8, 0))]
    built = fitted(
        book_of(
            members=MEMBERS,
            loads=LOADS,
            unknowns=[
                ["member", "unknown", "where", "expected [mm]", "expected u [mm]"],
                ["B1", "EI", "", "", ""],
                ["B1", "camber", "1", 12, 2],
            ],
            readings=[["member", "stage", "at [m]", "level [m]", "u [mm]"], *heights],
        )
    )
    assert estimate(built, "camber").recorded is None
