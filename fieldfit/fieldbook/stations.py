"""Checks along the beam: what must lie on it, in which order, and what may not share a place."""

from collections.abc import Mapping

import numpy as np
import pandas as pd

from fieldfit.fieldbook.cells import Floats
from fieldfit.fieldbook.records import Mask, refuse
from fieldfit.fieldbook.typed import Typed
from fieldfit.fieldbook.units import display

__all__ = ["check_stations"]

_ON = 1e-9  # of the length: rounding of a conversion
_AT_ODDS = 1e-3  # m: a station written in two tables may be rounded
_FEW = 3  # stations that cannot all be wrong where the length may be
_STATIONS = {
    "supports": ("at",),
    "hinges": ("at",),
    "zones": ("from", "to"),
    "loads": ("from", "to"),
    "imposed": ("from", "to"),
    "gauges": ("at",),
    "readings": ("at",),
}


def check_stations(tables: Mapping[str, Typed], units: Mapping[str, str]) -> None:
    """Note every station that cannot be; `units` are the book's own, for the messages."""
    members = _lengths(tables, units)
    for name, columns in _STATIONS.items():
        typed = tables[name]
        if typed.frame.empty:
            continue
        length = typed.frame["member"].map(members).to_numpy(dtype=np.float64)
        moved = _moved(typed, tables["stages"]) if name == "loads" else np.zeros(len(length), dtype=bool)
        for column in columns:
            _on_beam(typed, column, np.where(moved, np.nan, length), units)
        if "to" in columns:
            _ordered(typed)
    if len(tables["hinges"].frame):
        _hinge_ends(tables["hinges"], members)
    for name in ("supports", "hinges"):
        _apart(tables[name], name.removesuffix("s"))
    if len(tables["zones"].frame):
        _zones_apart(tables["zones"])
    if len(tables["readings"].frame):
        _one_place(tables["readings"], tables["gauges"])


def _lengths(tables: Mapping[str, Typed], units: Mapping[str, str]) -> pd.Series:
    """Length (m) by member; NaN, with one fault in the place of one a station, where all stations lie beyond it."""
    lengths = tables["members"].frame.drop_duplicates("member").set_index("member")["length"]
    named = [(tables[name].frame, column) for name, columns in _STATIONS.items() for column in columns]
    if not any((frame[column].to_numpy(dtype=np.float64) > lengths.min()).any() for frame, column in named):
        return lengths
    placed = (frame.loc[frame[column].notna(), ["member", column]] for frame, column in named)
    stations = pd.concat([part.set_axis(["member", "at"], axis=1) for part in placed])
    beside = stations[stations["at"] != 0.0].dropna().astype({"member": object})
    reach = beside.groupby("member")["at"].agg(["min", "max", "count"]).reindex(lengths.index)
    short = (reach["min"] > lengths * (1 + _ON)) & (reach["count"] >= _FEW)
    for member, farthest in reach["max"][short].items():
        shown, unit = display(units, "length", float(farthest))
        row = tables["members"].frame["row"][tables["members"].frame["member"] == member].iloc[0]
        expected = f"a length that reaches the stations of this member, the farthest at {shown:.6g} {unit}"
        tables["members"].refuse("length at odds", int(row), "length", expected, "check the unit in the heading")
    return lengths.mask(short)


def _on_beam(typed: Typed, column: str, length: Floats, units: Mapping[str, str]) -> None:
    """Every station from 0 to the length (m), shape (rows,); NaN lengths are not checked."""
    at = typed.frame[column].to_numpy(dtype=np.float64)
    off = (at < -_ON * length) | (at > length * (1 + _ON))
    for row, end in zip(typed.frame["row"].to_numpy()[off], length[off], strict=True):
        shown, unit = display(units, "length", end)
        typed.refuse("off the beam", int(row), column, f"a station from 0 to {shown:.6g} {unit}")


def _moved(loads: Typed, stages: Typed) -> Mask:
    """Which loads belong to a load case that some stage moves along the beam."""
    frame = stages.frame
    if not frame["offset"].any():
        return np.zeros(len(loads.frame), dtype=bool)
    moving = frame[frame["offset"].fillna(0.0) != 0.0][["member", "load case"]].drop_duplicates()
    pairs = pd.MultiIndex.from_frame(loads.frame[["member", "load case"]])
    found: Mask = pd.MultiIndex.from_frame(moving).get_indexer(pairs) >= 0
    return found


def _ordered(typed: Typed) -> None:
    crossed = (typed.frame["from"] >= typed.frame["to"]).to_numpy(dtype=bool)
    refuse(typed, crossed, "edges crossed", "to", "a station beyond from")


def _hinge_ends(hinges: Typed, members: pd.Series) -> None:
    """A hinge at an end of the member would part nothing."""
    at = hinges.frame["at"]
    length = hinges.frame["member"].map(members).astype(np.float64)
    end = (at == 0.0) | ((at - length).abs() <= _ON * length)
    hint = "an end that turns freely is a support whose rotation is free"
    refuse(hinges, end.to_numpy(dtype=bool), "hinge at an end", "at", "a station inside the member", hint)


def _apart(typed: Typed, what: str) -> None:
    """No two in one place on a member."""
    placed = typed.frame[typed.frame["at"].notna()]
    again = placed[placed.duplicated(["member", "at"])]
    for row in again["row"]:
        typed.refuse("same place", int(row), "at", f"a place without another {what}")


def _zones_apart(zones: Typed) -> None:
    """Each zone begins where those left of it have ended."""
    frame = zones.frame.dropna(subset=["member", "from", "to"]).sort_values(["member", "from"], kind="stable")
    reached = frame.groupby("member")["to"].transform(lambda ends: ends.cummax().shift())
    for row in frame["row"][frame["from"] < reached * (1 - _ON)]:
        zones.refuse("zones overlap", int(row), "from", "a station where the zone to its left has ended")


def _one_place(readings: Typed, gauges: Typed) -> None:
    """A reading's own station agrees with its gauge's, or with the gauge's other readings."""
    frame = readings.frame
    found = frame["gauge row"].to_numpy()
    station = np.append(gauges.frame["at"].to_numpy(dtype=np.float64), np.nan)[found]
    labelled = frame[(found < 0) & frame["gauge"].notna().to_numpy()]
    if len(labelled):
        station[labelled.index] = labelled.groupby(["member", "gauge"], observed=True)["at"].transform("first")
    apart = np.abs(frame["at"].to_numpy(dtype=np.float64) - station) > _AT_ODDS
    refuse(readings, apart, "gauge in two places", "at", "the station that this gauge has elsewhere in the book")
