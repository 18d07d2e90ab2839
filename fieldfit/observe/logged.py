"""A logger's file as observations: for each gauge and stage the mean of what its channel read within the window.

What a channel read outside all windows, or in rows that the book sets aside, is one observation each that nothing uses,
with the number of its readings: so the ledger adds up without a row for each of some millions of readings.
"""

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array, Flags
from fieldfit.fieldbook import Book
from fieldfit.fieldbook.clock import moments
from fieldfit.fieldbook.log import Channel, Log
from fieldfit.observe.averages import with_scatter
from fieldfit.observe.readings import COLUMNS, SENSE, SET_ASIDE, USUAL_SENSE, Ledger, Observations, purposes
from fieldfit.observe.repeats import Plateaus, plateaus
from fieldfit.observe.steady import run_means, steadied, steady_roles
from fieldfit.observe.windows import OUTSIDE, windows_of

__all__ = ["logged"]

Rows = NDArray[np.intp]


@dataclass(frozen=True, slots=True)
class _Parts:
    """Of one channel: the sums over its plateaus with their stages, resets until then, time and temperature, and what
    is left over.
    """

    found: Plateaus
    place: NDArray[np.intp]
    zero: NDArray[np.intp]
    time: Array
    temperature: Array
    aside: dict[str, tuple[int, float]]  # reason: number of readings and their mean


def logged(book: Book, owners: dict[str, int], stages: pd.DataFrame) -> Ledger | None:
    """The observations of a logger's file, by member; None where the book has none."""
    log = book.log
    if log is None or not log.channels:
        return None
    windows, roles = windows_of(book, stages), steady_roles(stages)
    gauges, resets = book.tables["gauges"], book.tables["resets"]
    when = moments(resets["time"].to_numpy(dtype=object))
    parts = [
        _parts(
            log,
            channel,
            windows[windows["member"] == gauges["member"][channel.gauge_row]],
            when[_same_gauge(resets, gauges, channel.gauge_row)],
            roles,
            float(gauges["temperature coefficient"][channel.gauge_row]),
        )
        for channel in log.channels
    ]
    ledgers = [*_means(log, parts, gauges, owners, stages), *_asides(log, parts, gauges, owners)]
    order = np.argsort(np.concatenate([one.owner for one in ledgers]), kind="stable")
    return joined(ledgers, order)


def joined(ledgers: list[Ledger], order: NDArray[np.intp]) -> Ledger:
    """Several ledgers as one, in this order."""
    columns: dict[str, Any] = {
        name: np.concatenate([getattr(one.readings, name) for one in ledgers])[order] for name in COLUMNS
    }
    owner = np.concatenate([one.owner for one in ledgers])[order]
    return Ledger(
        readings=Observations(**columns), owner=owner, row=np.concatenate([one.row for one in ledgers])[order]
    )


def _same_gauge(resets: pd.DataFrame, gauges: pd.DataFrame, row: int) -> Flags:
    """Which resets (k,) are of the gauge in a row of the gauges table."""
    same = (resets["member"] == gauges["member"][row]) & (resets["gauge"] == gauges["gauge"][row])
    return same.to_numpy(dtype=bool)


def _parts(
    log: Log, channel: Channel, windows: pd.DataFrame, resets: Array, roles: NDArray[np.object_], per_kelvin: float
) -> _Parts:
    """Cut a channel by the windows of its member and its own resets (k,), s; ``roles`` are those of all stages.

    Times are in order, so that a window is a stretch of rows; a reset within one makes two plateaus of it.
    """
    begin = np.searchsorted(log.time, windows["start"].to_numpy(), side="left")
    end = np.searchsorted(log.time, windows["end"].to_numpy(), side="right")
    end[:-1] = np.minimum(end[:-1], begin[1:])  # the moment at which two stages meet belongs to the next
    cut = np.unique(np.searchsorted(log.time, resets, side="left"))
    begin, end, whose = _split(begin, end, cut)
    read = np.isfinite(channel.values)
    kept = read & log.use
    number = np.concatenate([[0], np.cumsum(kept)])
    count = number[end] - number[begin]
    full = np.flatnonzero(count > 0)
    inside = np.zeros(len(kept), dtype=bool)
    for first, last in zip(begin[full].tolist(), end[full].tolist(), strict=True):
        inside[first:last] = True
    inside &= kept
    starts = np.concatenate([[0], np.cumsum(count[full])[:-1]]).astype(np.intp)
    values, time, temperature = channel.values[inside], log.time[inside], log.temperature[inside]
    place = windows["place"].to_numpy(dtype=np.intp)[whose[full]]
    zero = np.searchsorted(cut, begin[full], side="right")
    found = steadied(
        plateaus(values, starts),
        values,
        starts,
        time=time,
        temperature=temperature,
        per_kelvin=np.full(len(starts), per_kelvin),
        role=roles[place],
        gauge=np.zeros(len(starts), dtype=np.intp),
        zero=zero,
    )
    aside = {OUTSIDE: kept & ~inside, SET_ASIDE: read & ~log.use}
    return _Parts(
        found=found,
        place=place,
        zero=zero,
        time=run_means(time, starts),
        temperature=run_means(temperature, starts),
        aside={why: (int(rows.sum()), float(channel.values[rows].mean())) for why, rows in aside.items() if rows.any()},
    )


