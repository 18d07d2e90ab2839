"""An independent model: cubic Hermite finite elements by scikit-fem, knowing nothing of the package under test.

Stiffness and consistent loads are assembled by scikit-fem; moments, shears and reactions come from the nodal
forces by statics. Inside an element the loaded clamped beam of the same length is added to the cubic, so a
prismatic element under a linear load is exact everywhere. Euler-Bernoulli beams only.

Signs: x from the left end, deflection, forces and intensities up, rotations and couples anticlockwise, moments
sagging, imposed curvature concave up. SI or any consistent units.
"""

import itertools
import math
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
import scipy.sparse.linalg
from numpy.typing import NDArray
from scipy.sparse import csr_matrix
from skfem import Basis, BilinearForm, ElementLineHermite, LinearForm, MeshLine1
from skfem.helpers import dd

__all__ = ["Beam", "Bend", "Couple", "Force", "Solution", "Spread", "Support", "Zone", "solve"]

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Support:
    """Vertical and rotational stiffness at ``at``: inf holds, 0 lets go; ``up`` is its own movement."""

    at: float
    vertical: float = np.inf
    rotational: float = 0.0
    up: float = 0.0


@dataclass(frozen=True)
class Zone:
    """EI from ``start`` to ``end``, running linearly to ``EI_end``."""

    start: float
    end: float
    EI: float
    EI_end: float | None = None


@dataclass(frozen=True)
class Force:
    at: float
    up: float


@dataclass(frozen=True)
class Couple:
    at: float
    anticlockwise: float


@dataclass(frozen=True)
class Spread:
    start: float
    end: float
    up: float
    up_end: float | None = None


@dataclass(frozen=True)
class Bend:
    start: float
    end: float
    curvature: float


@dataclass(frozen=True)
class Beam:
    """A beam with its loads; where EI tapers, elements are no longer than ``taper_element`` of the length."""

    length: float
    EI: float
    supports: Sequence[Support]
    hinges: Sequence[float] = ()
    zones: Sequence[Zone] = ()
    forces: Sequence[Force] = ()
    couples: Sequence[Couple] = ()
    spreads: Sequence[Spread] = ()
    bends: Sequence[Bend] = ()
    taper_element: float = 1 / 96


@dataclass(frozen=True)
class Solution:
    """A solved beam; the methods take stations of any shape, those at a jump mean just right of it."""

    beam: Beam
    nodes: Array
    deflections: Array
    left_rotations: Array
    right_rotations: Array
    reactions: Array
    restraints: Array
    extra: dict[str, Array] = field(repr=False)

    def deflection(self, x: Array) -> Array:
        return self._inside(x, 0)

    def rotation(self, x: Array) -> Array:
        return self._inside(x, 1)

    def moment(self, x: Array) -> Array:
        """Moment of all forces and couples left of x; ``restraints`` are anticlockwise on the beam."""
        x = np.asarray(x, dtype=float)
        out = np.zeros_like(x)
        forces = [(s.at, r) for s, r in zip(self.beam.supports, self.reactions, strict=True)]
        for at, up in forces + [(f.at, f.up) for f in self.beam.forces]:
            out += up * np.maximum(x - at, 0.0)
        couples = [(s.at, c) for s, c in zip(self.beam.supports, self.restraints, strict=True)]
        for at, turn in couples + [(c.at, c.anticlockwise) for c in self.beam.couples]:
            out -= turn * ((x >= at) & (at < self.beam.length))  # the right end is read from inside
        for load in self.beam.spreads:
            out += _moment_of(load, x)
        return out

    def _inside(self, x: Array, order: int) -> Array:
        x = np.asarray(x, dtype=float)
        element = np.clip(np.searchsorted(self.nodes, x, side="right") - 1, 0, len(self.nodes) - 2)
        h = np.diff(self.nodes)[element]
        t = (x - self.nodes[element]) / h
        start, end = self.deflections[element], self.deflections[element + 1]
        turn, turn_end = self.right_rotations[element], self.left_rotations[element + 1]
        bubble, rise = (self.extra[name][element] for name in ("even", "rise"))
        if order == 0:
            shape = start * (1 + 2 * t) * (1 - t) ** 2 + end * t**2 * (3 - 2 * t)
            shape = shape + h * t * (1 - t) * (turn * (1 - t) - turn_end * t)
            return shape + h**4 * (t * (1 - t)) ** 2 * (bubble / 24 + rise * (2 + t) / 120)
        shape = (end - start) / h * 6 * t * (1 - t) + turn * (1 - t) * (1 - 3 * t) + turn_end * t * (3 * t - 2)
        even = 2 * t * (1 - t) * (1 - 2 * t) / 24
        return shape + h**3 * (bubble * even + rise * (5 * t**4 - 9 * t**2 + 4 * t) / 120)


