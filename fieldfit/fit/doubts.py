"""Doubts: what a licensed engineer would raise before believing the numbers."""

from collections.abc import Sequence

import numpy as np

from fieldfit.fit.columns import axial_columns
from fieldfit.observe import Subject

__all__ = ["assumptions"]


def assumptions(subject: Subject) -> tuple[str, ...]:
    """What was taken for granted, in sentences."""
    said = []
    if not any(subject.load_u.values()) and not subject.share_u:
        said.append("Loads were taken as exact: the book gives no uncertainty for them.")
    unmeasured = _unmeasured_supports(subject)
    if unmeasured:
        noun, verb = ("Supports", "were") if len(unmeasured) > 1 else ("Support", "was")
        names = " and ".join(unmeasured) if len(unmeasured) < 3 else ", ".join(unmeasured)
        said.append(f"{noun} {names} {verb} taken as rigid without a gauge there: an assumption, not a finding.")
    if len({case for case in subject.load_cases if case}) == 1 and _one_shape(subject):
        said.append("All stages carry one load case: a wrong load and a wrong EI look the same.")
    if _single_strain(subject):
        said.append(
            "Strain gauges that stand alone at their station were read as bending strain, without axial strain."
        )
    return tuple(said)


def _one_shape(subject: Subject) -> bool:
    """Whether all stages load the member in the same proportions."""
    factors = np.array([stage.factors for stage in subject.stages])
    return bool(np.linalg.matrix_rank(factors) <= 1) if factors.size else True


def _single_strain(subject: Subject) -> bool:
    seen = subject.observations
    strain = seen.quantity == "strain"
    shared = sum((column != 0).astype(int) for column in axial_columns(subject).values())
    unzeroed = strain & (seen.stage != (-1 if subject.zero is None else subject.zero))
    return bool(np.any(unzeroed & (np.asarray(shared) == 0)))


def _unmeasured_supports(subject: Subject) -> Sequence[str]:
    """Rigid supports with no deflection or level gauge within a hundredth of the length, nor asked for."""
    seen = subject.observations
    gauges = seen.at[np.isin(seen.quantity.astype(str), ("deflection", "level"))]
    near = 0.01 * float(subject.member.length[0])
    asked = {row.where for row in subject.asked if row.quantity in ("bearing stiffness", "settlement")}
    rigid = subject.member.support_flexibility[0] == 0
    places = zip(subject.supports, subject.member.support_at[0], rigid, strict=True)
    return [name for name, at, held in places if held and name not in asked and not np.any(np.abs(gauges - at) <= near)]
