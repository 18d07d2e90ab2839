"""Windows: readings that say when they were taken and not in which stage go to the stage whose window holds them."""

from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array
from fieldfit.fieldbook import Book
from fieldfit.fieldbook.clock import moments

__all__ = ["OUTSIDE", "placed", "windows_of"]

OUTSIDE = "outside the windows of all stages"


def windows_of(book: Book, stages: pd.DataFrame) -> pd.DataFrame:
    """The stages that have a start and an end, by start: member, start, end (s), and their place in `stages`."""
    given = book.tables["stages"]
    table = given[given["start"].notna() & given["end"].notna()].drop_duplicates(["member", "stage"])
    if table.empty:
        return pd.DataFrame({"member": [], "start": [], "end": [], "place": []})
    start, end = (moments(table[name].to_numpy(dtype=object)) for name in ("start", "end"))
    rows = table[["member", "stage"]].assign(start=start, end=end)
    rows = rows.merge(stages[["member", "stage"]].assign(place=np.arange(len(stages))), on=["member", "stage"])
    return rows.sort_values("start", kind="stable", ignore_index=True)


def placed(member: "pd.Series[Any]", time: Array, windows: pd.DataFrame) -> NDArray[np.intp]:
    """The place (n,) of the stage whose window holds each time (s), -1 where none does.

    Windows do not overlap; at the moment at which one stage ends and the next begins, the next holds.
    """
    owner, names = pd.factorize(windows["member"])
    known = windows.assign(owner=owner)
    asked = pd.DataFrame({"time": time, "row": np.arange(len(time)), "owner": pd.Index(names).get_indexer(member)})
    asked = asked[np.isfinite(time)].sort_values("time", kind="stable")
    stage = np.full(len(time), -1, dtype=np.intp)
    found = pd.merge_asof(asked, known, left_on="time", right_on="start", by="owner")
    found = found[found["time"] <= found["end"]]
    stage[found["row"].to_numpy()] = found["place"].to_numpy(dtype=np.intp)
    return stage
