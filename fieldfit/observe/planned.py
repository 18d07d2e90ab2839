"""Readings that are still to be taken: every gauge in stages that were not read yet."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from fieldfit.observe.cycles import kept_on
from fieldfit.observe.readings import COLUMNS, ELASTIC, SENSE, USUAL_SENSE, Observations
from fieldfit.observe.subject import Subject

__all__ = ["in_time", "planned", "planned_test", "unread_stages", "with_gauge"]

STEADY = 20.0  # degC of every reading to come: nothing is known of the day


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


def in_time(ahead: Subject) -> Subject:
    """The same with every reading taken in the middle of its stage's window, NaN where the book gives none."""
    seen = ahead.observations
    middle = np.array([*(np.mean(stage.window) for stage in ahead.stages), np.nan])
    return replace(ahead, observations=replace(seen, time=middle[seen.stage]))


def planned_test(subject: Subject) -> Subject:
    """The subject with one reading of every gauge in each stage that enters the elastic fit, zero stages among them.

    All at one temperature; no value yet.
    """
    ahead = in_time(planned(subject, elastic_stages(subject)))
    seen = ahead.observations
    origin = np.where(np.isfinite(seen.u) & (seen.u_from == "none"), "given", seen.u_from).astype(object)
    steady = np.full(len(seen), STEADY)
    return replace(ahead, observations=replace(seen, temperature=steady, u_from=origin))


def elastic_stages(subject: Subject) -> list[int]:
    """Numbers of the stages whose readings will enter the elastic fit: of the first cycle, no load kept on."""
    roles = np.array([stage.role for stage in subject.stages], dtype=object)
    kept = kept_on(roles, np.array([stage.factors for stage in subject.stages]))
    first = subject.stages[0].cycle
    return [
        number
        for number, stage in enumerate(subject.stages)
        if stage.role in ELASTIC and stage.cycle == first and not kept[number]
    ]


def with_gauge(subject: Subject, name: str, quantity: str, at: float, u: float) -> Subject:
    """A planned test with one more gauge, which counts as its kind usually does."""
    seen = subject.observations
    stages = np.unique(seen.stage)
    size = len(stages)
    sense = np.full(size, SENSE[USUAL_SENSE[quantity]])
    own = {
        "stage": stages,
        "gauge": np.full(size, name, dtype=object),
        "at": np.full(size, at),
        "quantity": np.full(size, quantity, dtype=object),
        "value": np.full(size, np.nan),
        "sign": sense,
        "usual": sense,
        "lever": np.ones(size),
        "u": np.full(size, u),
        "u_from": np.full(size, "given", dtype=object),
        "scale_u": np.zeros(size),
        "zero": np.zeros(size, dtype=np.intp),
        "per_kelvin": np.full(size, np.nan),
        "per_kelvin_u": np.full(size, np.nan),
    }
    first = [int(np.argmax(seen.stage == stage)) for stage in stages]
    every = {column: own.get(column, getattr(seen, column)[first]) for column in COLUMNS}
    joined = {column: np.concatenate([getattr(seen, column), every[column]]) for column in COLUMNS}
    return replace(subject, observations=Observations(**joined))
