"""Curves: what the recorded and the fitted member do all along, with the band of what is not known."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from fieldfit.beam import Array, Flags, Members, area, combine
from fieldfit.fit import Reconciliation
from fieldfit.fit.model import Model
from fieldfit.observe import Subject

__all__ = [
    "Curves",
    "changes",
    "curves_of",
    "fitted_area",
    "heaviest",
    "loaded_stages",
    "most_loaded",
    "shown_stages",
    "stations",
]

PIECES, OF_SPAN = 80, 24  # between the ends of a member, and at least so many to a support
MOST = 5  # stages shown in one figure, as many as there are signs


@dataclass(frozen=True, slots=True, kw_only=True)
class Curves:
    """Curves of K stages along S stations ``at`` (m), changes since the zero stage, SI, (K, S).

    ``reach`` is half the width of the 95 % band of ``fitted``; each is None where it is not known.
    """

    at: Array
    stages: tuple[int, ...]
    recorded: Array
    fitted: Array | None
    reach: Array | None


def loaded_stages(found: Reconciliation) -> list[int]:
    """Stages with readings in the fit, the reference zero stage left out."""
    seen = found.subject.observations
    used = np.unique(seen.stage[found.used_for == "fit"])
    return [int(stage) for stage in used if stage != found.subject.zero]


def heaviest(found: Reconciliation) -> int | None:
    """The stage in which the recorded member would deflect most; None where no stage is used."""
    stages = loaded_stages(found)
    if not stages:
        return None
    size = np.abs(curves_of(found, stages, "deflection").recorded).max(axis=1)
    return stages[int(size.argmax())]


def most_loaded(subject: Subject) -> int | None:
    """The stage with the most load on the member; None where no stage carries any."""
    loads = subject.loads
    length = loads.spread_to[0] - loads.spread_from[0]
    each = np.zeros(loads.cases)
    np.add.at(each, loads.force_case[0], np.abs(loads.force[0]))
    np.add.at(each, loads.spread_case[0], np.abs(loads.spread_start[0] + loads.spread_end[0]) / 2 * length)
    np.add.at(each, loads.couple_case[0], np.abs(loads.couple[0]) / float(subject.member.length[0]))
    total = [float(np.abs(stage.factors) @ each) for stage in subject.stages]
    return int(np.argmax(total)) if total and max(total) > 0 else None


def shown_stages(found: Reconciliation) -> list[int]:
    """At most five of the loaded stages, evenly picked, the heaviest among them."""
    stages = loaded_stages(found)
    if len(stages) <= MOST:
        return stages
    picked = {stages[int(place)] for place in np.linspace(0, len(stages) - 1, MOST).round()}
    top = heaviest(found)
    if top is not None and top not in picked:
        picked = picked - {min(picked, key=lambda stage: abs(stage - top))} | {top}
    return sorted(picked)


def stations(found: Reconciliation) -> tuple[Array, Flags]:
    """Stations along the member (S,), each seen from its left and from its right, so that jumps stand upright."""
    member, loads = found.subject.member, found.loads
    even = np.linspace(0.0, float(member.length[0]), max(PIECES, OF_SPAN * len(member.support_at[0])) + 1)
    jumps = [member.support_at, member.hinge_at, member.zone_from, member.zone_to, loads.force_at, loads.couple_at]
    jumps += [loads.spread_from, loads.spread_to, loads.bend_from, loads.bend_to]
    at = np.unique(np.concatenate([even, *(places.ravel() for places in jumps)]))
    at = at[(at >= 0) & (at <= float(member.length[0]))]
    return np.repeat(at, 2), np.tile([True, False], len(at))


def curves_of(found: Reconciliation, stages: Sequence[int], quantity: str) -> Curves:
    """Deflection (m, down) or curvature (1/m, sagging) of some stages along the member."""
    at, left = stations(found)
    model = _along(found, at, left, stages, quantity)
    shape = (len(stages), len(at))
    on_record = _since_zero(found, model, lambda one: one.as_recorded()).reshape(shape)
    if found.profile is None:
        return Curves(at=at, stages=tuple(stages), recorded=on_record, fitted=None, reach=None)
    best = found.profile.minimum.unknowns
    both = _since_zero(found, model, lambda one: np.column_stack(one.evaluate(best)))
    return Curves(
        at=at,
        stages=tuple(stages),
        recorded=on_record,
        fitted=both[:, 0].reshape(shape),
        reach=_reach(found, both[:, 1:], shape),
    )


def _along(found: Reconciliation, at: Array, left: Flags, stages: Sequence[int], quantity: str) -> Model:
    """The model of readings taken at every station in every stage, without zeros and datums."""
    return found.model.along(at, left, stages, quantity, -1.0 if quantity == "deflection" else 1.0)


def _since_zero(found: Reconciliation, model: Model, read: Callable[[Model], Array]) -> Array:
    """What ``read`` makes of a model, less the same in the reference zero stage."""
    values = read(model)
    zero = found.subject.zero
    return values if zero is None else values - read(replace(model, stage=np.full(len(model.stage), zero)))


def _reach(found: Reconciliation, slopes: Array, shape: tuple[int, int]) -> Array | None:
    """Half width of the band, the uncertainty of the unknowns carried over linearly (JCGM 100:2008, 5.2.2)."""
    if found.profile is None:
        return None
    noise, covariance = found.profile.noise, found.profile.minimum.covariance
    if not np.isfinite(covariance).all() or noise.explains_readings is False:
        return None
    spread = np.sqrt(np.maximum(np.einsum("ni,ij,nj->n", slopes, covariance, slopes), 0.0))
    return (spread * np.sqrt(noise.drop())).reshape(shape)


def changes(found: Reconciliation) -> tuple[Array, Array]:
    """Per reading (n,) in its gauge's sense: measured, zero and datum taken off, and as recorded, both since zero.

    NaN where a reading is not in the fit, so that its zero and datum are not known.
    """
    seen = found.subject.observations
    measured = seen.value - found.fitted + found.response
    on_record = _since_zero(found, found.model, lambda one: one.as_recorded())
    zero = found.subject.zero
    if zero is not None and found.profile is not None:
        best = found.profile.minimum.unknowns
        there = replace(found.model, stage=np.full(len(seen), zero))
        measured = measured - (there.predicted(best) - there.columns @ best)
    return measured, on_record


def fitted_area(found: Reconciliation, stage: int, start: float, end: float) -> float:
    """Area (rad) of the fitted member's curvature diagram between two stations (m), a change since the zero stage."""
    carried = found.carried
    if carried is None:
        raise ValueError("nothing was fitted")
    zero = found.subject.zero
    factors = carried[stage] - (0.0 if zero is None else carried[zero])
    loads = combine(found.loads, factors[None, None])
    return float(area(_fitted_member(found), loads, np.array([[start]]), np.array([[end]]))[0, 0, 0])


