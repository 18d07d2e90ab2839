"""Offsets: which loads a stage moves off the beam. A vehicle leaves it axle by axle; a slip of the pen looks alike."""

from collections.abc import Hashable, Mapping
from typing import Any

import numpy as np

from fieldfit.fieldbook.typed import Typed

__all__ = ["note_moved_off"]

_ON = 1e-9  # of the length: rounding of a conversion
_NAMED = 5


def note_moved_off(tables: Mapping[str, Typed]) -> None:
    """Tell of every stage whose offset moves loads off their member, those first of which nothing stays on it."""
    stages = tables["stages"]
    moving = stages.frame[stages.frame["offset"].fillna(0.0) != 0.0].dropna(subset=["member", "load case"])
    if moving.empty:
        return
    lengths = tables["members"].frame.drop_duplicates("member").set_index("member")["length"]
    loads = tables["loads"].frame[["member", "load case", "from", "to"]]
    moved = moving[["row", "member", "stage", "load case", "offset"]].merge(loads, on=["member", "load case"])
    if moved.empty:
        return
    length = moved["member"].map(lengths).to_numpy(dtype=np.float64)
    start = moved["from"].to_numpy(dtype=np.float64) + moved["offset"].to_numpy(dtype=np.float64)
    end = start + (moved["to"] - moved["from"]).fillna(0.0).to_numpy(dtype=np.float64)
    spread, slack = end > start, _ON * length
    gone = np.where(spread, (end <= slack) | (start >= length - slack), (end < -slack) | (start > length + slack))
    cut = (start < -slack) | (end > length + slack)
    groups = moved.assign(gone=gone, cut=cut).groupby(["row", "member", "stage", "load case"], sort=False)
    told = groups.agg(count=("gone", "size"), gone=("gone", "sum"), cut=("cut", "sum")).query("cut > 0").reset_index()
    told = told.assign(part=told["gone"] < told["count"]).sort_values("part", kind="stable")
    if len(told):
        named = "; ".join(map(_said, told.head(_NAMED).to_dict("records")))
        more = f"; and {len(told) - _NAMED} more" if len(told) > _NAMED else ""
        stages.notes.append(f"stages: offsets move loads off the beam, where they no longer count: {named}{more}")


def _said(row: Mapping[Hashable, Any]) -> str:
    part = f"{row['cut']} of {row['count']} loads" if row["part"] else "all"
    return f"{part} of {row['load case']} in stage {row['stage']} of {row['member']} (row {row['row']})"
