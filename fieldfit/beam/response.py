"""Response: what a loaded member does, from its areas, and how that changes with its unknowns.

The unknowns of the statics are the deflection, rotation, shear and moment at the left end of each panel. The
two moment-area theorems carry them over the panel; at each node the beam is continuous, and

    y + f R = support movement,     (1 - r) C = r (3EI/l) phi,     M = 0 at a hinge,

with R (up) and C (clockwise) the jumps of shear and moment there. All load cases are right-hand sides of one
system, and so are the derivatives.
"""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam.areas import Areas, integrate
from fieldfit.beam.loads import Loads
from fieldfit.beam.member import Array, Flags, Members
from fieldfit.errors import ModelError

__all__ = ["Response", "Stiffness", "gradient", "recorded", "respond", "solve"]

HOPELESS = 1e13  # condition beyond which no digit of an answer is left


class Stiffness(NamedTuple):
    """What a fit may change: ``EI_ratio`` (M, Z+1) over recorded, zone 0 first; ``flexibility`` (m/N) and
    ``fixity`` of the supports (M, J).
    """

    EI_ratio: Array
    flexibility: Array
    fixity: Array


@dataclass(frozen=True, slots=True)
class Response:
    """Responses of M members in C load cases at S stations, shape (M, C, S), SI, sagging and upward positive.

    ``rotation`` is that of the section, ``slope`` that of the axis (rotation - V/GA). ``reaction`` (N, up) and
    ``restraint`` (N m, clockwise on the beam) have shape (M, C, J); a reaction below zero pulls the beam
    down: at a bearing that cannot hold it, uplift. From ``gradient`` every shape has the unknowns in
    front of the load cases.
    """

    deflection: Array
    rotation: Array
    slope: Array
    curvature: Array
    moment: Array
    shear: Array
    reaction: Array
    restraint: Array

    def strain(self, below_neutral_axis: Array) -> Array:
        """Strain, tension positive, at distances (m) below the neutral axis that broadcast with the stations."""
        return self.curvature * below_neutral_axis

    @property
    def uplift(self) -> Flags:
        """Where a support holds the beam down, shape (..., C, J)."""
        return self.reaction < 0


def recorded(members: Members) -> Stiffness:
    """The stiffness on record: every EI ratio 1."""
    zones = members.zone_from.shape[1] + 1
    return Stiffness(np.ones((len(members), zones)), members.support_flexibility, members.support_fixity)


def respond(members: Members, loads: Loads, at: Array, left: Flags | None = None) -> Response:
    """Response of recorded members to their loads at stations ``at`` (M, S), m; see ``integrate``.

    Accurate to 1e-12 of the largest value up to ten equal spans, and to 2e-12 at 20 and 40 (each span keeps its
    own tangent). Raises ModelError for a mechanism.
    """
    return solve(integrate(members, loads, at, left))


def solve(areas: Areas, stiffness: Stiffness | None = None) -> Response:
    """Response at the stations of ``areas``, with the recorded stiffness or another one."""
    return _System.of(areas, stiffness or recorded(areas.members)).response()


def gradient(areas: Areas, stiffness: Stiffness | None = None) -> Response:
    """Derivatives with respect to the log EI ratio of each zone, each bearing flexibility, each fixity.

    Shape (M, U, C, S) with U = (Z+1) + J + J in that order. What is linear (loads, movements, imposed
    curvature) needs no derivative: it is the response to a load case of its own.
    """
    return _System.of(areas, stiffness or recorded(areas.members)).gradient()


class _Sums(NamedTuple):
    """What is added to the states carried to the points: by the loads, or by an EI ratio itself; (M, P, U, C)."""

    deflection: Array
    rotation: Array
    curvature: Array
    moment: Array | float = 0.0
    shear: Array | float = 0.0


class _Points(NamedTuple):
    """Responses at the P points of the areas, free of dimension, (M, P, U, C)."""

    deflection: Array
    rotation: Array
    curvature: Array
    moment: Array
    shear: Array


