"""How often a plateau's 95 % interval holds the truth: python -m tests.benchmarks.repeats [runs], 2,000 if left out.

Readings are a first-order autoregression with the coefficient over each column. Beside fieldfit's interval stand
s/sqrt(n) and the one with the lag-1 estimate put in as if it were true.
"""

import sys

import numpy as np
from scipy import stats

from fieldfit.beam import Array
from fieldfit.observe.repeats import plateaus, u_of_means
from tests.observe.test_repeats import autoregression, covered

COEFFICIENTS = (0.0, 0.3, 0.5, 0.7, 0.8, 0.9)
COUNTS = (3, 5, 10, 20, 50, 100, 300, 1000)


def independent(values: Array) -> float:
    """Share of intervals by s/sqrt(n) that hold 0."""
    count = values.shape[1]
    reach = stats.t.ppf(0.975, count - 1) * values.std(axis=1, ddof=1) / np.sqrt(count)
    return float((np.abs(values.mean(axis=1)) <= reach).mean())


def plugged_in(values: Array) -> float:
    """Share of intervals with n_eff = n (1 - r)/(1 + r), r the lag-1 estimate, that hold 0."""
    count = values.shape[1]
    away = values - values.mean(axis=1, keepdims=True)
    r = np.clip((away[:, 1:] * away[:, :-1]).sum(axis=1) / (away**2).sum(axis=1), 0, 0.999)
    effective = np.maximum(count * (1 - r) / (1 + r), 2.0)
    reach = stats.t.ppf(0.975, effective - 1) * values.std(axis=1, ddof=1) / np.sqrt(effective)
    return float((np.abs(values.mean(axis=1)) <= reach).mean())


def half_width(values: Array) -> float:
    """Median half width over that of the known variance of the mean."""
    runs, count = values.shape
    found = plateaus(values.ravel(), np.arange(runs) * count)
    u, freedom = u_of_means(found, np.arange(runs))
    return float(np.median(stats.t.ppf(0.975, freedom) * u) / (1.96 * values.mean(axis=1).std()))


def main() -> None:
    runs = int(sys.argv[1]) if len(sys.argv) > 1 else 2000
    heading = "  ".join(f"{c:>6}" for c in COEFFICIENTS)
    print(f"{'readings':>8}  {'interval':12}  {heading}")
    for count in COUNTS:
        rng = np.random.default_rng(count)
        made = [autoregression(rng, c, runs, count) for c in COEFFICIENTS]
        for name, share in (("fieldfit", covered), ("lag 1", plugged_in), ("s/sqrt(n)", independent)):
            print(f"{count:>8}  {name:12}  " + "  ".join(f"{100 * share(values):5.1f}%" for values in made), flush=True)
        print(
            f"{count:>8}  {'half width':12}  " + "  ".join(f"{half_width(values):6.2f}" for values in made), flush=True
        )


if __name__ == "__main__":
    main()
