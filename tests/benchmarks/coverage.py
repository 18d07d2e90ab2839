"""How often intervals hold: python -m tests.benchmarks.coverage [members a cause] [part of a cause's name].

Prints a table: for each cause and quantity the share of 95 % intervals that hold the truth (an open or bounded side
counts as holding), the bias in standard uncertainties, and the share of members where the quantity was determined.
"""

import sys
import tempfile
import time
from pathlib import Path

import numpy as np

from fieldfit.fieldbook import read_book
from fieldfit.fit import Estimate, reconcile_member
from fieldfit.observe import observe
from tests.simulate import CAUSES, Cause, simulate


def held(estimate: Estimate, truth: float) -> tuple[bool, float]:
    """Whether the interval holds the truth, and the error over u (NaN where there is no value)."""
    if estimate.quantity == "rotational restraint":
        low, high, value = estimate.fixity_low, estimate.fixity_high, estimate.fixity
    elif estimate.quantity == "EI":
        low, high, value = estimate.ratio_low, estimate.ratio_high, estimate.ratio
    else:
        low, high, value = estimate.low, estimate.high, estimate.value
    holds = (low is None or low <= truth * (1 + 1e-9) + 1e-12) and (high is None or truth * (1 - 1e-9) <= high + 1e-12)
    u = estimate.u if estimate.recorded is None or estimate.quantity != "EI" else (estimate.u or 0) / estimate.recorded
    plain = estimate.quantity not in ("rotational restraint", "bearing stiffness")
    return holds, (value - truth) / u if value is not None and u and plain else np.nan


def run(cause: Cause, members: int, seed: int) -> list[tuple[str, float, float, float]]:
    """Rows of the table for one cause."""
    with tempfile.TemporaryDirectory() as folder:
        truths = simulate(Path(folder) / "book", cause, members, seed)
        subjects = observe(read_book(Path(folder) / "book"))
    found = [reconcile_member(subject) for subject in subjects]
    rows = []
    for quantity, where, true in cause.targets:
        pairs = [
            (held(estimate, true(truth)), estimate)
            for one, truth in zip(found, truths, strict=True)
            for estimate in one.estimates
            if estimate.quantity == quantity and estimate.where == where
        ]
        covered = float(np.mean([pair[0][0] for pair in pairs]))
        errors = np.array([pair[0][1] for pair in pairs])
        bias = float(np.nanmean(errors)) if np.isfinite(errors).any() else np.nan
        known = float(np.mean([pair[1].determined == "yes" for pair in pairs]))
        rows.append((f"{quantity} {where}", covered, bias, known))
    return rows


def main() -> None:
    """Print the table."""
    members = int(sys.argv[1]) if len(sys.argv) > 1 else 1000
    wanted = sys.argv[2] if len(sys.argv) > 2 else ""
    print(f"{'cause':42} {'quantity':28} {'covered':>8} {'bias/u':>7} {'determined':>10} {'ms each':>8}")
    for number, cause in enumerate(CAUSES):
        if wanted not in cause.name:
            continue
        start = time.perf_counter()
        for quantity, covered, bias, known in run(cause, members, seed=100 + number):
            each = 1000 * (time.perf_counter() - start) / members
            print(f"{cause.name:42} {quantity:28} {covered:8.1%} {bias:7.2f} {known:10.0%} {each:8.1f}", flush=True)


if __name__ == "__main__":
    main()
