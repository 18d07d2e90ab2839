"""Levelling: heights and their covariance against numpy's own least squares, and the level book as readings."""

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from fieldfit.fieldbook import Book
from fieldfit.observe import Levelled, Subject, observe
from fieldfit.observe.level_doubts import level_doubts
from fieldfit.observe.levelling import Adjusted, Misfit, Net, adjusted

BookOf = Callable[..., Book]
HEADINGS = ["member", "stage", "set-up", "sight", "point", "staff [m]", "distance [m]", "use"]


def random_net(seed: int) -> Net:
    """Twelve points seen from eight set-ups, five or more from each, one exact height and one uncertain."""
    random = np.random.default_rng(seed)
    height, line = random.normal(100, 2, 12), random.normal(102, 1, 8)
    pairs = [
        (set_up, point) for set_up in range(8) for point in {set_up, set_up + 4, *random.choice(12, 4, replace=False)}
    ]
    set_up, point = np.array(pairs).T
    u = random.uniform(1e-4, 5e-4, len(pairs))
    staff = line[set_up] - height[point] + u * random.normal(size=len(pairs))
    return Net(
        set_up=set_up,
        point=point,
        staff=staff,
        u=u,
        known=np.array([2, 7]),
        height=height[[2, 7]],
        height_u=np.array([0.0, 1e-3]),
    )


def by_numpy(net: Net) -> tuple[np.ndarray, np.ndarray]:
    """Heights and covariance by numpy's least squares of all rows, the exact height as a very heavy one."""
    count = len(net.staff)
    rows = np.zeros((count + 2, 20))
    rows[np.arange(count), net.set_up] = 1
    rows[np.arange(count), 8 + net.point] = -1
    rows[[count, count + 1], 8 + net.known] = 1
    u = np.concatenate([net.u, [1e-8, net.height_u[1]]])
    values, *_ = np.linalg.lstsq(rows / u[:, None], np.concatenate([net.staff, net.height]) / u, rcond=None)
    inverse = np.linalg.pinv(rows / u[:, None])
    return values[8:], (inverse @ inverse.T)[8:, 8:]


@pytest.mark.parametrize("seed", range(5))
def test_heights_and_covariance_are_those_of_numpys_least_squares(seed: int) -> None:
    net = random_net(seed)
    found, (height, covariance) = adjusted(net), by_numpy(net)
    np.testing.assert_allclose(found.height, height, atol=1e-8)  # m, heights of 100 m
    np.testing.assert_allclose(found.covariance, covariance, atol=1e-6 * covariance.max())
    (misfit,) = found.misfits
    assert misfit.spare == len(net.staff) + 1 - 8 - 11
    assert found.redundancy.sum() <= misfit.spare  # the uncertain height has the rest


def lines(drops: list[tuple[str, str, float, float]], known: dict[str, float]) -> tuple[list[str], Adjusted]:
    """Names and heights of the points of lines of levels."""
    names = list(dict.fromkeys(name for start, end, *_ in drops for name in (start, end)))
    return names, adjusted(lines_net(drops, known))


def lines_net(drops: list[tuple[str, str, float, float]], known: dict[str, float]) -> Net:
    """Lines of levels (from, to, rise, variance) as set-ups of two sights."""
    names = list(dict.fromkeys(name for start, end, *_ in drops for name in (start, end)))
    ends = [(number, names.index(name)) for number, line in enumerate(drops) for name in line[:2]]
    set_up, point = np.array(ends).T
    return Net(
        set_up=set_up,
        point=point,
        staff=np.array([reading for *_, rise, _ in drops for reading in (rise, 0.0)]),
        u=np.sqrt(np.repeat([variance / 2 for *_, variance in drops], 2)),
        known=np.array([names.index(name) for name in known]),
        height=np.array([*known.values()]),
        height_u=np.zeros(len(known)),
    )


NETWORK = [("X", "A", 5.10, 4.0), ("A", "Y", 2.34, 3.0), ("Y", "C", -1.25, 2.0), ("C", "X", -6.13, 3.0)]
NETWORK += [("A", "B", -0.68, 2.0), ("Y", "B", -3.00, 2.0), ("B", "C", 1.70, 2.0)]  # rise, length in miles


