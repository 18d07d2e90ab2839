"""The beam model against general-purpose solvers of the same beam: python tests/benchmarks/beam.py.

A simple span under a uniform load, deflections at 20 stations; all timed in turn in one run, printed as ratios to the
single solve. The finite-element side is the Hermite model of tests/outside, assembled by scikit-fem, exact here.
"""

import time
from collections.abc import Callable

import numpy as np
from scipy.integrate import solve_bvp

from fieldfit.beam import Loads, Members, Spread, loads, member, respond, stack, stack_loads
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


def main() -> None:
    """Print the table."""
    exact = -5 * INTENSITY * LENGTH**4 / 384 / EI
    sizes = {count: simple_spans(count) for count in (1, 100, 10_000)}
    single = seconds(lambda: respond(*sizes[1]), 200)
    rows = [
        (f"fieldfit, {count} stacked, a member", seconds(lambda s=s: respond(*s), 9) / count)
        for count, s in sizes.items()
    ]
    rows += [
        ("finite elements with assembly", seconds(by_elements, 20)),
        ("boundary value problem", seconds(by_collocation, 9)),
    ]
    middle = [respond(*sizes[1]).deflection.min(), by_elements().min(), by_collocation().min()]
    print("midspan over closed form, nearest station:", *(f"{value / exact:.6f}" for value in middle))
    print(f"{'':36} {'microseconds':>13} {'over single':>12}")
    for name, took in [("fieldfit, single", single), *rows]:
        print(f"{name:36} {1e6 * took:13.1f} {took / single:12.4f}")


if __name__ == "__main__":
    main()