def _moment_of(load: Spread, x: Array) -> Array:
    run = np.clip(x, load.start, load.end) - load.start
    end = load.up if load.up_end is None else load.up_end
    slope = (end - load.up) / (load.end - load.start)
    total, first = run * (load.up + slope * run / 2), run**2 * (load.up / 2 + slope * run / 3)
    return np.asarray(total * (x - load.start) - first)


def solve(beam: Beam, at: Sequence[float] = ()) -> Solution:
    """Solve a beam; reactions are up and restraints anticlockwise on the beam, one a support.

    Stations ``at`` become nodes: inside a tapered element a rotation is only good to the cube of its length.
    """
    nodes = _nodes(beam, at)
    hinge_nodes = np.array([_index(nodes, at) for at in beam.hinges], dtype=int)
    basis, left, right = _basis(nodes, hinge_nodes)
    start, end = _rigidity(beam, nodes)
    intensity, intensity_end = _intensity(beam, nodes)
    bend = _bends(beam, nodes)
    t = np.broadcast_to(basis.X[0], (len(nodes) - 1, basis.X.shape[1]))
    along = {"EI": start[:, None] + (end - start)[:, None] * t}
    along["q"] = intensity[:, None] + (intensity_end - intensity)[:, None] * t
    along["bend"] = bend[:, None] + 0 * t
    stiffness = BilinearForm(lambda u, v, w: along["EI"] * dd(u)[0, 0] * dd(v)[0, 0]).assemble(basis)
    load = LinearForm(lambda v, w: along["q"] * v + along["EI"] * along["bend"] * dd(v)[0, 0]).assemble(basis)
    up, turn = basis.nodal_dofs
    for force in beam.forces:
        load[up[right[_index(nodes, force.at)]]] += force.up
    for couple in beam.couples:
        load[turn[right[_index(nodes, couple.at)]]] += couple.anticlockwise
    at = np.array([_index(nodes, s.at) for s in beam.supports])
    solution, forces = _constrained(beam, stiffness, load, up[right[at]], turn[right[at]], _ties(basis, left, right))
    middle = (start + end) / 2
    extra = {"even": intensity / middle, "rise": (intensity_end - intensity) / middle}
    rotations = (solution[turn[left]], solution[turn[right]])
    return Solution(beam, nodes, solution[up[right]], *rotations, *forces, extra)


def _nodes(beam: Beam, at: Sequence[float]) -> Array:
    places = [0.0, beam.length, *beam.hinges, *at]
    places += [thing.at for thing in (*beam.supports, *beam.forces, *beam.couples)]
    for thing in (*beam.zones, *beam.spreads, *beam.bends):
        places += [thing.start, thing.end]
    places = np.sort(np.array(places))
    places = places[np.concatenate([[True], np.diff(places) > 1e-9 * beam.length])]
    parts = [np.linspace(*ends, _pieces(beam, *ends), endpoint=False) for ends in itertools.pairwise(places)]
    return np.concatenate([*parts, places[-1:]])


def _pieces(beam: Beam, start: float, end: float) -> int:
    """Elements between two nodes: one, unless EI tapers there."""
    tapers = any(z.EI_end is not None and z.start < (start + end) / 2 < z.end for z in beam.zones)
    return math.ceil((end - start) / (beam.taper_element * beam.length) - 1e-6) if tapers else 1


def _index(nodes: Array, at: float) -> int:
    return int(np.argmin(np.abs(nodes - at)))