@pytest.mark.parametrize(
    ("weighted", "printed"),
    [(False, {"A": 105.141, "B": 104.483, "C": 106.188}), (True, {"A": 105.150, "B": 104.489, "C": 106.197})],
)
def test_a_published_network(weighted: bool, printed: dict[str, float]) -> None:
    """Wolf and Ghilani, Adjustment Computations, chapter on differential leveling, seven lines (from memory)."""
    drops = [(start, end, rise, length if weighted else 1.0) for start, end, rise, length in NETWORK]
    names, found = lines(drops, {"X": 100.00, "Y": 107.50})
    misfit = sum(found.misfits, Misfit())
    assert misfit.spare == 4
    for name, height in printed.items():
        assert found.height[names.index(name)] == pytest.approx(height, abs=6e-4)
    if not weighted:  # printed standard deviation of unit weight: 0.05
        assert np.sqrt(misfit.chi_square / misfit.spare) == pytest.approx(0.05, abs=5e-4)


def test_an_exact_height_parts_a_net_and_an_uncertain_one_joins_it() -> None:
    """Two points, each levelled twice from B; by hand 0.2 mm apart with u of 0.1 mm a line: 2 on one degree, and 8."""
    drops = [("B", "P", 1.0, 1e-8), ("B", "P", 1.0002, 1e-8), ("B", "Q", 2.0, 1e-8), ("B", "Q", 2.0004, 1e-8)]
    _, found = lines(drops, {"B": 10.0})
    assert [misfit.spare for misfit in found.misfits] == [1, 1]
    np.testing.assert_allclose([misfit.chi_square for misfit in found.misfits], [2.0, 8.0], rtol=1e-6)
    net = lines_net(drops, {"B": 10.0})
    (whole,) = adjusted(replace(net, height_u=np.array([1e-3]))).misfits
    assert whole.spare == 2
    assert whole.chi_square == pytest.approx(10.0, rel=1e-6)


def test_a_loop_spreads_its_misclosure_evenly_over_its_set_ups() -> None:
    """Standard practice: equal sights, four set-ups, 0.8 mm: 0.2 mm each, with the cumulative sum at the points."""
    drops = [("B", "P", 1.0, 1.0), ("P", "Q", 1.0, 1.0), ("Q", "R", -1.0, 1.0), ("R", "B", -0.9992, 1.0)]
    names, found = lines(drops, {"B": 10.0})
    heights = [found.height[names.index(name)] for name in "PQR"]
    np.testing.assert_allclose(heights, [10.9998, 11.9996, 10.9994], atol=1e-12)


def level_book(book_of: BookOf, rows: list[list[object]], **tables: object) -> tuple[Subject, Levelled]:
    """The simple book with three level points on it."""
    given = {
        "stages": [["member", "stage", "load case", "role"], ["B1", "zero", "", "zero"], ["B1", "P", "P", "load"]],
        "gauges": [
            ["member", "gauge", "at [m]", "measures", "positive sense"],
            ["B1", "L1", 1.5, "level", ""],
            ["B1", "L2", 3.0, "level", "down"],
            ["B1", "L3", 4.5, "level", ""],
        ],
        "levels": [HEADINGS, *rows],
        "levelling": [["u [mm]", "allowed per km [mm]"], [0.1, 4]],
        "benchmarks": [["benchmark", "height [m]"], ["BM", 50.0]],
        "readings": None,
        **tables,
    }
    (subject,) = observe(book_of(**given))
    assert subject.levelled is not None
    return subject, subject.levelled


def loop(stage: str, fall: float = 0.0, closing: float = 0.0) -> list[list[object]]:
    """A loop of two set-ups: L1 and L3 on its way, L2 a side shot; all points ``fall`` (m) lower."""
    return [
        ["", stage, "1", "backsight", "BM", 1.5, 20, ""],
        ["B1", stage, "1", "intermediate", "L2", 1.6 + fall, 20, ""],
        ["B1", stage, "1", "intermediate", "L3", 1.7 + fall, 20, ""],
        ["B1", stage, "1", "foresight", "L1", 1.4 + fall, 20, ""],
        ["B1", stage, "2", "backsight", "L1", 1.3 + fall, 20, ""],
        ["B1", stage, "2", "intermediate", "L3", 1.6 + fall, 20, ""],
        ["", stage, "2", "foresight", "BM", 1.4 - closing, 20, ""],
    ]


