"""Means: what each gauge read in each stage, as the rules of load tests take it, and how these readings err together.

Readings err on their own; what the scale of a gauge is wrong by goes with what it read, and heights of one levelling
net err together from stage to stage. Readings of a gauge whose temperature coefficient the book states are corrected
by it to the temperature of its first zero, as in the fit, and what it is uncertain by goes with how far they were. A
gauge that was reset goes on from where it was if it was read before and after in one stage; else it counts as another
gauge, as nothing tells by how much its zero moved.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import Array, Flags
from fieldfit.fit import Reconciliation
from fieldfit.fit.gauge_effects import WARMTH, warmer
from fieldfit.observe import Observations, Subject

__all__ = ["AFTER_RESET", "Means", "corrected_gauges", "means_of", "of_unknown_warmth", "readable"]

AFTER_RESET = " after reset "


@dataclass(frozen=True, slots=True, kw_only=True)
class Means:
    """Readings of G gauges from left to right in T stages, SI; deflections down, all else in the model's sign.

    ``where`` (G,) is an observation of each gauge; ``read`` (T, G) is NaN where nothing was read, ``variance``
    (G, T, T) the covariance between stages.
    """

    gauges: tuple[str, ...]
    where: NDArray[np.intp]
    read: Array
    variance: Array


def readable(seen: Observations) -> Flags:
    """Observations (n,) that a rule may take: all but those that the book sets aside or that are in no stage."""
    kept: Flags = (seen.used_for != "none") | (seen.why == "no zero")
    return kept


def corrected_gauges(subject: Subject) -> tuple[str, ...]:
    """Gauges of deflection whose readings are corrected for their temperature, as it changed."""
    return _by_warmth(subject, subject.observations.upright & readable(subject.observations), stated=True)


def of_unknown_warmth(subject: Subject, kept: Flags) -> tuple[str, ...]:
    """Gauges with observations (n,) taken at several temperatures that have a coefficient which the book only asks for.

    What the fit finds of it rests on the elastic model and on the same readings, and serves no rule.
    """
    return _by_warmth(subject, kept, stated=False)


def _by_warmth(subject: Subject, kept: Flags, *, stated: bool) -> tuple[str, ...]:
    warmth, per_kelvin, _ = _warmth(subject)
    moved = kept & (warmth != 0) & (np.isfinite(per_kelvin) == stated)
    return tuple(dict.fromkeys(subject.observations.gauge[moved].tolist()))


def _warmth(subject: Subject) -> tuple[Array, Array, Array]:
    """How much warmer (K) each observation (n,) is than its gauge's zero, its coefficient (SI a kelvin) and its u.

    Not at all for a gauge without one; NaN is a coefficient that the book asks for and does not state.
    """
    seen = subject.observations
    asked = [row.where for row in subject.asked if row.quantity == WARMTH]
    has_one = np.isfinite(seen.per_kelvin) | np.isin(seen.gauge.astype(str), [*filter(None, asked)])
    warmth = np.zeros(len(seen))
    for gauge in dict.fromkeys(seen.gauge[has_one].tolist()):
        warmth += warmer(subject, gauge)
    return np.where(has_one, warmth, 0.0), seen.per_kelvin, np.nan_to_num(seen.per_kelvin_u)


def means_of(found: Reconciliation, kept: Flags) -> Means:
    """What the gauges of some observations (n,) read; repeats in a stage count by their mean."""
    seen = found.subject.observations
    own, zero = seen.gauge[kept].astype(str), seen.zero[kept]
    later = np.char.add(np.char.add(own, AFTER_RESET), zero.astype(str))
    _, first, gauge = np.unique(np.where(zero > 0, later, own), return_index=True, return_inverse=True)
    order = np.argsort(seen.at[kept][first], kind="stable")
    first, gauge = first[order], np.argsort(order)[gauge]
    read, variance = _by_stage(found, kept, gauge, len(first))
    left = _joined(own[first], zero[first], read, variance)
    names = np.where(zero > 0, later, own)[first]
    return Means(
        gauges=tuple(names[left].tolist()),
        where=np.flatnonzero(kept)[first[left]],
        read=read[:, left],
        variance=variance[left] + _by_coefficient(found.subject, kept, own[first[left]]),
    )


def _by_coefficient(subject: Subject, kept: Flags, gauges: NDArray[np.str_]) -> Array:
    """What the coefficients of gauges (G,) are uncertain by, as variance of their readings between stages (G, T, T)."""
    seen = subject.observations
    warmth, _, u = _warmth(subject)
    mine = kept & (seen.gauge.astype(str) == gauges[:, None])
    shape = (len(gauges), len(subject.stages))
    number, total = np.zeros(shape), np.zeros(shape)
    gauge, place = np.nonzero(mine)
    np.add.at(number, (gauge, seen.stage[place]), 1.0)
    np.add.at(total, (gauge, seen.stage[place]), warmth[place] * u[place])
    moved = np.divide(total, number, out=np.zeros(shape), where=number > 0)
    return np.einsum("gs,gt->gst", moved, moved)


def _by_stage(found: Reconciliation, kept: Flags, gauge: NDArray[np.intp], count: int) -> tuple[Array, Array]:
    """Mean of each gauge's readings in each stage (T, G), and its covariance between stages (G, T, T)."""
    seen = found.subject.observations
    shape = (len(found.subject.stages), count)
    where = (seen.stage[kept], gauge)
    number, total, square, scale = np.zeros(shape), np.zeros(shape), np.zeros(shape), np.zeros(count)
    np.add.at(number, where, 1.0)
    warmth, per_kelvin, _ = _warmth(found.subject)
    value = seen.value - np.where(warmth == 0, 0.0, per_kelvin * warmth)
    np.add.at(total, where, np.where(seen.upright, -seen.sign, seen.sign)[kept] * value[kept])
    np.add.at(square, where, _u(found)[kept] ** 2)
    scale[gauge] = seen.scale_u[kept]
    with np.errstate(invalid="ignore", divide="ignore"):
        read, alone = total / number, square / number**2
    stages = np.arange(shape[0])
    variance = np.zeros((count, shape[0], shape[0]))
    variance[:, stages, stages] = np.where(number > 0, alone, 0.0).T
    first = np.array([next(iter(column[np.isfinite(column)]), 0.0) for column in read.T])
    moved = np.nan_to_num(read - first)
    variance += np.einsum("g,sg,tg->gst", scale**2, moved, moved)
    return read, variance + _together(found, kept, gauge, number)