@dataclass(frozen=True, slots=True)
class _System:
    """The equations of a stack at one stiffness: what makes them, their matrix (M, n, n) and solution (M, n, C).

    ``grip``, ``fixity``, ``held`` (3EI/l) stand at nodes (M, K); ``before`` (M, K, 4, 4) is what each node asks of
    the state left of it; ``rotation`` and ``deflection`` (M, P, 2+C) are the areas at this stiffness.
    """

    areas: Areas
    ratio: Array
    grip: Array
    held: Array
    before: Array
    rotation: Array
    deflection: Array
    matrix: Array
    solution: Array

    @classmethod
    def of(cls, areas: Areas, stiffness: Stiffness) -> "_System":
        """Assemble and solve."""
        nodes, unit = areas.panels, areas.scale
        flexibility = stiffness.flexibility * unit.EI[:, 0] / unit.length[:, 0] ** 3
        # 1/(1+f) weighs the support equation, so that it is regular from rigid (1) to no support (0).
        grip = nodes.at_nodes(1.0 / (1.0 + flexibility), 0.0)
        held = nodes.at_nodes(areas.members.fixity_stiffness / unit.moment[:, 0], 0.0)
        before, after = _selectors(grip, nodes.at_nodes(stiffness.fixity, 0.0), held, nodes.hinged)
        share = np.ones((len(grip), areas.sums.shape[3]))
        share[:, : stiffness.EI_ratio.shape[1]] = 1.0 / stiffness.EI_ratio
        rotation, deflection = np.einsum("mz,mpkzb->kmpb", share, areas.sums)
        ends = nodes.at.shape[1] - 1
        loaded = (
            deflection[:, :ends, 2:],
            rotation[:, :ends, 2:],
            areas.shear[:, :ends],
            areas.moment[:, :ends],
        )
        carry = _carry(areas.reach[:, :ends], rotation[:, :ends], deflection[:, :ends])
        matrix = _assembled(before[:, 1:] @ carry, after[:, :-1])
        right = -_rows(before[:, 1:] @ np.stack(loaded, axis=2))
        movement = nodes.at_nodes(areas.support_up, 0.0).swapaxes(1, 2)
        right[:, _vertical_row(ends + 1)] += grip[..., None] * movement
        solution = _solved(areas, matrix, right)
        return cls(areas, stiffness.EI_ratio, grip, held, before, rotation, deflection, matrix, solution)

    def response(self) -> Response:
        """Read the solution at the stations."""
        return _to_si(self.areas, self._plain_points(), self._left(self.solution[:, :, None]), None)

    def _left(self, solution: Array) -> Array:
        """Solution (M, n, U, C) as states at the left end of panels, (M, K-1, 4, U, C)."""
        return solution.reshape(len(solution), -1, 4, *solution.shape[2:])

    def _plain_points(self) -> _Points:
        areas = self.areas
        sums = (self.deflection[..., 2:], self.rotation[..., 2:], areas.imposed, areas.moment, areas.shear)
        return self._points(self._left(self.solution[:, :, None]), _Sums(*(s[:, :, None] for s in sums)))

    def _points(self, left: Array, sums: _Sums) -> _Points:
        areas = self.areas
        deflection, turned, pushed, bent = np.moveaxis(_at_points(areas, left), 2, 0)
        carried = [part[..., None, None] for part in np.moveaxis(self.rotation[..., :2], 2, 0)]
        rotation = turned + carried[0] * bent + carried[1] * pushed + sums.rotation
        carried = [part[..., None, None] for part in np.moveaxis(self.deflection[..., :2], 2, 0)]
        reach = areas.reach[..., None, None]
        deflection = deflection + reach * turned + carried[0] * bent + carried[1] * pushed + sums.deflection
        moment = bent + reach * pushed + sums.moment
        flexibility = (areas.flexibility / self.ratio[:, None]).sum(axis=2)[..., None, None]
        return _Points(deflection, rotation, flexibility * moment + sums.curvature, moment, pushed + sums.shear)

    def gradient(self) -> Response:
        """Differentiate: each unknown unbalances some equations, and a zone's EI bends the zone besides."""
        areas, zones = self.areas, self.ratio.shape[1]
        size, rows, count = self.solution.shape
        supports = areas.panels.of_support.shape[1]
        unknowns = zones + 2 * supports
        plain = self._plain_points()
        sums = self._own_sums(unknowns)
        ends = areas.panels.at.shape[1] - 1
        nothing = np.zeros_like(sums.deflection[:, :ends])
        moved = np.stack([sums.deflection[:, :ends], sums.rotation[:, :ends], nothing, nothing], axis=2)
        moved = moved.reshape(size, ends, 4, -1)
        unbalanced = -_rows(self.before[:, 1:] @ moved).reshape(size, rows, unknowns, count)
        reaction, restraint, turn = (s[:, :, 0] for s in _node_actions(plain, self._left(self.solution[:, :, None])))
        owner, support = np.nonzero(areas.panels.of_support >= 0)
        node = areas.panels.of_support[owner, support]
        row = _vertical_row(ends + 1)[node]
        unbalanced[owner, row, zones + support] = -(self.grip[..., None] * reaction)[owner, node]
        unbalanced[owner, row + 1, zones + supports + support] = (restraint + self.held[..., None] * turn)[owner, node]
        change = np.linalg.solve(self.matrix, unbalanced.reshape(size, rows, -1)).reshape(unbalanced.shape)
        left = self._left(change)
        unit = np.ones((size, unknowns))
        unit[:, zones : zones + supports] = (areas.scale.EI / areas.scale.length**3)[:, :, 0]
        return _to_si(areas, self._points(left, sums), left, unit)

    def _own_sums(self, unknowns: int) -> _Sums:
        """Change of the sums at all points with the log EI ratio of each zone, the panel states held."""
        areas, zones = self.areas, self.ratio.shape[1]
        _, _, pushed, bent = np.moveaxis(_at_points(areas, self._left(self.solution[:, :, None])), 2, 0)
        share = (-1.0 / self.ratio)[:, None, :, None]
        sums = areas.sums[:, :, :, :zones]
        bent_by = sums[..., 0, None] * bent[:, :, None] + sums[..., 1, None] * pushed[:, :, None] + sums[..., 2:]
        here = bent + areas.reach[..., None, None] * pushed + areas.moment[:, :, None]
        parts = (bent_by[:, :, 1], bent_by[:, :, 0], areas.flexibility[..., None] * here)
        fill = ((0, 0), (0, 0), (0, unknowns - zones), (0, 0))
        return _Sums(*(np.pad(share * part, fill) for part in parts))