def test_levels_become_readings_with_their_covariance(book_of: BookOf) -> None:
    subject, found = level_book(book_of, [*loop("zero"), *loop("P", fall=0.010)])
    seen = subject.observations
    assert [*seen.gauge] == ["L2", "L3", "L1"] * 2
    assert {*seen.quantity} == {"level"}
    np.testing.assert_allclose(seen.value[:3], [-49.9, 49.8, 50.1])  # L2 counts down
    np.testing.assert_allclose(seen.value[3:] - seen.value[:3], [0.010, -0.010, -0.010])
    np.testing.assert_allclose(np.sqrt(np.diag(seen.covariance)), seen.u)
    assert np.all(np.abs(seen.covariance[:3, :3]) > 0)  # one line of sight
    np.testing.assert_allclose(seen.covariance[:3, 3:], 0.0, atol=1e-20)  # one exact benchmark parts the stages
    assert [*found.heights["covered"]] == [False, True, True] * 2
    assert len(found.sights) == 14
    assert found.sights["residual"].notna().all()


def test_a_gauge_that_counts_down_turns_its_covariances_too(book_of: BookOf) -> None:
    """L2 and L3 share the line of sight: their heights are positively correlated, down against up negatively."""
    subject, _ = level_book(book_of, [*loop("zero"), *loop("P")])
    assert subject.observations.covariance[0, 1] < 0 < subject.observations.covariance[1, 2]


def test_misclosure_is_held_against_c_root_k(book_of: BookOf) -> None:
    _, found = level_book(book_of, [*loop("zero"), *loop("P", closing=0.0014)])
    zero, loaded = found.runs
    assert (zero.start, zero.end, zero.set_ups, zero.length) == ("BM", "BM", 2, 80.0)
    assert zero.misclosure == pytest.approx(0.0, abs=1e-12)
    assert loaded.misclosure == pytest.approx(0.0014)
    assert loaded.allowed == pytest.approx(0.004 * np.sqrt(0.080))  # 4 mm sqrt(0.08 km) = 1.13 mm
    assert (zero.is_beyond, loaded.is_beyond) == (False, True)


def test_the_smaller_allowance_holds_and_lines_close_on_a_second_benchmark(book_of: BookOf) -> None:
    rows = [
        ["", "P", "1", "backsight", "BM", 1.5, 20, ""],
        ["B1", "P", "1", "foresight", "L1", 1.4, 20, ""],
        ["B1", "P", "2", "backsight", "L1", 1.3, 20, ""],
        ["", "P", "2", "foresight", "BM2", 1.2, 20, ""],
    ]
    quality = [["u [mm]", "allowed per km [mm]", "allowed per set-up [mm]"], [0.1, 10, 0.5]]
    marks = [["benchmark", "height [m]"], ["BM", 50.0], ["BM2", 50.2011]]
    _, found = level_book(book_of, rows, levelling=quality, benchmarks=marks)
    (run,) = found.runs
    assert run.misclosure == pytest.approx(-0.0011)
    assert run.allowed == pytest.approx(0.0005 * np.sqrt(2))


def test_an_open_run_has_no_misclosure_and_checks_nothing(book_of: BookOf) -> None:
    _, found = level_book(book_of, loop("P")[:4])
    (run,) = found.runs
    assert np.isnan(run.misclosure)
    assert not run.is_beyond
    assert not found.heights["covered"].any()
    assert found.misfit.spare == 0


def test_a_run_set_aside_stays_in_the_ledger(book_of: BookOf) -> None:
    bad = [[*row[:2], f"bad {row[2]}", *row[3:7], "no"] for row in loop("P", closing=0.003)]
    _, found = level_book(book_of, [*bad, *loop("P")])
    assert [run.used for run in found.runs] == [False, True]
    assert found.runs[0].misclosure == pytest.approx(0.003)
    assert found.sights["residual"].isna().sum() == 7
    assert len(found.sights) == 14


def test_u_per_km_grows_with_the_length_of_the_sight(book_of: BookOf) -> None:
    """0.3 mm a km of double run is 0.42 mm single, over two sights of 20 m a set-up: 0.06 mm a sight."""
    quality = [["stage", "u [mm]", "u per km [mm]"], ["", "", 0.3], ["P", 0.08, 0.3]]
    _, found = level_book(book_of, [*loop("zero"), *loop("P")], levelling=quality)
    u = found.sights["u"].to_numpy()
    np.testing.assert_allclose(u[:7], 0.3e-3 * np.sqrt(2 * 0.020))
    np.testing.assert_allclose(u[7:], np.hypot(0.08e-3, 0.3e-3 * np.sqrt(2 * 0.020)))


