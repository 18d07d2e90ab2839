"""Readings that are still to be taken: every gauge in stages that were not read yet."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from fieldfit.observe.readings import COLUMNS, Observations
from fieldfit.observe.subject import Subject

__all__ = ["planned", "unread_stages"]


def unread_stages(subject: Subject) -> list[int]:
    """Numbers of the stages with no reading at all; a zero stage has nothing to expect."""
    read = set(subject.observations.stage)
    return [n for n, stage in enumerate(subject.stages) if n not in read and stage.role != "zero"]


def planned(subject: Subject, stages: Sequence[int]) -> Subject:
    """The subject with one reading of every gauge in each of those stages instead of what was read; values are NaN."""
    gauges = _known_gauges(subject)
    rows = gauges.take(np.tile(np.arange(len(gauges)), len(stages)))
    number = np.repeat(np.array(stages, dtype=np.intp), len(gauges))
    return replace(subject, observations=replace(rows, stage=number))


def _known_gauges(subject: Subject) -> Observations:
    """One row a gauge: those of the gauges table, then those only seen among the readings; zeros as they last were."""
    table, seen = subject.gauges, subject.observations
    names = [*table.gauge, *seen.gauge]
    first = [names.index(name) for name in dict.fromkeys(names)]
    every = {name: np.concatenate([getattr(table, name), getattr(seen, name)]) for name in COLUMNS}
    rows = Observations(**every).take(np.array(first, dtype=np.intp))
    return replace(
        rows,
        value=np.full(len(rows), np.nan),
        zero=np.array([max([0, *seen.zero[seen.gauge == name]]) for name in rows.gauge], dtype=np.intp),
        u=np.array([_u(seen, name, u) for name, u in zip(rows.gauge, rows.u, strict=True)]),
        used_for=np.full(len(rows), "fit", dtype=object),
        why=np.full(len(rows), "", dtype=object),
    )


def _u(seen: Observations, gauge: str, given: float) -> float:
    """Standard uncertainty of a reading to come: the gauge's own, else the median of what was read by it; NaN."""
    known = seen.u[(seen.gauge == gauge) & np.isfinite(seen.u)]
    return float(np.median(known)) if np.isnan(given) and known.size else float(given)