def _at_points(areas: Areas, left: Array) -> Array:
    """The state at the left end of the panel of every point, (M, P, 4, U, C)."""
    return left[np.arange(len(left))[:, None], areas.panel]


def _vertical_row(nodes: int) -> NDArray[np.intp]:
    """Row of the vertical equation of each node; the equation of rotation follows it."""
    rows = 4 * np.arange(nodes)
    rows[-1] -= 2
    return rows


def _selectors(grip: Array, fixity: Array, held: Array, hinged: Flags) -> tuple[Array, Array]:
    """What each node asks of the state just left and just right of it, (M, K, 4, 4) each.

    Columns: deflection, rotation, shear, moment. Rows: continuity of deflection, of rotation (at a hinge: no
    moment), the vertical support, the rotational restraint. Beyond the right end there is no shear, no moment.
    """
    before, after = np.zeros((2, *grip.shape, 4, 4))
    before[..., 0, 0], after[..., 0, 0] = 1.0, -1.0
    before[..., 1, 1], after[..., 1, 1] = ~hinged, -1.0 * ~hinged
    after[..., 1, 3] = hinged
    before[..., 2, 2], after[..., 2, 2] = grip - 1.0, 1.0 - grip
    before[..., 3, 3], after[..., 3, 3] = fixity - 1.0, 1.0 - fixity
    after[..., 2, 0] = grip
    after[..., 3, 1] = -fixity * held
    before[:, -1, 2:, :2] = after[:, -1, 2:, :2]
    before[:, -1, :2] = 0.0
    return before, after