def area_u(found: Reconciliation, stage: int, start: float, end: float) -> float | None:
    """Standard uncertainty (rad) of that area, from the unknowns (JCGM 100:2008, 5.2.2); None where not known."""
    if found.profile is None or not np.isfinite(found.profile.minimum.covariance).all():
        return None
    if found.profile.noise.explains_readings is False:
        return None
    at, left = stations(found)
    inside = (at >= start) & (at <= end)
    model = _along(found, at[inside], left[inside], [stage], "curvature")
    best = found.profile.minimum.unknowns
    slopes = np.trapezoid(_since_zero(found, model, lambda one: one.evaluate(best)[1]), at[inside], axis=0)
    return float(np.sqrt(slopes @ found.profile.minimum.covariance @ slopes * found.profile.noise.variance))


def _fitted_member(found: Reconciliation) -> Members:
    """The member with its fitted stiffness; springs stay what they are though fixity is measured against EI."""
    member, stiffness = found.subject.member, found.stiffness
    if stiffness is None:
        return member
    fixity, ratio = stiffness.fixity, stiffness.EI_ratio
    with np.errstate(divide="ignore"):
        spring = member.fixity_stiffness * fixity / (1.0 - fixity)
    made = replace(
        member,
        EI=member.EI * ratio[:, 0],
        zone_EI=member.zone_EI * ratio[:, 1:],
        zone_EI_end=member.zone_EI_end * ratio[:, 1:],
        support_flexibility=stiffness.flexibility,
    )
    with np.errstate(invalid="ignore"):
        held = np.where(np.isinf(spring), 1.0, spring / (spring + made.fixity_stiffness))
    return replace(made, support_fixity=held)
