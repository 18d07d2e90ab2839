"""Spans of a load test: which of them it loads, what a rule takes for their length, and where their gauges stand.

Where gauges stand at both supports of a span, the chord between these supports is taken off, so that a bearing that
gives way does not count as bending.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import Array, Flags, Loads
from fieldfit.observe import Subject

__all__ = ["Span", "netted", "spans_of"]

NEAR = 0.01  # of the shortest span: a gauge so near to a support reads that support
BENT = 0.1  # of the largest moment of a test: a span bent by less is not what is tested


@dataclass(frozen=True, slots=True, kw_only=True)
class Span:
    """A stretch of a member between neighbouring supports that hold it, or beyond the last: ``left`` to ``right`` (m).

    ``supports`` (m) are those at its ends; ``tested``: loads of the test stand on it and bend it.
    """

    name: str
    left: float
    right: float
    supports: tuple[float, ...]
    tested: bool = True

    @property
    def length(self) -> float:
        """What a rule takes for the span (m): twice its own for an overhang."""
        return (self.right - self.left) * (1.0 if len(self.supports) == 2 else 2.0)

    def holds(self, at: Array) -> Flags:
        """Which stations (S,) are on it."""
        on: Flags = (at >= self.left) & (at <= self.right)
        return on

    def chord(self, at: Array) -> list[Array]:
        """Shares (S,) of the level of each of its supports in the line that stations are taken from."""
        if len(self.supports) < 2:
            return [np.ones(len(at)) for _ in self.supports]
        length = self.right - self.left
        return [(self.right - at) / length, (at - self.left) / length]


def spans_of(subject: Subject, at: Array, moment: Array, changes: Array) -> tuple[Span, ...]:
    """The spans of a member from left to right; ``moment`` (T, S) is that at stations (S,), for the changes (T, C).

    Those are tested that carry a load in one of these stages and are bent by a tenth of the largest moment or more: the
    moment of a neighbour goes on into a span without load, and a stub beyond a support hardly bends. All are, where no
    load stands within any.
    """
    every = list(_spans(subject))
    size, cases = np.abs(moment).max(axis=0), np.flatnonzero((changes != 0).any(axis=0))
    loaded = [
        _carries(subject.loads, one, cases) and bool(size[one.holds(at)].max() >= BENT * size.max()) for one in every
    ]
    return tuple(replace(one, tested=own or not any(loaded)) for one, own in zip(every, loaded, strict=True))


def _spans(subject: Subject) -> Iterator[Span]:
    member = subject.member
    length = float(member.length[0])
    held = np.isfinite(member.support_flexibility[0])
    named = {
        float(x): name for name, x, holds in zip(subject.supports, member.support_at[0], held, strict=True) if holds
    }
    for left, right in pairwise(np.unique([0.0, *named, length]).tolist()):
        ends = tuple(x for x in (left, right) if x in named)
        names = [named[x] for x in ends]
        name = f"between {' and '.join(names)}" if len(ends) == 2 else f"beyond {' '.join(names)}"
        yield Span(name=name, left=left, right=right, supports=ends)


def _carries(loads: Loads, span: Span, cases: NDArray[np.intp]) -> bool:
    """Whether one of the load cases stands on a span; what stands at a support does not load it."""
    at = np.concatenate([loads.force_at[0], loads.couple_at[0]])
    on = np.isin(np.concatenate([loads.force_case[0], loads.couple_case[0]]), cases)
    on &= span.holds(at) & ~np.isin(at, span.supports)
    spread = (loads.spread_from[0] < span.right) & (loads.spread_to[0] > span.left)
    spread &= np.isin(loads.spread_case[0], cases)
    return bool(on.any() or spread.any())


def netted(spans: Sequence[Span], at: Array) -> tuple[Array, NDArray[np.intp], Flags]:
    """How readings of gauges at (G,) combine to net deflections (G, G), the span of each, and which spans have a chord.

    A gauge of a span is taken from the chord of its two supports where gauges stand at both, one of an overhang from
    the level of its support. A gauge at a support is in no span: -1.
    """
    supports = sorted({x for span in spans for x in span.supports})
    reach = NEAR * min(span.right - span.left for span in spans)
    near = np.abs(at[:, None] - np.array(supports)) <= reach
    readers = {x: int(np.flatnonzero(column)[0]) for x, column in zip(supports, near.T, strict=True) if column.any()}
    weights, place, chord = np.eye(len(at)), np.full(len(at), -1), np.zeros(len(spans), dtype=bool)
    for number, span in enumerate(spans):
        own = span.holds(at) & ~near.any(axis=1)
        place[own] = number
        chord[number] = bool(span.supports) and all(x in readers for x in span.supports)
        if chord[number]:
            for x, share in zip(span.supports, span.chord(at), strict=True):
                weights[own, readers[x]] -= share[own]
    return weights, place, chord