def _u(found: Reconciliation) -> Array:
    """Standard uncertainty of every reading; where the book gives none, the scatter that the fit found."""
    seen = found.subject.observations
    if found.profile is None:
        return seen.u
    spread = found.profile.noise.raised
    return np.where(seen.u_from == "none", spread, seen.u * spread)


def _together(found: Reconciliation, kept: Flags, gauge: NDArray[np.intp], number: Array) -> Array:
    """What readings of one gauge in two stages err by together (G, T, T), beside their own variances."""
    seen = found.subject.observations
    out = np.zeros((number.shape[1], *[len(number)] * 2))
    place = np.full(len(kept), -1)
    place[kept] = gauge
    own, stage = place[seen.together], seen.stage[seen.together]
    pairs = (own[:, None] == own) & (own >= 0) & ~np.eye(len(own), dtype=bool)
    a, b = np.nonzero(pairs)
    weight = number[stage[a], own[a]] * number[stage[b], own[a]]
    sign = seen.sign[seen.together]
    spread = 1.0 if found.profile is None else found.profile.noise.raised**2
    np.add.at(out, (own[a], stage[a], stage[b]), spread * (sign[a] * sign[b] * seen.covariance[a, b]) / weight)
    return out


def _joined(names: NDArray[np.str_], zero: NDArray[np.intp], read: Array, variance: Array) -> Flags:
    """Join gauges (G,) that were reset to what they were before, in place; which are left to stand for themselves."""
    left = np.ones(len(names), dtype=bool)
    for place in np.flatnonzero(zero > 0)[np.argsort(zero[zero > 0], kind="stable")]:
        before = np.flatnonzero((names == names[place]) & (zero < zero[place]) & left)
        if not len(before):
            continue
        into = before[zero[before].argmax()]
        onward = _onward(read[:, into], variance[into], read[:, place], variance[place])
        if onward is not None:
            read[:, into], variance[into] = onward
            left[place] = False
    return left


def _onward(old: Array, old_spread: Array, new: Array, new_spread: Array) -> tuple[Array, Array] | None:
    """Readings (T,) before and after a reset as one, with their covariance (T, T); None where none tells the step."""
    seen, again = np.isfinite(old), np.isfinite(new)
    if not (seen & again).any():
        return None
    step, later = int((seen & again).argmax()), again & ~seen
    of_old, of_new = np.diag(seen.astype(float)), np.diag(later.astype(float))
    of_old[later, step] += 1.0
    of_new[later, step] -= 1.0
    value = of_old @ np.nan_to_num(old) + of_new @ np.nan_to_num(new)
    spread = of_old @ old_spread @ of_old.T + of_new @ new_spread @ of_new.T
    return np.where(seen | later, value, np.nan), spread
