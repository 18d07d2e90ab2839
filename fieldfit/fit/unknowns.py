"""Unknowns: the numbers a fit may change, free of dimension, and what each of them changes.

An unknown turns the stiffness of the member, scales what stages carry, adds a load case of its own to them, or adds
the same column to the readings however stiff the member is. Each is one small function here.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace

import numpy as np

from fieldfit.beam import Array, Bend, Loads, Members, Movement, loads
from fieldfit.errors import ModelError
from fieldfit.fit.columns import camber_column, shift_column, tilt_column
from fieldfit.fit.imposed import TEMPERATURE, curvatures, gradient_stages, is_asked, settlements
from fieldfit.observe import Asked, Gradient, Subject

__all__ = [
    "BEARING",
    "CAMBER",
    "CREEP",
    "EI",
    "GRADIENT",
    "RESTRAINT",
    "Unknown",
    "asked_unknowns",
    "flexibility_unit",
    "gradient_unknowns",
    "load_unknowns",
]

OUTLANDISH = float(np.log(1e3))  # an EI a thousand times the record, or a thousandth of it, is no finding
SOFT = 1e3  # a bearing flexibility of so many l3/EI is no bearing
EI, RESTRAINT, BEARING, CREEP = "EI", "rotational restraint", "bearing stiffness", "creep factor"
CAMBER = "camber"
GRADIENT = "top minus bottom"
NONE: Array = np.zeros(0)


@dataclass(frozen=True, slots=True, kw_only=True)
class Unknown:
    """One number v of a fit, with its bounds, where to start, and what the book expects of it (NaN: nothing).

    ``stiffness`` (U,) is how it moves the log EI ratio of each zone, the flexibility and the fixity of each support;
    ``scales`` (T, C) marks what it multiplies, by ``offset`` + v; ``adds`` holds the extra load case that v puts on
    the ``stages`` (T,) it acts in, less ``already``, what the loads on record hold of it; ``column`` (n,) is what one
    unit adds to the readings. What an unknown does not do is empty. ``kind`` is its kind of quantity where its name
    alone does not say it. ``own_bounds`` says which bounds the book or nature sets, as against where the search gives
    up.
    """

    quantity: str
    where: str
    stage: str | None = None
    kind: str | None = None
    lower: float = -np.inf
    upper: float = np.inf
    own_bounds: tuple[bool, bool] = (False, False)
    start: float = 0.0
    expected: float = np.nan
    expected_u: float = np.nan
    stiffness: Array = field(default_factory=NONE.copy)
    scales: Array = field(default_factory=NONE.copy)
    offset: float = 0.0
    adds: Loads | None = None
    already: float = 0.0
    stages: Array = field(default_factory=NONE.copy)
    column: Array = field(default_factory=NONE.copy)

    @property
    def name(self) -> str:
        """What it is called in correlations and messages."""
        return " ".join(part for part in (self.quantity, self.where, self.stage) if part)

    @property
    def is_expected(self) -> bool:
        """Whether the book expects a value of it."""
        return bool(np.isfinite(self.expected) and np.isfinite(self.expected_u))


def asked_unknowns(subject: Subject) -> tuple[Unknown, ...]:
    """The unknowns that the book asks for, in its order, but for those of single gauges (`gauge_effects`)."""
    return tuple(MAKERS[row.quantity](subject, row) for row in subject.asked if row.quantity in MAKERS)


def load_unknowns(subject: Subject) -> tuple[Unknown, ...]:
    """A factor on each load case of uncertain weight, and on all of them for an uncertain share; expected to be 1."""
    asked = {row.where for row in subject.asked if row.quantity == "load"}
    rows = [
        Asked(quantity="load", where=case, expected=1.0, expected_u=u)
        for case, u in subject.load_u.items()
        if u > 0 and case in subject.load_cases and case not in asked
    ]
    if subject.share_u > 0:
        rows.append(Asked(quantity="load", where=None, expected=1.0, expected_u=subject.share_u))
    return tuple(_load(subject, row) for row in rows)


def gradient_unknowns(subject: Subject) -> tuple[Unknown, ...]:
    """The true temperature difference (K) wherever the book gives it with its u, expected to be so.

    Where the book asks for the temperature curvature itself, that stands in its place.
    """
    return tuple(_gradient(subject, one) for one in subject.gradients if one.u > 0 and not is_asked(subject, one))


def _gradient(subject: Subject, one: Gradient) -> Unknown:
    return Unknown(
        quantity=GRADIENT,
        where=one.where,
        stage=one.stage,
        kind="temperature difference",
        start=one.difference,
        expected=one.difference,
        expected_u=one.u,
        adds=loads(subject.member, bends=[Bend(one.start, one.end, one.bend)]),
        already=one.difference,
        stages=gradient_stages(subject, one),
    )


def _EI(subject: Subject, row: Asked) -> Unknown:
    """Logarithm of an EI ratio: of a zone, or of all that has no unknown of its own."""
    own_zones = {other.where for other in subject.asked if other.quantity == EI and other.where}
    zones = (None, *subject.zones)
    mine = [zone == row.where if row.where else zone not in own_zones for zone in zones]
    expected = _given(row.expected, np.nan)
    return Unknown(
        quantity=EI,
        where=row.where or "whole",
        lower=float(np.log(_given(row.low, np.exp(-OUTLANDISH)))),
        upper=float(np.log(_given(row.high, np.exp(OUTLANDISH)))),
        own_bounds=(row.low is not None, row.high is not None),
        expected=float(np.log(expected)),
        expected_u=_given(row.expected_u, np.nan) / expected,
        stiffness=_stiffness(subject.member, zones=np.array(mine, dtype=float)),
    )


def _restraint(subject: Subject, row: Asked) -> Unknown:
    """Fixity factor of a support."""
    which = _support(subject, row)
    at = np.eye(len(subject.supports))[which]
    plain = _plain(row, subject.supports[which], float(subject.member.support_fixity[0, which]), 0.0, 1.0)
    return replace(plain, stage=None, stiffness=_stiffness(subject.member, fixity=at))


def _bearing(subject: Subject, row: Asked) -> Unknown:
    """Flexibility of a bearing over l3/EI, so that rigid is 0; a high stiffness is a low flexibility."""
    which = _support(subject, row)
    unit = flexibility_unit(subject.member, which)
    flexibility = (_inverse(row.high, 0.0) / unit, _inverse(row.low, SOFT * unit) / unit)
    expected = _inverse(row.expected, np.nan)
    recorded = float(subject.member.support_flexibility[0, which]) / unit
    at = np.eye(len(subject.supports))[which] * unit
    return Unknown(
        quantity=BEARING,
        where=subject.supports[which],
        lower=flexibility[0],
        upper=flexibility[1],
        own_bounds=(True, row.low is not None),
        start=min(recorded, SOFT),
        expected=expected / unit,
        expected_u=_given(row.expected_u, np.nan) * expected**2 / unit,
        stiffness=_stiffness(subject.member, flexibility=at),
    )


def flexibility_unit(member: Members, which: int) -> float:
    """l3/EI (m/N) at a support: what a bearing flexibility is measured against."""
    EI_here = member.EI_beside(member.support_at)[0, which]
    return float(member.support_reach[0, which] ** 3 / EI_here)


def _load(subject: Subject, row: Asked) -> Unknown:
    """Factor on a load case, on all of them where none is named."""
    factors = np.array([stage.factors for stage in subject.stages])
    mine = np.array([case is not None and (row.where is None or case == row.where) for case in subject.load_cases])
    scales = np.broadcast_to(mine, factors.shape).astype(float)
    return replace(_plain(row, row.where or "all", 1.0, 0.0), stage=None, scales=scales)


def _creep(subject: Subject, row: Asked) -> Unknown:
    """Creep factor: what has come on top of the elastic deflection under loads, as a multiple of it.

    What the book imposes, a settlement or a curvature, is what came of it in the end: no load case, and without creep.
    """
    loaded = np.array([case is not None for case in subject.load_cases])
    scales = np.outer(_stages(subject, row), loaded)
    return replace(_plain(row, "whole", _given(row.expected, 0.0), 0.0), scales=scales, offset=1.0)


def _settlement(subject: Subject, row: Asked) -> Unknown:
    """Settlement (m, down) of a support in a stage; what the book imposes is in it."""
    which = _support(subject, row)
    unit = loads(subject.member, movements=[Movement(which, -1.0)])
    return _imposed(subject, row, subject.supports[which], unit, settlements(subject, which))


def _temperature(subject: Subject, row: Asked) -> Unknown:
    """Curvature (1/m, sagging) imposed on the whole member in a stage; what the book imposes is in it."""
    unit = loads(subject.member, bends=[Bend(0.0, float(subject.member.length[0]), 1.0)])
    return _imposed(subject, row, "whole", unit, curvatures(subject))


def _imposed(subject: Subject, row: Asked, where: str, unit: Loads, held: Array) -> Unknown:
    """The whole of what is imposed in a stage, of which the loads on record hold so much by stage, ``held`` (T,)."""
    stages = _stages(subject, row)
    already = float(held @ stages)
    return replace(_plain(row, where, _given(row.expected, already)), adds=unit, already=already, stages=stages)


def _column(make: Callable[[Subject, Asked], Array]) -> Callable[[Subject, Asked], Unknown]:
    """An unknown that only adds to the readings."""

    def unknown(subject: Subject, row: Asked) -> Unknown:
        plain = _plain(row, row.where or "whole", _given(row.expected, 0.0))
        return replace(plain, column=make(subject, row))

    return unknown


MAKERS: Mapping[str, Callable[[Subject, Asked], Unknown]] = {
    EI: _EI,
    RESTRAINT: _restraint,
    BEARING: _bearing,
    "settlement": _settlement,
    "load": _load,
    "datum shift": _column(lambda subject, row: shift_column(subject, _stages(subject, row))),
    "datum tilt": _column(lambda subject, row: tilt_column(subject, _stages(subject, row))),
    TEMPERATURE: _temperature,
    CAMBER: _column(lambda subject, row: camber_column(subject, row.where)),
    CREEP: _creep,
}


def _given(value: float | None, default: float) -> float:
    return float(default) if value is None else float(value)


def _inverse(value: float | None, default: float) -> float:
    return float(default) if value is None else 1.0 / value


def _plain(row: Asked, where: str, start: float, least: float = -np.inf, most: float = np.inf) -> Unknown:
    """An unknown as the book asks for it, in its own unit, which nature keeps between ``least`` and ``most``."""
    lower, upper = max(_given(row.low, least), least), min(_given(row.high, most), most)
    return Unknown(
        quantity=row.quantity,
        where=where,
        stage=row.stage,
        lower=lower,
        upper=upper,
        own_bounds=(bool(np.isfinite(lower)), bool(np.isfinite(upper))),
        start=float(np.clip(start, lower, upper)),
        expected=_given(row.expected, np.nan),
        expected_u=_given(row.expected_u, np.nan),
    )


def _support(subject: Subject, row: Asked) -> int:
    if row.where not in subject.supports:
        raise ModelError(f"member {subject.name!r}: {row.quantity} needs one of its supports, not {row.where!r}")
    return subject.supports.index(row.where)


def _stages(subject: Subject, row: Asked) -> Array:
    """Stages (T,) an unknown acts in, 1 or 0: the one named, or all but the reference zero stage."""
    if row.stage is None:
        return np.array([float(number != subject.zero) for number in range(len(subject.stages))])
    return np.array([float(stage.name == row.stage) for stage in subject.stages])


def _stiffness(
    member: Members, zones: Array | None = None, flexibility: Array | None = None, fixity: Array | None = None
) -> Array:
    count, supports = member.zone_from.shape[1] + 1, member.support_at.shape[1]
    parts = ((zones, count), (flexibility, supports), (fixity, supports))
    return np.concatenate([np.zeros(size) if part is None else part for part, size in parts])
