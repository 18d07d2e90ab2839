"""The figure of readings over time: stages shaded, means drawn, what had not settled said; none without times."""

from collections.abc import Callable

import numpy as np

from fieldfit.fieldbook import Book
from fieldfit.report.canvas import Area, Text
from fieldfit.report.figures import FIGURES
from fieldfit.work import reconcile

DAY = "2024-05-14T"
STAGES = [
    ["member", "stage", "load case", "role", "start", "end"],
    ["B1", "idle", "", "zero", f"{DAY}08:00:00", f"{DAY}08:29:00"],
    ["B1", "blocks", "P", "load", f"{DAY}08:30:00", f"{DAY}09:00:00"],
]


def test_stages_means_and_what_had_not_settled_are_drawn(book_of: Callable[..., Book]) -> None:
    noise = np.random.default_rng(2).normal(0, 0.01, 60)
    creep = [0.0 if n < 30 else 10.0 + 3 * (n - 30) / 30 for n in range(60)]
    log: list[list[object]] = [["time", "D [mm]"]]
    log += [[f"{DAY}{8 + n // 60:02}:{n % 60:02}:00", round(creep[n] + noise[n], 3)] for n in range(60)]
    gauges = [["member", "gauge", "at [m]", "u [mm]"], ["B1", "D", 3.0, 0.1]]
    book = book_of(stages=STAGES, gauges=gauges, readings=log)
    picture = FIGURES["plateaus"](book, reconcile(book)[0].reconciliation)
    assert picture is not None
    texts = [shape.text for shape in picture.drawing.shapes if isinstance(shape, Text)]
    assert {"idle", "blocks", "D"} <= set(texts)
    assert sum(isinstance(shape, Area) for shape in picture.drawing.shapes) == 2
    assert "Not settled: stage blocks, where D moved by 1.0" in picture.caption
