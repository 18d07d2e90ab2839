"""Traces: what a gauge read over the test, thinned for drawing: the least and the most in short stretches of time."""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import Array
from fieldfit.fieldbook import Book
from fieldfit.observe.readings import Ledger

__all__ = ["Trace", "traces_of"]

STRETCHES = 240  # of a trace


@dataclass(frozen=True, slots=True, kw_only=True)
class Trace:
    """What one gauge read: ``time`` (k,), s, in order, with the ``least`` and the ``most`` read about then (SI)."""

    gauge: str
    quantity: str
    time: Array
    least: Array
    most: Array


def traces_of(book: Book, ledger: Ledger, owners: dict[str, int]) -> dict[int, tuple[Trace, ...]]:
    """The traces of each member by its number; ``ledger`` holds the readings one by one. None without times."""
    found: dict[int, list[Trace]] = {}
    if book.log is not None:
        gauges = book.tables["gauges"]
        for channel in book.log.channels:
            member, gauge, measures = (str(gauges[name][channel.gauge_row]) for name in ("member", "gauge", "measures"))
            found.setdefault(owners[member], []).extend(_trace(gauge, measures, book.log.time, channel.values))
        return {owner: tuple(traces) for owner, traces in found.items()}
    seen = ledger.readings
    timed = np.flatnonzero(np.isfinite(seen.time))
    timed = timed[seen.used_for[timed] != "none"]
    order = timed[np.lexsort((seen.time[timed], seen.gauge[timed].astype(str), ledger.owner[timed]))]
    for mine in _runs(ledger.owner[order], seen.gauge[order]):
        rows = order[mine]
        trace = _trace(str(seen.gauge[rows[0]]), str(seen.quantity[rows[0]]), seen.time[rows], seen.value[rows])
        found.setdefault(int(ledger.owner[rows[0]]), []).extend(trace)
    return {owner: tuple(traces) for owner, traces in found.items()}


def _runs(owner: NDArray[np.intp], gauge: NDArray[np.object_]) -> list[slice]:
    """Stretches of rows of one member and gauge."""
    if not len(owner):
        return []
    edges = np.flatnonzero((np.diff(owner) != 0) | (gauge[1:] != gauge[:-1])) + 1
    ends = [0, *edges.tolist(), len(owner)]
    return [slice(a, b) for a, b in pairwise(ends)]


def _trace(gauge: str, quantity: str, time: Array, values: Array) -> list[Trace]:
    """A trace of values in the order of time, none where there are none."""
    read = np.isfinite(values) & np.isfinite(time)
    time, values = time[read], values[read]
    if not len(time):
        return []
    if len(time) <= STRETCHES:
        return [Trace(gauge=gauge, quantity=quantity, time=time, least=values, most=values)]
    starts = np.unique(np.searchsorted(time, np.linspace(time[0], time[-1], STRETCHES + 1)[:-1]))
    return [
        Trace(
            gauge=gauge,
            quantity=quantity,
            time=time[starts],
            least=np.minimum.reduceat(values, starts),
            most=np.maximum.reduceat(values, starts),
        )
    ]
