"""Areas: the curvature diagram, integrated once for each thing that can bend a panel.

A panel is bent by the moment at its left end (one), by the shear there (its distance from the left end), and
by each load case. For each of these this module keeps, at the panel ends and at the stations asked for, the
area of the curvature diagram from the left end of the panel and its moment about the station: what the first
and the second moment-area theorem need. The parts of different zones are kept apart, because 1/EI of a
zone is only a factor in front of its part.

Everything here is free of dimension: lengths by the longest panel, stiffness by the recorded EI.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam.actions import imposed_curvature, load_actions
from fieldfit.beam.cells import EI_at, Scale, by_zone, cut, of_zone, zone_at
from fieldfit.beam.loads import Loads, parked
from fieldfit.beam.member import SAME_PLACE, Array, Flags, Members, pick, refuse
from fieldfit.beam.panels import Panels, panels

__all__ = ["Areas", "integrate"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Areas:
    """Area integrals at P points: the K-1 panel ends, then the stations.

    ``sums`` (2, zones, b, M, P) as in ``Cells``, from the left end of the panel that holds the point, ``panel``
    (M, P), at a distance ``reach`` (M, P). ``moment`` and ``shear`` (C, M, P) come from the loads of the panel
    alone. ``flexibility`` (Z+1, M, P) is 1/EI there by zone, ``shear_flexibility`` (M, P) 1/GA, ``imposed``
    (C, M, P) the imposed curvature, ``movement`` (C, M, K) that of the supports, ``held`` (M, K) the 3EI/l which
    fixity is measured against; ``blank`` (M, S) marks padding.
    """

    members: Members
    panels: Panels
    scale: Scale
    movement: Array
    held: Array
    panel: NDArray[np.intp]
    reach: Array
    sums: Array
    moment: Array
    shear: Array
    flexibility: Array
    shear_flexibility: Array
    imposed: Array
    blank: Flags


def integrate(members: Members, loads: Loads, at: Array, left: Flags | None = None) -> Areas:
    """Integrate the curvature diagrams of loaded members up to stations ``at`` (M, S), m, NaN to pad.

    Where a response jumps a station means just right of the jump, or just ``left`` (M, S) of it; the two ends are
    read from inside the beam. Raises ModelError for a mechanism or a station off the beam.
    """
    end = members.length[:, None]
    off = (at < 0) | (at > end * (1 + SAME_PLACE))
    refuse(members, off, "a station lies off the beam")
    nodes = panels(members)
    scale = Scale(length=np.diff(nodes.at, axis=1).max(axis=1)[:, None], EI=members.EI[:, None])
    blank = np.isnan(at)
    stations = np.where(blank, end, np.minimum(at, end))
    before = (stations >= end) if left is None else left | (stations >= end)
    before &= stations > 0
    points = np.concatenate([nodes.at[:, 1:], stations], axis=1)
    ends = nodes.at.shape[1] - 1
    own = np.broadcast_to(np.arange(ends), points[:, :ends].shape)
    panel = np.concatenate([own, nodes.holding(stations, before)], axis=1)
    # A panel end is read before the loads that stand on it, which open the next panel; the last has no next.
    before_loads = np.concatenate([own < ends - 1, before], axis=1)
    before_edges = np.concatenate([np.ones_like(own, dtype=bool), before], axis=1)
    loads = parked(loads, members)
    start = pick(nodes.at, panel)
    shear, moment = load_actions(loads, start, points, before_loads)
    zone = zone_at(members, points, before_edges)
    shear_flexibility = of_zone(members.shear_flexibility, members.zone_shear_flexibility, zone)
    return Areas(
        members=members,
        panels=nodes,
        scale=scale,
        movement=nodes.at_nodes(loads.support_up.swapaxes(0, 1) / scale.length),
        held=nodes.at_nodes(members.fixity_stiffness / scale.moment),
        panel=panel,
        reach=(points - start) / scale.length,
        sums=cut(members, loads, nodes, points, scale).within_panel(panel),
        moment=moment / scale.moment,
        shear=shear / scale.force,
        flexibility=scale.EI / EI_at(members, points, zone) * by_zone(zone, members.zone_from.shape[1]),
        shear_flexibility=shear_flexibility * scale.force,
        imposed=imposed_curvature(loads, points, before_edges) * scale.length,
        blank=blank,
    )
