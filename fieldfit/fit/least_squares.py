"""Least squares by lmfit, for any residual with its Jacobian, and what to believe of the answer.

lmfit sees dimensionless steps from the start, each unknown scaled by the length of its Jacobian column, so that
neither forces in kN nor flexibilities of 1e-9 reach its absolute tolerances.
"""

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import NamedTuple

import lmfit
import numpy as np

from fieldfit.beam import Array, Flags

__all__ = ["Descent", "Minimum", "Problem", "best_of", "covariance_of", "descend", "minimise", "weights_of"]

STEPS = 60  # of a descent, at the most
STIFF = 1e9  # damping at which no step helps
ENOUGH = 1e-11  # gain, as a share of the sum of squares, that is rounding
WIDE = 1e6  # a step beside the room between bounds: any wider and lmfit takes the two bounds for one
FAR = 1e3  # steps of one residual length to a bound that is out of reach of lmfit
SQUARE = 1e-6  # cosine of the residual with a column of the Jacobian that lmfit takes for none: 1e-5 u off the best
ROUGHLY = 1e-3  # gain, as a share of the sum of squares, at which a start has shown which minimum it leads to
WARY = 0.1  # damping of the first step from a start that may be far off
RANK = 1e-10  # singular values below this share of the largest, columns scaled to one, carry no information


@dataclass(frozen=True, slots=True, kw_only=True)
class Problem:
    """A weighted residual (n,) with its Jacobian (n, p), as one function of the unknowns (p,), and their bounds.

    The function returns fresh arrays at each call: lmfit scales Jacobians in place.
    """

    evaluate: Callable[[Array], tuple[Array, Array]]
    lower: Array
    upper: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Minimum:
    """Where the sum of squares is least: the unknowns (p,), the residual (n,) and Jacobian (n, p) there.

    ``covariance`` (p, p) is for a residual of unit variance; along a direction that the residual does not
    see it is infinite, and ``rank`` is less than p. ``converged`` repeats what the solver said of itself.
    """

    unknowns: Array
    residual: Array
    jacobian: Array
    covariance: Array
    rank: int
    converged: bool

    @property
    def sum_of_squares(self) -> float:
        """Sum of the squared weighted residuals."""
        return float(self.residual @ self.residual)

    @property
    def degrees_of_freedom(self) -> int:
        """Residuals less what they had to determine."""
        return len(self.residual) - self.rank


def minimise(problem: Problem, start: Array) -> Minimum:
    """Find the least sum of squares from ``start`` (p,), which must lie within the bounds.

    Without an unknown there is nothing to find: the residual is what it is.
    """
    start = np.asarray(start, dtype=float)
    if not start.size:
        return _described(Descent(start, *problem.evaluate(start)), converged=True)
    first = descend(problem, start)
    lengths = np.linalg.norm(first.jacobian, axis=0)
    # A step of one residual length per unknown lets the trust region open at the right size.
    size = max(float(np.linalg.norm(first.residual)), 1.0)
    scale = np.minimum(size / np.where(lengths > 0, lengths, 1.0), WIDE * (problem.upper - problem.lower))
    names = [f"p{number}" for number in range(len(start))]
    parameters = lmfit.Parameters()
    lower, upper = ((bound - first.values) / scale for bound in (problem.lower, problem.upper))
    # The trust region measures slopes by the room to the bound ahead: one out of reach would never let it rest.
    lower, upper = np.where(lower < -FAR, -np.inf, lower), np.where(upper > FAR, np.inf, upper)
    for name, low, high in zip(names, lower, upper, strict=True):
        parameters.add(name, value=0.0, min=low, max=high)

    at = {first.values.tobytes(): (first.residual, first.jacobian)}

    def evaluated(given: lmfit.Parameters) -> tuple[Array, Array]:
        """Residual and Jacobian, from one evaluation: lmfit asks for them one after the other."""
        values = unknowns(given)
        if values.tobytes() not in at:
            at.clear()
            at[values.tobytes()] = problem.evaluate(values)
        return at[values.tobytes()]

    def unknowns(given: lmfit.Parameters) -> Array:
        return np.clip(first.values + scale * [given[name].value for name in names], problem.lower, problem.upper)

    minimizer = lmfit.Minimizer(
        lambda given: evaluated(given)[0].copy(),
        parameters,
        nan_policy="raise",
        scale_covar=False,
        Dfun=lambda given: evaluated(given)[1] * scale,
        ftol=1e-9,
        xtol=1e-9,
        gtol=SQUARE * size**2,
    )
    with np.errstate(invalid="ignore"):  # lmfit's own covariance, which nothing uses, has no root where rank is lost
        result = minimizer.least_squares()
    found = Descent(unknowns(result.params), *evaluated(result.params))
    # Where lmfit found nothing better, the descent before it stands to its last digit.
    best = descend(problem, found.values) if found.cost < (1 - ENOUGH) * first.cost else first
    return _described(best, converged=bool(result.success))


