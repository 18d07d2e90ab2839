"""Behaviour: how the deflections of a load test follow its load: secants, what is left, symmetry, one EI or several.

EI stage by stage is what the deflections of each stage, as changes from the start, are to those of the fitted member:
EI over the fitted one is 1/b of measured = b x fitted, weighted. Stages share their zero readings, which the test of
whether all b are one takes into account: Q = (b - m)' C^-1 (b - m) against chi-square, m their mean by C (generalised
least squares, Aitken 1935).
"""

from dataclasses import dataclass

import numpy as np
from scipy import stats

from fieldfit.beam import Array, integrate, solve
from fieldfit.fit import Reconciliation
from fieldfit.judge.rules.measures import MEASURES
from fieldfit.judge.rules.ratios import Ratio
from fieldfit.judge.rules.record import Record

__all__ = ["Behaviour", "Mirrored", "StageStiffness", "behaviour_of"]

FEWEST = 3  # stages that can tell a trend
SURE = 0.05  # a p below this is told as a trend
ALIKE = 1e-3  # of the larger: what the recorded member reads at two gauges is the same
MIRROR = 1e-3  # of the span


@dataclass(frozen=True, slots=True, kw_only=True)
class StageStiffness:
    """EI over the fitted one by load stage of the first cycle: values and u (S,), and what a test says of them.

    ``p`` is the probability of as much or more disagreement were one EI true of all, ``trend_p`` the same of a slope
    with the load; ``softer`` says which way it goes. ``secant`` (S, G) is the moment at the critical section over the
    deflection, over that of the first stage.
    """

    stages: tuple[int, ...]
    ratio: Array
    u: Array
    p: float | None
    trend_p: float | None
    softer: bool
    secant: Array

    @property
    def says(self) -> str:
        """What the stages tell, in a sentence."""
        if self.p is None or self.trend_p is None:
            return "Too few load stages, or no uncertainty, to tell whether one EI fits them all."
        if self.trend_p < SURE:
            way = "softer as the load grows, as by cracking or slip" if self.softer else "stiffer as the load grows"
            more = "" if self.softer else ", as by a gap that closes or a bearing that seats"
            return f"EI is not one for all load stages (trend, p = {_p(self.trend_p)}): {way}{more}."
        if self.p < SURE:
            return f"EI is not one for all load stages (p = {_p(self.p)}), and follows no trend with the load."
        return f"One EI fits all load stages (p = {_p(self.p)})."


def _p(value: float) -> str:
    return "below 0.001" if value < 0.001 else f"{value:.2g}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Mirrored:
    """Two gauges that mirror each other and should read the same: their difference (m) with its u.

    Of many pairs some differ by chance: ``reach`` grows with their number, so that one in twenty tests accuses any
    (Dunn 1961).
    """

    left: str
    right: str
    difference: float
    u: float | None
    reach: float

    @property
    def agree(self) -> bool | None:
        """Whether the difference is within ``reach`` of its u; None where none is known."""
        return None if not self.u else abs(self.difference) <= self.reach * self.u


@dataclass(frozen=True, slots=True, kw_only=True)
class Behaviour:
    """Stiffness by stage (None where there is but one stage, or no fit) and mirrored gauges at full load.

    ``linearity`` is the secant on first reaching full load over that of the first load stage (1: straight), and
    ``permanence`` what was left of the largest deflection, both of the first cycle at every gauge; None where the
    stages for it are missing.
    """

    stiffness: StageStiffness | None
    mirrored: tuple[Mirrored, ...]
    linearity: Ratio | None
    permanence: Ratio | None


def behaviour_of(found: Reconciliation, record: Record) -> Behaviour:
    """How a load test behaved."""
    return Behaviour(
        stiffness=_stage_stiffness(found, record),
        mirrored=tuple(_mirrored(record)),
        linearity=_linearity(record),
        permanence=next(taking.ratio for taking in MEASURES["residual over maximum"](record, record.cycles[0])),
    )


def _linearity(record: Record) -> Ratio | None:
    """Secant at full load over that at the first load, each the deflection on record over the one measured."""
    cycle = record.cycles[0]
    first = next((stage for stage in _loading(record) if stage != cycle.full[0]), None)
    if first is None or first > cycle.full[0]:
        return None
    (d, slope, p), (d_full, slope_full, p_full) = (
        (record.valued(one), one, record.valued(one, record.calculated))
        for one in (record.form(stage, cycle.start) for stage in (first, cycle.full[0]))
    )
    return record.ratio(p_full * d, p_full[:, None] * slope, p * d_full, p[:, None] * slope_full)


