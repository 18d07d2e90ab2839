"""Model: what the gauges of a member would read, for given unknowns, and how that changes with them."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import (
    SEEN,
    Array,
    Condensed,
    Flags,
    Loads,
    Stiffness,
    condense,
    integrate,
    recorded,
    side_by_side,
)
from fieldfit.fit.unknowns import Unknown
from fieldfit.observe import Subject

__all__ = ["Model", "model_of"]

#: Which response a gauge sees. A tiltmeter sits on the section, so it sees the rotation of the section.
READS = {"deflection": "deflection", "level": "deflection", "rotation": "rotation"}
READS |= {"curvature": "curvature", "strain": "curvature"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """The readings of a subject as functions of its unknowns.

    ``member`` is condensed to what the readings see, for the load cases of the book and those that unknowns add
    (``loads``). Per reading (n,): the ``sight`` of the condensed member it is, its ``stage``, and ``sense``, how the
    gauge sees the response. ``factors`` (T, C) is what stages carry on record. By unknown: ``moves`` (p, U)
    the stiffness, ``scales`` (p, T, C) and ``adds`` (p, T, C), a unit beyond ``already`` (p,), the factors,
    ``columns`` (n, p) the readings.
    """

    subject: Subject
    unknowns: tuple[Unknown, ...]
    loads: Loads
    member: Condensed
    sight: NDArray[np.intp]
    stage: NDArray[np.intp]
    sense: Array
    factors: Array
    base: Stiffness
    moves: Array
    offsets: Array
    scales: Array
    adds: Array
    already: Array
    columns: Array

    def among(self, used: Flags) -> "Model":
        """Return the same model of some of its readings, ``used`` (n,)."""
        names = ("sight", "stage", "sense", "columns")
        return replace(self, **{name: getattr(self, name)[used] for name in names})

    def along(self, at: Array, left: Flags, stages: Sequence[int], quantity: str, sense: float) -> "Model":
        """The same model of one quantity read at every station ``at`` (S,), just ``left`` (S,) of it or right, in some
        stages, stage by stage, without zeros and datums.
        """
        count = len(stages) * len(at)
        stations, kind = np.arange(len(at)), np.full(len(at), SEEN.index(READS[quantity]))
        return replace(
            self,
            member=condense(integrate(self.subject.member, self.loads, at[None], left[None]), stations, kind),
            sight=np.tile(stations, len(stages)),
            stage=np.repeat(np.array(stages, dtype=np.intp), len(at)),
            sense=np.full(count, sense),
            columns=np.zeros((count, self.columns.shape[1])),
        )

    @property
    def loading(self) -> bool:
        """Whether an unknown changes what stages carry."""
        return bool(self.scales.any() or self.adds.any())

    def stiffness(self, values: Array) -> Stiffness:
        """Stiffness of the member when its unknowns have these values (p,), or each of a stack of them (D, p)."""
        zones, supports = self.base.EI_ratio.shape[1], self.base.fixity.shape[1]
        moved = values @ self.moves
        log, flexibility, fixity = (
            moved[..., :zones],
            moved[..., zones : zones + supports],
            moved[..., zones + supports :],
        )
        return Stiffness(
            self.base.EI_ratio * np.exp(log), self.base.flexibility + flexibility, self.base.fixity + fixity
        )

    def carried(self, values: Array) -> Array:
        """Factors (..., T, C) on the load cases of each stage, those that unknowns (..., p) add among them."""
        if not self.loading:
            return self.factors
        scaled = np.where(self.scales > 0, (self.offsets + values)[..., None, None], 1.0).prod(axis=-3)
        return self.factors * scaled + np.tensordot(values - self.already, self.adds, axes=1)

    def predicted(self, values: Array) -> Array:
        """Readings (n,) in each gauge's sense, SI."""
        return self.predictions(values[None])[0]

    def predictions(self, values: Array) -> Array:
        """Readings (D, n) in each gauge's sense, SI, for a stack of unknowns (D, p)."""
        return self._read(self.member.sight(self.stiffness(values)), self.carried(values)) + values @ self.columns.T

    def as_recorded(self) -> Array:
        """Readings (n,) of the member on record, under the loads on record; NaN for one in no stage."""
        of_stage = self._read(self.member.sight(recorded(self.subject.member))[0], self.factors)
        return np.where(self.stage < 0, np.nan, of_stage)

    def evaluate(self, values: Array) -> tuple[Array, Array]:
        """Readings (n,) and their derivatives (n, p) with respect to the unknowns."""
        seen, change = self.member.sight_and_gradient(self.stiffness(values))
        carried = self.carried(values)
        out = self.columns.copy()
        if self.moves.any():
            turned = (self.moves @ change.reshape(len(change), -1)).reshape(-1, *seen.shape)
            out += self._read(turned, carried).T
        if self.loading:
            scaled = self.scales * self._scale_slope(values) + self.adds
            out += self._read(seen, scaled).T
        return self._read(seen, carried) + self.columns @ values, out

    def _read(self, seen: Array, carried: Array) -> Array:
        """Readings (..., n) where so much is seen (..., S, C) of the cases, and so much carried of them (..., T, C)."""
        return (seen @ carried.swapaxes(-1, -2))[..., self.sight, self.stage] * self.sense

    def _scale_slope(self, values: Array) -> Array:
        """Derivative (p, T, C) of the factors with respect to each unknown that scales them."""
        size = np.where(self.scales > 0, (self.offsets + values)[:, None, None], 1.0)
        others = np.array([np.delete(size, own, axis=0).prod(axis=0) for own in range(len(values))])
        return self.factors * others


def model_of(subject: Subject, unknowns: Sequence[Unknown]) -> Model:
    """Integrate the member's curvature diagrams at the stations of its readings."""
    seen, asked = subject.observations, tuple(unknowns)
    given = side_by_side([subject.loads, *(unknown.adds for unknown in asked if unknown.adds is not None)])
    stations, station = np.unique(seen.at, return_inverse=True)
    kind = np.array([SEEN.index(READS[quantity]) for quantity in seen.quantity], dtype=np.intp)
    sights, sight = np.unique(station * len(SEEN) + kind, return_inverse=True)
    factors = np.zeros((len(subject.stages), given.cases))
    factors[:, : subject.loads.cases] = [stage.factors for stage in subject.stages]
    on_record = recorded(subject.member)
    moves = np.array([unknown.stiffness if len(unknown.stiffness) else np.zeros(_size(on_record)) for unknown in asked])
    moved = (moves != 0).any(axis=0)[on_record.EI_ratio.shape[1] :].reshape(2, -1)
    return Model(
        subject=subject,
        unknowns=asked,
        loads=given,
        member=condense(integrate(subject.member, given, stations[None]), *np.divmod(sights, len(SEEN))),
        sight=sight,
        stage=seen.stage,
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
        already=np.array([unknown.already for unknown in asked]),
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