def _carry(reach: Array, rotation: Array, deflection: Array) -> Array:
    """Matrix (M, P, 4, 4) that carries the state over a stretch: the two moment-area theorems and statics."""
    carry = np.zeros((*reach.shape, 4, 4))
    carry[..., np.arange(4), np.arange(4)] = 1.0
    carry[..., 0, 1] = carry[..., 3, 2] = reach
    carry[..., 0, 3], carry[..., 0, 2] = deflection[..., 0], deflection[..., 1]
    carry[..., 1, 3], carry[..., 1, 2] = rotation[..., 0], rotation[..., 1]
    return carry


def _assembled(before: Array, after: Array) -> Array:
    """The square system: node k binds the end of panel k-1 to the start of panel k."""
    size, ends = before.shape[:2]
    matrix = np.zeros((size, 4 * ends + 4, ends, 4))
    rows = 4 * np.arange(ends)[:, None] + np.arange(4)
    panel = np.arange(ends)[:, None]
    matrix[:, rows, panel] = after
    matrix[:, rows + 4, panel] = before
    return matrix.reshape(size, 4 * ends + 4, 4 * ends)[:, _kept(ends)]


def _kept(ends: int) -> NDArray[np.intp]:
    """Rows that are equations: the first and the last node have nothing to be continuous with."""
    return np.delete(np.arange(4 * ends + 4), [0, 1, 4 * ends, 4 * ends + 1])


def _rows(per_node: Array) -> Array:
    """What the nodes after the first are owed (M, K-1, 4, C) as rows of the system (M, n, C)."""
    size, ends, _, cases = per_node.shape
    rows = np.concatenate([np.zeros((size, 4, cases)), per_node.reshape(size, 4 * ends, cases)], axis=1)
    return rows[:, _kept(ends)]


def _solved(areas: Areas, matrix: Array, right: Array) -> Array:
    try:
        solution = np.linalg.solve(matrix, right)
    except np.linalg.LinAlgError:
        solution = np.full_like(right, np.nan)
    size = np.abs(matrix).sum(axis=2).max(axis=1) * np.abs(solution).max(axis=(1, 2), initial=0.0)
    hopeless = ~(size <= HOPELESS * np.abs(right).max(axis=(1, 2), initial=0.0))
    if hopeless.any():
        worst = np.argmax(hopeless) if np.isfinite(solution).any() else np.argmax(np.linalg.cond(matrix))
        name = areas.members.name[int(worst)]
        raise ModelError(
            f"member {name!r} cannot be solved: it has no unique answer; a support so soft that it holds nothing, or "
            "a rigid zone over more supports than it needs, leaves it so"
        )
    return solution


def _node_actions(points: _Points, left: Array) -> tuple[Array, Array, Array]:
    """Reaction, restraint couple and rotation at every node, (M, K, U, C)."""
    ends = left.shape[1]
    turned, pushed, bent = (left[:, :, row] for row in (1, 2, 3))
    reaction, restraint, turn = np.zeros((3, len(left), ends + 1, *left.shape[3:]))
    reaction[:, :-1], restraint[:, :-1], turn[:, :-1] = pushed, bent, turned
    reaction[:, 1:] -= points.shear[:, :ends]
    restraint[:, 1:] -= points.moment[:, :ends]
    turn[:, -1] = points.rotation[:, ends - 1]
    return reaction, restraint, turn


def _to_si(areas: Areas, points: _Points, left: Array, unit: Array | None) -> Response:
    """Responses at the stations in SI; ``unit`` (M, U) per unknown of a gradient, None for the plain response."""
    reaction, restraint, _ = (areas.panels.at_supports(per_node) for per_node in _node_actions(points, left))
    ends, scale = left.shape[1], areas.scale
    blank = np.where(areas.blank, np.nan, 1.0)[..., None, None]
    deflection, rotation, curvature, moment, shear = (part[:, ends:] * blank for part in points)
    slope = rotation - shear * areas.shear_flexibility[:, ends:, None, None]
    length, force, couple = scale.length[..., None], scale.force[..., None], scale.moment[..., None]
    parts = [deflection * length, rotation, slope, curvature / length, moment * couple, shear * force]
    parts += [reaction * force, restraint * couple]
    if unit is None:
        return Response(*(part[:, :, 0].swapaxes(1, 2) for part in parts))
    return Response(*(np.moveaxis(part * unit[:, None, :, None], 1, 3) for part in parts))
