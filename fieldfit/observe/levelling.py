"""Levelling: the heights of all points of a net from its sights, by least squares with their full covariance.

A staff reading is the height of the line of sight above a point, so that a larger reading is a lower point:
staff = line of set-up - height of point. Lines and heights are found together from all sights, each over its u; what
is known of a height beforehand is a row of its own, and a height that is exact is no unknown (Gauss and Helmert's
adjustment by elements; Ghilani and Wolf, Adjustment Computations, chapter 12).
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import solve_triangular

from fieldfit.beam import Array

__all__ = ["Adjusted", "Net", "adjusted"]

Numbers = NDArray[np.intp]


@dataclass(frozen=True, slots=True, kw_only=True)
class Net:
    """Sights (n,) from set-ups at points, both counted from 0 without a gap, and what is known of some heights.

    ``staff`` and ``u`` (m) are the readings with their standard uncertainty. ``known`` (k,) are points of
    height ``height`` (m) with standard uncertainty ``height_u`` (m), 0 where it is exact.
    """

    set_up: Numbers
    point: Numbers
    staff: Array
    u: Array
    known: Numbers
    height: Array
    height_u: Array


@dataclass(frozen=True, slots=True, kw_only=True)
class Adjusted:
    """An adjusted net: heights (p,) in m and their covariance (p, p) in m2, exact points with rows of zeros.

    ``residual`` (n,) is measured less adjusted, m. ``redundancy`` (n,) is the share of an error of a sight that the
    net would show (Baarda, 1968): 0 where nothing checks it. ``chi_square`` has ``spare`` degrees of freedom.
    """

    height: Array
    covariance: Array
    residual: Array
    redundancy: Array
    chi_square: float
    spare: int


def adjusted(net: Net) -> Adjusted:
    """Adjust a net whose every point is reached from one of known height."""
    lines, points = int(net.set_up.max()) + 1, int(net.point.max()) + 1
    exact = net.known[net.height_u == 0]
    uncertain = net.height_u > 0
    heights = np.zeros(points)
    heights[exact] = net.height[net.height_u == 0]
    free = np.setdiff1d(np.arange(points), exact)
    matrix, owed = _rows(net, lines, points), net.staff + heights[net.point]
    known = np.zeros((int(uncertain.sum()), lines + points))
    known[np.arange(len(known)), lines + net.known[uncertain]] = 1.0
    u = np.concatenate([net.u, net.height_u[uncertain]])
    whole = np.concatenate([matrix, known])[:, np.concatenate([np.arange(lines), lines + free])] / u[:, None]
    basis, triangle = np.linalg.qr(whole)
    right = np.concatenate([owed, net.height[uncertain]]) / u
    found = solve_triangular(triangle, basis.T @ right)
    back = solve_triangular(triangle, np.eye(len(triangle)))[lines:]
    heights[free] = found[lines:]
    covariance = np.zeros((points, points))
    covariance[np.ix_(free, free)] = back @ back.T
    left = right - whole @ found
    return Adjusted(
        height=heights,
        covariance=covariance,
        residual=left[: len(net.u)] * net.u,
        redundancy=np.clip(1.0 - (basis[: len(net.u)] ** 2).sum(axis=1), 0.0, 1.0),
        chi_square=float(left @ left),
        spare=len(right) - len(found),
    )


def _rows(net: Net, lines: int, points: int) -> Array:
    """One row a sight: its line of sight less its point, (n, lines + points)."""
    rows = np.zeros((len(net.staff), lines + points))
    sight = np.arange(len(net.staff))
    rows[sight, net.set_up] = 1.0
    rows[sight, lines + net.point] = -1.0
    return rows
