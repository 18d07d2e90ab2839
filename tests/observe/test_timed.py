"""Readings by their time: windows, logger's files, averages, and a ledger that adds up."""

from collections.abc import Callable
from typing import Any

import numpy as np
import pandas as pd
import pytest

from fieldfit.errors import FieldBookError
from fieldfit.fieldbook import Book
from fieldfit.fieldbook.clock import forms_of, moments
from fieldfit.observe import Subject, observe
from fieldfit.observe.readings import SET_ASIDE
from fieldfit.observe.windows import OUTSIDE

BookOf = Callable[..., Book]
DAY = "2024-05-14T"
STAGES = [
    ["member", "stage", "load case", "role", "start", "end"],
    ["B1", "zero", "", "zero", f"{DAY}08:00:00", f"{DAY}08:10:00"],
    ["B1", "P", "P", "load", f"{DAY}08:10:00", f"{DAY}08:30:00"],
]
GAUGES = [["member", "gauge", "at [m]", "u [mm]", "channel"], ["B1", "D", 3.0, 0.1, "CH1"], ["B1", "E", 2.0, 0.1, ""]]


def log(*rows: list[object]) -> list[list[object]]:
    return [["time", "CH1 [mm]", "E [mm]"], *([f"{DAY}{row[0]}", *row[1:]] for row in rows)]


def subject_of(book: Book) -> Subject:
    (subject,) = observe(book)
    return subject


def ledger(subject: Subject) -> dict[tuple[Any, ...], tuple[float, float]]:
    seen = subject.observations
    keys = zip(map(subject.stage_name, seen.stage), seen.gauge, seen.why, strict=True)
    return dict(zip(keys, zip(seen.count.tolist(), (1000 * seen.value).round(6).tolist(), strict=True), strict=True))


def test_a_reading_goes_to_the_stage_whose_window_holds_it(book_of: BookOf) -> None:
    readings = [
        ["member", "gauge", "time", "deflection [mm]"],
        *(["B1", "D", f"{DAY}{at}", value] for at, value in (("07:59", 9), ("08:05", 1), ("08:10", 5), ("08:31", 9))),
    ]
    seen = ledger(subject_of(book_of(stages=STAGES, gauges=GAUGES, readings=readings)))
    assert seen[("zero", "D", "")] == (1, 1.0)
    assert seen[("P", "D", "")] == (1, 5.0)  # where two stages meet the next holds
    assert ("", "D", OUTSIDE) in seen
    assert len(seen) == 3  # the two outside share a key; both are in the ledger below


def test_every_reading_is_in_the_ledger_used_or_set_aside(book_of: BookOf) -> None:
    rows = [("07:00:00", 9, 9), ("08:01:00", 1, 2), ("08:02:00", 3, ""), ("08:20:00", 8, 7), ("09:00:00", 9, "n/a")]
    book = book_of(stages=STAGES, gauges=GAUGES, readings=log(*map(list, rows)))
    subject = subject_of(book)
    assert book.log is not None
    assert book.log.count == subject.observations.count.sum() == 8
    assert ledger(subject) == {
        ("zero", "D", ""): (2, 2.0),
        ("zero", "E", ""): (1, 2.0),
        ("P", "D", ""): (1, 8.0),
        ("P", "E", ""): (1, 7.0),
        ("", "D", OUTSIDE): (2, 9.0),
        ("", "E", OUTSIDE): (1, 9.0),
    }


def test_a_logger_says_the_same_as_a_row_a_reading(book_of: BookOf) -> None:
    noise = np.random.default_rng(3)
    times = [f"08:{minute:02}:{second:02}" for minute in range(30) for second in (0, 20, 40)]
    values = noise.normal(5.0, 0.1, (len(times), 2)).round(3)
    made = log(*([at, *row] for at, row in zip(times, values.tolist(), strict=True)))
    logged = subject_of(book_of(stages=STAGES, gauges=GAUGES, readings=made)).observations
    long = [["member", "gauge", "time", "deflection [mm]"]]
    long += [["B1", g, f"{DAY}{at}", row[n]] for at, row in zip(times, values, strict=True) for n, g in enumerate("DE")]
    single = subject_of(book_of(stages=STAGES, gauges=GAUGES, readings=long)).observations
    for name in ("value", "u", "count", "scatter", "change", "time"):
        by_key = [
            dict(zip(zip(o.stage, o.gauge, strict=True), getattr(o, name), strict=True)) for o in (logged, single)
        ]
        assert by_key[0] == pytest.approx(by_key[1], rel=1e-9), name


