"""Members: what a beam is, one or many, as arrays with a leading member axis.

Unlike members stand side by side because short rows are padded with NaN: a support, hinge or zone at NaN
does not exist. SI throughout; x runs from the left end.
"""

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import NamedTuple, TypeVar

import numpy as np
from numpy.typing import NDArray

from fieldfit.errors import ModelError

__all__ = ["Array", "Flags", "Members", "Support", "Zone", "member", "pad", "pick", "refuse", "stack", "within"]

Array = NDArray[np.floating]
Flags = NDArray[np.bool_]
Scalar = TypeVar("Scalar", bound=np.generic)

SAME_PLACE = 1e-9  # two stations closer than this share of the length are one


class Support(NamedTuple):
    """A support at ``at`` (m): ``flexibility`` 1/kv (m/N; 0 rigid, inf none), ``fixity`` factor 0 to 1."""

    at: float
    flexibility: float = 0.0
    fixity: float = 0.0


class Zone(NamedTuple):
    """A stretch (m) of its own EI (N m2; inf is rigid), running linearly to ``EI_end``, and GA (N)."""

    start: float
    end: float
    EI: float
    EI_end: float | None = None
    GA: float = np.inf


@dataclass(frozen=True, slots=True, kw_only=True)
class Members:
    """M members; arrays of shape (M,) or (M, padded), NaN where a member has no such thing.

    ``EI`` (N m2) is the recorded stiffness outside zones and the scale of the member; ``shear_flexibility``
    is 1/GA (1/N) with GA the effective shear rigidity, shape factor included. Support ``flexibility`` is 1/kv
    (m/N), 0 rigid and inf none; ``fixity`` is r = 1/(1 + 3EI/(kr l)) (Monforton and Wu, 1963), with l the
    distance to the nearest other support. Raises ModelError naming the first member that cannot be.
    """

    name: tuple[str, ...]
    length: Array
    EI: Array
    shear_flexibility: Array
    support_at: Array
    support_flexibility: Array
    support_fixity: Array
    hinge_at: Array
    zone_from: Array
    zone_to: Array
    zone_EI: Array
    zone_EI_end: Array
    zone_shear_flexibility: Array

    def __post_init__(self) -> None:
        for field in fields(self)[1:]:
            array = np.array(getattr(self, field.name), dtype=float)
            array.flags.writeable = False
            object.__setattr__(self, field.name, array)
        _refuse_impossible(self)

    def __len__(self) -> int:
        """Return the number of members."""
        return len(self.name)

    def block(self, rows: slice) -> "Members":
        """Return some of the members as a stack of their own, padded as before."""
        arrays = {field.name: getattr(self, field.name)[rows] for field in fields(self)[1:]}
        return Members(name=self.name[rows], **arrays)

    def take(self, number: int) -> "Members":
        """Return member ``number`` as a stack of one, without the padding it does not need."""
        arrays = {field.name: trimmed(getattr(self, field.name)[number]) for field in fields(self)[1:]}
        return Members(name=(self.name[number],), **arrays)

    @property
    def fixity_stiffness(self) -> Array:
        """3EI/l at each support, N m/rad, shape (M, J): what a fixity factor is measured against."""
        return 3.0 * self.EI_beside(self.support_at) / self.support_reach

    @property
    def support_reach(self) -> Array:
        """Distance l (m) from each support to the nearest other one, the length where there is none; (M, J)."""
        away = np.abs(self.support_at[:, :, None] - self.support_at[:, None, :])
        away = np.where(np.eye(away.shape[1], dtype=bool) | np.isnan(away), np.inf, away)
        nearest = away.min(axis=2, initial=np.inf)
        return np.where(np.isfinite(nearest), nearest, self.length[:, None])

    def EI_beside(self, x: Array) -> Array:
        """Recorded EI (N m2) at stations x (M, X); a rigid zone counts as the member's own EI."""
        if not self.zone_from.shape[1]:
            return np.broadcast_to(self.EI[:, None], x.shape)
        inside = (x[..., None] >= self.zone_from[:, None]) & (x[..., None] <= self.zone_to[:, None])
        inside &= np.isfinite(self.zone_EI[:, None])
        share = (x[..., None] - self.zone_from[:, None]) / (self.zone_to - self.zone_from)[:, None]
        with np.errstate(invalid="ignore"):
            EI = self.zone_EI[:, None] + share * (self.zone_EI_end - self.zone_EI)[:, None]
        found = np.where(inside, EI, -np.inf).max(axis=-1, initial=-np.inf)
        return np.where(found > 0, found, self.EI[:, None])


def member(
    name: str = "beam",
    *,
    length: float,
    EI: float,
    GA: float = np.inf,
    supports: Sequence[Support] | None = None,
    hinges: Sequence[float] = (),
    zones: Sequence[Zone] = (),
) -> Members:
    """One member (SI); without ``supports`` it is simple at both ends."""
    supports = (Support(0.0), Support(length)) if supports is None else supports
    at, flexibility, fixity = np.array(supports, dtype=float).reshape(-1, 3).T
    ends = [zone.EI if zone.EI_end is None else zone.EI_end for zone in zones]
    return Members(
        name=(name,),
        length=np.array([length]),
        EI=np.array([EI]),
        shear_flexibility=_inverse([GA]),
        support_at=at[None],
        support_flexibility=flexibility[None],
        support_fixity=fixity[None],
        hinge_at=np.array([list(hinges)], dtype=float),
        zone_from=np.array([[zone.start for zone in zones]], dtype=float),
        zone_to=np.array([[zone.end for zone in zones]], dtype=float),
        zone_EI=np.array([[zone.EI for zone in zones]], dtype=float),
        zone_EI_end=np.array([ends], dtype=float),
        zone_shear_flexibility=_inverse([zone.GA for zone in zones])[None],
    )


