"""Panels: the stretches between the ends, supports and hinges of a member.

Every panel keeps its own reference tangent, at its left end, so that the two moment-area theorems never
reach further than one panel. (From a single tangent at x = 0 the terms of a long continuous beam cancel
to nothing: twenty spans lose all digits that forty would need.)
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam.member import SAME_PLACE, Array, Flags, Members, pick, refuse

__all__ = ["Panels", "panels"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Panels:
    """The nodes of M members, K a member, left to right; short rows repeat the right end, unsupported.

    ``at`` (M, K) m; ``hinged`` (M, K); ``of_support`` (M, J) the node of each support, -1 where there is none.
    """

    at: Array
    hinged: Flags
    of_support: NDArray[np.intp]

    def holding(self, x: Array, left: Flags) -> NDArray[np.intp]:
        """Number of the panel that holds each x (M, X), at a node the one to its right, or ``left`` of it."""
        inner = self.at.T[1:-1, :, None]
        panel: NDArray[np.intp] = ((inner < x) | (~left & (inner == x))).sum(axis=0)
        return panel

    def at_nodes(self, per_support: Array) -> Array:
        """Spread values per support (..., M, J) to the nodes (..., M, K), nothing elsewhere."""
        out = np.zeros((*per_support.shape[:-1], self.at.shape[1]))
        owner, support = np.nonzero(self.of_support >= 0)
        out[..., owner, self.of_support[owner, support]] = per_support[..., owner, support]
        return out

    def at_supports(self, per_node: Array) -> Array:
        """Pick values per node (..., M, K) at the supports (..., M, J); NaN where there is no support."""
        return np.where(self.of_support < 0, np.nan, pick(per_node, np.maximum(self.of_support, 0)))


def panels(members: Members) -> Panels:
    """Divide members into panels; raises ModelError for a mechanism."""
    _refuse_mechanisms(members)
    end = members.length[:, None]
    places = np.concatenate([np.zeros_like(end), members.support_at, members.hinge_at, end], axis=1)
    places = np.where(np.isnan(places), end, places)
    order = np.argsort(places, axis=1, kind="stable")
    ordered = np.take_along_axis(places, order, axis=1)
    fresh = np.diff(ordered, axis=1) > SAME_PLACE * end
    node = np.concatenate([np.zeros(fresh[:, :1].shape, dtype=np.intp), np.cumsum(fresh, axis=1)], axis=1)
    owner = np.arange(len(members))[:, None]
    at = np.repeat(end, int(node.max()) + 1, axis=1)
    at[owner, node] = ordered
    of_place = np.empty_like(node)
    of_place[owner, order] = node
    supports, hinges = members.support_at.shape[1], members.hinge_at.shape[1]
    of_support = np.where(np.isnan(members.support_at), -1, of_place[:, 1 : 1 + supports])
    hinged = np.zeros(at.shape, dtype=bool)
    who, which = np.nonzero(~np.isnan(members.hinge_at))
    hinged[who, of_place[:, 1 + supports : 1 + supports + hinges][who, which]] = True
    return Panels(at=at, hinged=hinged, of_support=of_support)


def _refuse_mechanisms(members: Members) -> None:
    """Raise ModelError where a member could move against no resistance."""
    real = ~np.isnan(members.support_at)
    upright = real & np.isfinite(members.support_flexibility)
    restrained = real & (members.support_fixity > 0)
    supports = upright.sum(axis=1)
    refuse(members, supports == 0, "it has no vertical support, so nothing carries the load")
    alone = np.isnan(members.hinge_at).all(axis=1) & (supports < 2) & ~restrained.any(axis=1)
    refuse(
        members,
        alone,
        "one support that is free to turn leaves it a mechanism; a second support or a fixed rotation is missing",
    )
    if members.hinge_at.shape[1]:
        _refuse_loose_hinges(members, upright, restrained)


def _refuse_loose_hinges(members: Members, upright: Flags, restrained: Flags) -> None:
    """Raise ModelError where the rigid pieces between hinges have more freedoms than are held.

    The pieces have the freedoms y(0), phi(0) and the jump of rotation at each hinge; a support takes away
    the deflection, a restraint the rotation, at its place. Left over freedoms are a mechanism.
    """
    length = members.length[:, None, None]
    beyond = members.support_at[:, :, None] - members.hinge_at[:, None, :]
    on_hinge = restrained & (np.abs(beyond) <= SAME_PLACE * length).any(axis=2)
    refuse(members, on_hinge, "a rotational restraint stands at a hinge; move the hinge to one side")
    lever = np.concatenate([members.support_at[:, :, None], np.where(beyond > 0, beyond, 0.0)], axis=2) / length
    moves = np.concatenate([np.ones_like(lever[..., :1]), lever], axis=2)
    turns = np.concatenate([np.zeros_like(lever[..., :1]), np.ones_like(lever[..., :1]), beyond > 0], axis=2)
    held = np.concatenate([moves * upright[..., None], turns * restrained[..., None]], axis=1)
    hinges = (~np.isnan(members.hinge_at)).sum(axis=1)
    loose = 2 + hinges - np.linalg.matrix_rank(np.where(np.isnan(held), 0.0, held), tol=1e-9)
    first = int(np.argmax(loose > 0))
    free = f"its {hinges[first]} hinge(s) leave it {loose[first]} way(s) to move freely"
    refuse(members, loose > 0, f"{free}; as many supports or restraints are missing")
