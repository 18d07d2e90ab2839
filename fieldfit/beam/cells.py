"""Cells: the stretches of a member on which the moment is a polynomial and EI is smooth.

Cells run between neighbouring edges: nodes, stations, zone edges and load edges. An edge may stand twice; a cell
without width weighs nothing, which is why unlike members can be padded and stacked.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam.actions import imposed_curvature, intensity, load_actions
from fieldfit.beam.loads import Loads
from fieldfit.beam.member import Array, Flags, Members
from fieldfit.beam.panels import Panels

__all__ = ["Cells", "EI_at", "Scale", "cut", "of_zone", "zone_at"]


def gauss(points: int) -> tuple[Array, Array]:
    """Points and weights of Gauss-Legendre quadrature on [0, 1]."""
    s, weight = np.polynomial.legendre.leggauss(points)
    return (s + 1) / 2, weight / 2


GAUSS = gauss(16)  # in a tapered cell: to rounding at a taper of 1:100, 1e-13 at 1:1000, 2e-11 at 1:10000


@dataclass(frozen=True, slots=True, kw_only=True)
class Scale:
    """What one stands for, per member, shape (M, 1, 1): length (m) and EI (N m2)."""

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

    ``sums`` (M, E, 2, zones, b): 0 the area, 1 its moment, each about the left end of the cell's own panel; by
    zone (0 the rest of the member, 1 to Z, and two more for what no EI changes, imposed curvature and shear
    deflection, where there is any) and by what bends the panel (b = the moment and shear at its left end, C cases).
    ``node_edge`` (M, K) and ``point_edge`` (M, P) say which edge a node or a point is.
    """

    sums: Array
    node_edge: NDArray[np.intp]
    point_edge: NDArray[np.intp]

    def within_panel(self, panel: NDArray[np.intp]) -> Array:
        """Sums from the left end of each point's ``panel`` (M, P) to the point, (M, P, 2, zones, b)."""
        start = np.take_along_axis(self.node_edge, panel, axis=1)
        return _pick(self.sums, self.point_edge) - _pick(self.sums, start)


def cut(members: Members, loads: Loads, nodes: Panels, points: Array, scale: Scale) -> Cells:
    """Cut members at every edge and sum the integrals of the cells."""
    end = members.length[:, None]
    marks = [members.zone_from, members.zone_to, loads.force_at, loads.couple_at]
    marks += [loads.spread_from, loads.spread_to, loads.bend_from, loads.bend_to]
    places = np.concatenate([nodes.at, points, *marks], axis=1)
    places = np.where(np.isnan(places), end, places)
    order = np.argsort(places, axis=1, kind="stable")
    edge = np.empty_like(order)
    np.put_along_axis(edge, order, np.broadcast_to(np.arange(order.shape[1]), order.shape), axis=1)
    edges = np.take_along_axis(places, order, axis=1)
    first, second = edges[:, :-1], edges[:, 1:]
    node_count, point_count = nodes.at.shape[1], points.shape[1]
    node_edge, point_edge = edge[:, :node_count], edge[:, node_count : node_count + point_count]
    panel = nodes.holding((first + second) / 2, np.zeros(first.shape, dtype=bool))
    parts = _integrals(members, loads, first, second, np.take_along_axis(nodes.at, panel, axis=1), scale)
    sums = np.zeros((*edges.shape, *parts.shape[2:]))
    np.cumsum(parts[:, :, 0], axis=1, out=sums[:, 1:, 0])
    # The area that a panel has gathered so far turns the rest of it: its moment grows with every further cell.
    so_far = sums[:, :-1, 0] - _pick(sums[:, :, 0], np.take_along_axis(node_edge, panel, axis=1))
    width = ((second - first) / scale.length[:, 0])[..., None, None]
    np.cumsum(so_far * width + parts[:, :, 1], axis=1, out=sums[:, 1:, 1])
    return Cells(sums=sums, node_edge=node_edge, point_edge=point_edge)


def _pick(per_edge: Array, which: NDArray[np.intp]) -> Array:
    return per_edge[np.arange(len(which))[:, None], which]


def _integrals(members: Members, loads: Loads, first: Array, second: Array, origin: Array, scale: Scale) -> Array:
    """Area of curvature in each cell, and its moment about the cell's right end, (M, E-1, 2, zones, b).

    Along a cell every moment is a cubic in the share t of its width, so five integrals of t**n/EI serve all.
    """
    middle, width = (first + second) / 2, (second - first) / scale.length[:, 0]
    zone = zone_at(members, middle, np.zeros(first.shape, dtype=bool))
    weights, flexibility = _power_weights(EI_at(members, first, zone), EI_at(members, second, zone))
    cubic = _cubics(loads, first, second, origin, scale)
    bent = (flexibility * scale.EI[:, 0] * width)[..., None, None] * _product(cubic, weights)
    bent[..., 1] *= width[..., None]
    bent = bent.swapaxes(2, 3)[:, :, :, None]
    zones = members.zone_from.shape[1] + 1
    if zones > 1:
        bent = bent * (zone[..., None] == np.arange(zones))[:, :, None, :, None]
    sheared = members.shear_flexibility.any() or members.zone_shear_flexibility.any()
    if not (sheared or loads.bend_from.shape[1]):
        return bent
    fixed = np.zeros((*bent.shape[:3], 2, bent.shape[4]))
    imposed = imposed_curvature(loads, middle, np.zeros(first.shape, dtype=bool)) * scale.length
    fixed[:, :, 0, 0, 2:] = imposed * width[..., None]
    fixed[:, :, 1, 0, 2:] = imposed * width[..., None] ** 2 / 2
    # Shear is the slope of the moment, so what it adds up to over a cell is what the moment gains.
    shear_flexibility = of_zone(members.shear_flexibility, members.zone_shear_flexibility, zone)
    fixed[:, :, 1, 1] -= (shear_flexibility * scale.force[:, 0])[..., None] * cubic[..., 1:].sum(axis=-1)
    return np.concatenate([bent, fixed], axis=3)