def _inverse(stiffness: Sequence[float]) -> Array:
    """Flexibility, infinite where there is no stiffness: that is refused with the member's name."""
    with np.errstate(divide="ignore"):
        return 1.0 / np.array(stiffness, dtype=float)


def pad(owner: NDArray[np.intp], count: int, values: Array, fill: float = np.nan) -> Array:
    """Lay rows (R,) owned by members ``owner`` (R,) out as (count, widest), in order, filled with ``fill``."""
    place = within(owner, count)
    out = np.full((count, 1 + int(place.max(initial=-1))), fill)
    out[owner, place] = values
    return out


def within(owner: NDArray[np.intp], count: int) -> NDArray[np.intp]:
    """The place (R,) of each row among those of its owner, of which there are ``count``, in their order."""
    order = np.argsort(owner, kind="stable")
    sizes = np.bincount(owner, minlength=count)
    place = np.empty(len(owner), dtype=np.intp)
    place[order] = np.arange(len(order)) - np.repeat(np.cumsum(sizes) - sizes, sizes)
    return place


def pick(values: NDArray[Scalar], which: NDArray[np.intp]) -> NDArray[Scalar]:
    """Of values (..., M, X), those that ``which`` (M, Y) numbers along the last axis, member by member, (..., M, Y)."""
    members, count = values.shape[-2:]
    flat = values.reshape(*values.shape[:-2], members * count)
    return flat.take(which + count * np.arange(members)[:, None], axis=-1)


def stack(several: Sequence[Members]) -> Members:
    """Unlike members as one stack."""
    arrays = {field.name: joined([getattr(one, field.name) for one in several]) for field in fields(Members)[1:]}
    return Members(name=tuple(name for one in several for name in one.name), **arrays)


def joined(arrays: Sequence[Array], fill: float = np.nan) -> Array:
    """Concatenate along the member axis, the other axes padded with ``fill`` to the widest."""
    shape = np.max([array.shape[1:] for array in arrays], axis=0).astype(int)
    out = np.full((sum(len(array) for array in arrays), *shape), fill, dtype=arrays[0].dtype)
    start = 0
    for array in arrays:
        out[(slice(start, start + len(array)), *map(slice, array.shape[1:]))] = array
        start += len(array)
    return out


def trimmed(row: Array) -> Array:
    """One member's row (n,) or value () as a stack of one, its NaN padding cut off."""
    return row[None] if row.ndim == 0 else row[None, ~np.isnan(row)]


def _refuse_impossible(members: Members) -> None:
    length = members.length[:, None]
    slack = SAME_PLACE * length
    refuse(members, ~((members.length > 0) & np.isfinite(members.length)), "its length must be positive")
    refuse(members, ~((members.EI > 0) & np.isfinite(members.EI)), "its EI must be positive and finite")
    for what, at in (("support", members.support_at), ("zone", members.zone_from), ("zone", members.zone_to)):
        refuse(members, (at < -slack) | (at > length + slack), f"a {what} lies off the beam")
    ends = (members.hinge_at <= slack) | (members.hinge_at >= length - slack)
    refuse(members, ends, "a hinge must lie between the ends of the beam")
    for what, at in (("supports", members.support_at), ("hinges", members.hinge_at)):
        refuse(members, np.diff(np.sort(at, axis=1), axis=1) <= slack, f"two {what} stand at the same place")
    stiff = (members.zone_EI > 0) & (members.zone_EI_end > 0)
    stiff &= np.isfinite(members.zone_EI) == np.isfinite(members.zone_EI_end)
    real = ~np.isnan(members.zone_from)
    refuse(members, real & ~stiff, "a zone's EI must be positive, and rigid at both its ends or neither")
    refuse(members, real & ~(members.zone_to > members.zone_from), "a zone must end after it starts")
    order = np.argsort(members.zone_from, axis=1)
    starts = np.take_along_axis(members.zone_from, order, axis=1)[:, 1:]
    stops = np.take_along_axis(members.zone_to, order, axis=1)[:, :-1]
    refuse(members, starts < stops - slack, "two zones overlap")
    refuse(members, ~_stiff_in_shear(members.shear_flexibility), "GA must be positive")
    refuse(members, real & ~_stiff_in_shear(members.zone_shear_flexibility), "GA must be positive")
    held = (members.support_flexibility >= 0) & (members.support_fixity >= 0) & (members.support_fixity <= 1)
    refuse(members, ~np.isnan(members.support_at) & ~held, "support stiffness must not be negative")


def _stiff_in_shear(flexibility: Array) -> Flags:
    stiff: Flags = (flexibility >= 0) & np.isfinite(flexibility)
    return stiff


def refuse(members: Members, bad: NDArray[np.bool_], why: str) -> None:
    """Raise ModelError for the first member with anything ``bad``, shape (M,) or (M, n)."""
    if bad.any():
        first = int(np.argmax(bad.reshape(len(members), -1).any(axis=1)))
        raise ModelError(f"member {members.name[first]!r} cannot be solved: {why}")
