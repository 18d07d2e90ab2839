"""System: the equations of statics and compatibility of loaded members, and their solution.

The unknowns are the deflection, rotation, shear and moment at the left end of each panel. The two moment-area
theorems carry them over the panel; at each node the beam is continuous, and

    y + f R = support movement,     (1 - r) C = r (3EI/l) phi,     M = 0 at a hinge,

with R (up) and C (clockwise) the jumps of shear and moment there. All load cases are right-hand sides of one
system, and so are derivatives.
"""

from dataclasses import dataclass
from functools import cache
from typing import NamedTuple, NoReturn

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam.areas import Areas
from fieldfit.beam.member import Array, Flags, Members
from fieldfit.errors import ModelError

__all__ = ["Stiffness", "System", "equations", "inverted", "recorded", "vertical_row", "weighed"]

HOPELESS = 1e13  # growth of a solution beyond which no digit of it is left


class Stiffness(NamedTuple):
    """What a fit may change: ``EI_ratio`` (M, Z+1) over recorded, zone 0 first; ``flexibility`` (m/N) and
    ``fixity`` of the supports (M, J).
    """

    EI_ratio: Array
    flexibility: Array
    fixity: Array


def recorded(members: Members) -> Stiffness:
    """The stiffness on record: every EI ratio 1."""
    zones = members.zone_from.shape[1] + 1
    return Stiffness(np.ones((len(members), zones)), members.support_flexibility, members.support_fixity)


@dataclass(frozen=True, slots=True)
class System:
    """The equations of a stack at one stiffness: what makes them, their matrix (M, n, n) and solution.

    ``grip`` stands at nodes (M, K); ``before`` (M, K, 4, 4) is what each node asks of the state left of it;
    ``rotation`` and ``deflection`` (2+C, M, P) are the areas and ``flexibility`` (M, P) the 1/EI at this stiffness.
    ``left`` (4, 1, C, M, K-1) is the state at the left end of panels: deflection, rotation, shear, moment.
    """

    areas: Areas
    ratio: Array
    grip: Array
    before: Array
    rotation: Array
    deflection: Array
    flexibility: Array
    matrix: Array
    left: Array

    @classmethod
    def of(cls, areas: Areas, stiffness: Stiffness) -> "System":
        """Assemble and solve; raises ModelError where there is no unique answer."""
        nodes, unit, ratio = areas.panels, areas.scale, stiffness.EI_ratio
        # 1/(1+f) weighs the support equation, so that it is regular from rigid (1) to no support (0).
        grip = nodes.at_nodes(1.0 / (1.0 + stiffness.flexibility * (unit.EI / unit.length**3)))
        rotation, deflection = bent = weighed(areas, ratio)
        before, matrix, right = equations(areas, bent, grip, nodes.at_nodes(stiffness.fixity))
        flexibility = (areas.flexibility / ratio.T[..., None]).sum(axis=0)
        left = _as_states(_solved(areas, matrix, right)[:, :, None])
        return cls(areas, ratio, grip, before, rotation, deflection, flexibility, matrix, left)

    def change(self, moved: Array, forced: Array) -> Array:
        """States that balance panel ends ``moved`` (4, U, C, M, K-1) and equations ``forced`` (M, n, U, C)."""
        size, ends = len(self.matrix), moved.shape[-1]
        asked = self.before[:, 1:] @ moved.transpose(3, 4, 0, 1, 2).reshape(size, ends, 4, -1)
        right = forced.reshape(size, 4 * ends, -1) - _rows(asked)
        return _as_states(np.linalg.solve(self.matrix, right).reshape(forced.shape))


def equations(areas: Areas, bent: Array, grip: Array, fixity: Array) -> tuple[Array, Array, Array]:
    """What nodes ask of the state left of them (M, K, 4, 4), the matrix (M, n, n) and what is owed (M, n, C).

    ``bent`` (2, 2+C, M, P) are areas of curvature and their moments, of one member several if need be; ``grip`` and
    ``fixity`` stand at nodes (M, K).
    """
    ends = areas.panels.at.shape[1] - 1
    rotation, deflection = bent[..., :ends]
    before, after = _selectors(grip, fixity, areas.held, areas.panels.hinged)
    loaded = np.stack(
        np.broadcast_arrays(deflection[2:], rotation[2:], areas.shear[..., :ends], areas.moment[..., :ends])
    )
    matrix = _assembled(before[:, 1:] @ _carry(areas.reach[:, :ends], rotation, deflection), after[:, :-1])
    right = -_rows(before[:, 1:] @ loaded.transpose(2, 3, 0, 1))
    right[:, vertical_row(ends + 1)] += (grip * areas.movement).transpose(1, 2, 0)
    return before, matrix, right


