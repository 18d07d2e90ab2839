"""Sag: the largest deflection of each span from the chord between its supports, down and up, and where.

Every span is cut where its shape changes its law or its slope kinks (supports, hinges, zone edges, load edges)
and evenly in between. On such a piece the deflection is a quintic, or very nearly where EI tapers, so deflection
and slope at both ends and the middle give all of it. The extremes of the pieces are compared.
"""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from fieldfit.beam.areas import integrate
from fieldfit.beam.loads import Loads
from fieldfit.beam.member import SAME_PLACE, Array, Flags, Members
from fieldfit.beam.response import solve
from fieldfit.beam.system import Stiffness

__all__ = ["Sag", "largest_sag"]

PIECES = 8  # even pieces a span
STEPS = 30  # of Newton's method, halving where it leaves the bracket

# A quintic from 0 is fixed by its value at 1/2 and 1 and its slope at 0, 1/2 and 1: the factors of t**1 to t**5.
_POWER = np.arange(1, 6)
_QUINTIC = np.linalg.inv([0.5**_POWER, 1.0**_POWER, *(_POWER * t ** (_POWER - 1) for t in (0.0, 0.5, 1.0))])


@dataclass(frozen=True, slots=True, kw_only=True)
class Sag:
    """The spans of M members, left to right, NaN to pad: between neighbouring vertical supports, and overhangs.

    ``start``, ``end`` (m) and ``overhang`` have shape (M, N); ``down`` and ``up``, how far a span goes down and up
    (m, neither below 0), and where, ``down_at`` and ``up_at`` (m), have shape (M, C, N). Both are deviations from the
    chord between the two supports, for an overhang from the level of its support.
    """

    start: Array
    end: Array
    overhang: Flags
    down: Array
    up: Array
    down_at: Array
    up_at: Array

    @property
    def sag(self) -> Array:
        """The deviation of greatest size (M, C, N), m: negative where the span rises more than it sags."""
        return np.where(self.up > self.down, -self.up, self.down)

    @property
    def at(self) -> Array:
        """Where the deviation of greatest size is (M, C, N), m."""
        return np.where(self.up > self.down, self.up_at, self.down_at)


def largest_sag(members: Members, loads: Loads, stiffness: Stiffness | None = None) -> Sag:
    """Largest sag of every span of loaded members, with the recorded stiffness or another one.

    The place is good to 1e-6 of the span, the sag to 1e-10 of itself. Raises ModelError for a mechanism.
    """
    spans = _spans(members)
    x = _pieces(members, loads, spans)
    size, held = len(members), np.stack([spans.near, spans.far], axis=1)
    left = np.zeros(x.shape, dtype=bool)
    left[..., 2] = True  # the far end of a piece is read from inside it
    left = np.concatenate([left.reshape(size, -1), np.zeros(held[:, 0].shape, dtype=bool).repeat(2, axis=1)], axis=1)
    stations = np.concatenate([x.reshape(size, -1), held.reshape(size, -1)], axis=1)
    response = solve(integrate(members, loads, stations, left), stiffness)
    count, shape = x[0].size, (size, loads.cases, *x.shape[1:])
    near, far = np.moveaxis(response.deflection[..., count:].reshape(size, loads.cases, 2, -1), 2, 0)
    tilt = (far - near) / (spans.end - spans.start)[:, None]
    chord = near[..., None, None] + tilt[..., None, None] * (x - spans.start[..., None, None])[:, None]
    deviation = response.deflection[..., :count].reshape(shape) - chord
    at = _extremes(x[:, None], deviation, response.slope[..., :count].reshape(shape) - tilt[..., None, None])
    there = solve(integrate(members, loads, at.reshape(size, -1)), stiffness).deflection
    cases = np.arange(loads.cases)
    own = there.reshape(size, loads.cases, *at.shape[1:])[:, cases, cases]
    sag = near[..., None] + tilt[..., None] * (at - spans.start[:, None, :, None]) - own
    down, up = np.moveaxis(np.maximum(sag * (1.0, -1.0), 0.0), -1, 0)  # below 0 by rounding alone: the supports stay
    down_at, up_at = np.moveaxis(at, -1, 0)
    return Sag(
        start=spans.start, end=spans.end, overhang=spans.overhang, down=down, up=up, down_at=down_at, up_at=up_at
    )


class _Spans(NamedTuple):
    """Spans as in ``Sag``, and the supports ``near`` and ``far`` (m) whose chord they are measured from, (M, N)."""

    start: Array
    end: Array
    near: Array
    far: Array
    overhang: Flags


