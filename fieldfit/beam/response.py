"""Response: what a loaded member does at its stations, and how that changes with its unknowns."""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from fieldfit.beam.areas import Areas, integrate
from fieldfit.beam.loads import Loads
from fieldfit.beam.member import Array, Flags, Members
from fieldfit.beam.system import Stiffness, System, recorded, vertical_row

__all__ = ["Response", "gradient", "respond", "solve", "solve_with_gradient"]

NOISE = 1e-9  # a pull below this share of the largest reaction of its case is rounding, not uplift


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
        largest = np.abs(np.nan_to_num(self.reaction)).max(axis=-1, keepdims=True, initial=0.0)
        pulled: Flags = self.reaction < -NOISE * largest
        return pulled


def respond(members: Members, loads: Loads, at: Array, left: Flags | None = None) -> Response:
    """Response of recorded members to their loads at stations ``at`` (M, S), m; see ``integrate``.

    Equal spans under uniform load, against exact fractions, relative to the largest value: 5e-15 at ten spans, 9e-15
    at 20, 2e-14 at 40, 4e-14 at 80 (each panel keeps its own tangent). Raises ModelError for a mechanism.
    """
    return solve(integrate(members, loads, at, left))


def solve(areas: Areas, stiffness: Stiffness | None = None) -> Response:
    """Response at the stations of ``areas``, with the recorded stiffness or another one."""
    return _response(System.of(areas, stiffness or recorded(areas.members)))


def gradient(areas: Areas, stiffness: Stiffness | None = None) -> Response:
    """Derivatives with respect to the log EI ratio of each zone, each bearing flexibility, each fixity.

    Shape (M, U, C, S) with U = (Z+1) + J + J in that order. What is linear (loads, movements, imposed
    curvature) needs no derivative: it is the response to a load case of its own.
    """
    return _gradient(System.of(areas, stiffness or recorded(areas.members)))


def solve_with_gradient(areas: Areas, stiffness: Stiffness) -> tuple[Response, Response]:
    """Response and gradient from one solution: what each step of a fit needs."""
    system = System.of(areas, stiffness)
    return _response(system), _gradient(system)


def _response(system: System) -> Response:
    return _to_si(system.areas, _plain_points(system), system.left, None)


def _gradient(system: System) -> Response:
    """Each unknown unbalances some equations of the panels, and a zone's EI bends the zone besides."""
    areas = system.areas
    zones, supports = system.ratio.shape[1], areas.panels.of_support.shape[1]
    unknowns, ends = zones + 2 * supports, areas.panels.at.shape[1] - 1
    sums = _own_sums(system, unknowns)
    nothing = np.zeros_like(sums.deflection[:, :ends])
    moved = np.stack([sums.deflection[:, :ends], sums.rotation[:, :ends], nothing, nothing], axis=2)
    left = system.change(moved, _forced(system, unknowns))
    unit = np.ones((len(areas.members), unknowns))
    unit[:, zones : zones + supports] = (areas.scale.EI / areas.scale.length**3)[:, :, 0]
    return _to_si(areas, _points(system, left, sums), left, unit)


def _forced(system: System, unknowns: int) -> Array:
    """How the support equations change with flexibility and fixity, the states held, (M, n, U, C)."""
    areas, zones = system.areas, system.ratio.shape[1]
    size, rows, count = system.solution.shape
    reaction, restraint, turn = (s[:, :, 0] for s in _node_actions(_plain_points(system), system.left))
    owner, support = np.nonzero(areas.panels.of_support >= 0)
    node = areas.panels.of_support[owner, support]
    row = vertical_row(areas.panels.at.shape[1])[node]
    forced = np.zeros((size, rows, unknowns, count))
    forced[owner, row, zones + support] = -(system.grip[..., None] * reaction)[owner, node]
    turned = (restraint + system.held[..., None] * turn)[owner, node]
    forced[owner, row + 1, zones + areas.panels.of_support.shape[1] + support] = turned
    return forced


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


def _plain_points(system: System) -> _Points:
    areas = system.areas
    sums = (system.deflection[..., 2:], system.rotation[..., 2:], areas.imposed, areas.moment, areas.shear)
    return _points(system, system.left, _Sums(*(s[:, :, None] for s in sums)))


def _points(system: System, left: Array, sums: _Sums) -> _Points:
    areas = system.areas
    deflection, turned, pushed, bent = np.moveaxis(_at_points(areas, left), 2, 0)
    by_bent, by_pushed = (part[..., None, None] for part in np.moveaxis(system.rotation[..., :2], 2, 0))
    rotation = turned + by_bent * bent + by_pushed * pushed + sums.rotation
    by_bent, by_pushed = (part[..., None, None] for part in np.moveaxis(system.deflection[..., :2], 2, 0))
    reach = areas.reach[..., None, None]
    deflection = deflection + reach * turned + by_bent * bent + by_pushed * pushed + sums.deflection
    moment = bent + reach * pushed + sums.moment
    flexibility = (areas.flexibility / system.ratio[:, None]).sum(axis=2)[..., None, None]
    return _Points(deflection, rotation, flexibility * moment + sums.curvature, moment, pushed + sums.shear)


def _own_sums(system: System, unknowns: int) -> _Sums:
    """Change of the sums at all points with the log EI ratio of each zone, the panel states held."""
    areas, zones = system.areas, system.ratio.shape[1]
    _, _, pushed, bent = np.moveaxis(_at_points(areas, system.left), 2, 0)
    share = (-1.0 / system.ratio)[:, None, :, None]
    sums = areas.sums[:, :, :, :zones]
    bent_by = sums[..., 0, None] * bent[:, :, None] + sums[..., 1, None] * pushed[:, :, None] + sums[..., 2:]
    here = bent + areas.reach[..., None, None] * pushed + areas.moment[:, :, None]
    parts = (bent_by[:, :, 1], bent_by[:, :, 0], areas.flexibility[..., None] * here)
    fill = ((0, 0), (0, 0), (0, unknowns - zones), (0, 0))
    return _Sums(*(np.pad(share * part, fill) for part in parts))


def _at_points(areas: Areas, left: Array) -> Array:
    """The state at the left end of the panel of every point, (M, P, 4, U, C)."""
    return left[np.arange(len(left))[:, None], areas.panel]


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
