"""Effects: what a fitted member does under its stages: sag, reactions, moments, against the member on record."""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array, Loads, Sag, Stiffness, combine, largest_sag, recorded
from fieldfit.fit.noise import Noise
from fieldfit.fit.profile import Profile
from fieldfit.fit.reconcile import Reconciliation
from fieldfit.fit.stations import solved_along
from fieldfit.fit.unknowns import CREEP
from fieldfit.observe import DEAD, SELF_WEIGHT, Stage, Subject

__all__ = ["Actions", "Extreme", "Sagging", "actions_of", "actions_u", "sag_of_stage", "sag_under", "uplift_notes"]

STEP = 1e-3  # of a standard uncertainty, for central differences of a smooth function
ROUNDING = 1e-9  # a pull below this share of the largest reaction is none


@dataclass(frozen=True, slots=True, kw_only=True)
class Extreme:
    """How far a span goes one way from its chord (m, not below 0), with its standard uncertainty and interval.

    ``u``, ``low`` and ``high`` are None where the readings leave it open; a ``u`` of 0 is one that no unknown changes.
    """

    size: float
    u: float | None
    low: float | None
    high: float | None
    noise: Noise

    def probability_up_to(self, value: float) -> float | None:
        """Probability that the true size is a value (m) or less; None where the readings leave it open."""
        if self.u is None:
            return None
        if self.u == 0:
            return float(self.size <= value)
        return self.noise.probability((value - self.size) / self.u * float(np.sqrt(self.noise.variance)))


@dataclass(frozen=True, slots=True, kw_only=True)
class Sagging:
    """Largest deflections of one span from its chord in a stage, down and up.

    ``names`` are the span's number from the left and its supports, ``length`` (m) is its own, also of an overhang.
    """

    names: tuple[str, ...]
    length: float
    is_overhang: bool
    down: Extreme
    up: Extreme

    @property
    def doubled(self) -> float:
        """Its length (m), that of an overhang twice."""
        return self.length * (2.0 if self.is_overhang else 1.0)

    @property
    def largest(self) -> Extreme:
        """The greater of the two."""
        return self.up if self.up.size > self.down.size else self.down


@dataclass(frozen=True, slots=True, kw_only=True)
class Actions:
    """Reactions (T, J), N up, restraint couples (T, J), N m, and largest sagging and hogging moments (T,), N m."""

    reaction: Array
    restraint: Array
    sagging: Array
    hogging: Array

    def flat(self) -> Array:
        """All of them side by side (T, 2J + 2), in this order."""
        return np.hstack([self.reaction, self.restraint, self.sagging[:, None], self.hogging[:, None]])


def sag_of_stage(found: Reconciliation, stage: int) -> tuple[Sagging, ...]:
    """Sag of every span of the fitted member in a stage, its uncertainty carried over from the unknowns (GUM 5.1.2)."""
    return _saggings(found, lambda values: _spans(found, values, stage))


def sag_under(found: Reconciliation, loads: Loads, factors: Array) -> tuple[Sagging, ...]:
    """Sag of every span of the fitted member under other loads, so much of each case (C,); the loads are exact."""
    together = combine(loads, factors[None, None])
    return _saggings(found, lambda values: largest_sag(found.subject.member, together, found.model.stiffness(values)))


def _saggings(found: Reconciliation, spans_at: Callable[[Array], Sag]) -> tuple[Sagging, ...]:
    """Sag of every span as a function of the unknowns, at the best fit."""
    profile = found.profile
    if profile is None:
        return ()
    spans = spans_at(profile.minimum.unknowns)
    u = _carried_over(profile, lambda values: _both_ways(spans_at(values)).ravel()).reshape(2, -1)
    real = np.flatnonzero(np.isfinite(spans.down[0, 0]))
    return tuple(
        _sagging(profile.noise, found.subject, spans, int(number), place, u[:, number])
        for place, number in enumerate(real)
    )


def _both_ways(spans: Sag) -> Array:
    """How far the spans of one member go down and up in one load case, (2, N)."""
    return np.stack([spans.down[0, 0], spans.up[0, 0]])


def _carried_over(profile: Profile, effect: Callable[[Array], Array]) -> Array:
    """Standard uncertainty (n,) of an effect (n,) of the unknowns, by central differences; NaN where not known."""
    best, covariance = profile.minimum.unknowns, profile.minimum.covariance
    if not np.isfinite(covariance).all():
        return np.full(len(effect(best)), np.nan)
    steps = STEP * np.diag(np.sqrt(np.diag(covariance)))
    lower, upper = profile.problem.lower, profile.problem.upper
    pairs = [(np.clip(best - step, lower, upper), np.clip(best + step, lower, upper)) for step in steps]
    slopes = [effect(b) - effect(a) for a, b in pairs]
    sizes = [float(np.abs(b - a).max()) for a, b in pairs]
    gradient = np.array([slope / size if size else 0 * slope for slope, size in zip(slopes, sizes, strict=True)])
    gradient = gradient.reshape(len(best), -1)
    variance = np.einsum("is,ij,js->s", gradient, covariance, gradient)
    return np.sqrt(np.maximum(variance, 0.0) * profile.noise.variance)


def _spans(found: Reconciliation, values: Array, stage: int) -> Sag:
    loads = combine(found.loads, found.model.carried(values)[None, stage : stage + 1])
    return largest_sag(found.subject.member, loads, found.model.stiffness(values))


