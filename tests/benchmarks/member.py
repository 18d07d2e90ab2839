"""One member with many unknowns, against what a competent user would script: python -m tests.benchmarks.member.

Two spans, 20 gauges, 4 stages, EI by zone, a bearing and two restraints unknown. The other side is lmfit's own default
fit of a Hermite finite-element model, written by hand below, with elements of 0.2 m and with the longest that still
have nodes at every load, support and zone edge. All run in turn, several times; a table of ratios is printed.

The script by hand starts once, as fieldfit does in the first row; fieldfit itself starts five times where supports
are unknown, lest it stop at a lesser minimum.
"""

import tempfile
import time
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

import lmfit
import numpy as np

from fieldfit.fieldbook import read_book
from fieldfit.fit.design import Design, design_of
from fieldfit.fit.estimates import estimates_of
from fieldfit.fit.least_squares import Minimum, best_of, minimise
from fieldfit.fit.model import model_of
from fieldfit.fit.noise import noise_of
from fieldfit.fit.profile import Profile
from fieldfit.fit.starts import starts
from fieldfit.fit.unknowns import asked_unknowns
from fieldfit.fit.whitening import whitening_of
from fieldfit.observe import Subject, observe
from tests.simulate import EI, TWO_SPANS, Cause, Gauge, Truth, U, simulate

PLACES = np.linspace(0.8, 15.2, 20)
FINE, COARSE = 80, 40  # elements
RUNS = 15
U_READING = 0.1e-3
CASES = {"P": (4.0, 60e3), "Q": (12.0, 60e3), "R": (6.0, 50e3), "S": (10.0, 50e3)}
CAUSE = Cause(
    name="everything",
    length=16.0,
    supports=TWO_SPANS,
    loads={name: [load] for name, load in CASES.items()},
    stages={name: name for name in CASES},
    gauges=[Gauge(name=f"D{number}", at=float(at)) for number, at in enumerate(PLACES)],
    u={**U, "deflection": U_READING},
    zone=(6.4, 9.6),
    truths=[Truth(ratio=0.9, zone_ratio=0.7, bearing={"B": 30e6}, fixity={"A": 0.3, "C": 0.5})],
    unknowns=[
        ["EI", "", "", "", ""],
        ["EI", "soft", "", "", ""],
        ["bearing stiffness", "B", "", "", ""],
        ["rotational restraint", "A", "", "", ""],
        ["rotational restraint", "C", "", "", ""],
    ],
)


class ByHand:
    """A Hermite finite-element model with lmfit, as it is usually written: dense, differences for derivatives."""

    def __init__(self, subject: Subject, elements: int) -> None:
        self.elements = elements
        seen = subject.observations
        self.x = np.linspace(0.0, 16.0, elements + 1)
        self.node = np.round(seen.at / 16.0 * elements, 9)
        self.stage, self.measured = seen.stage, seen.value
        middle = (self.x[1:] + self.x[:-1]) / 2
        self.soft = (middle > 6.4) & (middle < 9.6)
        h = 16.0 / elements
        self.h = h
        self.k = np.array(
            [[12, 6 * h, -12, 6 * h], [6 * h, 4 * h * h, -6 * h, 2 * h * h], [-12, -6 * h, 12, -6 * h],
             [6 * h, 2 * h * h, -6 * h, 4 * h * h]]
        ) / h**3  # fmt: skip
        self.loads = np.zeros((2 * elements + 2, len(CASES)))
        for case, (at, force) in enumerate(CASES.values()):
            self.loads[2 * round(at / h), case] = -force

    def residual(self, given: lmfit.Parameters) -> np.ndarray:
        p = given.valuesdict()
        stiff = np.zeros((2 * self.elements + 2, 2 * self.elements + 2))
        for element, soft in enumerate(self.soft):
            at = slice(2 * element, 2 * element + 4)
            stiff[at, at] += (p["zone"] if soft else p["EI"]) * EI * self.k
        middle = 2 * round(8.0 / self.h)
        stiff[middle, middle] += 1.0 / (p["bearing"] * 8.0**3 / EI)
        for fixity, turn in ((p["A"], 1), (p["C"], 2 * self.elements + 1)):
            stiff[turn, turn] += 3 * EI / 8.0 * fixity / (1 - fixity)
        free = np.setdiff1d(np.arange(2 * self.elements + 2), [0, 2 * self.elements])
        u = np.zeros_like(self.loads)
        u[free] = np.linalg.solve(stiff[np.ix_(free, free)], self.loads[free])
        element = np.minimum(self.node.astype(int), self.elements - 1)
        t = self.node - element
        shape = np.stack(
            [1 - 3 * t**2 + 2 * t**3, self.h * t * (1 - t) ** 2, 3 * t**2 - 2 * t**3, self.h * t**2 * (t - 1)]
        )
        dofs = 2 * element + np.arange(4)[:, None]
        return (-(shape * u[dofs, self.stage]).sum(axis=0) - self.measured) / U_READING

    def fit(self) -> lmfit.minimizer.MinimizerResult:
        parameters = lmfit.Parameters()
        for name, value, low, high in (
            ("EI", 1.0, 0.01, 100.0), ("zone", 1.0, 0.01, 100.0), ("bearing", 0.01, 1e-9, 1.0), ("A", 0.1, 0.0, 0.999),
            ("C", 0.1, 0.0, 0.999),
        ):  # fmt: skip
            parameters.add(name, value=value, min=low, max=high)
        return lmfit.minimize(self.residual, parameters, scale_covar=False)


