"""An independent beam for the demos: direct stiffness with exact cubic elements, knowing nothing of fieldfit.

x from the left end, deflections and rotations of the usual sense of engineers here: deflection down, rotation
anticlockwise, forces down, sagging moment positive. Any consistent units.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Support:
    """Vertical and rotational spring stiffness at a station; None holds fast."""

    at: float
    vertical: float | None = None
    rotational: float | None = 0.0


@dataclass(frozen=True)
class Beam:
    """A prismatic beam under forces (at, down) and one even load over its whole length (down)."""

    length: float
    EI: float
    supports: Sequence[Support]
    forces: Sequence[tuple[float, float]] = ()
    even: float = 0.0
    stations: Sequence[float] = ()


@dataclass(frozen=True)
class Answer:
    """Deflection, rotation and moment at the stations asked for."""

    deflection: np.ndarray
    rotation: np.ndarray
    moment: np.ndarray


def solve(beam: Beam) -> Answer:
    """Solve by direct stiffness; every support, force and station is a node, so that no reading is interpolated."""
    places = [0.0, beam.length, *beam.stations, *(s.at for s in beam.supports), *(at for at, _ in beam.forces)]
    nodes = np.unique(np.round(places, 9))
    size = 2 * len(nodes)
    stiffness, push = np.zeros((size, size)), np.zeros(size)
    for left in range(len(nodes) - 1):
        own = slice(2 * left, 2 * left + 4)
        length = nodes[left + 1] - nodes[left]
        stiffness[own, own] += beam.EI / length**3 * _element(length)
        push[own] += _even(beam.even, length)
    for at, force in beam.forces:
        push[2 * _node(nodes, at)] -= force
    held = []
    for support in beam.supports:
        for freedom, spring in ((0, support.vertical), (1, support.rotational)):
            which = 2 * _node(nodes, support.at) + freedom
            if spring is None:
                held.append(which)
            else:
                stiffness[which, which] += spring
    free = np.setdiff1d(np.arange(size), held)
    moved = np.zeros(size)
    moved[free] = np.linalg.solve(stiffness[np.ix_(free, free)], push[free])
    asked = [_node(nodes, at) for at in beam.stations]
    moments = np.array([_moment(beam, nodes, moved, node) for node in asked])
    return Answer(-moved[0::2][asked], moved[1::2][asked], moments)


def _node(nodes: np.ndarray, at: float) -> int:
    return int(np.argmin(np.abs(nodes - at)))


def _element(length: float) -> np.ndarray:
    """Stiffness of a cubic element times L3/EI; deflections up, rotations anticlockwise."""
    a, b, c = 6 * length, 4 * length**2, 2 * length**2
    return np.array([[12, a, -12, a], [a, b, -a, c], [-12, -a, 12, -a], [a, c, -a, b]])


def _even(even: float, length: float) -> np.ndarray:
    """Forces and couples at the nodes that stand for an even load down."""
    return -even * length / 2 * np.array([1, length / 6, 1, -length / 6])


def _moment(beam: Beam, nodes: np.ndarray, moved: np.ndarray, node: int) -> float:
    """Sagging moment at a node, from the element on its right (on its left at the right end)."""
    left = min(node, len(nodes) - 2)
    own = slice(2 * left, 2 * left + 4)
    length = nodes[left + 1] - nodes[left]
    ends = beam.EI / length**3 * _element(length) @ moved[own] - _even(beam.even, length)
    return float(-ends[1] if node == left else ends[3])
