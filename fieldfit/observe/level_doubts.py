"""What the level book leaves unchecked, or fails, in sentences for one member."""

from collections.abc import Iterator

import numpy as np
import pandas as pd
from scipy import stats

from fieldfit.observe.levels import Levelled, Run
from fieldfit.observe.naming import first_named

__all__ = ["level_doubts"]

UNLIKELY = 0.01


def level_doubts(found: Levelled | None, member: str) -> tuple[str, ...]:
    """Sentences on the levelling that this member's readings come from; none where there is none."""
    own = None if found is None else found.heights[found.heights["member"] == member]
    if found is None or own is None or own.empty:
        return ()
    runs = [run for run in found.runs if run.used and run.stage in set(own["stage"]) and _concerns(run, own, found)]
    said = [*_beyond(runs), *_open(runs)]
    side_shots = [*dict.fromkeys(own["point"][~own["covered"]])]
    if side_shots and any(np.isfinite(run.misclosure) for run in runs):
        verb = "was" if len(side_shots) == 1 else "were"
        said.append(
            f"{first_named(side_shots)} {verb} levelled by side shots (intermediate sights): no loop would show an "
            "error there."
        )
    misfit = found.misfit_behind(own)
    if misfit.spare and stats.chi2.sf(misfit.chi_square, misfit.spare) < UNLIKELY:
        said.append(
            f"The levels disagree among themselves by more than their u (chi-square {misfit.chi_square:.3g} on "
            f"{misfit.spare} degrees of freedom): a misreading, a mark that moved, or a u that is too small."
        )
    return tuple(said)


def _concerns(run: Run, own: pd.DataFrame, found: Levelled) -> bool:
    """Whether a run shares a part of the net with a member's ``own`` heights, or checks the benchmarks of all alone."""
    return not run.parts.isdisjoint(own["part"]) or run.parts.isdisjoint(found.heights["part"])


def _beyond(runs: list[Run]) -> Iterator[str]:
    for run in runs:
        if run.is_beyond:
            yield (
                f"Stage {run.stage}: the levels from {run.start} to {run.end} miss their closure by "
                f"{abs(run.misclosure) / run.allowed:.2f} times what is allowed. Level it again."
            )


def _open(runs: list[Run]) -> Iterator[str]:
    stages = [*dict.fromkeys(run.stage for run in runs if np.isnan(run.misclosure))]
    if stages:
        noun = "Stage" if len(stages) == 1 else "Stages"
        yield f"{noun} {first_named(stages)}: a run of levels ends on no known height, so that nothing checks it."