def _sagging(noise: Noise, subject: Subject, spans: Sag, number: int, place: int, u: Array) -> Sagging:
    start, end, overhang = (float(part[0, number]) for part in (spans.start, spans.end, spans.overhang))
    ends = [name for name, at in zip(subject.supports, subject.member.support_at[0], strict=True) if at in (start, end)]
    sizes = _both_ways(spans)[:, number]
    down, up = (_extreme(noise, float(size), float(each)) for size, each in zip(sizes, u, strict=True))
    return Sagging(
        names=(str(place + 1), "-".join(ends)),
        length=end - start,
        is_overhang=bool(overhang),
        down=down,
        up=up,
    )


def _extreme(noise: Noise, size: float, u: float) -> Extreme:
    if not np.isfinite(u):
        return Extreme(size=size, u=None, low=None, high=None, noise=noise)
    reach = float(np.sqrt(noise.drop() / noise.variance)) * u if noise.variance else 0.0
    return Extreme(size=size, u=u, low=max(size - reach, 0.0), high=size + reach, noise=noise)


def actions_of(found: Reconciliation) -> tuple[Actions, Actions | None]:
    """What every stage does to the member on record and to the fitted one."""
    subject = found.subject
    on_record = np.array([stage.factors for stage in subject.stages])
    first = _actions(subject, subject.loads, on_record, recorded(subject.member))
    if found.profile is None:
        return first, None
    return first, _fitted_actions(found, found.profile.minimum.unknowns)


def actions_u(found: Reconciliation, stage: int) -> Array | None:
    """Standard uncertainties (2J + 2,) of what a stage does to the fitted member, carried over from the unknowns.

    Reactions, restraint couples, largest sagging and hogging moment, as in ``Actions`` (GUM 5.1.2); NaN where the
    readings leave an unknown open, None where nothing was fitted.
    """
    if found.profile is None:
        return None
    return _carried_over(found.profile, lambda values: _fitted_actions(found, values, [stage]).flat()[0])


def _fitted_actions(found: Reconciliation, values: Array, stages: Sequence[int] | None = None) -> Actions:
    """Actions in some stages, all if none is named: creep deforms a member further and adds nothing to its forces."""
    model = found.model
    creeps = [unknown.quantity == CREEP for unknown in model.unknowns]
    factors = model.carried(np.where(creeps, 0.0, values))
    chosen = factors if stages is None else factors[list(stages)]
    return _actions(found.subject, found.loads, chosen, model.stiffness(values))


def _actions(subject: Subject, loads: Loads, factors: Array, stiffness: Stiffness) -> Actions:
    _, response = solved_along(subject.member, loads, factors, stiffness)
    moment = response.moment[0]
    return Actions(
        reaction=response.reaction[0],
        restraint=response.restraint[0],
        sagging=np.maximum(moment.max(axis=1), 0.0),
        hogging=np.minimum(moment.min(axis=1), 0.0),
    )


def uplift_notes(found: Reconciliation) -> Iterator[str]:
    """In sentences, by stage: the supports that the fitted member would lift off, or of which nobody can tell.

    A support lets go where its whole reaction is a pull: what the stage brings together with the dead load that the
    book states as there before the test. Without a self-weight among them, what resists the pull is not known.
    """
    _, fitted = actions_of(found)
    if fitted is None:
        return
    reaction = fitted.reaction + _standing(found)
    largest = np.abs(reaction).max(axis=1, keepdims=True)
    pulled = reaction < -ROUNDING * largest
    names = np.array(found.subject.supports, dtype=object)
    for number in np.flatnonzero(pulled.any(axis=1)):
        stage, where = found.subject.stages[number], " and ".join(names[pulled[number]])
        if _has_self_weight(found.subject, stage):
            yield f"The fitted member would lift off {where} in stage {stage.name}."
        else:
            yield (
                f"Under what the book puts on it in stage {stage.name}, the fitted member pulls upward at {where}. No "
                "self-weight is stated among that, so whether it would lift off cannot be told."
            )


def _standing(found: Reconciliation) -> Array:
    """Reactions (T, J), N up, of the fitted member to the dead load that was on it before each stage."""
    subject, service = found.subject, found.subject.service
    if service is None or found.stiffness is None:
        return np.zeros((len(subject.stages), len(subject.supports)))
    dead = np.tile(service.factors(*DEAD, standing=True), (len(subject.stages), 1))
    for number, stage in enumerate(subject.stages):
        dead[number, [name in _carried(subject, stage) for name in service.names]] = 0.0
    return _actions(subject, service.loads, dead, found.stiffness).reaction


def _has_self_weight(subject: Subject, stage: Stage) -> bool:
    """Whether the book states the self-weight of a member as there before the test, or as carried by a stage."""
    if subject.service is None:
        return False
    rows = zip(subject.service.names, subject.service.natures, subject.service.carried, strict=True)
    on = _carried(subject, stage)
    return any(nature == SELF_WEIGHT and (name in on or not carried) for name, nature, carried in rows)


def _carried(subject: Subject, stage: Stage) -> set[str | None]:
    """Load cases that a stage carries."""
    return {case for case, factor in zip(subject.load_cases, stage.factors, strict=True) if factor}