def _as_states(solution: Array) -> Array:
    """Solution (M, n, U, C) as states at the left end of panels, (4, U, C, M, K-1)."""
    return solution.reshape(len(solution), -1, 4, *solution.shape[2:]).transpose(2, 3, 4, 0, 1)


def weighed(areas: Areas, ratio: Array, *, shear: float = 1.0) -> Array:
    """Area of curvature and its moment at the points, with EI at ``ratio`` (M, Z+1) and so much of the shear
    deflection, (2, 2+C, M, P).
    """
    zones = ratio.shape[1]
    share = np.ones((areas.sums.shape[1], len(ratio)))
    share[:zones] = 1.0 / ratio.T
    share[zones + 1 :] = shear
    return np.einsum("zm,kzbmp->kbmp", share, areas.sums)


def vertical_row(nodes: int) -> NDArray[np.intp]:
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
    carry = np.zeros((*rotation.shape[1:], 4, 4))
    carry[...] = np.eye(4)
    carry[..., 0, 1] = carry[..., 3, 2] = reach
    carry[..., 0, 3], carry[..., 0, 2] = deflection[:2]
    carry[..., 1, 3], carry[..., 1, 2] = rotation[:2]
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


@cache
def _kept(ends: int) -> NDArray[np.intp]:
    """Rows that are equations: the first and the last node have nothing to be continuous with."""
    return np.delete(np.arange(4 * ends + 4), [0, 1, 4 * ends, 4 * ends + 1])


def _rows(per_node: Array) -> Array:
    """What the nodes after the first are owed (M, K-1, 4, C) as rows of the system (M, n, C)."""
    size, ends, _, cases = per_node.shape
    rows = np.concatenate([np.zeros((size, 4, cases)), per_node.reshape(size, 4 * ends, cases)], axis=1)
    return rows[:, _kept(ends)]


def _solved(areas: Areas, matrix: Array, right: Array) -> Array:
    """Solve, with one right-hand side more that is like no load: only a sound system answers it moderately."""
    probe = _probe(matrix.shape[1])
    probed = np.concatenate([right, np.broadcast_to(probe[:, None], (*right.shape[:2], 1))], axis=2)
    try:
        solution = np.linalg.solve(matrix, probed)
    except np.linalg.LinAlgError:
        _refuse_singular(areas, int(np.argmax(np.linalg.cond(matrix))))
    growth = np.abs(matrix).sum(axis=2).max(axis=1) * np.abs(solution[..., -1]).max(axis=1)
    hopeless = ~(growth <= HOPELESS)
    if hopeless.any():
        _refuse_singular(areas, int(np.argmax(hopeless)))
    return solution[..., :-1]


def inverted(areas: Areas, matrix: Array) -> Array:
    """Inverses (D, n, n) of matrices of one member, refused where a solution would be."""
    try:
        inverse = np.linalg.inv(matrix)
    except np.linalg.LinAlgError:
        _refuse_singular(areas, 0)
    growth = np.abs(matrix).sum(axis=2).max(axis=1) * np.abs(inverse @ _probe(matrix.shape[1])).max(axis=1)
    if not (growth <= HOPELESS).all():
        _refuse_singular(areas, 0)
    return inverse


@cache
def _probe(size: int) -> Array:
    """A right-hand side that is like no load."""
    return np.cos(1.0 + np.arange(size) ** 2)


def _refuse_singular(areas: Areas, which: int) -> NoReturn:
    raise ModelError(
        f"member {areas.members.name[which]!r} cannot be solved: it has no unique answer; a support so soft that it "
        "holds nothing, or a rigid zone over more supports than it needs, leaves it so"
    )