def _loading(record: Record) -> list[int]:
    """Stages of the first cycle on which a load was reached and something read."""
    cycle = record.cycles[0]
    stages = [number for number in cycle.stages if record.subject.stages[number].role == "load"]
    return [number for number in stages if np.isfinite(record.read[number]).any() and number != cycle.start]


def _stage_stiffness(found: Reconciliation, record: Record) -> StageStiffness | None:
    cycle = record.cycles[0]
    stages = _loading(record)
    if found.stiffness is None or found.carried is None or len(stages) < 2:
        return None
    fitted = _fitted(found, record)
    slopes, shares = [], []
    for stage in stages:
        gradient = record.form(stage, cycle.start)
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
    b, a = np.array(slopes), np.array(shares)
    spread = _covariance(record, a, stages, cycle.start)
    level = record.load[stages] - (0.0 if cycle.start is None else record.load[cycle.start])
    p_all, p_trend, softer = _tests(b, spread, level, record)
    return StageStiffness(
        stages=tuple(stages),
        ratio=1.0 / b,
        u=np.sqrt(np.diag(spread)) / b**2,
        p=p_all,
        trend_p=p_trend,
        softer=softer,
        secant=_secants(record, stages, cycle.start, level),
    )


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


def _tests(b: Array, spread: Array, level: Array, record: Record) -> tuple[float | None, float | None, bool]:
    """Probabilities of one b for all and of no slope with the load level, and whether the slope is upward."""
    if len(b) < FEWEST or not np.isfinite(spread).all() or np.ptp(level) == 0:
        return None, None, False
    size = np.sqrt(np.diag(spread))
    if not (size > 0).all():
        return None, None, False
    inverse = np.linalg.pinv(spread / np.outer(size, size), hermitian=True) / np.outer(size, size)
    one = np.ones(len(b))
    mean = float(one @ inverse @ b / (one @ inverse @ one))
    off = b - mean
    design = np.stack([one, level / np.abs(level).max()], axis=1)
    normal = np.linalg.inv(design.T @ inverse @ design)
    slope = float((normal @ design.T @ inverse @ b)[1])
    p_all = _tail(float(off @ inverse @ off), len(b) - 1, record)
    return p_all, _tail(slope**2 / float(normal[1, 1]), 1, record), slope > 0


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


def _mirrored(record: Record) -> list[Mirrored]:
    """Gauges that mirror each other about the middle of their span, where the loading is symmetric too."""
    cycle = record.cycles[0]
    slope = record.form(cycle.full[0], cycle.start)
    read, calculated = record.valued(slope), record.valued(slope, record.calculated)
    supports = np.sort(record.subject.member.support_at[0])
    found: list[tuple[int, int]] = []
    for left in range(len(record.gauges)):
        edges = supports[supports <= record.at[left]][-1:], supports[supports >= record.at[left]][:1]
        if not (len(edges[0]) and len(edges[1])):
            continue
        mirror = float(edges[0][0] + edges[1][0] - record.at[left])
        near = np.flatnonzero(np.abs(record.at - mirror) <= MIRROR * record.span[left])
        alike = np.abs(calculated[left] - calculated) <= ALIKE * abs(calculated[left])
        right = next((int(one) for one in near if one > left and alike[one]), None)
        if right is not None:
            found.append((left, right))
    known = [pair for pair in found if np.isfinite(read[list(pair)]).all()]
    reach = float(stats.norm.isf(SURE / 2 / max(1, len(known))))
    return [_pair(record, slope, read, left, right, reach) for left, right in known]


def _pair(record: Record, slope: Array, read: Array, left: int, right: int, reach: float) -> Mirrored:
    weights = record.weights[left] - record.weights[right]
    change = np.einsum("s,jst,t->j", slope[left], record.alone, slope[left])
    u = float(np.sqrt((weights**2 * change).sum()))
    return Mirrored(
        left=record.gauges[left],
        right=record.gauges[right],
        difference=float(read[left] - read[right]),
        u=u if np.isfinite(u) else None,
        reach=reach,
    )
