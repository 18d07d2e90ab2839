"""Ahead: what gauges should read in stages that are still to come, with the band that a sound test keeps to.

Before a test the band comes from what is known beforehand: unknowns with what the book expects of them, loads and
readings with their u, propagated by draws (JCGM 101:2008, over fixed quasi-random numbers). In a test half done it
comes from the fit of the stages already read, propagated linearly with all correlations (JCGM 100:2008, 5.2.2).
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from scipy import stats
from scipy.stats import qmc

from fieldfit.beam import Array, Flags
from fieldfit.fit.design import Design
from fieldfit.fit.estimates import recovered
from fieldfit.fit.gauge_effects import drifts_on, warmed
from fieldfit.fit.model import model_of
from fieldfit.fit.noise import LEVEL
from fieldfit.fit.nuisance import Nuisance, nuisances_of
from fieldfit.fit.profile import Profile
from fieldfit.fit.unknowns import EI, Unknown, asked_unknowns, gradient_unknowns, load_unknowns
from fieldfit.observe import Subject
from fieldfit.observe.naming import first_named
from fieldfit.observe.planned import in_time, planned, unread_stages

__all__ = ["STOP", "Expected", "before_test", "next_stages", "parted"]

STOP = 0.99  # level of the band whose ends are the stop values: common practice, no source
SCALE, ZERO = "scale of ", "zero of "  # how the names of those nuisances begin
DRAWS = 11  # powers of two
SHARES = 16  # of the draws, solved one after the other: a large member times all draws would fill the memory
SEED = 20240229


@dataclass(frozen=True, slots=True, kw_only=True)
class Expected:
    """What every gauge should read in stages to come, arrays of shape (n,) in the gauge's sense, SI.

    ``subject`` has the readings to come as its observations. ``expected`` has its 95 % band ``low`` to ``high`` and
    its stop values ``stop_low`` and ``stop_high`` (NaN where nothing gives a band). With ``is_change`` they are changes
    since the zero reading, otherwise readings. ``left_out`` says what the bands do not hold, in sentences.
    """

    subject: Subject
    expected: Array
    low: Array
    high: Array
    stop_low: Array
    stop_high: Array
    is_change: bool
    left_out: tuple[str, ...]


def parted(subject: Subject) -> tuple[tuple[Unknown, ...], tuple[Unknown, ...]]:
    """The unknowns of a fit, and those that only add a column without bounds and so are nuisances."""
    asked = asked_unknowns(subject)
    free = tuple(u for u in asked if u.column.size and not np.isfinite([u.lower, u.upper]).any())
    return (*(u for u in asked if u not in free), *load_unknowns(subject), *gradient_unknowns(subject)), free


def before_test(subject: Subject, stages: Sequence[int] | None = None) -> Expected:
    """Changes since zero that every gauge should show in stages, all but the zero if left out, whatever was read."""
    every = [number for number, stage in enumerate(subject.stages) if stage.role != "zero"]
    stages = every if stages is None else stages
    ahead = planned(subject, stages)
    model = model_of(ahead, _every_unknown(ahead))
    normal = np.asarray(qmc.MultivariateNormalQMC(np.zeros(len(model.unknowns) + 1), rng=SEED).random(2**DRAWS))
    values = np.column_stack(
        [_drawn(subject, unknown, z) for unknown, z in zip(model.unknowns, normal.T, strict=False)]
    )
    seen = ahead.observations
    likely = np.array([[_best(unknown) for unknown in model.unknowns]])
    best = (model.predictions(likely) - _at_zero(subject, stages, likely))[0]
    read = np.hypot(np.sqrt(1.0 if subject.zero is None else 2.0) * np.nan_to_num(seen.u), seen.scale_u * best)
    cloud = np.concatenate([model.predictions(some) for some in np.array_split(values, SHARES)])
    cloud += normal[:, -1:] * read - _at_zero(subject, stages, values)
    ends = [(1 - LEVEL) / 2, (1 + LEVEL) / 2, (1 - STOP) / 2, (1 + STOP) / 2]
    drawn, own = np.quantile(cloud, ends, axis=0), best + stats.norm.ppf(ends)[:, None] * read
    # The member on record may stand at the edge of what is drawn, as a pinned one does: its own band counts too.
    (low, stop_low), (high, stop_high) = np.minimum(drawn, own)[[0, 2]], np.maximum(drawn, own)[[1, 3]]
    unspread = [u.name for u in model.unknowns if _prior(subject, u) is None]
    return Expected(
        subject=ahead,
        expected=best,
        low=low,
        high=high,
        stop_low=stop_low,
        stop_high=stop_high,
        is_change=True,
        left_out=(*_unspread(unspread), *_unsure(ahead), *_warmed(ahead)),
    )


def _every_unknown(ahead: Subject) -> tuple[Unknown, ...]:
    unknowns, free = parted(ahead)
    return (*unknowns, *free)


def _at_zero(subject: Subject, stages: Sequence[int], values: Array) -> Array:
    """What the zero reading before each reading of those stages has in it already, (D, n), for unknowns (D, p)."""
    if subject.zero is None:
        return np.zeros((len(values), 1))
    zeros = planned(subject, [subject.zero])
    return np.tile(model_of(zeros, _every_unknown(zeros)).predictions(values), len(stages))


def _best(unknown: Unknown) -> float:
    return unknown.expected if unknown.is_expected else unknown.start


def _prior(subject: Subject, unknown: Unknown) -> "stats.rv_frozen | None":
    """What is known of an unknown before any reading: what the book expects, the tolerance on EI, or its bounds."""
    if unknown.is_expected:
        center, u = unknown.expected, unknown.expected_u
        return stats.truncnorm((unknown.lower - center) / u, (unknown.upper - center) / u, center, u)
    low, high = unknown.lower, unknown.upper
    if unknown.quantity == EI:
        if not np.isfinite(subject.tolerance):
            return None
        share = min(subject.tolerance, 0.99)
        low, high = max(low, float(np.log(1 - share))), min(high, float(np.log(1 + share)))
    elif not all(unknown.own_bounds):
        return None
    return stats.uniform(low, high - low) if low < high else None


def _drawn(subject: Subject, unknown: Unknown, normal: Array) -> Array:
    """Values of an unknown for standard normal draws; what nothing is known of stays where the record has it."""
    prior = _prior(subject, unknown)
    return np.full(len(normal), unknown.start) if prior is None else np.asarray(prior.ppf(stats.norm.cdf(normal)))


def _unspread(names: Sequence[str]) -> list[str]:
    if not names:
        return []
    named = ", ".join(name.removesuffix(" whole") for name in names)
    return [f"Taken as recorded, without any spread: {named}. The book says neither what is expected nor how sure."]


def _unsure(ahead: Subject) -> list[str]:
    seen = ahead.observations
    without = [*dict.fromkeys(seen.gauge[np.isnan(seen.u)])]
    return [f"No u is given for {', '.join(without)}: its readings were taken as exact."] if without else []


def _warmed(ahead: Subject) -> list[str]:
    gauges = warmed(ahead, ahead.observations)
    if not gauges:
        return []
    return [f"Taken at the temperature of the zero reading: {', '.join(gauges)}. What they read as they warm is extra."]


def next_stages(subject: Subject, design: Design, profile: Profile, nuisances: Sequence[Nuisance]) -> Expected:
    """Readings that a fit expects in the stages without any reading."""
    stages = unread_stages(subject)
    ahead = in_time(planned(subject, stages))
    unknowns, free = parted(ahead)
    best = profile.minimum.unknowns
    predicted, slopes = model_of(ahead, unknowns).evaluate(best)
    change = predicted - _at_zero(subject, stages, np.append(best, np.zeros(len(free)))[None])[0]
    values, covariance = recovered(design, profile)
    blank = np.zeros(len(predicted))
    scales = {one.name.removeprefix(SCALE): one for one in nuisances if one.name.startswith(SCALE)}
    later = _coming(subject, ahead, free, scales, change)
    timeless = np.any([blank, *(np.isnan(one.column) for one in later)], axis=0)
    coming = {one.name: replace(one, column=np.nan_to_num(one.column)) for one in later}
    known = [coming[one.name].column if one.name in coming else blank for one in nuisances]
    columns = np.array(known).reshape(len(known), len(predicted)).T
    new = [one for name, one in coming.items() if name not in {nuisance.name for nuisance in nuisances}]
    lines = np.hstack([slopes, columns])
    unseen = ~np.isfinite(np.diag(covariance))
    lost = (lines[:, unseen] != 0).any(axis=1)
    lost |= np.any([one.column != 0 for one in new if one.name.startswith(ZERO)], axis=0) if new else False
    lost |= timeless | (profile.noise.explains_readings is False)
    held = lines[:, ~unseen]
    spread = np.einsum("ni,ij,nj->n", held, covariance[np.ix_(~unseen, ~unseen)], held)
    for one in new:
        spread += (one.column * one.expected_u) ** 2 / profile.noise.variance if one.is_expected else 0.0
    white = profile.noise.source == "scatter"
    own = profile.noise.factor * (1.0 if white else np.nan_to_num(ahead.observations.u))
    unscaled = ~np.isin(ahead.observations.gauge, [*scales])
    read = np.hypot(own, unscaled * ahead.observations.scale_u * change)
    u = np.where(lost, np.nan, np.sqrt((spread + read**2) * profile.noise.variance))
    expected = predicted + columns @ values + sum((one.column * np.nan_to_num(one.expected) for one in new), blank)
    reach, stop = (np.sqrt(profile.noise.drop(level) / profile.noise.variance) * u for level in (LEVEL, STOP))
    names = [*(u.name for u in unknowns), *(one.name for one in nuisances)]
    lacking = [name for name, dark, line in zip(names, unseen, lines.T, strict=True) if dark and line.any()]
    lacking += [one.name for one in new if not one.is_expected]
    return Expected(
        subject=ahead,
        expected=expected,
        low=expected - reach,
        high=expected + reach,
        stop_low=expected - stop,
        stop_high=expected + stop,
        is_change=False,
        left_out=(
            *_doubted(profile),
            *_lacking(lacking),
            *_untimed(ahead, timeless),
            *([] if white else _unsure(ahead)),
            *_warmed(ahead),
        ),
    )


def _coming(
    subject: Subject, ahead: Subject, free: Sequence[Unknown], scales: Mapping[str, Nuisance], change: Array
) -> list[Nuisance]:
    """Nuisances of readings to come; drifts and errors of scales (by gauge) go on as they were found."""
    every = nuisances_of(ahead, (*free, *drifts_on(subject, ahead)))
    went_on = [replace(one, column=(ahead.observations.gauge == name) * change) for name, one in scales.items()]
    return [*(one for one in every if not one.name.startswith(SCALE)), *went_on]


def _untimed(ahead: Subject, timeless: Flags) -> list[str]:
    seen = ahead.observations
    if not timeless.any():
        return []
    gauges, stages = (dict.fromkeys(names[timeless].tolist()) for names in (seen.gauge, seen.stage))
    named = first_named([ahead.stages[stage].name for stage in stages])
    return [f"{', '.join(gauges)} drifts, and the book gives no start and end for {named}: no band holds there."]


def _doubted(profile: Profile) -> list[str]:
    if profile.noise.explains_readings is not False:
        return []
    return [
        "The model does not explain the readings so far: no band holds. Find out why before anything more is loaded."
    ]


def _lacking(names: Sequence[str]) -> list[str]:
    if not names:
        return []
    return [f"The readings so far say nothing of {', '.join(names)}: what depends on it has no band, or is taken as 0."]
