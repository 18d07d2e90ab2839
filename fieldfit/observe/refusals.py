"""Refusals: readings that cannot be held against the model as they were recorded."""

from collections.abc import Iterator
from dataclasses import replace

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.beam import Array, Flags, Loads, Members, jumps, pad
from fieldfit.errors import Fault
from fieldfit.fieldbook import Book
from fieldfit.observe.readings import Ledger
from fieldfit.observe.structure import Owners, laid_out, supports_of

__all__ = ["unusable_readings"]

JUMPING = ("rotation", "curvature", "strain")
SIDE = "a station to one side: what is read here jumps"
MOVE = "move the station a little, to the side the gauge is really on"


def unusable_readings(book: Book, ledger: Ledger, gauges: Ledger, members: Members, loads: Loads) -> list[Fault]:
    """Every reading in the fit that stands on a jump, or whose uncertainty cannot be told.

    So does a gauge of the table ``gauges`` that is still to be read, lest its readings are refused when it is late.
    """
    faults: list[Fault] = []
    if {*book.tables["gauges"]["measures"], *book.tables["readings"]["quantity"].unique()} & {*JUMPING}:
        members_at = _with_unknown_restraints(book, members), loads
        faults += _on_jumps("readings", ledger, _used(ledger, _jumping(ledger)), *members_at)
        faults += _on_jumps("gauges", gauges, np.flatnonzero(_jumping(gauges) & _unread(gauges, ledger)), *members_at)
    return [
        *faults,
        *_without_u(ledger, members),
        *_without_temperature(book, ledger, members),
    ]


def _used(ledger: Ledger, where: Flags) -> npt.NDArray[np.intp]:
    """Places of the readings in the fit that `where` (n,) marks."""
    places = np.flatnonzero(where)
    return places[ledger.readings.used_for[places] == "fit"]


def _with_unknown_restraints(book: Book, members: Members) -> Members:
    """The members with each support restrained whose rotational restraint is asked for: moment may jump there."""
    unknowns = book.tables["unknowns"]
    asked = unknowns[unknowns["unknown"] == "rotational restraint"]
    if asked.empty:
        return members
    owners: Owners = {name: number for number, name in enumerate(members.name)}
    supports = supports_of(book)
    places = set(zip(asked["member"], asked["where"], strict=True))
    turned = [place in places for place in zip(supports["member"], supports["support"], strict=True)]
    restrained = laid_out(supports, owners, turned=np.array(turned, dtype=float))["turned"] > 0
    return replace(members, support_fixity=np.where(restrained, 1.0, members.support_fixity))


def _jumping(ledger: Ledger) -> Flags:
    """Readings (n,) of rotation, curvature and strain; deflections never jump."""
    return np.asarray(pd.Series(ledger.readings.quantity).isin(JUMPING), dtype=bool)


def _unread(gauges: Ledger, ledger: Ledger) -> Flags:
    """Which gauges (g,) have no reading at all, not even one set aside."""
    read = pd.MultiIndex.from_arrays([ledger.owner, ledger.readings.gauge])
    return ~pd.MultiIndex.from_arrays([gauges.owner, gauges.readings.gauge]).isin(read)


def _on_jumps(
    table: str, ledger: Ledger, used: npt.NDArray[np.intp], members: Members, loads: Loads
) -> Iterator[Fault]:
    """Rows of a table, in places ``used`` of the ledger, that stand on a jump of what they measure."""
    if not len(used):
        return
    seen = ledger.readings
    turned = seen.quantity[used] == "rotation"
    owner = ledger.owner[used]
    found = jumps(members, loads, pad(owner, len(members), seen.at[used]))
    places = pad(owner, len(members), np.arange(len(used), dtype=float))
    wrong = np.where(turned, _by_row(found.rotation, places), _by_row(found.curvature, places))
    for place in used[wrong].tolist():
        yield Fault(
            kind="station on a jump",
            table=table,
            row=int(ledger.row[place]),
            column="at",
            value=f"{seen.gauge[place]} at {seen.at[place]:g} m",
            expected=SIDE,
            hint=MOVE,
        )


def _by_row(per_station: Flags, places: Array) -> Flags:
    """Flags laid out (M, S) as flags a row, by the place of each row in the layout."""
    real = ~np.isnan(places)
    out = np.zeros(int(real.sum()), dtype=bool)
    out[places[real].astype(int)] = per_station[real]
    return out


def _without_u(ledger: Ledger, members: Members) -> Iterator[Fault]:
    """Readings without any uncertainty, where the scatter of the member's readings cannot stand in for it.

    Scatter needs readings of one kind that all lack it.
    """
    seen, owner = ledger.readings, ledger.owner
    lacking = _used(ledger, np.isnan(seen.u))
    if not len(lacking):
        return
    used = _used(ledger, np.isin(owner, owner[lacking]))
    rows = pd.DataFrame({"owner": owner[used], "kind": seen.quantity[used], "bare": np.isnan(seen.u[used])})
    several = rows.groupby("owner")[["kind", "bare"]].nunique().gt(1).any(axis=1)
    wrong = lacking[several[owner[lacking]].to_numpy()]
    where = pd.DataFrame({"owner": owner[wrong], "gauge": seen.gauge[wrong], "row": ledger.row[wrong]})
    for place, gauge, row in where.drop_duplicates(["owner", "gauge"]).itertuples(index=False):
        yield Fault(
            kind="uncertainty missing",
            table="readings",
            row=int(row),
            column="u",
            value=f"{gauge} of {members.name[place]}, without u",
            expected="u, plus or minus or resolution, as the member is read by several kinds of gauge or gives some u",
            hint="scatter can stand in only where one kind of gauge is read and none has a u",
        )


def _without_temperature(book: Book, ledger: Ledger, members: Members) -> Iterator[Fault]:
    """Readings of a gauge with a temperature coefficient, stated or asked for, that lack what it is held against."""
    unknowns, stages = book.tables["unknowns"], book.tables["stages"]
    rows = unknowns[unknowns["unknown"] == "temperature coefficient"]
    seen, owner, names = ledger.readings, ledger.owner, np.array(members.name, dtype=object)
    known = np.isfinite(seen.per_kelvin)
    for member, gauge in zip(rows["member"], rows["where"], strict=True):
        known |= (names[owner] == member) & (seen.gauge == gauge)
    if not known.any():
        return
    zeroed = np.isin(names.astype(str), stages["member"][stages["role"] == "zero"].to_numpy(dtype=str))
    lacking = known & ~(np.isfinite(seen.temperature) & zeroed[owner]) & (seen.used_for != "none")
    for place in np.flatnonzero(lacking).tolist():
        yield Fault(
            kind="temperature missing",
            table="readings",
            row=int(ledger.row[place]),
            column="temperature",
            value=f"{seen.gauge[place]} of {names[owner[place]]}",
            expected="a temperature with every reading of this gauge, and a zero stage that it counts from",
        )
