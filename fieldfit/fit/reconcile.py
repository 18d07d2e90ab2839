"""Reconcile: the readings of one member with what theory says of it."""

from collections.abc import Mapping
from dataclasses import dataclass, replace
from itertools import combinations
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import Array, Flags, Loads, Stiffness
from fieldfit.errors import ModelError
from fieldfit.fit.ahead import Expected, before_test, next_stages, parted
from fieldfit.fit.design import Design, basis_of, design_of
from fieldfit.fit.doubts import assumptions, too_good
from fieldfit.fit.estimates import Estimate, estimates_of, nuisance_estimates, undetermined
from fieldfit.fit.gauge_effects import drifts, warmths
from fieldfit.fit.least_squares import Minimum, best_of, minimise
from fieldfit.fit.model import Model, model_of
from fieldfit.fit.noise import Source, noise_of, sights_of, source_of
from fieldfit.fit.nuisance import Nuisance, nuisances_of
from fieldfit.fit.profile import BetterMinimum, Profile
from fieldfit.fit.slips import slip_of
from fieldfit.fit.starts import starts
from fieldfit.fit.suspicions import apart_of, suspicions
from fieldfit.fit.unknowns import CREEP, EI, Unknown
from fieldfit.fit.weighing import Weight, noise_beside, weight_of
from fieldfit.fit.whitening import whitening_of
from fieldfit.observe import Subject
from fieldfit.observe.levelling import Misfit
from fieldfit.observe.naming import first_named
from fieldfit.observe.planned import unread_stages

__all__ = ["Reconciliation", "reconcile_member"]

AGAIN = 5  # fits at the most, each from a better place that a profile of the one before found
UNSEEN = 1e-12  # m, rad, 1/m or strain: less than any gauge reads
WORN_OUT = 1.0 - 1e-9  # leverage at which a reading does nothing but determine what it alone can


@dataclass(frozen=True, slots=True, kw_only=True)
class Reconciliation:
    """What the readings say of one member.

    Arrays of shape (n,) run over all readings in the ledger's order, NaN where a reading is not in the fit:
    ``as_recorded`` and ``fitted`` are readings (SI, gauge's sense), ``response`` the fitted reading less the zero
    and datum of its gauge; ``standardised`` is the residual over its own standard uncertainty and ``leverage`` the
    share of a reading that the fit follows. ``profile``, ``stiffness`` and ``carried`` (T, C), what each stage
    carries of ``loads`` by the fit, are None where nothing could be fitted. ``model`` is that of all readings,
    ``ahead`` what stages without readings should read, None where there are none.
    """

    subject: Subject
    model: Model
    estimates: tuple[Estimate, ...]
    correlations: Mapping[str, float]
    profile: Profile | None
    stiffness: Stiffness | None
    carried: Array | None
    loads: Loads
    used_for: NDArray[np.object_]
    why: NDArray[np.object_]
    u: Array
    as_recorded: Array
    fitted: Array
    response: Array
    standardised: Array
    leverage: Array
    warnings: tuple[str, ...]
    ahead: Expected | None = None


def reconcile_member(subject: Subject) -> Reconciliation:
    """Fit one member. Raises ModelError for a member that cannot be solved."""
    unknowns, free = parted(subject)
    free = (*free, *warmths(subject), *drifts(subject))
    model = model_of(subject, unknowns)
    source, whole, of_whole = source_of(subject), subject, nuisances_of(subject, free)
    subject = _without_lone_readings(subject, of_whole)
    nuisances = nuisances_of(subject, free)
    plain = _unfitted(subject, model, (*unknowns, *free))
    if not (subject.observations.used_for == "fit").any():
        return _untold(plain)
    design = _design(subject, model, nuisances, source)
    found = _settled(subject, design, source)
    if found is None:
        return _untold(plain)
    design, profile, estimates = found
    fitted = _fitted(plain, model, design, nuisances, profile, estimates)

    def reread(values: Array) -> Design:
        other = replace(subject, observations=replace(subject.observations, value=values))
        return _design(other, model, nuisances_of(other, free), source).scaled(profile.noise.factor)

    slips = slip_of(subject, design, profile, reread)
    fitted = replace(fitted, warnings=(*fitted.warnings, *slips))
    if not unread_stages(subject):
        return fitted
    # A lone reading tells no more than the zero of its gauge, but that is what the next stages are read from.
    last = _design(whole, model, of_whole, source).scaled(profile.noise.factor)
    ahead = next_stages(whole, last, profile, of_whole)
    return replace(fitted, ahead=ahead, warnings=(*fitted.warnings, _still_unread(whole)))


