"""Levelling: the heights of all points of a net from its sights, by least squares with their full covariance.

A staff reading is the height of the line of sight above a point, so that a larger reading is a lower point:
staff = line of set-up - height of point. Lines and heights are found together from all sights, each over its u; what
is known of a height beforehand is a row of its own, and a height that is exact is no unknown (Gauss and Helmert's
adjustment by elements; Ghilani and Wolf, Adjustment Computations, chapter 12).

No error passes through a height that is exact. Sights that only such heights join are separate parts of the net, each
with its own chi-square; they add up to that of the whole.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import solve_triangular
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from fieldfit.beam import Array

__all__ = ["Adjusted", "Misfit", "Net", "adjusted"]

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


@dataclass(frozen=True, slots=True)
class Misfit:
    """What rows leave of a least squares fit, ``chi_square``, and its degrees of freedom ``spare``."""

    chi_square: float = 0.0
    spare: int = 0

    def __add__(self, other: "Misfit") -> "Misfit":
        """Both together, where neither counts a row of the other."""
        return Misfit(self.chi_square + other.chi_square, self.spare + other.spare)


@dataclass(frozen=True, slots=True, kw_only=True)
class Adjusted:
    """An adjusted net: heights (p,) in m and their covariance (p, p) in m2, exact points with rows of zeros.

    ``residual`` (n,) is measured less adjusted, m. ``redundancy`` (n,) is the share of an error of a sight that the
    net would show (Baarda, 1968): 0 where nothing checks it. ``set_up_part`` and ``point_part`` (p,) number the parts
    of the net, -1 for exact points, which are of none; ``misfits`` are what each part leaves.
    """

    height: Array
    covariance: Array
    residual: Array
    redundancy: Array
    set_up_part: Numbers
    point_part: Numbers
    misfits: tuple[Misfit, ...]


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
    part, point_part = _parts(net, lines, free), np.full(points, -1)
    point_part[free] = part[lines:]
    return Adjusted(
        height=heights,
        covariance=covariance,
        residual=left[: len(net.u)] * net.u,
        redundancy=np.clip(1.0 - (basis[: len(net.u)] ** 2).sum(axis=1), 0.0, 1.0),
        set_up_part=part[:lines],
        point_part=point_part,
        misfits=_misfits(left**2, np.concatenate([part[net.set_up], point_part[net.known[uncertain]]]), part),
    )


def _parts(net: Net, lines: int, free: Numbers) -> Numbers:
    """The part of the net of every unknown: the lines of set-ups, then the ``free`` heights."""
    joins = np.isin(net.point, free)
    ends = (net.set_up[joins], lines + np.searchsorted(free, net.point[joins]))
    edges = coo_array((np.ones(len(ends[0])), ends), shape=(lines + len(free),) * 2)
    return np.asarray(connected_components(edges, directed=False)[1], dtype=np.intp)


def _misfits(squares: Array, row_part: Numbers, unknown_part: Numbers) -> tuple[Misfit, ...]:
    """What each part leaves, by the part of every row (squared and over its u) and of every unknown."""
    count = int(unknown_part.max()) + 1
    chi_square = np.bincount(row_part, squares, minlength=count)
    spare = np.bincount(row_part, minlength=count) - np.bincount(unknown_part, minlength=count)
    return tuple(map(Misfit, chi_square.tolist(), spare.tolist()))


def _rows(net: Net, lines: int, points: int) -> Array:
    """One row a sight: its line of sight less its point, (n, lines + points)."""
    rows = np.zeros((len(net.staff), lines + points))
    sight = np.arange(len(net.staff))
    rows[sight, net.set_up] = 1.0
    rows[sight, lines + net.point] = -1.0
    return rows
