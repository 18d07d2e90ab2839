"""Cells: the stretches of a member on which the moment is a polynomial and EI is smooth.

Cells run between neighbouring edges: nodes, stations, zone edges and load edges. An edge may stand twice; a cell
without width weighs nothing, which is why unlike members can be padded and stacked.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam.actions import imposed_curvature, intensity, load_actions
from fieldfit.beam.loads import Loads
from fieldfit.beam.member import Array, Flags, Members, pick
from fieldfit.beam.panels import Panels

__all__ = ["Cells", "EI_at", "Scale", "by_zone", "cut", "of_zone", "zone_at"]


def gauss(points: int) -> tuple[Array, Array]:
    """Points and weights of Gauss-Legendre quadrature on [0, 1]."""
    s, weight = np.polynomial.legendre.leggauss(points)
    return (s + 1) / 2, weight / 2


GAUSS = gauss(20)  # in a tapered cell: to 3e-14 up to a taper of 1:10000 (14 points: 7e-11 at 1:1000)


@dataclass(frozen=True, slots=True, kw_only=True)
class Scale:
    """What one stands for, per member, shape (M, 1): length (m) and EI (N m2)."""

    length: Array
    EI: Array

    @property
    def force(self) -> Array:
        """EI / length2, N."""
        return self.EI / self.length**2

    @property
    def moment(self) -> Array:
        """EI / length, N m."""
        return self.EI / self.length


@dataclass(frozen=True, slots=True, kw_only=True)
class Cells:
    """Sums over all cells left of an edge: area of curvature and its moment, free of dimension.

    ``sums`` (2, zones, b, M, E): 0 the area, 1 its moment, each about the left end of the cell's own panel; by
    zone (0 the rest of the member, 1 to Z, and two more for what no EI changes, imposed curvature and shear
    deflection, where there is any) and by what bends the panel (b = the moment and shear at its left end, C cases).
    Small axes stand first, so that arithmetic runs along members and edges.
    ``node_edge`` (M, K) and ``point_edge`` (M, P) say which edge a node or a point is.
    """

    sums: Array
    node_edge: NDArray[np.intp]
    point_edge: NDArray[np.intp]

    def within_panel(self, panel: NDArray[np.intp]) -> Array:
        """Sums from the left end of each point's ``panel`` (M, P) to the point, (2, zones, b, M, P)."""
        return pick(self.sums, self.point_edge) - pick(self.sums, pick(self.node_edge, panel))


def cut(members: Members, loads: Loads, nodes: Panels, points: Array, scale: Scale) -> Cells:
    """Cut members at every edge and sum the integrals of the cells."""
    end = members.length[:, None]
    marks = [members.zone_from, members.zone_to, loads.force_at, loads.couple_at]
    marks += [loads.spread_from, loads.spread_to, loads.bend_from, loads.bend_to]
    places = np.concatenate([nodes.at, points, *marks], axis=1)
    places = np.where(np.isnan(places), end, places)
    order = np.argsort(places, axis=1, kind="stable")
    edge = np.empty_like(order)
    edge[np.arange(len(order))[:, None], order] = np.arange(order.shape[1])
    edges = pick(places, order)
    first, second = edges[:, :-1], edges[:, 1:]
    node_count, point_count = nodes.at.shape[1], points.shape[1]
    node_edge, point_edge = edge[:, :node_count], edge[:, node_count : node_count + point_count]
    panel = nodes.holding((first + second) / 2, np.zeros(first.shape, dtype=bool))
    area, moment = _integrals(members, loads, first, second, pick(nodes.at, panel), scale)
    sums = np.zeros((2, *area.shape[:-1], edges.shape[1]))
    np.cumsum(area, axis=-1, out=sums[0, ..., 1:])
    # The area that a panel has gathered so far turns the rest of it: its moment grows with every further cell.
    so_far = sums[0, ..., :-1] - pick(sums[0], pick(node_edge, panel))
    np.cumsum(so_far * ((second - first) / scale.length) + moment, axis=-1, out=sums[1, ..., 1:])
    return Cells(sums=sums, node_edge=node_edge, point_edge=point_edge)


def _integrals(members: Members, loads: Loads, first: Array, second: Array, origin: Array, scale: Scale) -> Array:
    """Area of curvature in each cell, and its moment about the cell's right end, (2, zones, b, M, E-1).

    Along a cell every moment is a cubic in the share t of its width, so five integrals of t**n/EI serve all.
    """
    middle, width = (first + second) / 2, (second - first) / scale.length
    zone = zone_at(members, middle, np.zeros(first.shape, dtype=bool))
    weights, flexibility = _power_weights(EI_at(members, first, zone), EI_at(members, second, zone))
    cubic = _cubics(loads, first, second, origin, scale)
    turn = flexibility * scale.EI * width
    bent = _weighed(cubic, weights) * np.stack([turn, turn * width])[:, None]
    bent = bent[:, None] * by_zone(zone, members.zone_from.shape[1])[:, None]
    sheared = members.shear_flexibility.any() or members.zone_shear_flexibility.any()
    if not (sheared or loads.bend_from.shape[1]):
        return bent
    fixed = np.zeros((2, 2, *bent.shape[2:]))
    imposed = imposed_curvature(loads, middle, np.zeros(first.shape, dtype=bool)) * scale.length
    fixed[0, 0, 2:] = imposed * width
    fixed[1, 0, 2:] = imposed * width**2 / 2
    # Shear is the slope of the moment, so what it adds up to over a cell is what the moment gains.
    shear_flexibility = of_zone(members.shear_flexibility, members.zone_shear_flexibility, zone)
    fixed[1, 1] -= shear_flexibility * scale.force * cubic[1:].sum(axis=0)
    return np.concatenate([bent, fixed], axis=1)


