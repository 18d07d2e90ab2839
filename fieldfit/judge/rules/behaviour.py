"""Behaviour: how the deflections of a load test follow its load: secants, what is left, symmetry, one EI or several."""

from dataclasses import dataclass

import numpy as np
from scipy import stats

from fieldfit.beam import Array
from fieldfit.fit import Reconciliation
from fieldfit.judge.rules.measures import MEASURES
from fieldfit.judge.rules.ratios import Ratio
from fieldfit.judge.rules.record import Record
from fieldfit.judge.rules.stages import SURE, StageStiffness, loading, stage_stiffness

__all__ = ["Behaviour", "Mirrored", "behaviour_of"]

ALIKE = 1e-3  # of the larger: what the recorded member reads at two gauges is the same
MIRROR = 1e-3  # of the span


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
        stiffness=stage_stiffness(found, record),
        mirrored=tuple(_mirrored(record)),
        linearity=_linearity(record),
        permanence=next(taking.ratio for taking in MEASURES["residual over maximum"](record, record.cycles[0])),
    )


def _linearity(record: Record) -> Ratio | None:
    """Secant at full load over that at the first load, each the deflection on record over the one measured."""
    cycle = record.cycles[0]
    first = next((stage for stage in loading(record) if stage != cycle.full[0]), None)
    if first is None or first > cycle.full[0]:
        return None
    (d, slope, p), (d_full, slope_full, p_full) = (
        (record.valued(one), one, record.valued(one, record.calculated))
        for one in (record.form(stage, cycle.start) for stage in (first, cycle.full[0]))
    )
    return record.ratio(p_full * d, p_full[:, None] * slope, p * d_full, p[:, None] * slope_full)


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
