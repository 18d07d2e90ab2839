"""Stages: EI stage by stage of a load test, whether one serves all, and what is to be said where it does not.

EI of a stage is what its deflections, as changes from the start, are to those of the fitted member: EI over the fitted
one is 1/b of measured = b x fitted, weighted. Stages share their zero readings, which the test of whether all b are one
takes into account: Q = (b - m)' C^-1 (b - m) against chi-square, m their mean by C (generalised least squares, Aitken
1935). The readings of a stage are held against its own b in the same way.

A member that cracks, slips or seats changes from stage to stage in one direction, and all gauges see it. One wrong
reading may give a slope too, but not that: a physical cause is named only where the stages go one way and each agrees
with itself.
"""

from dataclasses import dataclass
from itertools import combinations

import numpy as np
from scipy import stats

from fieldfit.beam import Array, Flags, integrate, solve
from fieldfit.fit import Reconciliation
from fieldfit.judge.rules.record import Record

__all__ = ["SURE", "StageStiffness", "loading", "stage_stiffness"]

FEWEST = 3  # stages that can tell a trend
SURE = 0.05  # a p below this is told
SOFTER = "softer as the load grows", "as by cracking or slip"
STIFFER = "stiffer as the load grows", "as by a gap that closes or a bearing that seats"


@dataclass(frozen=True, slots=True, kw_only=True)
class StageStiffness:
    """EI over the fitted one by load stage of the first cycle: values and u (S,), and what a test says of them.

    ``p`` is the probability of as much or more disagreement were one EI true of all, ``trend_p`` the same of a slope
    with the load; ``softer`` says which way it goes, ``one_way`` that no two stages go against it by more than their u.
    ``apart`` names the stage without which the others agree best, ``others_p`` is how well they do; ``mixed`` names
    those whose readings do not agree with their own EI, the worst first. ``secant`` (S, G) is the moment at the
    critical section over the deflection, over that of the first stage.
    """

    stages: tuple[int, ...]
    ratio: Array
    u: Array
    p: float | None
    trend_p: float | None
    softer: bool
    one_way: bool
    apart: str | None
    others_p: float | None
    mixed: tuple[str, ...]
    secant: Array

    @property
    def says(self) -> str:
        """What the stages tell, in a sentence or two."""
        if self.p is None or self.trend_p is None:
            return "Too few load stages, or no uncertainty, to tell whether one EI fits them all."
        if self.trend_p < SURE and self.one_way:
            way, cause = SOFTER if self.softer else STIFFER
            cause = "" if self.mixed else f", {cause}"
            return f"EI is not one for all load stages (trend, {_p(self.trend_p)}): {way}{cause}. {self._look}".strip()
        if self.p < SURE:
            return f"EI is not one for all load stages ({_p(self.p)}), and follows no trend with the load. {self._look}"
        return f"One EI fits all load stages ({_p(self.p)})."

    @property
    def _look(self) -> str:
        """Whose readings to look at; empty where many stages tell one trend."""
        if len(self.mixed) == 1:
            return f"The readings of {self.mixed[0]} do not agree with one EI among themselves: look at them first."
        if self.mixed:
            several = f"The readings of {len(self.mixed)} stages do not agree with one EI among themselves"
            return f"{several}, least those of {self.mixed[0]}: look at them, and at what the model leaves out, first."
        if self.others_p is not None and self.others_p >= SURE:
            return f"Without {self.apart} the others agree ({_p(self.others_p)}): look at its readings first."
        return "" if self.one_way else f"{self.apart} stands apart most: look at its readings first."


def _p(value: float) -> str:
    return "p below 0.001" if value < 0.001 else f"p = {value:.2g}"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Slopes:
    """Measured over fitted deflection b (S,) by stage, its covariance (S, S), and how well each stage agrees (S,)."""

    b: Array
    spread: Array
    own_p: Array


def loading(record: Record) -> list[int]:
    """Stages of the first cycle on which a load was reached and something read."""
    cycle = record.cycles[0]
    stages = [number for number in cycle.stages if record.subject.stages[number].role == "load"]
    return [number for number in stages if np.isfinite(record.read[number]).any() and number != cycle.start]


def stage_stiffness(found: Reconciliation, record: Record) -> StageStiffness | None:
    """EI by load stage of the first cycle; None where there is but one, or no fit."""
    cycle = record.cycles[0]
    stages = loading(record)
    if found.stiffness is None or found.carried is None or len(stages) < 2:
        return None
    slopes = _slopes(record, stages, _fitted(found, record))
    if slopes is None:
        return None
    level = record.load[stages] - (0.0 if cycle.start is None else record.load[cycle.start])
    names = [record.subject.stages[number].name for number in stages]
    p, trend_p, slope = _tests(slopes, level, record)
    told = p is not None and min(p, trend_p or 0.0) < SURE
    apart, others_p = _apart(slopes, record) if told else (None, None)
    mixed = [number for number in np.argsort(slopes.own_p) if slopes.own_p[number] < SURE / len(stages)]  # Dunn 1961
    return StageStiffness(
        stages=tuple(stages),
        ratio=1.0 / slopes.b,
        u=np.sqrt(np.diag(slopes.spread)) / slopes.b**2,
        p=p,
        trend_p=trend_p,
        softer=slope > 0,
        one_way=told and _goes_one_way(slopes, level, slope),
        apart=None if apart is None else names[apart],
        others_p=others_p,
        mixed=tuple(names[number] for number in mixed),
        secant=_secants(record, stages, cycle.start, level),
    )


