"""Averages: the readings of one gauge in one stage become one observation, with their number kept for the ledger."""

from dataclasses import replace

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array
from fieldfit.fieldbook import alike, numbered
from fieldfit.observe.readings import Ledger, Observations
from fieldfit.observe.repeats import Plateaus, combined, plateaus, u_of_means
from fieldfit.observe.steady import run_means, steadied

__all__ = ["averaged", "with_scatter"]

ORIGINS = ("given", "resolution", "none")  # from the best known to the least


def averaged(ledger: Ledger, shared: NDArray[np.int64], roles: NDArray[np.object_]) -> Ledger:
    """One observation for the readings that share a number (n,); what is set aside stays one by one.

    ``roles`` (M, T) are those of the stages of all members, blank where drift is not to be told by them.
    """
    seen = ledger.readings
    repeated = alike(shared)
    if not repeated.any():
        return ledger
    repeated &= seen.used_for != "none"
    place = np.arange(len(seen))
    first = pd.Series(place).groupby(shared, sort=False).transform("min").to_numpy()
    group = np.where(repeated, first, place)
    order = np.lexsort((place, _order(seen.time, group), group))
    starts = np.flatnonzero(np.diff(group[order], prepend=-1))
    found = plateaus(seen.value[order], starts)
    heads = group[order[starts]]
    gauges, kinds = (pd.factorize(values[heads])[0] for values in (seen.gauge, seen.quantity))
    gauge, _ = pd.factorize(numbered(ledger.owner[heads], gauges, kinds))
    origin = pd.Index(ORIGINS).get_indexer(pd.Index(seen.u_from))[order]
    found = steadied(
        found,
        seen.value[order],
        starts,
        time=seen.time[order],
        temperature=seen.temperature[order],
        per_kelvin=seen.per_kelvin[heads],
        role=np.where(seen.used_for[heads] == "fit", roles[ledger.owner[heads], seen.stage[heads]], ""),
        gauge=gauge,
        zero=seen.zero[heads],
    )
    means = replace(
        seen.take(heads),
        u=np.sqrt(run_means(seen.u[order] ** 2, starts)),
        u_from=np.array(ORIGINS, dtype=object)[np.maximum.reduceat(origin, starts)],
        time=run_means(seen.time[order], starts),
        temperature=run_means(seen.temperature[order], starts),
    )
    return Ledger(readings=with_scatter(means, found, gauge), owner=ledger.owner[heads], row=ledger.row[heads])


def with_scatter(seen: Observations, found: Plateaus, gauge: NDArray[np.intp]) -> Observations:
    """Observations, one a plateau, with the mean as their value and its scatter in their u; ``gauge`` (n,) numbers.

    A single reading whose u is given keeps it: that u is said of single readings.
    """
    scatter, freedom = u_of_means(found, gauge)
    said = (found.count == 1) & (seen.u_from == "given")
    return replace(
        seen,
        value=found.mean,
        u=combined(seen.u, np.where(said, np.nan, scatter), freedom),
        count=found.count.astype(float),
        scatter=np.where(found.count > 1, scatter, np.nan),
        change=found.change,
        change_u=found.change_u,
        jump=found.jump,
        step=found.step,
    )


def _order(time: Array, group: NDArray[np.intp]) -> Array:
    """Times (n,) to order the readings of a group by; 0 where any of them lacks its time."""
    lacking = np.zeros(len(time), dtype=bool)
    lacking[group[np.isnan(time)]] = True
    return np.where(lacking[group], 0.0, time)