def test_rows_that_the_book_sets_aside_are_counted(book_of: BookOf) -> None:
    made = log(["08:01:00", 1, 2], ["08:20:00", 8, 7], ["08:21:00", 99, 99])
    made = [[*row, "use" if n == 0 else "no" if n == 3 else "yes"] for n, row in enumerate(made)]
    seen = ledger(subject_of(book_of(stages=STAGES, gauges=GAUGES, readings=made)))
    assert seen[("", "D", SET_ASIDE)] == (1, 99.0)
    assert seen[("P", "D", "")] == (1, 8.0)


def test_a_clock_set_back_in_a_log_is_refused_with_its_row(book_of: BookOf) -> None:
    made = log(["08:01:00", 1, 2], ["08:59:00", 8, 7], ["08:00:00", 8, 7])
    with pytest.raises(FieldBookError, match=r"readings, row 4 \[time\].*winter time"):
        book_of(stages=STAGES, gauges=GAUGES, readings=made)


def test_a_clock_set_ahead_in_a_log_is_told(book_of: BookOf) -> None:
    made = log(["08:01:00", 1, 2], ["08:02:00", 8, 7], ["09:03:00", 8, 7], ["09:04:00", 8, 7], ["09:05:00", 8, 7])
    notes = book_of(stages=STAGES, gauges=GAUGES, readings=made).notes
    assert any("jumps ahead by an hour at row 4" in note for note in notes)


def slow_log(hours: list[float], zone: str = "") -> list[list[object]]:
    """A row at each hour counted from midnight of the day."""
    start = pd.Timestamp(f"{DAY}00:00:00")
    times = [(start + pd.Timedelta(hours=hour)).isoformat() + zone for hour in hours]
    return [["time", "D [mm]", "E [mm]"], *([time, 1.0, 2.0] for time in times)]


def test_an_hour_that_stands_twice_in_an_hourly_log_is_refused(book_of: BookOf) -> None:
    """02:00 in summer time, and an hour later 02:00 in winter time."""
    made = slow_log([0, 1, 2, 2, 3, 4, 8])
    with pytest.raises(FieldBookError, match=r"readings, row 5 \[time\].*an hour stands twice.*winter time"):
        book_of(stages=STAGES, gauges=GAUGES, readings=made)
    often = slow_log([8, 8, 8 + 20 / 60, 8 + 40 / 60])  # every 20 minutes: one moment written twice
    assert not book_of(stages=STAGES, gauges=GAUGES, readings=often).notes


@pytest.mark.parametrize(
    ("hours", "told"),
    [
        ([0, 2, 4, 5, 7, 9], "an hour less than usual has passed at row 5"),
        ([0, 1, 2, 4, 5, 6], "jumps ahead by an hour at row 5"),
        ([7, 7.5, 8, 9.5, 10], "jumps ahead by an hour at row 5"),
    ],
)
def test_a_slow_log_whose_clock_was_set_is_told(hours: list[float], told: str, book_of: BookOf) -> None:
    (note,) = book_of(stages=STAGES, gauges=GAUGES, readings=slow_log(hours)).notes
    assert told in note


def test_a_clock_with_its_offset_from_utc_was_not_set(book_of: BookOf) -> None:
    zoned = [[*row[:4], *(f"{at}Z" for at in row[4:])] if n else row for n, row in enumerate(STAGES)]
    assert not book_of(stages=zoned, gauges=GAUGES, readings=slow_log([0, 1, 2, 4, 4, 5, 6], "Z")).notes


def test_resets_are_counted_by_rows_so_these_may_not_go_back_in_time(book_of: BookOf) -> None:
    rows = [["zero", 0.0, "08:00", ""], ["P", 6.0, "08:20", ""], ["P", 0.5, "08:25", "yes"]]
    for order in (rows, rows[::-1]):
        table = [["member", "stage", "gauge", "deflection [mm]", "time", "reset"]]
        table += [["B1", stage, "D", value, f"{DAY}{at}:00", reset] for stage, value, at, reset in order]
        if order is rows:
            seen = subject_of(book_of(stages=STAGES, gauges=GAUGES, readings=table)).observations
            assert [*seen.zero] == [0, 0, 1]
        else:
            with pytest.raises(FieldBookError, match=r"row 3.*in the order they were taken"):
                book_of(stages=STAGES, gauges=GAUGES, readings=table)