def test_benchmarks_without_height_are_one_in_all_stages(book_of: BookOf) -> None:
    """BM2 ties the stages: its height is found once, so that a stage closed on it alone knows its error."""
    marks = [["benchmark", "height [m]"], ["BM", 50.0], ["BM2", ""]]
    second = ["", "zero", "2", "intermediate", "BM2", 1.0, 20, ""]
    only = [["", "P", "1", "backsight", "BM2", 1.2, 20, ""], ["B1", "P", "1", "foresight", "L1", 1.51, 20, ""]]
    subject, _ = level_book(book_of, [*loop("zero")[:-1], second, loop("zero")[-1], *only], benchmarks=marks)
    seen = subject.observations
    assert seen.value[-1] == pytest.approx(50.4 + 1.2 - 1.51)
    assert seen.covariance[-1, 0] != 0


def test_what_the_level_book_leaves_unchecked_is_said(book_of: BookOf) -> None:
    subject, _ = level_book(book_of, [*loop("zero"), *loop("P", closing=0.0014)])
    beyond, side, disagree = level_doubts(subject.levelled, "B1")
    assert beyond == (
        "Stage P: the levels from BM to BM miss their closure by 1.24 times what is allowed. Level it again."
    )
    assert side.startswith("L2 was levelled by side shots")
    assert "disagree among themselves" in disagree
    assert level_doubts(subject.levelled, "another member") == ()
    subject, _ = level_book(book_of, loop("P")[:4])
    (open_run,) = level_doubts(subject.levelled, "B1")
    assert open_run == "Stage P: a run of levels ends on no known height, so that nothing checks it."


def two_members(book_of: BookOf, rows: list[list[object]], **tables: object) -> tuple[Subject, Subject]:
    """The simple book twice, a level point L at midspan of each."""
    members = [["member", "length [m]", "EI [kN m2]"], ["B1", 6.0, 20000], ["B2", 6.0, 20000]]
    given = {
        "members": members,
        "loads": [["member", "load case", "from [m]", "force [kN]"], ["*", "P", 3.0, 50]],
        "stages": [["member", "stage", "load case", "role"], ["*", "zero", "", "zero"], ["*", "P", "P", "load"]],
        "gauges": [["member", "gauge", "at [m]", "measures"], ["*", "L", 3.0, "level"]],
        "levels": [HEADINGS, *rows],
        "levelling": [["u [mm]", "allowed per set-up [mm]"], [0.3, 2]],
        "benchmarks": [["benchmark", "height [m]"], ["BM", 50.0], ["BM2", 50.7]],
        "readings": None,
        **tables,
    }
    first, second = observe(book_of(**given))
    return first, second


def through(member: str, stage: str, misread: float = 0.0) -> list[list[object]]:
    """A set-up of its own for each member, its point between the benchmarks; the foresight misread."""
    return [
        ["", stage, f"at {member}", "backsight", "BM", 1.5, 20, ""],
        [member, stage, f"at {member}", "intermediate", "L", 1.2, 20, ""],
        ["", stage, f"at {member}", "foresight", "BM2", 0.8 + misread, 20, ""],
    ]


def test_what_went_wrong_at_one_member_is_not_told_of_another(book_of: BookOf) -> None:
    """Both are levelled in the same stages from the same exact benchmarks; through those no error passes."""
    rows = [*through("B1", "zero"), *through("B2", "zero"), *through("B1", "P", misread=0.030), *through("B2", "P")]
    first, second = two_members(book_of, rows)
    beyond, _side, disagree = level_doubts(first.levelled, "B1")
    assert beyond.startswith("Stage P: the levels from BM to BM2 miss their closure by 15.00 times")  # 30 mm of 2
    assert disagree.startswith("The levels disagree")
    (side,) = level_doubts(second.levelled, "B2")
    assert side.startswith("L was levelled by side shots")


def test_an_uncertain_benchmark_passes_a_disagreement_on(book_of: BookOf) -> None:
    rows = [*through("B1", "zero"), *through("B2", "zero"), *through("B1", "P", misread=0.030), *through("B2", "P")]
    marks = [["benchmark", "height [m]", "u [mm]"], ["BM", 50.0, ""], ["BM2", 50.7, 1]]
    _, second = two_members(book_of, rows, benchmarks=marks)
    assert level_doubts(second.levelled, "B2")[-1].startswith("The levels disagree")


def test_a_check_of_the_benchmarks_alone_is_told_to_all(book_of: BookOf) -> None:
    check = [["", "P", "c", "backsight", "BM", 1.5, 20, ""], ["", "P", "c", "foresight", "BM2", 0.81, 20, ""]]
    rows = [row for stage in ("zero", "P") for member in ("B1", "B2") for row in through(member, stage)]
    for subject in two_members(book_of, [*rows, *check]):
        beyond, _side = level_doubts(subject.levelled, subject.name)
        assert beyond.startswith("Stage P: the levels from BM to BM2 miss their closure by 5.00 times")
