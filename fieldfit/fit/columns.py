"""Columns: what one unit of an unknown adds to the readings, however stiff the member is, each of shape (n,).

Which there are is for the readings in use to say: one that is set aside is as good as not taken.
"""

from itertools import pairwise

import numpy as np

from fieldfit.beam import Array, Flags
from fieldfit.errors import ModelError
from fieldfit.observe import Subject

__all__ = ["axial_columns", "camber_column", "scale_columns", "shift_column", "tilt_column", "zero_columns"]


def zero_columns(subject: Subject) -> dict[str, Array]:
    """The zero of each gauge, where there is a zero stage; without one, readings are changes from unloaded.

    A reset starts a new zero, with or without a zero stage.
    """
    seen, kept = subject.observations, _kept(subject)
    first = 0 if subject.zero is not None else 1
    return {
        f"zero of {name}{f' after reset {number}' if number else ''}": (
            (seen.gauge == name) & (seen.zero == number)
        ).astype(float)
        for name, number in sorted(set(zip(seen.gauge[kept], seen.zero[kept], strict=True)))
        if number >= first
    }


def shift_column(subject: Subject, stages: Array) -> Array:
    """A datum shift (m) in some stages: it adds to readings of level, or of deflection where no level was read.

    It counts in the sense that the gauge usually has: down for deflections, up for levels.
    """
    seen = subject.observations
    levels = _kept(subject) & (seen.quantity == "level") & (stages[seen.stage] > 0)
    kind = "level" if levels.any() else "deflection"
    return (seen.quantity == kind) * stages[seen.stage] * seen.sign * seen.usual


def tilt_column(subject: Subject, stages: Array) -> Array:
    """A datum tilt (rad) in some stages: a shift that grows with the distance from the left end."""
    return shift_column(subject, stages) * subject.observations.at


def camber_column(subject: Subject, where: str | None) -> Array:
    """A camber (m, up) built into a span, as a parabola between its supports; it shows in levels alone."""
    seen = subject.observations
    start, end = _span(subject, where)
    share = (seen.at - start) / (end - start)
    shape = np.where((share >= 0) & (share <= 1), 4 * share * (1 - share), 0.0)
    return (seen.quantity == "level") * shape * seen.sign


def _span(subject: Subject, where: str | None) -> tuple[float, float]:
    """Ends (m) of a span, named by its number from the left or by its two supports (A-B)."""
    held = np.isfinite(subject.member.support_flexibility[0])
    places = np.sort(subject.member.support_at[0, held])
    names = [name for name, upright in zip(subject.supports, held, strict=True) if upright]
    spans = dict(zip([f"{a}-{b}" for a, b in pairwise(names)], range(len(names)), strict=False))
    spans |= {str(number + 1): number for number in range(len(places) - 1)}
    if where is None and len(places) == 2:
        where = "1"
    if where not in spans:
        known = ", ".join(spans) or "none"
        raise ModelError(f"member {subject.name!r}: camber needs one of its spans ({known}), not {where!r}")
    return float(places[spans[where]]), float(places[spans[where] + 1])


def axial_columns(subject: Subject) -> dict[str, Array]:
    """An axial strain that the strain gauges of a station share, where there are two or more of them; by stage."""
    seen = subject.observations
    strain = _kept(subject) & (seen.quantity == "strain")
    columns = {}
    for at in np.unique(seen.at[strain]):
        here = strain & (seen.at == at)
        if len(set(seen.gauge[here])) < 2:
            continue
        for stage in np.unique(seen.stage[here]):
            if stage != subject.zero:
                name = f"axial strain at {at:g} m, {subject.stages[stage].name}"
                columns[name] = (here & (seen.stage == stage)) * seen.sign
    return columns


def scale_columns(subject: Subject) -> dict[str, tuple[Array, float]]:
    """The scale error of each gauge whose scale is uncertain, a fraction of its change, with its uncertainty."""
    seen, kept = subject.observations, _kept(subject)
    columns = {}
    for name in sorted(set(seen.gauge[kept & (seen.scale_u > 0)])):
        mine = kept & (seen.gauge == name)
        zero = mine & (seen.stage == subject.zero)
        change = seen.value - (seen.value[zero].mean() if zero.any() else 0.0)
        columns[f"scale of {name}"] = (np.where(mine, change, 0.0), float(seen.scale_u[mine].max()))
    return columns


def _kept(subject: Subject) -> Flags:
    """Readings (n,) that serve the fit or the rules of load tests, and are not set aside."""
    return np.asarray(subject.observations.used_for != "none", dtype=bool)