def _spans(members: Members) -> _Spans:
    upright = np.where(np.isfinite(members.support_flexibility), members.support_at, np.nan)
    supports = np.sort(upright, axis=1)
    zero, length = np.zeros((len(members), 1)), members.length[:, None]
    near = np.concatenate([zero * np.nan, supports], axis=1)
    far = np.concatenate([supports, zero * np.nan], axis=1)
    start, end = np.concatenate([zero, supports], axis=1), np.where(np.isnan(far), length, far)
    real = end - start > SAME_PLACE * length
    overhang = real & (np.isnan(near) | np.isnan(far))
    near, far = np.where(np.isnan(near), far, near), np.where(np.isnan(far), near, far)
    order = np.argsort(~real, axis=1, kind="stable")[:, : real.sum(axis=1).max()]
    places = np.where(real, np.stack([start, end, near, far]), np.nan)
    start, end, near, far = np.take_along_axis(places, order[None], axis=2)
    return _Spans(start, end, near, far, np.take_along_axis(overhang, order, axis=1))


def _pieces(members: Members, loads: Loads, spans: _Spans) -> Array:
    """Start, middle and end (m) of every piece of every span, (M, N, pieces, 3)."""
    marks = [members.hinge_at, members.zone_from, members.zone_to, members.support_at, loads.force_at]
    marks += [loads.couple_at, loads.spread_from, loads.spread_to, loads.bend_from, loads.bend_to]
    start, end = spans.start[..., None], spans.end[..., None]
    broken = np.clip(np.nan_to_num(np.concatenate(marks, axis=1))[:, None], start, end)
    even = start + (end - start) * np.linspace(0.0, 1.0, PIECES + 1)
    edges = np.sort(np.concatenate([broken, np.minimum(even, end)], axis=2), axis=2)
    return np.stack([edges[..., :-1], (edges[..., :-1] + edges[..., 1:]) / 2, edges[..., 1:]], axis=-1)


def _extremes(x: Array, value: Array, slope: Array) -> Array:
    """Where a curve known at start, middle and end of its pieces (..., pieces, 3) is lowest and highest, (..., 2)."""
    start, width = value[..., 0], x[..., 2] - x[..., 0]
    known = [value[..., 1] - start, value[..., 2] - start, *np.moveaxis(slope * width[..., None], -1, 0)]
    factors = np.stack(known, axis=-1) @ _QUINTIC.T
    ends = np.zeros_like(start), np.ones_like(start)
    turns = _turn(factors, 0.0, 0.5), _turn(factors, 0.5, 1.0)
    t = np.stack([*ends, *turns], axis=-1)
    height = start[..., None] + ((t[..., None] ** _POWER) * factors[..., None, :]).sum(axis=-1)
    height = height.reshape(*height.shape[:-2], -1)
    best = np.stack([height.argmin(axis=-1), height.argmax(axis=-1)], axis=-1)
    place = x[..., :1] + t * width[..., None]
    return np.take_along_axis(place.reshape(*place.shape[:-2], -1), best, axis=-1)


def _turn(factors: Array, low: float, high: float) -> Array:
    """Where quintics (..., 5) turn between two t; the lower one where they do not."""
    t = np.full(factors.shape[:-1], low)
    turns = _polynomial(_POWER * factors, t) * _polynomial(_POWER * factors, np.full_like(t, high)) < 0
    t[turns] = _root(_POWER * factors[turns], low, high)
    return t


def _root(factors: Array, low: float, high: float) -> Array:
    """The root of polynomials (n, 5) that change sign once between two t: Newton's method, kept between them."""
    below, above = np.full(len(factors), low), np.full(len(factors), high)
    slope = _POWER[:4] * factors[:, 1:]
    rising = _polynomial(factors, below) > 0
    t = (below + above) / 2
    for _ in range(STEPS):
        now = _polynomial(factors, t)
        same = (now > 0) == rising
        below, above = np.where(same, t, below), np.where(same, above, t)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = t - now / _polynomial(slope, t)
        t = np.where((step > below) & (step < above), step, (below + above) / 2)
    return t


def _polynomial(factors: Array, t: Array) -> Array:
    """Sum of factors times t**0, t**1, and so on, by Horner's rule."""
    out = factors[..., -1]
    for power in range(factors.shape[-1] - 2, -1, -1):
        out = out * t + factors[..., power]
    return out
