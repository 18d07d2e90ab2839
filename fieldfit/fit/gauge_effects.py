"""What gauges read without the member moving: drift with time, and temperature of the gauge itself.

Both add to the readings of one gauge a column that is known but for its size, so that they are nuisances: found with
their uncertainty together with all else, never taken off beforehand.
"""

import numpy as np

from fieldfit.beam import Array, Flags
from fieldfit.fit.unknowns import Unknown
from fieldfit.observe import Observations, Subject

__all__ = ["WARMTH", "drifting", "drifts", "drifts_on", "timeless", "warmed", "warmer", "warmths"]

DRIFT, WARMTH = "drift", "temperature coefficient"


def drifts(subject: Subject) -> list[Unknown]:
    """A linear drift (SI a second) for each gauge whose zero was read before and after its loaded stages, with times.

    d(t) = d0 + rate (t - t0): between two zero readings this is the interpolation of every site manual.
    """
    seen, unknowns = subject.observations, []
    for gauge in drifting(subject):
        mine = seen.gauge == gauge
        start = seen.time[mine & _zeros(subject)].min()
        column = np.where(mine, seen.time - start, 0.0)
        unknowns.append(_unknown(subject, DRIFT, gauge, column, f"{seen.quantity[mine][0]} rate"))
    return unknowns


def drifts_on(subject: Subject, ahead: Subject) -> list[Unknown]:
    """The same drifts in readings still to come, NaN where these have no time."""
    seen, coming, unknowns = subject.observations, ahead.observations, []
    for gauge in drifting(subject):
        start = seen.time[(seen.gauge == gauge) & _zeros(subject)].min()
        column = np.where(coming.gauge == gauge, coming.time - start, 0.0)
        unknowns.append(_unknown(ahead, DRIFT, gauge, column, ""))
    return unknowns


def drifting(subject: Subject) -> list[str]:
    """Gauges whose zeros bracket their loaded stages in time."""
    return [gauge for gauge, known in _bracketed(subject) if known]


def timeless(subject: Subject) -> list[str]:
    """Gauges whose zeros stand before and after their loaded stages by the order of the stages alone."""
    return [gauge for gauge, known in _bracketed(subject) if not known]


def _bracketed(subject: Subject) -> list[tuple[str, bool]]:
    """Gauges read in zero stages before and after others, and whether all times are known."""
    seen, found = subject.observations, []
    used, zero = seen.used_for == "fit", _zeros(subject)
    if len(np.unique(seen.stage[zero])) < 2:
        return []
    for gauge in dict.fromkeys(seen.gauge[zero]):
        mine = used & (seen.gauge == gauge)
        known = bool(np.isfinite(seen.time[mine]).all())
        order = seen.time if known else seen.stage
        ends, others = order[mine & zero], order[mine & ~zero]
        if len(ends) > 1 and len(others) and ends.min() < others.min() and others.max() < ends.max():
            found.append((str(gauge), known))
    return found


def _zeros(subject: Subject) -> Flags:
    """Which observations (n,) are zero readings in the fit."""
    seen = subject.observations
    is_zero = np.array([*(stage.role == "zero" for stage in subject.stages), False])
    return is_zero[seen.stage] & (seen.used_for == "fit")


def warmths(subject: Subject) -> list[Unknown]:
    """The temperature coefficient (SI a kelvin) of each gauge for which the book states or asks for one.

    It counts from the temperature of the gauge's first zero reading; a stated one comes with its uncertainty.
    """
    seen, unknowns = subject.observations, []
    for gauge in warmed(subject, seen):
        mine = seen.gauge == gauge
        stated = float(seen.per_kelvin[mine][0])
        column = np.where(seen.used_for == "fit", warmer(subject, gauge), 0.0)
        known = (stated, float(seen.per_kelvin_u[mine][0]))
        unknowns.append(_unknown(subject, WARMTH, gauge, column, f"{seen.quantity[mine][0]} per kelvin", known))
    return unknowns


def warmed(subject: Subject, seen: Observations) -> list[str]:
    """Gauges in use that read more as they warm: the book states or asks for their temperature coefficient."""
    asked = {row.where for row in subject.asked if row.quantity == WARMTH}
    used = seen.used_for == "fit"
    rows = zip(seen.gauge[used], np.isfinite(seen.per_kelvin[used]), strict=True)
    return [*dict.fromkeys(gauge for gauge, stated in rows if stated or gauge in asked)]


def warmer(subject: Subject, gauge: str) -> Array:
    """How much warmer (K) the observations (n,) of a gauge are than its first zero reading; 0 for those of others."""
    seen = subject.observations
    mine = seen.gauge == gauge
    return np.where(mine, seen.temperature - _first(subject, mine), 0.0)


def _first(subject: Subject, mine: Flags) -> float:
    """Temperature (degC) at the first zero reading of a gauge, else at its first reading, in the fit if any is."""
    seen = subject.observations
    for rows in (mine & _zeros(subject), mine & (seen.used_for == "fit"), mine):
        if rows.any():
            return float(seen.temperature[rows][0])
    return np.nan


def _unknown(
    subject: Subject, quantity: str, gauge: str, column: Array, kind: str, known: tuple[float, float] = (np.nan, np.nan)
) -> Unknown:
    """An unknown that adds a column to the readings of one gauge; all else stays as it is."""
    used = subject.observations.used_for == "fit"
    return Unknown(
        quantity=quantity,
        where=gauge,
        kind=kind,
        expected=known[0],
        expected_u=known[1],
        column=np.where(used, column, 0.0),
    )