def _power_weights(EI: Array, EI_end: Array) -> tuple[Array, Array]:
    """What turns a cubic in t into its area over 1/EI and the moment of that about t = 1, (..., 4, 2), with the
    flexibility 1/(N m2) per cell that goes in front.

    In a tapered cell EI = E1 (E2/E1)**s with s running as the logarithm of EI, so dt/EI is constant in s and what
    is left to integrate is entire: Gauss-Legendre converges faster than any power, however steep the taper.
    """
    exponent = np.arange(5)
    if np.array_equal(EI, EI_end):
        power, flexibility = 1.0 / (exponent + 1.0), 1.0 / EI
    else:
        rigid = ~np.isfinite(EI)
        log = np.log(np.where(rigid, 1.0, EI_end / np.where(rigid, 1.0, EI)))
        flat = np.abs(log) < 1e-12
        (s, weight), steep = GAUSS, np.where(flat, 1.0, log)
        share = np.where(flat[..., None], s, np.expm1(steep[..., None] * s) / np.expm1(steep)[..., None])
        power = (share[..., None] ** exponent * weight[:, None]).sum(axis=-2)
        flexibility = np.where(flat, 1.0, steep / np.expm1(steep)) / EI
    return np.stack([power[..., :4], power[..., :4] - power[..., 1:]], axis=-1), flexibility


def _product(cubic: Array, weights: Array) -> Array:
    """Cubic (M, E-1, b, 4) by weights, per cell (M, E-1, 4, 2) or the same for all (4, 2): one product then."""
    product: Array = cubic @ weights if weights.ndim > 2 else np.dot(cubic, weights)
    return product


def _cubics(loads: Loads, first: Array, second: Array, origin: Array, scale: Scale) -> Array:
    """Moment along each cell for each thing that bends it, as coefficients of t**0 to t**3, (M, E-1, 2+C, 4)."""
    unit = scale.length[:, 0]
    width = (second - first) / unit
    out = np.zeros((*first.shape, 2 + loads.cases, 4))
    out[..., 0, 0] = 1.0
    out[..., 1, 0], out[..., 1, 1] = (first - origin) / unit, width
    shear, moment = load_actions(loads, origin, first, np.zeros(first.shape, dtype=bool))
    out[..., 2:, 0] = moment / scale.moment
    out[..., 2:, 1] = shear / scale.force * width[..., None]
    if loads.spread_from.shape[1]:
        start, gradient = intensity(loads, first, second)
        width = (second - first)[..., None]
        out[..., 2:, 2] = start * width**2 / 2 / scale.moment
        out[..., 2:, 3] = gradient * width**3 / 6 / scale.moment
    return out


def zone_at(members: Members, x: Array, left: Flags) -> NDArray[np.intp]:
    """Number of the zone at x (M, X), 0 where there is none; at an edge the one to its right, or ``left`` of it."""
    start, end, x, left = members.zone_from[:, None], members.zone_to[:, None], x[..., None], left[..., None]
    inside = np.where(left, (start < x) & (x <= end), (start <= x) & (x < end))
    zone: NDArray[np.intp] = (inside * np.arange(1, start.shape[-1] + 1)).sum(axis=-1)
    return zone


def of_zone(whole: Array, by_zone: Array, zone: NDArray[np.intp]) -> Array:
    """Pick, for each ``zone`` number (M, X), the value of the rest of the member (M,) or that of a zone (M, Z)."""
    if not by_zone.shape[1]:
        return np.broadcast_to(whole[:, None], zone.shape)
    return np.take_along_axis(np.concatenate([whole[:, None], by_zone], axis=1), zone, axis=1)


def EI_at(members: Members, x: Array, zone: NDArray[np.intp]) -> Array:
    """EI (N m2) at x as seen from inside ``zone``."""
    if not members.zone_from.shape[1]:
        return np.broadcast_to(members.EI[:, None], x.shape)
    start, end = (of_zone(members.EI, EI, zone) for EI in (members.zone_EI, members.zone_EI_end))
    origin = of_zone(np.zeros_like(members.length), members.zone_from, zone)
    stop = of_zone(members.length, members.zone_to, zone)
    rise = np.where(np.isfinite(start), end, 0.0) - np.where(np.isfinite(start), start, 0.0)
    return start + rise * (x - origin) / (stop - origin)
