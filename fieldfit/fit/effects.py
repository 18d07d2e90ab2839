"""Effects: what a fitted member does under its stages: sag, reactions, moments, against the member on record."""

from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array, Loads, Sag, Stiffness, combine, largest_sag, recorded
from fieldfit.fit.noise import Noise
from fieldfit.fit.reconcile import Reconciliation
from fieldfit.fit.stations import solved_along
from fieldfit.observe import Subject

__all__ = ["Actions", "Sagging", "actions_of", "sag_of_stage", "uplifted_supports"]

STEP = 1e-3  # of a standard uncertainty, for central differences of a smooth function
ROUNDING = 1e-9  # a pull below this share of the largest reaction is none


@dataclass(frozen=True, slots=True, kw_only=True)
class Sagging:
    """Largest deflection (m, down) of one span from its chord in a stage, with its standard uncertainty and interval.

    ``names`` are the span's number from the left and its supports, ``length`` (m) is twice its own for an overhang.
    """

    names: tuple[str, ...]
    length: float
    sag: float
    u: float | None
    low: float | None
    high: float | None
    noise: Noise

    def probability_below(self, value: float) -> float | None:
        """Probability that the true sag is below a value (m)."""
        if not self.u:
            return None
        return self.noise.probability((value - self.sag) / self.u * float(np.sqrt(self.noise.variance)))


@dataclass(frozen=True, slots=True, kw_only=True)
class Actions:
    """Reactions (T, J), N up, restraint couples (T, J), N m, and largest sagging and hogging moments (T,), N m."""

    reaction: Array
    restraint: Array
    sagging: Array
    hogging: Array


def sag_of_stage(found: Reconciliation, stage: int) -> tuple[Sagging, ...]:
    """Sag of every span of the fitted member in a stage, its uncertainty carried over from the unknowns (GUM 5.1.2)."""
    profile = found.profile
    if profile is None:
        return ()
    best, covariance = profile.minimum.unknowns, profile.minimum.covariance
    spans = _spans(found, best, stage)
    u = np.full(spans.sag.shape[2], np.nan)
    if np.isfinite(covariance).all():
        steps = STEP * np.diag(np.sqrt(np.diag(covariance)))
        lower, upper = profile.problem.lower, profile.problem.upper
        pairs = [(np.clip(best - step, lower, upper), np.clip(best + step, lower, upper)) for step in steps]
        slopes = [_spans(found, b, stage).sag[0, 0] - _spans(found, a, stage).sag[0, 0] for a, b in pairs]
        sizes = [float(np.abs(b - a).max()) for a, b in pairs]
        gradient = np.array([slope / size if size else 0 * slope for slope, size in zip(slopes, sizes, strict=True)])
        variance = np.einsum(
            "is,ij,js->s", gradient.reshape(len(best), -1), covariance, gradient.reshape(len(best), -1)
        )
        u = np.sqrt(np.maximum(variance, 0.0) * profile.noise.variance)
    real = np.flatnonzero(np.isfinite(spans.sag[0, 0]))
    return tuple(
        _sagging(profile.noise, found.subject, spans, int(number), place, float(u[number]))
        for place, number in enumerate(real)
    )


def _spans(found: Reconciliation, values: Array, stage: int) -> Sag:
    loads = combine(found.loads, found.model.carried(values)[None, stage : stage + 1])
    return largest_sag(found.subject.member, loads, found.model.stiffness(values))


def _sagging(noise: Noise, subject: Subject, spans: Sag, number: int, place: int, u: float) -> Sagging:
    start, end, overhang = (float(part[0, number]) for part in (spans.start, spans.end, spans.overhang))
    ends = [name for name, at in zip(subject.supports, subject.member.support_at[0], strict=True) if at in (start, end)]
    sag, known = float(spans.sag[0, 0, number]), np.isfinite(u)
    reach = float(np.sqrt(noise.drop() / noise.variance)) * u if noise.variance else 0.0
    return Sagging(
        names=(str(place + 1), "-".join(ends)),
        length=(end - start) * (2.0 if overhang else 1.0),
        sag=sag,
        u=u if known else None,
        low=sag - reach if known else None,
        high=sag + reach if known else None,
        noise=noise,
    )


def actions_of(found: Reconciliation) -> tuple[Actions, Actions | None]:
    """What every stage does to the member on record and to the fitted one."""
    subject = found.subject
    on_record = np.array([stage.factors for stage in subject.stages])
    first = _actions(subject, subject.loads, on_record, recorded(subject.member))
    if found.stiffness is None or found.carried is None:
        return first, None
    return first, _actions(subject, found.loads, found.carried, found.stiffness)


def _actions(subject: Subject, loads: Loads, factors: Array, stiffness: Stiffness) -> Actions:
    _, response = solved_along(subject.member, loads, factors, stiffness)
    moment = response.moment[0]
    return Actions(
        reaction=response.reaction[0],
        restraint=response.restraint[0],
        sagging=np.maximum(moment.max(axis=1), 0.0),
        hogging=np.minimum(moment.min(axis=1), 0.0),
    )


def uplifted_supports(found: Reconciliation) -> dict[str, tuple[str, ...]]:
    """Supports that the fitted member would lift off, by stage."""
    _, fitted = actions_of(found)
    if fitted is None:
        return {}
    largest = np.abs(fitted.reaction).max(axis=1, keepdims=True)
    lifted = fitted.reaction < -ROUNDING * largest
    names = np.array(found.subject.supports, dtype=object)
    return {stage.name: tuple(names[row]) for stage, row in zip(found.subject.stages, lifted, strict=True) if row.any()}
