"""Reconcile: the readings of one member with what theory says of it."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import Array, Stiffness
from fieldfit.fit.least_squares import Minimum, Problem, minimise
from fieldfit.fit.model import Model, model_of
from fieldfit.fit.noise import LEVEL, Noise, Source, noise_of, weights_of
from fieldfit.fit.nuisance import Projection, nuisances_of, projection
from fieldfit.fit.profile import Ends, Interval, profile, profiled_drop
from fieldfit.fit.unknowns import Unknown, stiffness_at, unknowns_of
from fieldfit.observe import Subject

__all__ = ["Estimate", "Fitted", "Reconciliation", "reconcile_member"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Estimate:
    """One estimated quantity, SI, with its interval at ``level``; None where the readings cannot say.

    ``determined`` is yes, between, at least, at most or no. ``ratio`` is over the ``recorded`` value.
    """

    quantity: str
    where: str
    stage: str | None
    value: float | None
    u: float | None
    low: float | None
    high: float | None
    level: float
    low_ends: Ends | None
    high_ends: Ends | None
    determined: str
    recorded: float
    ratio: float | None
    ratio_low: float | None
    ratio_high: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Fitted:
    """A fit as it can be asked again: the weighted, projected problem, its minimum and its noise."""

    unknowns: tuple[Unknown, ...]
    problem: Problem
    minimum: Minimum
    noise: Noise

    def probability_below(self, which: int, value: float) -> float:
        """Probability that unknown ``which`` is below ``value`` (its own unit), by the signed root of the profile."""
        best = float(self.minimum.unknowns[which])
        inside = float(np.clip(value, self.problem.lower[which], self.problem.upper[which]))
        rise = max(profiled_drop(self.problem, self.minimum, which)(inside), 0.0)
        return self.noise.probability(float(np.sign(value - best)) * float(np.sqrt(rise)))


@dataclass(frozen=True, slots=True, kw_only=True)
class Reconciliation:
    """What the readings say of one member.

    Arrays of shape (n,) run over all readings in the ledger's order, NaN where a reading is not in the fit:
    ``as_recorded`` and ``fitted`` are readings (SI, gauge's sense), ``response`` the fitted reading less the zero
    and datum of its gauge; ``standardised`` the residual over its own
    standard uncertainty, None where the fit would follow the reading wherever it went. ``fit`` and ``stiffness``
    are None where nothing could be fitted.
    """

    subject: Subject
    estimates: tuple[Estimate, ...]
    fit: Fitted | None
    stiffness: Stiffness | None
    used_for: NDArray[np.object_]
    why: NDArray[np.object_]
    u: Array
    as_recorded: Array
    fitted: Array
    response: Array
    standardised: Array
    warnings: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class _Weighted:
    """Residual and Jacobian of the readings in the fit, weighted and projected; picklable, fresh at every call."""

    model: Model
    measured: Array
    weights: Array
    projection: Projection

    def residual(self, values: Array) -> Array:
        return self.projection.apply(self.weights * (self.model.predicted(values) - self.measured))

    def jacobian(self, values: Array) -> Array:
        return self.projection.apply(self.weights[:, None] * self.model.jacobian(values))


def reconcile_member(subject: Subject) -> Reconciliation:
    """Fit one member. Raises ModelError for a member that cannot be solved."""
    seen = subject.observations
    unknowns = unknowns_of(subject)
    model = model_of(subject, unknowns)
    used = seen.used_for == "fit"
    recorded = model.as_recorded()
    source, weights = weights_of(subject)
    nuisances = nuisances_of(subject)
    fitted = _fit(model.among(used), seen.value[used], weights[used], nuisances.columns[used], source)
    blank = np.full(len(seen), np.nan)
    if fitted is None:
        return Reconciliation(
            subject=subject,
            estimates=tuple(_undetermined(subject, unknown) for unknown in unknowns),
            fit=None,
            stiffness=None,
            used_for=seen.used_for,
            why=seen.why,
            u=seen.u,
            as_recorded=recorded,
            fitted=blank,
            response=blank,
            standardised=blank,
            warnings=_warnings(subject),
        )
    predicted, response, standardised = blank.copy(), blank.copy(), blank.copy()
    response[used] = model.predicted(fitted.minimum.unknowns)[used]
    weighted = weights[used]
    predicted[used] = seen.value[used] + fitted.minimum.residual / weighted
    standardised[used] = _standardised(fitted, nuisances.columns[used] * weighted[:, None])
    return Reconciliation(
        subject=subject,
        estimates=tuple(_estimate(subject, fitted, number) for number in range(len(unknowns))),
        fit=fitted,
        stiffness=stiffness_at(subject, unknowns, fitted.minimum.unknowns),
        used_for=seen.used_for,
        why=seen.why,
        u=np.sqrt(fitted.noise.variance) / weights,
        as_recorded=recorded,
        fitted=predicted,
        response=response,
        standardised=standardised,
        warnings=_warnings(subject),
    )


def _fit(model: Model, measured: Array, weights: Array, columns: Array, source: Source) -> Fitted | None:
    """Fit the readings; None where they say nothing: no spare reading for the scatter, or no response at all."""
    if not len(measured):
        return None
    project = projection(columns * weights[:, None])
    weighted = _Weighted(model, measured, weights, project)
    problem = Problem(
        residual=weighted.residual,
        jacobian=weighted.jacobian,
        lower=np.array([unknown.lower for unknown in model.unknowns]),
        upper=np.array([unknown.upper for unknown in model.unknowns]),
    )
    start = np.array([unknown.start for unknown in model.unknowns])
    if not np.any(problem.jacobian(start)):
        return None
    minimum = minimise(problem, start)
    noise = noise_of(source, minimum.sum_of_squares, minimum.degrees_of_freedom - project.rank)
    if noise is None:
        return None
    return Fitted(unknowns=model.unknowns, problem=problem, minimum=minimum, noise=noise)


def _standardised(fitted: Fitted, columns: Array) -> Array:
    """Residuals over their own standard uncertainty, NaN where leverage is 1 (the reading decides alone)."""
    design = np.concatenate([fitted.minimum.jacobian, columns], axis=1)
    length = np.linalg.norm(design, axis=0)
    basis, values, _ = np.linalg.svd(design / np.where(length > 0, length, 1.0), full_matrices=False)
    leverage = (basis[:, values > 1e-10 * values[0]] ** 2).sum(axis=1)
    free = 1.0 - leverage
    spread = np.sqrt(np.where(free > 1e-9, free, np.nan) * fitted.noise.variance)
    return np.divide(fitted.minimum.residual, -spread, out=np.full(len(spread), np.nan), where=spread > 0)


def _estimate(subject: Subject, fitted: Fitted, number: int) -> Estimate:
    unknown, minimum, noise = fitted.unknowns[number], fitted.minimum, fitted.noise
    interval = profile(fitted.problem, minimum, number, noise.drop())
    ratio = float(np.exp(minimum.unknowns[number]))
    u = ratio * float(np.sqrt(noise.variance * minimum.covariance[number, number]))
    low, high = (float(np.exp(end.value)) for end in (interval.low, interval.high))
    determined = _determined(interval)
    sure = determined == "yes"
    recorded = _recorded_EI(subject, unknown)
    return Estimate(
        quantity=unknown.quantity,
        where=unknown.where,
        stage=None,
        value=ratio * recorded if sure else None,
        u=u * recorded if sure else None,
        low=low * recorded if interval.low.ends == "found" else None,
        high=high * recorded if interval.high.ends == "found" else None,
        level=LEVEL,
        low_ends=interval.low.ends,
        high_ends=interval.high.ends,
        determined=determined,
        recorded=recorded,
        ratio=ratio if sure else None,
        ratio_low=low if interval.low.ends == "found" else None,
        ratio_high=high if interval.high.ends == "found" else None,
    )


def _determined(interval: Interval) -> str:
    """What the two ends of an interval leave to say."""
    found = (interval.low.ends == "found", interval.high.ends == "found")
    return {(True, True): "yes", (True, False): "at least", (False, True): "at most", (False, False): "no"}[found]


def _undetermined(subject: Subject, unknown: Unknown) -> Estimate:
    nothing = dict.fromkeys(("value", "u", "low", "high", "low_ends", "high_ends", "ratio", "ratio_low", "ratio_high"))
    return Estimate(
        quantity=unknown.quantity,
        where=unknown.where,
        stage=None,
        level=LEVEL,
        determined="no",
        recorded=_recorded_EI(subject, unknown),
        **nothing,
    )


def _recorded_EI(subject: Subject, unknown: Unknown) -> float:
    """EI on record (N m2) of the zone an unknown stands for, at its left end; of the member for the whole."""
    zone = unknown.zones[0]
    return float(subject.member.EI[0] if zone == 0 else subject.member.zone_EI[0, zone - 1])


def _warnings(subject: Subject) -> tuple[str, ...]:
    """What a licensed engineer would raise before believing the numbers."""
    said = []
    if subject.loads_exact:
        said.append("Loads were taken as exact: the book gives no uncertainty for them.")
    unmeasured = _unmeasured_supports(subject)
    if unmeasured:
        said.append(
            f"Support {', '.join(unmeasured)} was taken as rigid without a gauge there: an assumption, not a finding."
        )
    return tuple(said)


def _unmeasured_supports(subject: Subject) -> Sequence[str]:
    """Rigid supports with no deflection or level gauge within a hundredth of the length."""
    seen = subject.observations
    gauges = seen.at[np.isin(seen.quantity.astype(str), ("deflection", "level"))]
    near = 0.01 * float(subject.member.length[0])
    rigid = subject.member.support_flexibility[0] == 0
    places = zip(subject.supports, subject.member.support_at[0], rigid, strict=True)
    return [name for name, at, held in places if held and not np.any(np.abs(gauges - at) <= near)]