def _slopes(record: Record, stages: list[int], fitted: Array) -> _Slopes | None:
    """Measured over fitted deflection by stage; None where a stage has nothing to weigh."""
    start = record.cycles[0].start
    slopes, shares, agree = [], [], []
    for stage in stages:
        gradient = record.form(stage, start)
        d, p = record.valued(gradient), record.valued(gradient, fitted)
        spread = np.einsum("gs,gst,gt->g", gradient, record.variance, gradient)
        known = np.isfinite(d) & np.isfinite(spread) & (spread > 0)
        weight = np.where(known, 1.0 / np.where(known, spread, 1.0), 0.0)
        total = float((weight * p**2).sum())
        if total == 0.0:
            return None
        share = weight * p / total
        slopes.append(float((share * np.nan_to_num(d)).sum()))
        shares.append(share @ record.weights)
        agree.append(_own_p(record, gradient, d, p, share, known))
    a = np.array(shares)
    return _Slopes(b=np.array(slopes), spread=_covariance(record, a, stages, start), own_p=np.array(agree))


def _own_p(record: Record, gradient: Array, d: Array, p: Array, share: Array, known: Flags) -> float:
    """Probability of as much or more scatter of a stage's deflections (G,) about its own EI; NaN for one gauge."""
    freedom = int(known.sum()) - 1
    if freedom < 1:
        return float("nan")
    weights = record.weights[known]
    own = np.einsum("s,jst,t->j", gradient[known][0], record.alone, gradient[known][0])
    spread = (weights * np.where((weights != 0).any(axis=0), own, 0.0)) @ weights.T
    rest = np.eye(freedom + 1) - np.outer(p[known], share[known])
    return _tail(_distance(rest @ d[known], rest @ spread @ rest.T), freedom, record)


def _fitted(found: Reconciliation, record: Record) -> Array:
    """Deflection (m, down) of the fitted member at the gauges in every stage, (T, G)."""
    areas = integrate(found.subject.member, found.loads, record.stations[None])
    down = -np.asarray(found.carried) @ solve(areas, found.stiffness).deflection[0]
    net: Array = down @ record.weights.T
    return net


def _covariance(record: Record, shares: Array, stages: list[int], start: int | None) -> Array:
    """Covariance (S, S) of sums over gauges (S, J) of the changes of their readings from the start."""
    change = np.zeros((len(stages), len(record.read)))
    change[np.arange(len(stages)), stages] = 1.0
    if start is not None:
        change[:, start] -= 1.0
    own = np.einsum("as,jst,bt->jab", change, record.alone, change)
    spread: Array = np.einsum("aj,bj,jab->ab", shares, shares, own)
    return spread


def _tests(slopes: _Slopes, level: Array, record: Record) -> tuple[float | None, float | None, float]:
    """Probabilities of one b for all and of no slope with the load level, and the slope."""
    b, spread = slopes.b, slopes.spread
    if len(b) < FEWEST or not np.isfinite(spread).all() or np.ptp(level) == 0 or not (np.diag(spread) > 0).all():
        return None, None, 0.0
    inverse = _inverse(spread)
    design = np.stack([np.ones(len(b)), level / np.abs(level).max()], axis=1)
    normal = np.linalg.inv(design.T @ inverse @ design)
    slope = float((normal @ design.T @ inverse @ b)[1])
    p = _tail(_about_mean(b, spread), len(b) - 1, record)
    return p, _tail(slope**2 / float(normal[1, 1]), 1, record), slope


def _apart(slopes: _Slopes, record: Record) -> tuple[int, float]:
    """The stage without which the others agree best, and the probability of their disagreement."""
    every = np.arange(len(slopes.b))
    left = [every[every != number] for number in every]
    distance = [_about_mean(slopes.b[others], slopes.spread[np.ix_(others, others)]) for others in left]
    best = int(np.argmin(distance))
    return best, _tail(distance[best], len(every) - 2, record)


def _goes_one_way(slopes: _Slopes, level: Array, slope: float) -> bool:
    """Whether no two stages go against the slope by more than chance among all pairs allows (Dunn 1961)."""
    pairs = [pair for pair in combinations(np.argsort(level, kind="stable"), 2) if level[pair[0]] != level[pair[1]]]
    first, second = np.array(pairs).T
    spread = slopes.spread
    u = np.sqrt(spread[first, first] + spread[second, second] - 2.0 * spread[first, second])
    against = (slopes.b[first] - slopes.b[second]) * np.sign(slope)
    return bool((against <= stats.norm.isf(SURE / len(pairs)) * u).all())


def _about_mean(b: Array, spread: Array) -> float:
    """Q of b (S,) about their mean by their covariance (S, S)."""
    inverse, one = _inverse(spread), np.ones(len(b))
    return _distance(b - float(one @ inverse @ b / (one @ inverse @ one)), spread)


def _distance(off: Array, spread: Array) -> float:
    """Q of deviations (S,) by their covariance (S, S), which may be singular."""
    return float(off @ _inverse(spread) @ off)


def _inverse(spread: Array) -> Array:
    size = np.sqrt(np.diag(spread))
    inverse: Array = np.linalg.pinv(spread / np.outer(size, size), hermitian=True) / np.outer(size, size)
    return inverse


def _tail(statistic: float, freedom: int, record: Record) -> float:
    """Probability of as much or more: chi-square, or F where the uncertainty is itself from scatter."""
    rests_on = record.noise.degrees_of_freedom if record.noise else None
    if rests_on is None:
        return float(stats.chi2.sf(statistic, freedom))
    return float(stats.f.sf(statistic / freedom, freedom, rests_on))


def _secants(record: Record, stages: list[int], start: int | None, level: Array) -> Array:
    """Load over deflection by stage and gauge (S, G), over that of the first stage."""
    moved = record.read[stages] - (0.0 if start is None else record.read[start])
    with np.errstate(divide="ignore", invalid="ignore"):
        secant = level[:, None] / moved
        relative: Array = secant / secant[:1]
    return relative
