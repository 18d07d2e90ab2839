"""The beam model against general-purpose solvers of the same beam: python -m tests.benchmarks.beam.

A simple span under a uniform load, deflections at 20 stations; all timed in turn in one run, printed as ratios to the
single solve. The finite-element side is the Hermite model of tests/outside, assembled by scikit-fem, exact here.
"""

import time
from collections.abc import Callable

import numpy as np
from scipy.integrate import solve_bvp

from fieldfit.beam import (
    Loads,
    Members,
    Spread,
    integrate,
    loads,
    member,
    recorded,
    respond,
    solve,
    solve_with_gradient,
    stack,
    stack_loads,
)
from tests.outside import hermite

LENGTH, EI, INTENSITY, STATIONS = 7.2, 48.2e6, 12e3, 20
AT = np.linspace(0.0, LENGTH, STATIONS)


def simple_spans(count: int) -> tuple[Members, Loads, np.ndarray]:
    """So many members of slightly unlike lengths, with their loads and stations."""
    lengths = LENGTH * np.linspace(1.0, 1.5, count)
    members = [member(length=length, EI=EI) for length in lengths]
    given = [
        loads(one, spreads=[Spread(0.0, length, -INTENSITY)]) for one, length in zip(members, lengths, strict=True)
    ]
    return stack(members), stack_loads(given), lengths[:, None] * np.linspace(0.0, 1.0, STATIONS)


def by_elements() -> np.ndarray:
    """The same deflections by finite elements, assembly included."""
    beam = hermite.Beam(
        length=LENGTH,
        EI=EI,
        supports=[hermite.Support(0.0), hermite.Support(LENGTH)],
        spreads=[hermite.Spread(0.0, LENGTH, -INTENSITY)],
    )
    return hermite.solve(beam).deflection(AT)


def by_collocation() -> np.ndarray:
    """The same deflections as a boundary value problem, to the accuracy that solver reaches."""

    def slopes(_: np.ndarray, y: np.ndarray) -> np.ndarray:
        return np.stack([y[1], y[2] / EI, y[3], np.full_like(y[0], -INTENSITY)])

    def ends(left: np.ndarray, right: np.ndarray) -> np.ndarray:
        return np.array([left[0], right[0], left[2], right[2]])

    return solve_bvp(slopes, ends, AT, np.zeros((4, STATIONS)), tol=1e-8).sol(AT)[0]


def seconds(work: Callable[[], object], runs: int) -> float:
    """Median time of one run."""
    work()
    took = []
    for _ in range(runs):
        start = time.perf_counter()
        work()
        took.append(time.perf_counter() - start)
    return float(np.median(took))


def closed_form() -> np.ndarray:
    """The same deflections by the handbook: -w x (l3 - 2 l x2 + x3) / 24 EI."""
    return -INTENSITY * AT * (LENGTH**3 - 2 * LENGTH * AT**2 + AT**3) / (24 * EI)


def main() -> None:
    """Print the table."""
    sizes = {count: simple_spans(count) for count in (1, 100, 10_000)}
    areas, stiffness = integrate(*sizes[1]), recorded(sizes[1][0])
    single = seconds(lambda: respond(*sizes[1]), 200)
    rows = [("fieldfit, single", single)]
    rows += [
        (f"fieldfit, {count} stacked, a member", seconds(lambda s=s: respond(*s), 9) / count)
        for count, s in sizes.items()
        if count > 1
    ]
    rows += [
        ("fieldfit, areas kept, as in a fit", seconds(lambda: solve(areas, stiffness), 200)),
        ("  the same with its derivatives", seconds(lambda: solve_with_gradient(areas, stiffness), 200)),
        ("finite elements with assembly", seconds(by_elements, 20)),
        ("boundary value problem", seconds(by_collocation, 9)),
    ]
    found = {"fieldfit": respond(*sizes[1]).deflection, "elements": by_elements(), "collocation": by_collocation()}
    for name, deflections in found.items():
        off = np.abs(deflections - closed_form()).max() / np.abs(closed_form()).max()
        print(f"{name}: off the closed form by {off:.0e} of the largest deflection")
    print(f"{'':36} {'microseconds':>13} {'over single':>12}")
    for name, took in rows:
        print(f"{name:36} {1e6 * took:13.1f} {took / single:12.4f}")


if __name__ == "__main__":
    main()
