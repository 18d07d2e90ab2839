"""Threshold: how far a profile may rise where bounds are near.

Away from bounds the rise of the sum of squares at the truth follows chi-square with one degree of freedom. Near a bound
it does not: the best fit cannot go beyond, so that the usual 3.84 covers too seldom, or too often. There the 95 % point
is taken from the same statistic in the linearised problem with its bounds, over a fixed set of quasi-random draws.
"""

from itertools import product

import numpy as np
from scipy import stats
from scipy.stats import qmc

from fieldfit.beam import Array, Flags

__all__ = ["NEAR", "bounded_drop", "near_bounds"]

NEAR = 3.0  # standard uncertainties within which a bound is felt
DRAWS = 12  # powers of two
SEED = 20240229


def near_bounds(values: Array, u: Array, lower: Array, upper: Array) -> Flags:
    """Which unknowns (p,) lie within reach of one of their bounds."""
    return (values - lower < NEAR * u) | (upper - values < NEAR * u)


def bounded_drop(
    triangle: Array, values: Array, bounds: tuple[Array, Array], which: int, level: float, spare: float | None
) -> float:
    """Point of ``level`` of the rise at the truth, were the truth at ``values`` (p,).

    ``triangle`` (p, p) is R of the QR of the Jacobian over the standard deviation of a residual; ``spare`` are the
    degrees of freedom of that deviation, None where it is known. Only the nearest bound of each unknown is minded.
    """
    noise = _draws(len(values) + (spare is not None))
    lower, upper = bounds
    side = np.where(values - lower < upper - values, -1.0, 1.0)
    room = np.where(side < 0, values - lower, upper - values)
    near = room < (NEAR + 1) * np.linalg.norm(np.linalg.pinv(triangle), axis=1)
    held = np.arange(len(values)) == which
    draws = noise[:, : len(values)]
    rise = _least(triangle, draws, room, side, near, held) - _least(triangle, draws, room, side, near, held & False)
    if spare is not None:
        rise /= stats.chi2.ppf(stats.norm.cdf(noise[:, -1]), spare) / spare
    return float(np.quantile(rise, level))


def _draws(width: int) -> Array:
    """Standard normal quasi-random draws (2**DRAWS, width), the same at every call."""
    return np.asarray(qmc.MultivariateNormalQMC(np.zeros(width), rng=SEED).random(2**DRAWS))


def _least(triangle: Array, draws: Array, room: Array, side: Array, near: Flags, held: Flags) -> Array:
    """Least |R d - z|2 for each draw z, over steps d from the truth that keep to the near bounds; ``held`` stay.

    A bound is ``room`` away to its ``side``. The problem is convex in a box, so its answer is the least among those
    choices of unknowns on their bounds whose other unknowns keep within theirs.
    """
    least = np.full(len(draws), np.inf)
    for choice in product((False, True), repeat=int((near & ~held).sum())):
        pinned = np.zeros(len(room), dtype=bool)
        pinned[near & ~held] = choice
        free = ~(pinned | held)
        owed = draws - triangle[:, pinned] @ (side * room)[pinned]
        step = owed @ np.linalg.pinv(triangle[:, free]).T
        left = owed - step @ triangle[:, free].T
        kept = (step * side[free] <= room[free])[:, near[free]].all(axis=1)
        least = np.where(kept, np.minimum(least, (left**2).sum(axis=1)), least)
    return least
