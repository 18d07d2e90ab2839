"""Response: what a loaded member does at its stations, and how that changes with its unknowns."""

from dataclasses import dataclass, fields
from typing import NamedTuple

import numpy as np

from fieldfit.beam.areas import Areas, integrate
from fieldfit.beam.loads import Loads
from fieldfit.beam.member import Array, Flags, Members, pick
from fieldfit.beam.system import Stiffness, System, recorded, vertical_row

__all__ = ["Response", "gradient", "respond", "solve", "solve_with_gradient"]

BLOCK = 1000  # members solved at once: the arrays of more are too large for the cache
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
    if len(members) <= BLOCK:
        return solve(integrate(members, loads, at, left))
    parts = [
        solve(integrate(members.block(rows), loads.block(rows), at[rows], None if left is None else left[rows]))
        for rows in (slice(start, start + BLOCK) for start in range(0, len(members), BLOCK))
    ]
    return Response(*(np.concatenate([getattr(part, field.name) for part in parts]) for field in fields(Response)))


def solve(areas: Areas, stiffness: Stiffness | None = None) -> Response:
    """Response at the stations of ``areas``, with the recorded stiffness or another one."""
    return _response(areas, _plain(System.of(areas, stiffness or recorded(areas.members))))


def gradient(areas: Areas, stiffness: Stiffness | None = None) -> Response:
    """Derivatives with respect to the log EI ratio of each zone, each bearing flexibility, each fixity.

    Shape (M, U, C, S) with U = (Z+1) + J + J in that order. What is linear (loads, movements, imposed
    curvature) needs no derivative: it is the response to a load case of its own.
    """
    return solve_with_gradient(areas, stiffness or recorded(areas.members))[1]


def solve_with_gradient(areas: Areas, stiffness: Stiffness) -> tuple[Response, Response]:
    """Response and gradient from one solution: what each step of a fit needs."""
    system = System.of(areas, stiffness)
    plain = _plain(system)
    return _response(areas, plain), _gradient(system, plain)


class _Sums(NamedTuple):
    """What is added to the states carried to the points: by the loads, or by an EI ratio itself; (U, C, M, P)."""

    deflection: Array
    rotation: Array
    curvature: Array
    moment: Array | float = 0.0
    shear: Array | float = 0.0


class _State(NamedTuple):
    """Responses free of dimension at the P points of the areas (U, C, M, P), then at the K nodes (U, C, M, K)."""

    deflection: Array
    rotation: Array
    curvature: Array
    moment: Array
    shear: Array
    reaction: Array
    restraint: Array
    turn: Array


def _plain(system: System) -> _State:
    areas = system.areas
    sums = (system.deflection[2:], system.rotation[2:], areas.imposed, areas.moment, areas.shear)
    return _state(system, system.left, _Sums(*sums))


def _state(system: System, left: Array, sums: _Sums) -> _State:
    """The two moment-area theorems carry the state at the left end of each panel to the points in it."""
    areas = system.areas
    start, turned, pushed, bent = pick(left, areas.panel)
    rotation = turned + system.rotation[0] * bent + system.rotation[1] * pushed + sums.rotation
    deflection = system.deflection[0] * bent + system.deflection[1] * pushed + sums.deflection
    deflection += start + areas.reach * turned
    moment = bent + areas.reach * pushed + sums.moment
    curvature, shear = system.flexibility * moment + sums.curvature, pushed + sums.shear
    return _State(deflection, rotation, curvature, moment, shear, *_node_actions(left, rotation, moment, shear))


def _node_actions(left: Array, rotation: Array, moment: Array, shear: Array) -> tuple[Array, Array, Array]:
    """Reaction, restraint couple and rotation at every node, (U, C, M, K)."""
    ends = left.shape[-1]
    reaction, restraint, turn = np.zeros((3, *left.shape[1:-1], ends + 1))
    turn[..., :-1], reaction[..., :-1], restraint[..., :-1] = left[1:]
    reaction[..., 1:] -= shear[..., :ends]
    restraint[..., 1:] -= moment[..., :ends]
    turn[..., -1] = rotation[..., ends - 1]
    return reaction, restraint, turn


def _gradient(system: System, plain: _State) -> Response:
    """Each unknown unbalances some equations of the panels, and a zone's EI bends the zone besides."""
    areas = system.areas
    zones, supports = system.ratio.shape[1], areas.panels.of_support.shape[1]
    unknowns, ends = zones + 2 * supports, areas.panels.at.shape[1] - 1
    sums = _own_sums(system, plain, unknowns)
    moved = np.zeros((4, *sums.deflection.shape[:-1], ends))
    moved[0], moved[1] = sums.deflection[..., :ends], sums.rotation[..., :ends]
    left = system.change(moved, _forced(system, plain, unknowns))
    unit = np.ones((unknowns, 1, len(areas.members), 1))
    unit[zones : zones + supports, 0] = areas.scale.EI / areas.scale.length**3
    parts = _to_si(areas, _state(system, left, sums))
    return Response(*((part * unit).transpose(2, 0, 1, 3) for part in parts))


def _own_sums(system: System, plain: _State, unknowns: int) -> _Sums:
    """Change of the sums at all points with the log EI ratio of each zone, the panel states held."""
    areas, zones = system.areas, system.ratio.shape[1]
    _, _, pushed, bent = pick(system.left[:, 0], areas.panel)
    share, sums = -1.0 / system.ratio.T[..., None], areas.sums[:, :zones]
    out = np.zeros((3, unknowns, *plain.moment.shape[1:]))
    out[1::-1, :zones] = sums[:, :, :1] * bent + sums[:, :, 1:2] * pushed + sums[:, :, 2:]
    out[2, :zones] = areas.flexibility[:, None] * plain.moment
    out[:, :zones] *= share[:, None]
    return _Sums(*out)


def _forced(system: System, plain: _State, unknowns: int) -> Array:
    """How the support equations change with flexibility and fixity, the states held, (M, n, U, C)."""
    areas, zones = system.areas, system.ratio.shape[1]
    owner, support = np.nonzero(areas.panels.of_support >= 0)
    node = areas.panels.of_support[owner, support]
    row = vertical_row(areas.panels.at.shape[1])[node]
    forced = np.zeros((*system.matrix.shape[:2], unknowns, plain.moment.shape[1]))
    pushed, turned = -system.grip * plain.reaction[0], plain.restraint[0] + areas.held * plain.turn[0]
    forced[owner, row, zones + support] = pushed[:, owner, node].T
    forced[owner, row + 1, zones + areas.panels.of_support.shape[1] + support] = turned[:, owner, node].T
    return forced


def _response(areas: Areas, plain: _State) -> Response:
    return Response(*(part[0].swapaxes(0, 1) for part in _to_si(areas, plain)))


def _to_si(areas: Areas, state: _State) -> list[Array]:
    """Fields of a response at the stations in SI, (U, C, M, S), and of the supports, (U, C, M, J)."""
    ends, scale = areas.panels.at.shape[1] - 1, areas.scale
    blank = np.where(areas.blank, np.nan, 1.0)
    deflection, rotation, curvature, moment, shear = (part[..., ends:] * blank for part in state[:5])
    slope = rotation - shear * areas.shear_flexibility[:, ends:]
    parts = [deflection * scale.length, rotation, slope, curvature / scale.length]
    parts += [moment * scale.moment, shear * scale.force]
    reaction, restraint = (areas.panels.at_supports(part) for part in (state.reaction, state.restraint))
    return [*parts, reaction * scale.force, restraint * scale.moment]
