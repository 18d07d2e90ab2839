"""Condensed: one member seen at a few places, with everything multiplied out that its stiffness does not change.

The equations of System are linear in 1/EI of each zone, and a support stands between free (no force) and held (no
movement) by its grip or fixity. So they are kept once as held, by zone, and once as free; a step of a fit only weighs
them, inverts one small matrix, and follows what is seen through it.
"""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam.areas import Areas
from fieldfit.beam.member import Array
from fieldfit.beam.system import Stiffness, equations, inverted, vertical_row

__all__ = ["SEEN", "Condensed", "condense"]

SEEN = ("deflection", "rotation", "curvature")  # what can be followed


@dataclass(frozen=True, slots=True, kw_only=True)
class Condensed:
    """Equations (n rows), then sights (S rows), over the n states and C load cases of one member.

    ``held`` (Z+2, n+S, n+C) is by 1/EI of each zone, its last part whatever the zones; ``free`` (n, n+C) are the
    equations with every support let go. ``rows`` (2J,) are the equations of the supports, vertical then rotation;
    padding is not ``real`` and moves nothing. ``unit`` (N/m) takes flexibilities to those of the equations.
    """

    areas: Areas
    held: Array
    free: Array
    rows: NDArray[np.intp]
    real: NDArray[np.bool_]
    unit: float

    def sight(self, stiffness: Stiffness) -> Array:
        """What is seen in each load case at each of a stack of stiffnesses (D rows), (D, S, C), SI."""
        solution = self._solved(stiffness)
        return solution.whole[:, len(self.free) :] @ solution.states

    def sight_and_gradient(self, stiffness: Stiffness) -> tuple[Array, Array]:
        """What is seen at one stiffness (S, C) and how it changes with the unknowns of ``gradient``, (U, S, C)."""
        share, grip, whole, inverse, states = (part[0] for part in self._solved(stiffness))
        size, supports = len(inverse), len(self.rows) // 2
        eye = whole[size:]
        lever = eye[:, :size] @ inverse
        owed = self.held[:-1] @ states
        by_zone = (lever @ (grip[:, None] * owed[:, :size]) - owed[:, size:]) * share[:-1, None, None]
        away = (whole[self.rows] - self.free[self.rows]) @ states
        away[:supports] *= -self.unit * grip[self.rows[:supports], None] ** 2
        away[~self.real] = 0.0
        return eye @ states, np.concatenate([by_zone, -lever.T[self.rows, :, None] * away[:, None]])

    def _solved(self, stiffness: Stiffness) -> "_Solution":
        count, (size, width) = len(stiffness.EI_ratio), self.free.shape
        share = np.concatenate([1.0 / stiffness.EI_ratio, np.ones((count, 1))], axis=1)
        held = np.concatenate([1.0 / (1.0 + self.unit * stiffness.flexibility), stiffness.fixity], axis=1)
        grip = np.ones((count, size))
        grip[:, self.rows[self.real]] = held[:, self.real]
        whole = (share @ self.held.reshape(len(self.held), -1)).reshape(count, -1, width)
        equations = grip[..., None] * whole[:, :size] + (1.0 - grip[..., None]) * self.free
        inverse = inverted(self.areas, equations[..., :size])
        unit = np.broadcast_to(np.eye(width - size), (count, width - size, width - size))
        return _Solution(share, grip, whole, inverse, np.concatenate([-inverse @ equations[..., size:], unit], axis=1))


class _Solution(NamedTuple):
    """Share (D, Z+2) of each part, grip (D, n) of each equation, all rows with supports held (D, n+S, n+C), the inverse
    of the equations (D, n, n), and the states over unit load cases (D, n+C, C).
    """

    share: Array
    grip: Array
    whole: Array
    inverse: Array
    states: Array


def condense(areas: Areas, station: NDArray[np.intp], kind: NDArray[np.intp]) -> Condensed:
    """Multiply out the equations of one member (a stack of one) and what is seen of it.

    ``station`` (S,) numbers the stations of ``areas``, ``kind`` (S,) what is seen there in the order of SEEN.
    """
    nodes, zones = areas.panels, len(areas.flexibility)
    parts = np.concatenate([areas.sums[:, :zones], areas.sums[:, zones:].sum(axis=1, keepdims=True)], axis=1)
    bent = np.concatenate([parts, np.zeros_like(parts[:, :1])], axis=1)[:, :, :, 0].swapaxes(1, 2)
    *held, constant = _whole(areas, bent, 1.0)
    held[:zones] = [zone - constant for zone in held[:zones]]
    row = vertical_row(nodes.at.shape[1])[np.maximum(nodes.of_support[0], 0)]
    return Condensed(
        areas=areas,
        held=np.concatenate([held, _seen(areas, parts, nodes.at.shape[1] - 1 + station, kind)], axis=1),
        free=_whole(areas, bent[:, :, -1:], 0.0)[0],
        rows=np.concatenate([row, row + 1]),
        real=np.tile(nodes.of_support[0] >= 0, 2),
        unit=float(areas.scale.EI[0, 0] / areas.scale.length[0, 0] ** 3),
    )


def _whole(areas: Areas, bent: Array, held: float) -> Array:
    """Equations (B, n, n+C), what they are owed on the left side too, where only ``bent`` (2, 2+C, B, P) bends."""
    grip = areas.panels.at_nodes(np.full(areas.panels.of_support.shape, held))
    _, matrix, right = equations(areas, bent, grip, grip)
    return np.concatenate([matrix, -right], axis=2)


def _seen(areas: Areas, parts: Array, point: NDArray[np.intp], kind: NDArray[np.intp]) -> Array:
    """Sights (Z+2, S, n+C) at points: the state of their panel carried there by the two moment-area theorems."""
    zones, cases, which = len(areas.flexibility), len(areas.moment), np.arange(len(point))
    reach, length = areas.reach[0, point], float(areas.scale.length[0, 0])
    moment = np.concatenate([np.ones((1, len(point))), reach[None], areas.moment[:, 0][:, point]])
    bent = np.zeros((3, zones + 1, 2 + cases, len(point)))
    bent[:2] = parts[::-1, ..., 0, :][..., point]
    bent[2, :zones] = areas.flexibility[:, 0][:, None, point] * moment
    bent[2, zones, 2:] = areas.imposed[:, 0][:, point]
    own = bent[kind, :, :, which]
    first, size = 4 * areas.panel[0, point], 4 * (areas.panels.at.shape[1] - 1)
    out = np.zeros((zones + 1, len(point), size + cases))
    out[:, which, first + 3], out[:, which, first + 2] = own[:, :, 0].T, own[:, :, 1].T
    out[:, :, size:] = own[:, :, 2:].transpose(1, 0, 2)
    out[-1, which, first] = kind == 0
    out[-1, which, first + 1] = np.array([reach, np.ones_like(reach), np.zeros_like(reach)])[kind, which]
    return out * np.array([length, 1.0, 1.0 / length])[kind, None]
