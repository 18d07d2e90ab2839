"""Steadying: the scatter of a plateau without the drift and the warming of its gauge, which are unknowns of the fit.

Taken as scatter too, they would count twice. A stated temperature coefficient is taken as it stands; the rate of a
drift is that from the first zero stage to the last, so that nothing is fitted within a plateau: its scatter loses no
degree of freedom, and how far its readings hang together is told from what is left. Means stay as they were read.
"""

from dataclasses import replace

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array
from fieldfit.observe.readings import ELASTIC
from fieldfit.observe.repeats import Plateaus, plateaus

__all__ = ["run_means", "steadied", "steady_roles"]

SMALL = 0.02  # of the scatter: a drift over a plateau that adds less than 1/30,000 to its variance


def steady_roles(stages: pd.DataFrame) -> NDArray[np.object_]:
    """The role of each stage, blank for members with cycles: which of these the fit takes is not known here."""
    cyclic = stages["member"].isin(stages["member"][stages["cycle"].notna()])
    return stages["role"].mask(cyclic, "").to_numpy(dtype=object)


def run_means(values: Array, starts: NDArray[np.intp]) -> Array:
    """Means over runs; NaN where a value is missing."""
    ends = np.append(starts[1:], len(values))
    return np.add.reduceat(values, starts) / (ends - starts) if len(starts) else np.zeros(0)


def steadied(
    found: Plateaus,
    values: Array,
    starts: NDArray[np.intp],
    *,
    time: Array,
    temperature: Array,
    per_kelvin: Array,
    role: NDArray[np.object_],
    gauge: NDArray[np.intp],
    zero: NDArray[np.intp],
) -> Plateaus:
    """The plateaus (G,) of values (n,) with the sums that tell scatter taken of what drift and warming leave.

    ``time`` (s) and ``temperature`` (degC) are of the readings (n,), the temperature coefficient ``per_kelvin``, the
    role of the stage, the number of the gauge and that of its zero of the plateaus (G,). A plateau of one figure has
    no scatter and keeps none.
    """
    when, warmth = run_means(time, starts), run_means(temperature, starts)
    moving = found.square > 0
    warm = np.where(moving, np.nan_to_num(per_kelvin), 0.0)
    means = found.mean - np.nan_to_num(per_kelvin * warmth)
    rate = np.where(moving, _drift(means, when, role, gauge, zero), 0.0)
    left, least = values, SMALL * np.sqrt(found.square / found.count)
    for slope, along, middle in ((warm, temperature, warmth), (rate, time, when)):
        if slope.any():
            reach = np.maximum.reduceat(along, starts) - np.minimum.reduceat(along, starts)
            felt = np.where(np.abs(slope) * reach > least, slope, 0.0)
            if felt.any():
                left = left - np.nan_to_num(np.repeat(felt, found.count) * (along - np.repeat(middle, found.count)))
    if left is values:
        return found
    sums = plateaus(left, starts)
    return replace(found, square=sums.square, lagged=sums.lagged, first=sums.first, last=sums.last)


def _drift(
    mean: Array, time: Array, role: NDArray[np.object_], gauge: NDArray[np.intp], zero: NDArray[np.intp]
) -> Array:
    """Rate (G,) a second from the first zero stage of a gauge to its last; 0 where the fit gives it no drift.

    That takes zeros before and after all loads, by known times; a gauge that was reset has no one line of zeros.
    """
    if not np.isfinite(time[role == "zero"]).any():
        return np.zeros(len(mean))
    known = np.isfinite(time)
    rows = pd.DataFrame({"gauge": gauge, "mean": mean, "time": time, "known": known, "role": role, "zero": zero})
    rows = rows[np.isin(role, ELASTIC)].sort_values("time", kind="stable")
    alike = rows.groupby("gauge")
    whole = alike["known"].min() & (alike["zero"].min() == alike["zero"].max())
    ends = rows[rows["role"] == "zero"].groupby("gauge")[["mean", "time"]]
    first, last = ends.first(), ends.last()
    loaded = rows[rows["role"] != "zero"].groupby("gauge")["time"].agg(["min", "max"]).reindex(first.index)
    loads = first.index.isin(rows["gauge"][rows["role"] == "load"])
    kept = loads & whole[first.index] & (first["time"] < loaded["min"]) & (loaded["max"] < last["time"])
    rise = (last - first)[kept]
    return (rise["mean"] / rise["time"]).reindex(gauge).fillna(0.0).to_numpy(dtype=float)