def _design(subject: Subject, model: Model, nuisances: tuple[Nuisance, ...], source: Source) -> Design:
    seen = subject.observations
    used = seen.used_for == "fit"
    return design_of(
        model.among(used),
        seen.value[used],
        whitening_of(seen, used, believed=source != "scatter"),
        tuple(replace(nuisance, column=nuisance.column[used]) for nuisance in nuisances),
    )


def _untold(plain: Reconciliation) -> Reconciliation:
    """Where no reading tells anything, stages to come should read what the book expects beforehand."""
    subject = plain.subject
    if not unread_stages(subject):
        return plain
    ahead = before_test(subject, unread_stages(subject))
    return replace(plain, ahead=ahead, warnings=(*plain.warnings, _still_unread(subject)))


def _still_unread(subject: Subject) -> str:
    names = [subject.stages[number].name for number in unread_stages(subject)]
    return f"Not read: {first_named(names)}. Should they still be loaded, what they should read is given."


def _settled(subject: Subject, design: Design, source: Source) -> tuple[Design, Profile, tuple[Estimate, ...]] | None:
    """Fit and profile every unknown, again from wherever a profile comes upon a better fit, with the readings weighed.

    None where the readings say nothing: no scatter to judge them by, or no response at all.
    """
    points = [*starts(design)]
    if points[0].size and not _responds(design, points[0]):
        return None
    weight = None
    if source != "given" and not design.is_alone:
        weight = weight_of(design, source, points)
        if weight is None:
            return None
        design = design.scaled(weight.factor)
    sights = sights_of(subject)
    for _ in range(AGAIN):
        profile = _fit(design, source, points, weight, sights)
        if profile is None:
            return None
        try:
            return design, profile, estimates_of(subject, design, profile)
        except BetterMinimum as better:
            points = [better.unknowns]
    raise ModelError(f"member {subject.name!r}: the fit does not settle; give fewer unknowns or more readings")


def _without_lone_readings(subject: Subject, nuisances: tuple[Nuisance, ...]) -> Subject:
    """Set aside the one reading of a gauge whose zero was never read: it determines that zero and nothing else."""
    seen = subject.observations
    used = seen.used_for == "fit"
    lone = np.zeros(len(seen), dtype=bool)
    for nuisance in nuisances:
        mine = used & (nuisance.column != 0)
        if nuisance.name.startswith("zero of") and mine.sum() == 1:
            lone |= mine
    if not lone.any():
        return subject
    purpose, why = seen.used_for.copy(), seen.why.copy()
    purpose[lone], why[lone] = "none", "no zero"
    return replace(subject, observations=replace(seen, used_for=purpose, why=why))


def _unfitted(subject: Subject, model: Model, unknowns: tuple[Unknown, ...]) -> Reconciliation:
    seen = subject.observations
    blank = np.full(len(seen), np.nan)
    return Reconciliation(
        subject=subject,
        model=model,
        estimates=tuple(undetermined(subject, unknown, None) for unknown in unknowns),
        correlations=MappingProxyType({}),
        profile=None,
        stiffness=None,
        carried=None,
        loads=model.loads,
        used_for=seen.used_for,
        why=seen.why,
        u=seen.u,
        as_recorded=(as_recorded := model.as_recorded()),
        fitted=blank,
        response=blank,
        standardised=blank,
        leverage=blank,
        warnings=(*assumptions(subject), *suspicions(subject, as_recorded)),
    )


def _fit(design: Design, source: Source, points: list[Array], weight: Weight | None, sights: Misfit) -> Profile | None:
    """Fit the readings; None where no scatter is left to judge them by."""
    problem = design.problem()
    if len(points) > 1:
        points = [best_of(problem, points)]
    minimum = minimise(problem, points[0])
    spare, readings = minimum.degrees_of_freedom - design.projection.rank, len(design.measured)
    if weight is None:
        size = float((design.whitening.apply(design.measured) ** 2).sum())
        noise = noise_of(source, minimum.sum_of_squares, spare, size, sights)
    else:
        noise = noise_beside(weight, source, minimum, readings, spare)
    return None if noise is None else Profile(problem=problem, minimum=minimum, noise=noise, readings=readings)


