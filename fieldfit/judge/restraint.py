"""Restraint: how codes would class a rotational restraint, for information: a class is a matter of design.

AISC 360-16, commentary to B3.4: fully restrained from kL/EI = 20, simple up to 2 (secant stiffness at service load;
from memory). EN 1993-1-8:2005, 5.2.2.5: nominally pinned up to 0.5, rigid from 8 in a braced frame and from 25 in
others (initial stiffness; from memory). A test at service load sees neither exactly.
"""

import numpy as np

from fieldfit.fit import Estimate, Reconciliation

__all__ = ["restraint_notes"]

AISC = ((2.0, "simple"), (20.0, "partially restrained"), (np.inf, "fully restrained"))
EN = ((0.5, "nominally pinned"), (8.0, "semi-rigid"), (25.0, "rigid in a braced frame"), (np.inf, "rigid"))


def restraint_notes(found: Reconciliation) -> tuple[str, ...]:
    """A sentence for each rotational restraint of which a side is known; none where the model is at odds with it all.

    KL/EI is by the fitted EI of the whole member, by the recorded one where that is not determined.
    """
    if found.profile is not None and found.profile.noise.explains_readings is False:
        return ()
    ratio = next((e.ratio for e in found.estimates if e.quantity == "EI" and e.where == "whole" and e.ratio), None)
    return tuple(
        _sentence(estimate, ratio)
        for estimate in found.estimates
        if estimate.quantity == "rotational restraint" and estimate.determined != "no"
    )


def _sentence(estimate: Estimate, ratio: float | None) -> str:
    over = 1.0 if ratio is None else ratio
    low, high = (_relative(fixity, over) for fixity in (estimate.fixity_low or 0.0, _or_fixed(estimate.fixity_high)))
    aisc, en = (" to ".join(dict.fromkeys(_class(value, table) for value in (low, high))) for table in (AISC, EN))
    top = "no upper limit" if np.isinf(high) else f"{high:.2g}"
    which = "recorded" if ratio is None else "fitted"
    return (
        f"Restraint at {estimate.where}: kL/EI from {low:.2g} to {top}, with the {which} EI. AISC 360 would call that "
        f"{aisc}, EN 1993-1-8 {en} (boundaries from memory; information, not design)."
    )


def _or_fixed(fixity: float | None) -> float:
    return 1.0 if fixity is None else fixity


def _relative(fixity: float, ratio: float) -> float:
    """KL/EI of a fixity factor: 3r/(1 - r), over the EI ratio."""
    return float("inf") if fixity >= 1 else 3 * fixity / (1 - fixity) / ratio


def _class(value: float, table: tuple[tuple[float, str], ...]) -> str:
    return next(word for most, word in table if value <= most)