def _basis(nodes: Array, hinges: Array) -> tuple[Basis, Array, Array]:
    """Elements, and the vertex that stands left and right of each node; a hinge has two."""
    copies = 1 + np.isin(np.arange(len(nodes)), hinges)
    right = np.cumsum(copies) - 1
    left = right - (copies - 1)
    mesh = MeshLine1(np.repeat(nodes, copies)[None], np.stack([right[:-1], left[1:]]))
    return Basis(mesh, ElementLineHermite(), intorder=8), left, right


def _ties(basis: Basis, left: Array, right: Array) -> list[tuple[int, int]]:
    up = basis.nodal_dofs[0]
    return [(up[a], up[b]) for a, b in zip(left, right, strict=True) if a != b]


def _middles(nodes: Array) -> Array:
    return np.asarray((nodes[:-1] + nodes[1:]) / 2)


def _rigidity(beam: Beam, nodes: Array) -> tuple[Array, Array]:
    start = np.full(len(nodes) - 1, beam.EI)
    end = start.copy()
    for zone in beam.zones:
        inside = (_middles(nodes) > zone.start) & (_middles(nodes) < zone.end)
        rise = ((zone.EI if zone.EI_end is None else zone.EI_end) - zone.EI) / (zone.end - zone.start)
        start[inside] = zone.EI + rise * (nodes[:-1][inside] - zone.start)
        end[inside] = zone.EI + rise * (nodes[1:][inside] - zone.start)
    return start, end


def _intensity(beam: Beam, nodes: Array) -> tuple[Array, Array]:
    start, end = np.zeros((2, len(nodes) - 1))
    for load in beam.spreads:
        inside = (_middles(nodes) > load.start) & (_middles(nodes) < load.end)
        slope = ((load.up if load.up_end is None else load.up_end) - load.up) / (load.end - load.start)
        start[inside] += load.up + slope * (nodes[:-1][inside] - load.start)
        end[inside] += load.up + slope * (nodes[1:][inside] - load.start)
    return start, end


def _bends(beam: Beam, nodes: Array) -> Array:
    out = np.zeros(len(nodes) - 1)
    for bend in beam.bends:
        out += bend.curvature * ((_middles(nodes) > bend.start) & (_middles(nodes) < bend.end))
    return out


def _constrained(
    beam: Beam, stiffness: csr_matrix, load: Array, up: Array, turn: Array, ties: list[tuple[int, int]]
) -> tuple[Array, tuple[Array, Array]]:
    """Solve with springs added, held freedoms moved to the right-hand side and hinge deflections tied."""
    size = len(load)
    vertical = np.array([s.vertical for s in beam.supports])
    rotational = np.array([s.rotational for s in beam.supports])
    moved = np.array([s.up for s in beam.supports])
    spring, push = np.zeros(size), load.copy()
    for stiff, dof, to in ((vertical, up, moved), (rotational, turn, 0.0 * moved)):
        soft = np.isfinite(stiff)
        spring[dof[soft]] += stiff[soft]
        push[dof[soft]] += stiff[soft] * to[soft]
    held = np.concatenate([up[np.isinf(vertical)], turn[np.isinf(rotational)]])
    value = np.zeros(size)
    value[up[np.isinf(vertical)]] = moved[np.isinf(vertical)]
    of = np.arange(size)
    for slave, master in ties:
        of[slave] = master
    free = np.setdiff1d(np.unique(of), held)
    column = np.full(size, -1)
    column[free] = np.arange(len(free))
    rows = np.flatnonzero(column[of] >= 0)
    tie = csr_matrix((np.ones(len(rows)), (rows, column[of][rows])), shape=(size, len(free)))
    full = (stiffness + scipy.sparse.diags_array(spring)).tocsr()
    value = value[of]
    reduced = (tie.T @ full @ tie).tocsc()
    found = tie @ scipy.sparse.linalg.spsolve(reduced, tie.T @ (push - full @ value)) + value
    # What the elements ask of a node beyond its loads is what its support gives; a tie hands it to the master.
    residual = np.bincount(of, weights=stiffness @ found - load, minlength=size)
    return found, (residual[up], residual[turn])
