"""Stages that had not settled: what the last third of a stage moved against what the stage brought."""

from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array
from fieldfit.observe import Subject

__all__ = ["Unsettled", "unsettled", "unsettled_words"]

SHARE = 0.05  # of the stage's increment in its last third: common practice, no source
SURE = 2.0  # standard uncertainties by which a movement must be seen
CLEAR = 3.0  # standard uncertainties by which an increment must be seen to be held against


@dataclass(frozen=True, slots=True, kw_only=True)
class Unsettled:
    """A stage that had not settled: the worst ``gauge``, its ``change`` in the last third and the ``increment``.

    Both are SI, absolute, of the ``quantity`` read; ``others`` counts further gauges beyond the share.
    """

    stage: str
    gauge: str
    quantity: str
    change: float
    increment: float
    others: int


def unsettled(subject: Subject) -> tuple[Unsettled, ...]:
    """Stages whose last third still moved by more than a twentieth of the stage's increment.

    The increment of a stage that loads or unloads is its change from the stage before; a stage that does neither is
    held against the largest change of the gauge.
    """
    seen = subject.observations
    if not np.isfinite(seen.change).any():
        return ()
    increment = _increments(subject)
    held = increment > CLEAR * np.where(np.isfinite(seen.u), seen.u, 0.0)
    share = np.divide(np.abs(seen.change), increment, out=np.zeros(len(seen)), where=held)
    moving = (share > SHARE) & (np.abs(seen.change) > SURE * seen.change_u)
    found = []
    for stage in np.unique(seen.stage[moving]):
        mine = np.flatnonzero(moving & (seen.stage == stage))
        worst = mine[share[mine].argmax()]
        found.append(
            Unsettled(
                stage=subject.stage_name(int(stage)),
                gauge=str(seen.gauge[worst]),
                quantity=str(seen.quantity[worst]),
                change=float(abs(seen.change[worst])),
                increment=float(increment[worst]),
                others=len(mine) - 1,
            )
        )
    return tuple(found)


def _increments(subject: Subject) -> Array:
    """The increment (n,) that each observation is held against, SI; 0 where there is none."""
    seen = subject.observations
    increment = np.zeros(len(seen))
    brings = np.array([stage.role in ("load", "unload") for stage in subject.stages])
    for gauge in dict.fromkeys(seen.gauge):
        mine = np.flatnonzero((seen.gauge == gauge) & (seen.stage >= 0) & (seen.used_for != "none"))
        mine = mine[np.argsort(seen.stage[mine], kind="stable")]
        if len(mine) > 1:
            own = np.abs(np.diff(seen.value[mine], prepend=seen.value[mine[0]]))
            increment[mine] = np.where(brings[seen.stage[mine]], own, np.ptp(seen.value[mine]))
    return increment


def unsettled_words(found: Unsettled) -> str:
    """The finding as a sentence."""
    more = f"; {found.others} more gauge(s) moved beyond 5 %" if found.others else ""
    return (
        f"Stage {found.stage} had not settled: in its last third {found.gauge} still moved by "
        f"{100 * found.change / found.increment:.0f} % of what the stage brought (more than 5 %){more}."
    )