def best_of(problem: Problem, points: Iterable[Array]) -> Array:
    """Where the best of the descents from several starts (p,) ended, all of them cut short."""
    return min(
        (descend(problem, point, damping=WARY, enough=ROUGHLY) for point in points), key=lambda one: one.cost
    ).values


class Descent(NamedTuple):
    """Where a descent ended: the unknowns (p,), the residual (n,) and the Jacobian (n, p) there."""

    values: Array
    residual: Array
    jacobian: Array

    @property
    def cost(self) -> float:
        """Sum of the squared residuals."""
        return float(self.residual @ self.residual)


def descend(
    problem: Problem, start: Array, held: Flags | None = None, *, damping: float = 0.0, enough: float = ENOUGH
) -> Descent:
    """Least sum of squares near ``start`` (p,), by damped Gauss-Newton steps along the bounds; ``held`` stay put.

    It takes the last digits that a trust region leaves, and follows a minimum from one profile value to the next.
    """
    values = np.clip(start, problem.lower, problem.upper)
    movable = np.ones(len(values), dtype=bool) if held is None else ~held
    residual, jacobian = problem.evaluate(values)
    cost = float(residual @ residual)
    for _ in range(STEPS):
        slope = jacobian.T @ residual
        blocked = ((values <= problem.lower) & (slope > 0)) | ((values >= problem.upper) & (slope < 0))
        free = np.flatnonzero(movable & ~blocked)
        if not free.size:
            break
        step = _damped_step(jacobian[:, free], residual, damping)
        trial = values.copy()
        trial[free] = np.clip(values[free] + step, problem.lower[free], problem.upper[free])
        foreseen = residual + jacobian[:, free] @ (trial[free] - values[free])
        after, trial_jacobian = problem.evaluate(trial)
        trial_cost = float(after @ after)
        if not trial_cost <= cost:
            damping = max(10.0 * damping, 1e-3)
            if damping > STIFF:
                break
            continue
        gained = cost - trial_cost
        # The less of the foreseen gain came true, the longer the damping stays (Nielsen 1999; from memory).
        true = gained / max(cost - float(foreseen @ foreseen), gained, np.finfo(float).tiny)
        values, residual, jacobian, cost = trial, after, trial_jacobian, trial_cost
        damping *= max(1.0 - (2.0 * true - 1.0) ** 3, 0.1)
        if gained <= enough * cost + np.finfo(float).tiny:
            break
    return Descent(values, residual, jacobian)


def _damped_step(jacobian: Array, residual: Array, damping: float) -> Array:
    """Gauss-Newton step, its columns scaled to one and held back by ``damping`` (Levenberg and Marquardt)."""
    length = np.linalg.norm(jacobian, axis=0)
    length = np.where(length > 0, length, 1.0)
    left, sizes, right = np.linalg.svd(jacobian / length, full_matrices=False)
    clear = sizes > RANK * sizes.max(initial=np.finfo(float).tiny)
    shrunk = sizes[clear] / (sizes[clear] ** 2 + damping)
    return -(right[clear].T @ (shrunk * (left[:, clear].T @ residual))) / length


def weights_of(jacobian: Array) -> Array:
    """What every row of a linear problem adds to its unknowns, (p, n): the pseudo-inverse of the Jacobian (n, p)."""
    length = np.linalg.norm(jacobian, axis=0)
    length = np.where(length > 0, length, 1.0)
    return np.asarray(np.linalg.pinv(jacobian / length, rcond=RANK)) / length[:, None]


def covariance_of(jacobian: Array) -> tuple[Array, int]:
    """Covariance (p, p) of unknowns for residuals of unit variance, and the rank of their Jacobian (n, p).

    By singular values of the columns scaled to unit length. What a direction without information touches has
    infinite variance, whatever the others say of it.
    """
    length = np.linalg.norm(jacobian, axis=0)
    seen = length > 0
    length = np.where(seen, length, 1.0)
    _, values, rows = np.linalg.svd(jacobian / length, full_matrices=False)
    clear = values > RANK * max(float(values.max(initial=0.0)), np.finfo(float).tiny)
    half = rows[clear] / values[clear, None] / length
    covariance = half.T @ half
    count = len(length)
    missing = np.eye(count) - rows[clear].T @ rows[clear]
    lost = np.flatnonzero(~seen | (np.diag(missing) > RANK))
    covariance[lost, lost] = np.inf
    return covariance, int(clear.sum())


def _described(best: Descent, converged: bool) -> Minimum:
    covariance, rank = covariance_of(best.jacobian)
    return Minimum(
        unknowns=best.values,
        residual=best.residual,
        jacobian=best.jacobian,
        covariance=covariance,
        rank=rank,
        converged=converged,
    )
