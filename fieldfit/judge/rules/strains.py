"""Strains: the greatest strain that a test brought about, and what the recorded member would have there and then.

The gauge and the stage are those of the greatest measured strain. Strain gauges come first; where there are none,
curvatures stand for them, as the ratio of two bending strains at one depth is that of their curvatures.
"""

from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array, Flags, integrate, recorded, solve
from fieldfit.fit import Noise, Reconciliation
from fieldfit.judge.rules.means import means_of, readable
from fieldfit.judge.rules.record import cycles_of
from fieldfit.observe import Subject

__all__ = ["Strain", "greatest_strain"]

LOADED = ("load", "hold")


@dataclass(frozen=True, slots=True, kw_only=True)
class Strain:
    """A change of strain from the start of its cycle, tension positive, or of curvature (1/m), sagging positive.

    ``measured`` is NaN where the reading that may be the greatest is missing. Variances are of the readings, and of
    what the loads on record are uncertain by; ``noise`` is that of the fit where it stands in for a u.
    """

    gauge: str
    stage: str
    quantity: str
    measured: float
    measured_variance: float
    calculated: float
    calculated_variance: float
    noise: Noise | None


def greatest_strain(found: Reconciliation) -> Strain | None:
    """The greatest strain that was read under load; None where no gauge read any.

    A reading that is missing where a gauge would have more, by what the recorded member would and what the others
    read, is not passed over.
    """
    subject, seen = found.subject, found.subject.observations
    quantity = "strain" if (readable(seen) & (seen.quantity == "strain")).any() else "curvature"
    kept = readable(seen) & (seen.quantity == quantity)
    if not kept.any():
        return None
    means = means_of(found, kept)
    read = means.read
    change = _changes(subject)
    loaded = np.isfinite(read).any(axis=1) & np.array([stage.role in LOADED for stage in subject.stages], dtype=bool)
    if not loaded.any():
        return None
    missing = ((change != 0)[:, :, None] & np.isnan(read)[None]).any(axis=1)
    measured = np.where(missing, np.nan, change @ np.nan_to_num(read))
    by_case = _by_case(subject, seen.at[means.where], seen.lever[means.where])
    factors = change @ np.array([stage.factors for stage in subject.stages])
    stage, place = _greatest(measured, factors @ by_case, loaded)
    parts = factors[stage] * by_case[:, place]
    return Strain(
        gauge=means.gauges[place],
        stage=subject.stages[stage].name,
        quantity=quantity,
        measured=float(measured[stage, place]),
        measured_variance=float(change[stage] @ means.variance[place] @ change[stage]),
        calculated=float(parts.sum()),
        calculated_variance=_of_loads(subject, parts),
        noise=None if found.profile is None else found.profile.noise,
    )


def _changes(subject: Subject) -> Array:
    """How readings combine (T, T) to the change of every stage from the start of its cycle."""
    out = np.eye(len(subject.stages))
    for cycle in cycles_of(subject):
        if cycle.start is not None:
            out[[*cycle.stages], cycle.start] -= 1.0
    return out


def _by_case(subject: Subject, at: Array, lever: Array) -> Array:
    """Strain or curvature of the recorded member at gauges (G,) from left to right for each load case, (C, G)."""
    response = solve(integrate(subject.member, subject.loads, at[None]), recorded(subject.member))
    out: Array = response.curvature[0] * lever
    return out


def _greatest(measured: Array, calculated: Array, loaded: Flags) -> tuple[int, int]:
    """Stage and gauge of the greatest measured strain (T, G), or of a missing one that would be greater."""
    size, on_record = np.abs(measured), np.abs(calculated)
    read = np.isfinite(size) & loaded[:, None] & (on_record > 0)
    like = float(np.median(size[read] / on_record[read])) if read.any() else 1.0
    size = np.where(np.isnan(size), like * on_record, size)
    stage, place = np.unravel_index(np.where(loaded[:, None], size, -1.0).argmax(), size.shape)
    return int(stage), int(place)


def _of_loads(subject: Subject, parts: Array) -> float:
    """Variance of a strain that is the sum of its load cases' parts (C,), each of which errs as a whole.

    The member's share is one of its loads: what is imposed on it in a stage has none.
    """
    shared = [case is not None for case in subject.load_cases]
    total = (subject.share_u * float(parts[shared].sum())) ** 2
    for name, u in subject.load_u.items():
        own = [case == name for case in subject.load_cases]
        total += (u * float(parts[own].sum())) ** 2
    return total
