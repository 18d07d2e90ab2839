"""How often intervals hold: python -m tests.benchmarks.coverage [members a cause] [part of a cause's name].

Prints a table: for each cause and quantity the share of 95 % intervals that hold the truth (an open or bounded side
counts as holding), the bias of the best fit in standard uncertainties, and the share of members where the quantity was
determined.

Bias is counted in the number that is fitted (logarithm of an EI ratio, fixity, flexibility), over all members, whether
the quantity was determined or not: to be determined is itself a matter of the noise. It is counted over the whole
cause, then apart where no restraint or bearing that is asked for truly stands at a bound (pinned, fixed, rigid) and
where one does, as no best fit goes beyond. Each time it is given as the mean error and as the median error: of an
estimate that often stands on a bound the median says whether it is as often too high as too low.
"""

import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.fieldbook import read_book
from fieldfit.fit import Estimate, Reconciliation, reconcile_member
from fieldfit.observe import observe
from tests.simulate import CAUSES, Cause, Truth, simulate


class Bias(NamedTuple):
    """Error of best fits over u, of all members, of those with truths inside their bounds and at one; NaN for none."""

    whole: float
    inside: float
    at_bound: float


class Row(NamedTuple):
    """One quantity of a cause: shares of members, and the mean and the median error of the best fit."""

    quantity: str
    covered: float
    mean: Bias
    median: Bias
    determined: float


def holds(estimate: Estimate, truth: float) -> bool:
    """Whether the interval holds the truth."""
    kind = {"rotational restraint": "fixity_", "EI": "ratio_"}.get(estimate.quantity, "")
    low, high = getattr(estimate, f"{kind}low"), getattr(estimate, f"{kind}high")
    return (low is None or low <= truth * (1 + 1e-9) + 1e-12) and (high is None or truth * (1 - 1e-9) <= high + 1e-12)


def error(found: Reconciliation, estimate: Estimate, truth: float) -> float:
    """Error of the best fit over its standard uncertainty, in the number that is fitted."""
    if estimate.number is None or found.profile is None:
        return np.nan if estimate.value is None or not estimate.u else (estimate.value - truth) / estimate.u
    fitted = {"EI": np.log, "bearing stiffness": lambda stiffness: 1.0 / (stiffness * estimate.unit)}
    minimum, own = found.profile.minimum, fitted.get(estimate.quantity, float)(truth)
    u = np.sqrt(found.profile.noise.variance * minimum.covariance[estimate.number, estimate.number])
    return float((minimum.unknowns[estimate.number] - own) / u) if 0 < u < np.inf else np.nan


def at_bound(cause: Cause, truth: Truth) -> bool:
    """Whether a restraint or bearing that is asked for is truly pinned, fixed or rigid."""
    asked = [(str(row[0]), str(row[1])) for row in cause.unknowns]
    restraints = [truth.fixity.get(where, 0.0) for quantity, where in asked if quantity == "rotational restraint"]
    bearings = [truth.bearing.get(where, np.inf) for quantity, where in asked if quantity == "bearing stiffness"]
    return any(fixity in (0.0, 1.0) for fixity in restraints) or np.inf in bearings


def run(cause: Cause, members: int, seed: int) -> list[Row]:
    """Rows of the table for one cause."""
    with tempfile.TemporaryDirectory() as folder:
        truths = simulate(Path(folder) / "book", cause, members, seed)
        subjects = observe(read_book(Path(folder) / "book"))
    found = [reconcile_member(subject) for subject in subjects]
    bounded = np.array([at_bound(cause, truth) for truth in truths])
    rows = []
    for quantity, where, true in cause.targets:
        estimates = [next(e for e in one.estimates if (e.quantity, e.where) == (quantity, where)) for one in found]
        values = [true(truth) for truth in truths]
        errors = np.array([error(*each) for each in zip(found, estimates, values, strict=True)])
        rows.append(
            Row(
                quantity=f"{quantity} {where}",
                covered=float(np.mean([holds(*each) for each in zip(estimates, values, strict=True)])),
                mean=_bias(np.mean, errors, bounded),
                median=_bias(np.median, errors, bounded),
                determined=float(np.mean([estimate.determined == "yes" for estimate in estimates])),
            )
        )
    return rows


def _bias(middle: Callable[..., Any], errors: NDArray[np.float64], bounded: NDArray[np.bool_]) -> Bias:
    known = np.isfinite(errors)
    parts = (errors[known & part] for part in (known, ~bounded, bounded))
    return Bias(*(float(middle(part)) if part.size else np.nan for part in parts))


def main() -> None:
    """Print the table."""
    members = int(sys.argv[1]) if len(sys.argv) > 1 else 1000
    wanted = sys.argv[2] if len(sys.argv) > 2 else ""
    parts = f"{'whole':>7} {'inside':>7} {'bound':>7}"
    print(f"{'':70} {'':8} {'mean error over u':^23} {'median error over u':^23}")
    print(f"{'cause':42} {'quantity':28} {'covered':>8} {parts} {parts} {'determined':>10} {'ms each':>8}")
    for number, cause in enumerate(CAUSES):
        if wanted not in cause.name:
            continue
        start = time.perf_counter()
        for row in run(cause, members, seed=100 + number):
            each = 1000 * (time.perf_counter() - start) / members
            bias = " ".join(f"{error:7.2f}" for error in (*row.mean, *row.median))
            words = f"{row.covered:8.1%} {bias} {row.determined:10.0%} {each:8.1f}"
            print(f"{cause.name:42} {row.quantity:28} {words}", flush=True)


if __name__ == "__main__":
    main()