def by_zone(zone: NDArray[np.intp], zones: int) -> Array:
    """One in the zone that holds a place (M, X), of the rest and so many zones, (Z+1, M, X)."""
    return (zone == np.arange(zones + 1)[:, None, None]).astype(float)


def _power_weights(EI: Array, EI_end: Array) -> tuple[Array, Array]:
    """What turns a cubic in t into its area over 1/EI and the moment of that about t = 1, (2, 4, ...), with the
    flexibility 1/(N m2) per cell that goes in front.

    In a tapered cell EI = E1 (E2/E1)**s with s running as the logarithm of EI, so dt/EI is constant in s and what
    is left to integrate is entire: Gauss-Legendre converges faster than any power, however steep the taper.
    """
    exponent = np.arange(5.0)
    if np.array_equal(EI, EI_end):
        power, flexibility = 1.0 / (exponent + 1.0), 1.0 / EI
    else:
        rigid = ~np.isfinite(EI)
        log = np.log(np.where(rigid, 1.0, EI_end / np.where(rigid, 1.0, EI)))
        flat = np.abs(log) < 1e-12
        (s, weight), steep = GAUSS, np.where(flat, 1.0, log)
        share = np.where(flat[..., None], s, np.expm1(steep[..., None] * s) / np.expm1(steep)[..., None])
        power = np.einsum("...gn,g->n...", share[..., None] ** exponent, weight)
        flexibility = np.where(flat, 1.0, steep / np.expm1(steep)) / EI
    return np.stack([power[:4], power[:4] - power[1:]]), flexibility


def _weighed(cubic: Array, weights: Array) -> Array:
    """Cubics (4, b, M, E-1) by weights (2, 4, ...), per cell or the same for all, (2, b, M, E-1)."""
    if weights.ndim == 2:
        return (weights @ cubic.reshape(4, -1)).reshape(2, *cubic.shape[1:])
    return np.einsum("knme,nbme->kbme", weights, cubic)


def _cubics(loads: Loads, first: Array, second: Array, origin: Array, scale: Scale) -> Array:
    """Moment along each cell for each thing that bends it, as factors of t**0 to t**3, (4, 2+C, M, E-1)."""
    width = second - first
    out = np.zeros((4, 2 + loads.cases, *first.shape))
    out[0, 0] = 1.0
    out[0, 1], out[1, 1] = (first - origin) / scale.length, width / scale.length
    shear, moment = load_actions(loads, origin, first, np.zeros(first.shape, dtype=bool))
    per_moment = 1.0 / scale.moment
    out[0, 2:], out[1, 2:] = moment * per_moment, shear * (width * per_moment)
    if loads.spread_from.shape[1]:
        start, gradient = intensity(loads, first, second)
        square = width * width * per_moment
        out[2, 2:], out[3, 2:] = start * (square / 2), gradient * (square * width / 6)
    return out


def zone_at(members: Members, x: Array, left: Flags) -> NDArray[np.intp]:
    """Number of the zone at x (M, X), 0 where there is none; at an edge the one to its right, or ``left`` of it.

    Where two zones overlap by no more than rounding the later one counts.
    """
    start, end = members.zone_from.T[..., None], members.zone_to.T[..., None]
    inside = np.where(left, (start < x) & (x <= end), (start <= x) & (x < end))
    zone: NDArray[np.intp] = (inside * np.arange(1, len(start) + 1)[:, None, None]).max(axis=0, initial=0)
    return zone


def of_zone(whole: Array, by_zone: Array, zone: NDArray[np.intp]) -> Array:
    """Pick, for each ``zone`` number (M, X), the value of the rest of the member (M,) or that of a zone (M, Z)."""
    if not by_zone.shape[1]:
        return np.broadcast_to(whole[:, None], zone.shape)
    return pick(np.concatenate([whole[:, None], by_zone], axis=1), zone)


def EI_at(members: Members, x: Array, zone: NDArray[np.intp]) -> Array:
    """EI (N m2) at x as seen from inside ``zone``."""
    if not members.zone_from.shape[1]:
        return np.broadcast_to(members.EI[:, None], x.shape)
    start, end = (of_zone(members.EI, EI, zone) for EI in (members.zone_EI, members.zone_EI_end))
    origin = of_zone(np.zeros_like(members.length), members.zone_from, zone)
    stop = of_zone(members.length, members.zone_to, zone)
    rise = np.where(np.isfinite(start), end, 0.0) - np.where(np.isfinite(start), start, 0.0)
    return start + rise * (x - origin) / (stop - origin)