def test_zones_written_out_are_compared_and_mixed_ones_refused(book_of: BookOf) -> None:
    zoned = [[*row[:4], *(f"{at}+02:00" for at in row[4:])] if n else row for n, row in enumerate(STAGES)]
    made = log(["06:01:00Z", 1, 2], ["06:20:00Z", 8, 7])
    seen = ledger(subject_of(book_of(stages=zoned, gauges=GAUGES, readings=made)))
    assert seen[("P", "D", "")] == (1, 8.0)
    with pytest.raises(FieldBookError, match="write the offset from UTC with every time or with none"):
        book_of(stages=STAGES, gauges=GAUGES, readings=made)


def test_times_of_every_form() -> None:
    texts = np.array(
        ["2024-05-14T10:00:00Z", "2024-05-14T12:00:00+02:00", None, "10:00:00", "2024-05-14"], dtype=object
    )
    assert forms_of(texts).tolist() == ["zoned", "zoned", None, "hour", "day"]
    seconds = moments(texts)
    assert seconds[0] == seconds[1]
    assert seconds[3] == 36000
    assert np.isnan(seconds[2])


RESETS = [["member", "gauge", "time", "remark"], ["B1", "D", f"{DAY}08:20:00", "knocked"]]


def test_a_reset_within_a_stage_makes_two_plateaus_of_it(book_of: BookOf) -> None:
    rows = [("08:01:00", 1, 2), ("08:12:00", 5, 6), ("08:14:00", 7, 6), ("08:20:00", 1, 6), ("08:25:00", 3, 6)]
    book = book_of(stages=STAGES, gauges=GAUGES, readings=log(*map(list, rows)), resets=RESETS)
    seen = subject_of(book).observations
    found = {
        (int(stage), gauge, int(zero)): (count, round(1000 * value, 9))
        for stage, gauge, zero, count, value in zip(
            seen.stage, seen.gauge, seen.zero, seen.count.tolist(), seen.value.tolist(), strict=True
        )
    }
    assert found == {
        (0, "D", 0): (1, 1.0),
        (0, "E", 0): (1, 2.0),
        (1, "D", 0): (2, 6.0),
        (1, "D", 1): (2, 2.0),
        (1, "E", 0): (4, 6.0),
    }
    assert book.log is not None
    assert book.log.count == seen.count.sum()


@pytest.mark.parametrize(
    ("at", "zeros"), [("08:00:00", [1, 1]), ("08:10:00", [0, 1]), ("08:30:00", [0, 0]), ("23:00:00", [0, 0])]
)
def test_a_reset_counts_from_its_own_moment(book_of: BookOf, at: str, zeros: list[int]) -> None:
    resets = [RESETS[0], ["B1", "D", f"{DAY}{at}", ""]]
    made = log(["08:01:00", 1, 2], ["08:10:00", 5, 6])
    seen = subject_of(book_of(stages=STAGES, gauges=GAUGES, readings=made, resets=resets)).observations
    assert seen.zero[seen.gauge == "D"].tolist() == zeros
    assert not seen.zero[seen.gauge == "E"].any()


def test_a_reset_of_no_gauge_or_of_another_clock_is_refused(book_of: BookOf) -> None:
    made = log(["08:01:00", 1, 2], ["08:20:00", 8, 7])
    for row, told in (
        (["B1", "F", f"{DAY}08:05:00", ""], "a gauge of"),
        (["B1", "D", "08:05", ""], "date with a time"),
    ):
        with pytest.raises(FieldBookError, match=rf"resets, row 2.*{told}"):
            book_of(stages=STAGES, gauges=GAUGES, readings=made, resets=[RESETS[0], row])


def test_a_column_of_resets_in_a_log_is_refused_not_passed_over(book_of: BookOf) -> None:
    made = [[*row, "yes" if n else "reset"] for n, row in enumerate(log(["08:01:00", 1, 2], ["08:20:00", 8, 7]))]
    with pytest.raises(FieldBookError, match="a logger's file: time, a column a channel"):
        book_of(stages=STAGES, gauges=GAUGES, readings=made)