def _split(begin: Rows, end: Rows, cut: Rows) -> tuple[Rows, Rows, Rows]:
    """Stretches of rows cut where resets are, and the window (k,) that each is of."""
    first = np.searchsorted(cut, begin, side="right")
    inside = np.maximum(np.searchsorted(cut, end, side="left") - first, 0)
    whose = np.repeat(np.arange(len(begin)), inside + 1)
    step = np.arange(len(whose)) - np.repeat(np.cumsum(inside + 1) - inside - 1, inside + 1)
    edge = np.append(cut, 0)[np.minimum(first[whose] + step, len(cut))]
    last = step == inside[whose]
    starts = np.where(step == 0, begin[whose], np.append(0, edge[:-1]))
    return starts, np.where(last, end[whose], edge), whose


def _means(
    log: Log, parts: list[_Parts], gauges: pd.DataFrame, owners: dict[str, int], stages: pd.DataFrame
) -> Iterator[Ledger]:
    """One ledger of all means."""
    size = [len(part.place) for part in parts]
    which = np.repeat(np.arange(len(parts)), size)
    if not len(which):
        return
    place = np.concatenate([part.place for part in parts])
    found = Plateaus(
        **{
            name: np.concatenate([getattr(part.found, name) for part in parts])
            for name in Plateaus.__dataclass_fields__
        }
    )
    used_for, why = purposes(stages["role"].to_numpy(dtype=object), place, np.ones(len(place), dtype=bool))
    plain = _described(
        log,
        gauges,
        which,
        stage=stages["number"].to_numpy(dtype=np.intp)[place],
        used_for=used_for,
        why=why,
        zero=np.concatenate([part.zero for part in parts]),
        time=np.concatenate([part.time for part in parts]),
        temperature=np.concatenate([part.temperature for part in parts]),
    )
    yield _ledger(log, with_scatter(plain, found, which), gauges, owners, which)


def _asides(log: Log, parts: list[_Parts], gauges: pd.DataFrame, owners: dict[str, int]) -> Iterator[Ledger]:
    """One ledger of all that nothing uses."""
    rows = [(number, why, *left) for number, part in enumerate(parts) for why, left in part.aside.items()]
    if not rows:
        return
    which = np.array([row[0] for row in rows], dtype=np.intp)
    unknown = np.full(len(rows), np.nan)
    plain = _described(
        log,
        gauges,
        which,
        stage=np.full(len(rows), -1, dtype=np.intp),
        used_for=np.full(len(rows), "none", dtype=object),
        why=np.array([row[1] for row in rows], dtype=object),
        time=unknown,
        temperature=unknown,
        value=np.array([row[3] for row in rows]),
        count=np.array([float(row[2]) for row in rows]),
    )
    yield _ledger(log, plain, gauges, owners, which)


def _ledger(
    log: Log, readings: Observations, gauges: pd.DataFrame, owners: dict[str, int], which: NDArray[np.intp]
) -> Ledger:
    members = [owners[gauges["member"][channel.gauge_row]] for channel in log.channels]
    row = np.full(len(which), int(log.row[0]), dtype=np.int64)
    return Ledger(readings=readings, owner=np.array(members, dtype=np.intp)[which], row=row)


def _described(log: Log, gauges: pd.DataFrame, which: NDArray[np.intp], **own: Any) -> Observations:
    """Observations of the channels ``which`` (n,), by the gauges table; ``own`` are the other columns."""
    table = gauges.loc[[channel.gauge_row for channel in log.channels]]
    usual = table["measures"].map(USUAL_SENSE).map(SENSE).to_numpy(dtype=float)
    sense = table["positive sense"].map(SENSE).to_numpy(dtype=float)
    half = table["plus or minus"].to_numpy(dtype=float) / np.sqrt(3.0)
    given = np.where(np.isnan(table["u"].to_numpy(dtype=float)), half, table["u"].to_numpy(dtype=float))
    step = table["resolution"].to_numpy(dtype=float)
    origin = np.where(~np.isnan(given), "given", np.where(~np.isnan(step), "resolution", "none")).astype(object)
    known = np.hypot(np.nan_to_num(given), np.nan_to_num(step) / np.sqrt(12.0))
    unknown = np.full(len(which), np.nan)
    of_gauge = {
        "gauge": table["gauge"].to_numpy(dtype=object),
        "at": table["at"].to_numpy(dtype=float),
        "quantity": table["measures"].to_numpy(dtype=object),
        "sign": np.where(np.isnan(sense), usual, sense),
        "usual": usual,
        "lever": np.where(table["measures"] == "strain", table["below neutral axis"].to_numpy(dtype=float), 1.0),
        "u": np.where(origin == "none", np.nan, known),
        "scale_u": np.nan_to_num(table["scale u"].to_numpy(dtype=float)),
        "u_from": origin,
        "per_kelvin": table["temperature coefficient"].to_numpy(dtype=float),
        "per_kelvin_u": table["temperature coefficient u"].to_numpy(dtype=float),
    }
    plain = dict.fromkeys(("value", "count", "scatter", "change", "change_u", "jump", "step"), unknown)
    plain["zero"] = np.zeros(len(which), dtype=np.intp)
    return Observations(**(plain | {name: values[which] for name, values in of_gauge.items()} | own))
