"""Least squares by lmfit, for any residual with its Jacobian, and what to believe of the answer.

lmfit sees dimensionless steps from the start, each unknown scaled by the length of its Jacobian column, so that
neither forces in kN nor flexibilities of 1e-9 reach its absolute tolerances.
"""

from collections.abc import Callable
from dataclasses import dataclass

import lmfit
import numpy as np

from fieldfit.beam import Array

__all__ = ["Minimum", "Problem", "covariance_of", "minimise"]

POLISH = 5  # Gauss-Newton steps at the most, from where lmfit stopped
RANK = 1e-10  # singular values below this share of the largest, columns scaled to one, carry no information


@dataclass(frozen=True, slots=True, kw_only=True)
class Problem:
    """A weighted residual (n,) and its Jacobian (n, p) as functions of the unknowns (p,), with their bounds.

    Both functions return a fresh array at each call: lmfit scales Jacobians in place.
    """

    residual: Callable[[Array], Array]
    jacobian: Callable[[Array], Array]
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
        return _described(problem, start, converged=True)
    lengths = np.linalg.norm(problem.jacobian(start), axis=0)
    scale = 1.0 / np.where(lengths > 0, lengths, 1.0)
    # A step of one residual length per unknown lets the trust region open at the right size.
    scale *= max(float(np.linalg.norm(problem.residual(start))), 1.0)
    names = [f"p{number}" for number in range(len(start))]
    parameters = lmfit.Parameters()
    for number, name in enumerate(names):
        low, high = ((bound[number] - start[number]) / scale[number] for bound in (problem.lower, problem.upper))
        parameters.add(name, value=0.0, min=low, max=high)

    def unknowns(given: lmfit.Parameters) -> Array:
        return start + scale * np.array([given[name].value for name in names])

    minimizer = lmfit.Minimizer(
        lambda given: problem.residual(unknowns(given)),
        parameters,
        nan_policy="raise",
        scale_covar=False,
        Dfun=lambda given: problem.jacobian(unknowns(given)) * scale,
        ftol=1e-14,
        xtol=1e-14,
        gtol=1e-14,
    )
    result = minimizer.least_squares()
    best = np.clip(unknowns(result.params), problem.lower, problem.upper)
    return _described(problem, _polished(problem, best), bool(result.success))


def _polished(problem: Problem, best: Array) -> Array:
    """Take Gauss-Newton steps while they help: the last digits, which a trust region leaves."""
    residual = problem.residual(best)
    for _ in range(POLISH):
        jacobian = problem.jacobian(best)
        length = np.linalg.norm(jacobian, axis=0)
        length = np.where(length > 0, length, 1.0)
        step = np.linalg.lstsq(jacobian / length, -residual, rcond=RANK)[0] / length
        further = best + step
        if np.any(further < problem.lower) or np.any(further > problem.upper):
            return best
        after = problem.residual(further)
        if not after @ after <= residual @ residual:
            return best
        best, residual = further, after
    return best


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


def _described(problem: Problem, best: Array, converged: bool) -> Minimum:
    residual, jacobian = problem.residual(best), problem.jacobian(best)
    covariance, rank = covariance_of(jacobian)
    return Minimum(
        unknowns=best,
        residual=residual,
        jacobian=jacobian,
        covariance=covariance,
        rank=rank,
        converged=converged,
    )
