"""Sags: limits on the largest deflection of a span in the stages of the test."""

from dataclasses import replace

import numpy as np

from fieldfit.fit import Reconciliation, Sagging, sag_of_stage
from fieldfit.judge.checks import BOOK, Check, missed_side, unassessed
from fieldfit.judge.spans import judged, why_no_span, why_not
from fieldfit.observe import Limit

__all__ = ["sag_checks"]


def sag_checks(found: Reconciliation, limit: Limit) -> list[Check]:
    """Largest deflection of a span from the chord of its supports, by the fitted member under a stage's load.

    ``span/n`` asks the same of the length of the span over the deflection, a cantilever counting twice its length.
    """
    checks: list[Check] = []
    spans: tuple[Sagging, ...] = ()
    stages = [one for one in enumerate(found.subject.stages) if limit.stage in (None, one[1].name)]
    loaded = [(number, stage.name) for number, stage in stages if stage.role != "zero" and _carries(found, number)]
    for number, stage in loaded:
        spans = sag_of_stage(found, number)
        checks += [_check(found, limit, stage, span) for span in spans if limit.where in (None, *span.names)]
    if checks:
        return checks
    reason = why_no_span(found, limit.where, spans) if loaded else "the limit is of no stage under load"
    ends = (None, None) if limit.limit == "span/n" else (limit.at_least, limit.at_most)
    check = unassessed(limit.limit, limit.where or "whole", "deflection", _source(limit), reason, ends)
    return [replace(check, stage=limit.stage)]


def _carries(found: Reconciliation, stage: int) -> bool:
    """Whether anything acts on the member in a stage: unloaded, the fitted member is straight, whatever was read."""
    carried = found.subject.stages[stage].factors if found.carried is None else found.carried[stage]
    return bool(np.any(carried))


def _check(found: Reconciliation, limit: Limit, stage: str, span: Sagging) -> Check:
    ends = (limit.at_least, limit.at_most)
    if limit.limit == "span/n":
        # The deflection must not be more than the length over n.
        ends = (None, None if limit.at_least is None else span.doubled / limit.at_least)
    one = judged(span, *ends)
    refused = why_not(found, span)
    side = "" if one.verdict != "beyond" else missed_side(one.extreme.high, one.at_least)
    return Check(
        check=limit.limit,
        where=span.names[0],
        stage=stage,
        kind="deflection",
        value=one.extreme.size,
        u=one.extreme.u,
        low=one.extreme.low,
        high=one.extreme.high,
        at_least=one.at_least,
        at_most=one.at_most,
        verdict="not assessed" if refused else one.verdict,
        probability_within=None if refused else one.probability_within,
        source=_source(limit),
        reason=refused or one.told(side),
    )


def _source(limit: Limit) -> str:
    return BOOK if limit.limit != "span/n" or limit.at_least is None else f"{BOOK}: span/{limit.at_least:g}"
