"""The two moment-area theorems, as calls of their own.

First: the rotation between two stations is the area of the curvature diagram between them. Second: one station
deviates from the tangent at another by the moment of that area about the station that deviates.

The curvature is M/EI with what is imposed. The kink of a hinge is no area of curvature, and shear deflects
without curving: neither is counted. On a beam without both, with y the deflection and phi the rotation,

    area = phi(end) - phi(start)     and     deviation = y(of) - y(t) - phi(t) (of - t).
"""

import numpy as np

from fieldfit.beam.areas import Areas, integrate
from fieldfit.beam.loads import Loads
from fieldfit.beam.member import Array, Members, pick
from fieldfit.beam.system import System, recorded, weighed

__all__ = ["area", "tangential_deviation"]


def area(members: Members, loads: Loads, start: Array, end: Array) -> Array:
    """Area (rad) of the curvature diagram from ``start`` to ``end`` (M, S), m, in each case, (M, C, S).

    Positive where the beam curves up on the way; minus the same from ``end`` to ``start``. Raises ModelError.
    """
    return _between(members, loads, end, start)[0].swapaxes(0, 1)


def tangential_deviation(members: Members, loads: Loads, of: Array, tangent_at: Array) -> Array:
    """How far (m, up) station ``of`` lies from the tangent drawn at ``tangent_at`` (M, S), m, (M, C, S).

    Raises ModelError for a mechanism or a station off the beam.
    """
    return _between(members, loads, of, tangent_at)[1].swapaxes(0, 1)


def _between(members: Members, loads: Loads, of: Array, tangent_at: Array) -> tuple[Array, Array]:
    """Area from ``tangent_at`` to ``of`` and its moment about ``of``, (C, M, S) each.

    Whole panels between the two count once, forward or backward; the panels that hold the two count in part.
    """
    areas = integrate(members, loads, np.concatenate([of, tangent_at], axis=1))
    area, moment = _from_panel_start(areas)
    ends, count = areas.panels.at.shape[1] - 1, of.shape[1]
    panel = areas.panel[:, ends:]
    number = np.arange(ends)
    passed = 1.0 * (number < panel[:, :count, None]) - (number < panel[:, count:, None])
    beyond = (of[..., None] - areas.panels.at[:, None, 1:]) * passed
    whole, whole_moment = area[..., :ends, None], moment[..., :ends, None]
    this, that = slice(ends, ends + count), slice(ends + count, None)
    turned = (passed @ whole)[..., 0] + area[..., this] - area[..., that]
    lever = area[..., that] * (of - tangent_at)
    return turned, (passed @ whole_moment + beyond @ whole)[..., 0] + moment[..., this] - moment[..., that] - lever


def _from_panel_start(areas: Areas) -> tuple[Array, Array]:
    """Area (rad) from the left end of its panel to every point, and its moment (m) about the point, (C, M, P)."""
    stiffness = recorded(areas.members)
    _, _, pushed, bent = pick(System.of(areas, stiffness).left[:, 0], areas.panel)
    area, moment = (
        part[0] * bent + part[1] * pushed + part[2:] for part in weighed(areas, stiffness.EI_ratio, shear=0.0)
    )
    return area, moment * areas.scale.length