def in_turn(works: Mapping[str, Callable[[], object]]) -> tuple[dict[str, float], dict[str, Any]]:
    """Median seconds of each work over some rounds in which all have their turn, and what each came to last."""
    took: dict[str, list[float]] = {name: [] for name in works}
    results: dict[str, Any] = {}
    for _ in range(RUNS):
        for name, work in works.items():
            start = time.perf_counter()
            results[name] = work()
            took[name].append(time.perf_counter() - start)
    return {name: float(np.median(seconds)) for name, seconds in took.items()}, results


def main() -> None:
    """Print the table."""
    with tempfile.TemporaryDirectory() as folder:
        simulate(Path(folder) / "book", CAUSE, 1, seed=4)
        (subject,) = observe(read_book(Path(folder) / "book"))

    def design() -> Design:
        model = model_of(subject, asked_unknowns(subject))
        seen = subject.observations
        white = whitening_of(seen, np.ones(len(seen), dtype=bool), believed=True)
        return design_of(model, seen.value, white, ())

    def once() -> Minimum:
        made = design()
        return minimise(made.problem(), next(starts(made)))

    def often() -> Minimum:
        made = design()
        return minimise(made.problem(), best_of(made.problem(), starts(made)))

    made = design()
    found = once()
    noise = noise_of("given", found.sum_of_squares, found.degrees_of_freedom, 1.0)
    assert noise is not None
    profile = Profile(problem=made.problem(), minimum=found, noise=noise, readings=len(made.measured))
    seconds, results = in_turn(
        {
            "fit": once,
            "five starts": often,
            "profiles": lambda: estimates_of(subject, made, profile),
            "fine": ByHand(subject, FINE).fit,
            "coarse": ByHand(subject, COARSE).fit,
        }
    )
    u = np.sqrt(np.diag(found.covariance))
    for mesh in ("fine", "coarse"):
        values = np.array([results[mesh].params[name].value for name in ("EI", "zone", "bearing", "A", "C")])
        inward = np.concatenate([np.log(values[:2]), values[2:]])
        apart = np.max(np.abs(inward - found.unknowns) / u)
        print(f"{f'largest difference of the estimates, {mesh} mesh, in u':66} {apart:8.1e}")
    rows = (("fine", "fit"), ("coarse", "fit"), ("fine", "five starts"), ("profiles", "fit"))
    for over, under in rows:
        print(f"{f'{over} over {under}':66} {seconds[over] / seconds[under]:8.1f}")
    print(f"{'(fit, ms)':66} {1000 * seconds['fit']:8.1f}")


if __name__ == "__main__":
    main()
