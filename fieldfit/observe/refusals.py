"""Refusals: readings that cannot be held against the model as they were recorded."""

from collections.abc import Iterator

import numpy as np
import pandas as pd

from fieldfit.beam import Array, Flags, Loads, Members, jumps
from fieldfit.errors import Fault
from fieldfit.observe.structure import Owners, laid_out

__all__ = ["unusable_readings"]

SIDE = "a station to one side: what is read here jumps"
MOVE = "move the station a little, to the side the gauge is really on"


def unusable_readings(readings: pd.DataFrame, members: Members, loads: Loads) -> list[Fault]:
    """Every reading in the fit that stands on a jump, or whose uncertainty cannot be told."""
    used = readings[readings["used_for"] == "fit"]
    return [*_on_jumps(used, members, loads), *_without_u(used)]


def _on_jumps(used: pd.DataFrame, members: Members, loads: Loads) -> Iterator[Fault]:
    owners: Owners = {name: number for number, name in enumerate(members.name)}
    stations = laid_out(used, owners, used["at"])
    places = laid_out(used, owners, np.arange(len(used), dtype=float))
    found = jumps(members, loads, stations)
    on = {"curvature": _by_row(found.curvature, places), "rotation": _by_row(found.rotation, places)}
    on["strain"] = on["curvature"]
    wrong = np.zeros(len(used), dtype=bool)
    for kind, rows in on.items():
        wrong |= (used["quantity"] == kind).to_numpy() & rows
    for row in used[wrong].to_dict("records"):
        what = f"{row['gauge']} at {row['at']:g} m"
        yield Fault(
            kind="station on a jump",
            table="readings",
            row=row["row"],
            column="at",
            value=what,
            expected=SIDE,
            hint=MOVE,
        )


def _by_row(per_station: Flags, places: Array) -> Flags:
    """Flags laid out (M, S) as flags a row, by the place of each row in the layout."""
    real = ~np.isnan(places)
    out = np.zeros(int(real.sum()), dtype=bool)
    out[places[real].astype(int)] = per_station[real]
    return out


def _without_u(used: pd.DataFrame) -> Iterator[Fault]:
    """Readings without any uncertainty, where the scatter of the member's readings cannot stand in for it.

    Scatter needs readings of one kind that all lack it.
    """
    origin = used["u_from"].eq("none")
    lacking = origin.groupby(used["member"]).transform("any")
    mixed = origin.groupby(used["member"]).transform("nunique").gt(1)
    kinds = used["quantity"].groupby(used["member"]).transform("nunique").gt(1)
    wrong = used[origin & lacking & (mixed | kinds)]
    for (member, gauge), rows in wrong.groupby(["member", "gauge"], sort=False):
        yield Fault(
            kind="uncertainty missing",
            table="readings",
            row=int(rows["row"].iloc[0]),
            column="u",
            value=f"{gauge} of {member}, without u",
            expected="u, plus or minus or resolution, as the member is read by several kinds of gauge or gives some u",
            hint="scatter can stand in only where one kind of gauge is read and none has a u",
        )
