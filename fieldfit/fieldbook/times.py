"""Checks of time: that times can be compared, that windows part the stages, that no clock runs backwards."""

from collections.abc import Iterator, Mapping, Sequence

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.fieldbook.cells import Floats
from fieldfit.fieldbook.clock import FORMS, TIMES, forms_of, moments
from fieldfit.fieldbook.log import Log
from fieldfit.fieldbook.records import Mask, refuse
from fieldfit.fieldbook.typed import Typed

__all__ = ["check_times"]

CLOCK = (3000.0, 4200.0)  # s: a step back or ahead of about an hour is that of a clock set for winter or summer
HOUR = "it goes back by about an hour, as a clock set to winter time does: write the offset from UTC, as +01:00"
AGAIN = "an hour stands twice, as by a clock set to winter time: write the offset from UTC, as +01:00"
SORT = "write the readings in the order they were taken, or name their stage"
#: What an hour more or less than usual from one row of a log to the next (s) looks like.
SHIFTS = {
    3600.0: "the clock jumps ahead by an hour at row {rows}; if it was set to summer time there",
    -3600.0: "an hour less than usual has passed at row {rows}; if the clock was set to winter time there",
}
NEAR = 300.0  # s: how close to an hour
RESET = "the column reset counts a gauge's readings in the order they were taken: write them in that order"
WINTER = f"{SORT}; if a clock was set to winter time in between, write the offset from UTC, as +01:00"


def check_times(tables: Mapping[str, Typed], log: Log | None) -> None:
    """Note every fault of time in readings and stages.

    Times that cannot be compared are refused where readings are placed by them; else they are told in a note.
    """
    stages, readings = tables["stages"], tables["readings"]
    unsaid = readings.frame["stage"].isna().to_numpy(dtype=bool) & ~readings.at_fault("stage")
    timed = readings.given("time")
    refuse(readings, unsaid & ~timed, "no stage", "stage", "a stage, or a time within the window of one")
    if log is None:
        resets = tables["resets"]
        every = np.ones(len(resets.frame), dtype=bool)
        refuse(resets, every, "reset without log", "time", "no row: yes in the column reset of the readings says it")
    members = _placed_by_time(tables, unsaid & timed, log)
    if _at_odds(tables, log, refused=len(members) > 0):
        return
    if len(members):
        _windows(stages, members)
        _no_window(readings, unsaid & timed, sorted(set(members) - set(_with_window(stages))), log)
    if timed.any():
        _backwards(readings, unsaid)
    if log is not None:
        _log_backwards(readings, log)


def _placed_by_time(tables: Mapping[str, Typed], rows: Mask, log: Log | None) -> list[str]:
    """The members whose readings go to stages by their time."""
    own = tables["readings"].frame["member"][rows].dropna()
    gauges = tables["gauges"].frame["member"]
    logged: Sequence[str] = [*gauges[[one.gauge_row for one in log.channels]].dropna()] if log else []
    return [*dict.fromkeys([*own, *logged])]


def _at_odds(tables: Mapping[str, Typed], log: Log | None, *, refused: bool) -> bool:
    """Whether times are written in several ways; the first of each way but the first is refused or told."""
    seen: dict[str, None] = {}
    for typed, name, forms in _forms(tables, log):
        for form, row in forms.items():
            if seen and form not in seen:
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


def _forms(tables: Mapping[str, Typed], log: Log | None) -> Iterator[tuple[Typed, str, Mapping[str, int]]]:
    """The columns of times, and the first row of each way of writing them."""
    for table, name in TIMES:
        typed = tables[table]
        if typed.frame[name].isna().all():
            continue
        forms = forms_of(typed.frame[name].to_numpy(dtype=object))
        distinct = pd.unique(forms[pd.notna(forms)])
        yield typed, name, {form: int(typed.frame["row"].to_numpy()[np.argmax(forms == form)]) for form in distinct}
    if log is not None:
        yield tables["readings"], "time", log.forms


def _why(form: str, seen: Mapping[str, None]) -> str:
    if {"zoned", "local"} <= {form, *seen}:
        return "write the offset from UTC with every time or with none"
    return "write the date and the time of day with every time"


def _windows(stages: Typed, members: Sequence[str]) -> None:
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


def _with_window(stages: Typed) -> list[str]:
    return [*dict.fromkeys(stages.frame["member"][stages.given("start") & stages.given("end")])]


def _no_window(readings: Typed, timed: Mask, members: Sequence[str], log: Log | None) -> None:
    """Note the first reading of each of the members that have no window to hold it."""
    expected = "a stage, or a start and an end of the stages of this member"
    rows = readings.frame[timed & readings.frame["member"].isin(members).to_numpy(dtype=bool)]
    for row in rows.drop_duplicates("member")["row"]:
        readings.refuse("no window", int(row), "stage", expected)
    if log is not None and len(log.row) and members:
        hint = f"the stages of {', '.join(members[:3])} have no start and end"
        readings.refuse("no window", int(log.row[0]), "time", "a start and an end of the stages of its members", hint)


def _log_backwards(readings: Typed, log: Log) -> None:
    """A logger's rows do not go back in time, nor stand still for an hour; a step longer or shorter by one is told."""
    step = np.diff(log.time)
    usual = float(np.median(step)) if len(step) else 0.0
    by_own_clock = "zoned" not in log.forms
    again = (step == 0) & by_own_clock & (CLOCK[0] <= usual <= CLOCK[1])
    for place in np.flatnonzero((step < 0) | again).tolist():
        hint = AGAIN if again[place] else HOUR if CLOCK[0] <= -step[place] <= CLOCK[1] else None
        expected = f"a time {'after' if again[place] else 'at or after'} that of the row above it"
        readings.refuse("time backwards", int(log.row[place + 1]), "time", expected, hint)
    for by, told in SHIFTS.items() if by_own_clock and usual > 0 else ():
        shifted = (step > 0) & (np.abs(step - usual - by) <= min(usual, NEAR))
        if shifted.any():
            rows = _first(log.row[1:][shifted])
            readings.notes.append(f"readings: {told.format(rows=rows)}, write the offset from UTC with every time")


def _first(rows: NDArray[np.int64]) -> str:
    return ", ".join(map(str, rows[:5])) + (", ..." if len(rows) > 5 else "")


def _backwards(readings: Typed, unsaid: Mask) -> None:
    """Within a gauge time does not go back from row to row: refused where it places readings or the gauge was reset.

    Elsewhere it is told in a note.
    """
    frame = readings.frame
    time = pd.Series(_moments(frame, "time"), index=frame.index)
    own = [frame["member"].astype(object), frame["gauge"].astype(object), frame["at"]]
    before = time.groupby(own, dropna=False).shift()
    step = (time - before).to_numpy(dtype=float)
    back = step < 0
    clock = back & (-step >= CLOCK[0]) & (-step <= CLOCK[1])
    expected = "a time at or after that of the reading above it"
    refuse(readings, back & unsaid & clock, "time backwards", "time", expected, HOUR)
    short = back & ~clock & (-step < CLOCK[0])
    refuse(readings, short & unsaid, "time backwards", "time", expected, WINTER)
    refuse(readings, back & unsaid & ~clock & ~short, "time backwards", "time", expected, SORT)
    reset = frame["reset"].groupby(own, dropna=False).transform("any").to_numpy(dtype=bool)
    refuse(readings, back & ~unsaid & reset, "time backwards", "time", expected, RESET)
    told = frame["row"].to_numpy()[back & ~unsaid & ~reset]
    if len(told):
        readings.notes.append(
            f"readings: time goes back in {len(told)} row(s) that name their stage (row {_first(told)})"
        )
