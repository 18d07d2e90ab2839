"""Checks of time: that times can be compared, that windows part the stages, that no clock runs backwards."""

from collections.abc import Mapping

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.fieldbook.cells import Floats
from fieldfit.fieldbook.clock import FORMS, TIMES, forms_of, moments
from fieldfit.fieldbook.records import Mask, refuse
from fieldfit.fieldbook.typed import Typed

__all__ = ["check_times"]

CLOCK = (3000.0, 4200.0)  # s: a step back or ahead of about an hour is that of a clock set for winter or summer
HOUR = "it goes back by about an hour, as a clock set to winter time does: write the offset from UTC, as +01:00"
SORT = "write the readings in the order they were taken, or name their stage"


def check_times(tables: Mapping[str, Typed]) -> None:
    """Note every fault of time in readings and stages.

    Times that cannot be compared are refused where readings are placed by them; else they are told in a note.
    """
    stages, readings = tables["stages"], tables["readings"]
    unsaid = readings.frame["stage"].isna().to_numpy(dtype=bool) & ~readings.at_fault("stage")
    timed = readings.given("time")
    refuse(readings, unsaid & ~timed, "no stage", "stage", "a stage, or a time within the window of one")
    if _at_odds(tables, refused=bool(np.any(unsaid & timed))):
        return
    if np.any(unsaid & timed):
        _windows(stages, pd.unique(readings.frame["member"][unsaid & timed]))
        members = _with_window(stages)
        nowhere = unsaid & timed & ~readings.frame["member"].isin(members).to_numpy(dtype=bool)
        _once_a_member(readings, nowhere)
    if timed.any():
        _backwards(readings, unsaid)


def _at_odds(tables: Mapping[str, Typed], *, refused: bool) -> bool:
    """Whether times are written in several ways; the first of each way but the first is refused or told."""
    places = [(tables[table], name) for table, name in TIMES]
    seen: dict[str, None] = {}
    for typed, name in places:
        forms = forms_of(typed.frame[name].to_numpy(dtype=object))
        for form in pd.unique(forms[pd.notna(forms)]):
            if seen and form not in seen:
                row = int(typed.frame["row"].to_numpy()[np.argmax(forms == form)])
                first = FORMS[next(iter(seen))]
                if refused:
                    typed.refuse("times at odds", row, name, f"{first}, as other times of this book", _why(form, seen))
                else:
                    typed.notes.append(
                        f"{typed.block.table.name}: row {row} gives {FORMS[form]}, other times are {first}; "
                        "times were not compared"
                    )
            seen.setdefault(form)
    return len(seen) > 1


def _why(form: str, seen: Mapping[str, None]) -> str:
    if {"zoned", "local"} <= {form, *seen}:
        return "write the offset from UTC with every time or with none"
    return "write the date and the time of day with every time"


def _windows(stages: Typed, members: npt.NDArray[np.object_]) -> None:
    """The windows of those members are whole and do not overlap."""
    mine = stages.frame["member"].isin(members).to_numpy(dtype=bool)
    start, end = stages.given("start"), stages.given("end")
    refuse(stages, mine & start & ~end, "window open", "end", "when it ended, as readings are placed by their time")
    refuse(stages, mine & end & ~start, "window open", "start", "when it began, as readings are placed by their time")
    rows = stages.frame[mine & start & end].drop_duplicates(["member", "stage"])
    rows = rows.assign(start=_moments(rows, "start"), end=_moments(rows, "end"))
    rows = rows.sort_values(["member", "start"], kind="stable")
    before = rows.groupby("member")["end"].shift()
    for row in rows["row"][rows["start"] < before]:
        stages.refuse("windows overlap", int(row), "start", "a time when the stage before it had ended")


def _moments(rows: pd.DataFrame, name: str) -> Floats:
    return moments(rows[name].to_numpy(dtype=object))


def _with_window(stages: Typed) -> npt.NDArray[np.object_]:
    return pd.unique(stages.frame["member"][stages.given("start") & stages.given("end")])


def _once_a_member(readings: Typed, where: Mask) -> None:
    """Note the first reading of each member that no window can hold."""
    for row in readings.frame[where].drop_duplicates("member")["row"]:
        expected = "a stage, or a start and an end of the stages of this member"
        readings.refuse("no window", int(row), "stage", expected)


def _backwards(readings: Typed, unsaid: Mask) -> None:
    """Within a gauge time does not go back from row to row: refused where it places readings, else told in a note."""
    frame = readings.frame
    time = pd.Series(_moments(frame, "time"), index=frame.index)
    own = [frame["member"].astype(object), frame["gauge"].astype(object), frame["at"]]
    before = time.groupby(own, dropna=False).shift()
    step = (time - before).to_numpy(dtype=float)
    back = step < 0
    clock = back & (-step >= CLOCK[0]) & (-step <= CLOCK[1])
    expected = "a time at or after that of the reading above it"
    refuse(readings, back & unsaid & clock, "time backwards", "time", expected, HOUR)
    refuse(readings, back & unsaid & ~clock, "time backwards", "time", expected, SORT)
    told = frame["row"].to_numpy()[back & ~unsaid]
    if len(told):
        rows = ", ".join(map(str, told[:5])) + (", ..." if len(told) > 5 else "")
        readings.notes.append(f"readings: time goes back in {len(told)} row(s) that name their stage (row {rows})")