def _responds(design: Design, values: Array) -> bool:
    """Whether any reading changes with any unknown by more than rounding, zeros and datum free."""
    slopes = design.whitening.apply(design.model.evaluate(values)[1])
    clear = design.projection.apply(np.pad(slopes, ((0, len(design.owed)), (0, 0))))
    return bool(np.any(np.abs(clear) > UNSEEN / design.whitening.u.min()))


def _fitted(
    plain: Reconciliation,
    model: Model,
    design: Design,
    nuisances: tuple[Nuisance, ...],
    profile: Profile,
    estimates: tuple[Estimate, ...],
) -> Reconciliation:
    subject, minimum = plain.subject, profile.minimum
    used = plain.used_for == "fit"
    count = int(used.sum())
    left = design.whitening.undo(minimum.residual[:count])
    leverage = _leverage(design, minimum)
    estimates += nuisance_estimates(design, nuisances, profile)
    return replace(
        plain,
        estimates=tuple(_renamed(subject, estimate) for estimate in estimates),
        correlations=MappingProxyType(_correlations(design, minimum)),
        profile=profile,
        stiffness=model.stiffness(minimum.unknowns),
        carried=model.carried(minimum.unknowns),
        u=_spread(np.sqrt(profile.noise.variance) * design.whitening.u, used, plain.u),
        fitted=_spread(design.measured + left, used),
        response=_spread(_bent(model, minimum.unknowns)[used], used),
        standardised=_spread(_standardised(left / design.whitening.u, leverage, profile.noise.variance), used),
        leverage=_spread(leverage, used),
        warnings=(*plain.warnings, *too_good(profile.noise), *apart_of(subject, design, profile, used)),
    )


def _spread(values: Array, used: Flags, elsewhere: Array | None = None) -> Array:
    """Values of the readings in the fit among all readings."""
    out = np.full(len(used), np.nan) if elsewhere is None else elsewhere.copy()
    out[used] = values
    return out


def _bent(model: Model, values: Array) -> Array:
    """Readings (n,) by bending alone, without the columns that unknowns add."""
    return model.predicted(values) - model.columns @ values


def _leverage(design: Design, minimum: Minimum) -> Array:
    """Share (n,) of the variance of each reading that the fit follows, unknowns and nuisances all free."""
    white = design.whitening
    basis = basis_of(design.whole_jacobian(minimum.unknowns))
    return (white.undo(basis[: len(white.u)]) ** 2).sum(axis=1) / white.u**2


def _standardised(left: Array, leverage: Array, variance: float) -> Array:
    """Residuals (measured less fitted) over their own standard uncertainty; NaN where leverage is 1."""
    free = np.where(leverage < WORN_OUT, 1.0 - leverage, np.nan)
    spread = np.sqrt(free * variance)
    return np.divide(-left, spread, out=np.full(len(left), np.nan), where=spread > 0)


def _correlations(design: Design, minimum: Minimum) -> dict[str, float]:
    """Correlations of all pairs of unknowns, by their names joined with ``~``."""
    names = [unknown.name for unknown in design.model.unknowns]
    spread = np.sqrt(np.diag(minimum.covariance))
    known = np.isfinite(spread) & (spread > 0)
    return {
        f"{names[a]} ~ {names[b]}": float(minimum.covariance[a, b] / (spread[a] * spread[b]))
        for a, b in combinations(range(len(names)), 2)
        if known[a] and known[b]
    }


def _renamed(subject: Subject, estimate: Estimate) -> Estimate:
    """In a shape survey that declares no camber or no creep, an EI is only an apparent one, and is called so."""
    if estimate.quantity != EI or not subject.is_shape_survey:
        return estimate
    declared = {row.quantity for row in subject.asked}
    lacking = [word for word, name in (("straight when built", "camber"), ("no creep", CREEP)) if name not in declared]
    return replace(estimate, quantity=f"apparent EI (assumes {', '.join(lacking)})") if lacking else estimate
