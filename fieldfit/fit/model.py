"""Model: what the gauges of a member would read, for given unknowns, and how that changes with them."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import (
    Areas,
    Array,
    Flags,
    Loads,
    Response,
    Stiffness,
    integrate,
    recorded,
    side_by_side,
    solve,
    solve_with_gradient,
)
from fieldfit.fit.unknowns import Unknown
from fieldfit.observe import Subject

__all__ = ["Model", "model_of"]

#: Which response a gauge sees. A tiltmeter sits on the section, so it sees the rotation of the section.
SEEN = {"deflection": "deflection", "level": "deflection", "rotation": "rotation"}
SEEN |= {"curvature": "curvature", "strain": "curvature"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """The readings of a subject as functions of its unknowns.

    ``areas`` are integrated once at the distinct stations of the readings, for the load cases of the book and those
    that unknowns add (``loads``). Per reading (n,): ``station`` and ``stage`` numbers, ``quantity``, and ``sense``,
    how the gauge sees the response. ``factors`` (T, C) is what stages carry on record. By unknown: ``moves`` (p, U)
    the stiffness, ``scales`` (p, T, C) and ``adds`` (p, T, C) the factors, ``columns`` (n, p) the readings.
    """

    subject: Subject
    unknowns: tuple[Unknown, ...]
    loads: Loads
    areas: Areas
    station: NDArray[np.intp]
    stage: NDArray[np.intp]
    quantity: NDArray[np.object_]
    sense: Array
    factors: Array
    base: Stiffness
    moves: Array
    offsets: Array
    scales: Array
    adds: Array
    columns: Array

    def among(self, used: Flags) -> "Model":
        """Return the same model of some of its readings, ``used`` (n,)."""
        names = ("station", "stage", "quantity", "sense", "columns")
        return replace(self, **{name: getattr(self, name)[used] for name in names})

    def stiffness(self, values: Array) -> Stiffness:
        """Stiffness of the member when its unknowns have these values (p,)."""
        zones, supports = self.base.EI_ratio.shape[1], self.base.fixity.shape[1]
        moved = values @ self.moves
        log, flexibility, fixity = np.split(moved, [zones, zones + supports])
        return Stiffness(
            self.base.EI_ratio * np.exp(log), self.base.flexibility + flexibility, self.base.fixity + fixity
        )

    def carried(self, values: Array) -> Array:
        """Factors (T, C) on the load cases of each stage, those that unknowns add among them."""
        scaled = np.where(self.scales > 0, (self.offsets + values)[:, None, None], 1.0).prod(axis=0)
        return self.factors * scaled + np.tensordot(values, self.adds, axes=1)

    def predicted(self, values: Array) -> Array:
        """Readings (n,) in each gauge's sense, SI."""
        seen = self._seen(solve(self.areas, self.stiffness(values)))
        return (self.carried(values)[self.stage] * seen).sum(axis=1) * self.sense + self.columns @ values

    def as_recorded(self) -> Array:
        """Readings (n,) of the member on record, under the loads on record."""
        seen = self._seen(solve(self.areas, recorded(self.subject.member)))
        return (self.factors[self.stage] * seen).sum(axis=1) * self.sense

    def evaluate(self, values: Array) -> tuple[Array, Array]:
        """Readings (n,) and their derivatives (n, p) with respect to the unknowns."""
        response, change = solve_with_gradient(self.areas, self.stiffness(values))
        seen, carried = self._seen(response), self.carried(values)[self.stage]
        sense = self.sense[:, None]
        out = self.columns.copy()
        if self.moves.any():
            out += (self.moves @ (self._seen(change) * carried).sum(axis=-1)).T * sense
        if self.scales.any() or self.adds.any():
            scaled = self.scales * self._scale_slope(values) + self.adds
            out += (scaled[:, self.stage] * seen).sum(axis=-1).T * sense
        return (carried * seen).sum(axis=1) * self.sense + self.columns @ values, out

    def _scale_slope(self, values: Array) -> Array:
        """Derivative (p, T, C) of the factors with respect to each unknown that scales them."""
        size = np.where(self.scales > 0, (self.offsets + values)[:, None, None], 1.0)
        others = np.array([np.delete(size, own, axis=0).prod(axis=0) for own in range(len(values))])
        return self.factors * others

    def _seen(self, response: Response) -> Array:
        """What each reading sees of each load case, (..., n, C), before its own sense."""
        first = response.deflection[0]
        out = np.zeros((*first.shape[:-2], len(self.quantity), first.shape[-2]))
        for kind in set(self.quantity):
            of_kind = np.flatnonzero(self.quantity == kind)
            field = getattr(response, SEEN[kind])[0][..., self.station[of_kind]]
            out[..., of_kind, :] = field.swapaxes(-1, -2)
        return out


def model_of(subject: Subject, unknowns: Sequence[Unknown]) -> Model:
    """Integrate the member's curvature diagrams at the stations of its readings."""
    seen, asked = subject.observations, tuple(unknowns)
    given = side_by_side([subject.loads, *(unknown.adds for unknown in asked if unknown.adds is not None)])
    stations, station = np.unique(seen.at, return_inverse=True)
    factors = np.zeros((len(subject.stages), given.cases))
    factors[:, : subject.loads.cases] = [stage.factors for stage in subject.stages]
    on_record = recorded(subject.member)
    moves = np.array([unknown.stiffness if len(unknown.stiffness) else np.zeros(_size(on_record)) for unknown in asked])
    moved = (moves != 0).any(axis=0)[on_record.EI_ratio.shape[1] :].reshape(2, -1)
    return Model(
        subject=subject,
        unknowns=asked,
        loads=given,
        areas=integrate(subject.member, given, stations[None]),
        station=station,
        stage=seen.stage,
        quantity=seen.quantity,
        sense=seen.sign * seen.lever,
        factors=factors,
        base=Stiffness(
            on_record.EI_ratio,
            np.where(moved[0], 0.0, on_record.flexibility),
            np.where(moved[1], 0.0, on_record.fixity),
        ),
        moves=moves,
        offsets=np.array([unknown.offset for unknown in asked]),
        scales=_padded([unknown.scales for unknown in asked], factors.shape),
        adds=_added(subject, asked, factors.shape),
        columns=np.array([c if len(c := unknown.column) else np.zeros(len(seen)) for unknown in asked]).T,
    )


def _size(stiffness: Stiffness) -> int:
    return sum(part.shape[1] for part in stiffness)


def _padded(arrays: Sequence[Array], shape: tuple[int, ...]) -> Array:
    """Arrays (T, fewer) or empty as one (p, T, C)."""
    out = np.zeros((len(arrays), *shape))
    for number, array in enumerate(arrays):
        if array.size:
            out[number, :, : array.shape[1]] = array
    return out


def _added(subject: Subject, unknowns: Sequence[Unknown], shape: tuple[int, ...]) -> Array:
    """Which stages carry the load case of which unknown, (p, T, C)."""
    out = np.zeros((len(unknowns), *shape))
    case = subject.loads.cases
    for number, unknown in enumerate(unknowns):
        if unknown.adds is not None:
            out[number, :, case] = unknown.stages
            case += 1
    return out
