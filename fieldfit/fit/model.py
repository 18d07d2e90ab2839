"""Model: what the gauges of a member would read, for given unknowns, and how that changes with them."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import Areas, Array, Flags, Response, gradient, integrate, recorded, solve
from fieldfit.fit.unknowns import Unknown, stiffness_at
from fieldfit.observe import Subject

__all__ = ["Model", "model_of"]

#: Which response a gauge sees. A tiltmeter sits on the section, so it sees the rotation of the section.
SEEN = {"deflection": "deflection", "level": "deflection", "rotation": "rotation"}
SEEN |= {"curvature": "curvature", "strain": "curvature"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """The readings of a subject as functions of its unknowns.

    ``areas`` are integrated once at the distinct stations of the readings; ``station`` (n,) says which is whose,
    ``quantity`` (n,) what is read there, ``factors`` (n, C) what its stage carries, ``sense`` (n,) how the gauge
    sees it.
    """

    subject: Subject
    unknowns: tuple[Unknown, ...]
    areas: Areas
    station: NDArray[np.intp]
    quantity: NDArray[np.object_]
    factors: Array
    sense: Array

    def among(self, used: Flags) -> "Model":
        """Return the same model of some of its readings, ``used`` (n,)."""
        names = ("station", "quantity", "factors", "sense")
        return replace(self, **{name: getattr(self, name)[used] for name in names})

    def predicted(self, values: Array) -> Array:
        """Readings (n,) from unloaded, in each gauge's sense, SI."""
        response = solve(self.areas, stiffness_at(self.subject, self.unknowns, values))
        return self._read(response)

    def as_recorded(self) -> Array:
        """Readings (n,) of the member on record."""
        return self._read(solve(self.areas, recorded(self.subject.member)))

    def jacobian(self, values: Array) -> Array:
        """Derivatives (n, p) of the readings with respect to the unknowns."""
        change = gradient(self.areas, stiffness_at(self.subject, self.unknowns, values))
        by_zone = self._read(change)
        return np.stack([by_zone[list(unknown.zones)].sum(axis=0) for unknown in self.unknowns], axis=1)

    def _read(self, response: Response) -> Array:
        """What each gauge sees of a response, summed over what its stage carries, (..., n)."""
        out = np.zeros((*response.deflection.shape[1:-2], len(self.quantity)))
        for kind in set(self.quantity):
            of_kind = np.flatnonzero(self.quantity == kind)
            seen = getattr(response, SEEN[kind])[0][..., self.station[of_kind]]
            out[..., of_kind] = (seen * self.factors[of_kind].T).sum(axis=-2)
        return out * self.sense


def model_of(subject: Subject, unknowns: Sequence[Unknown]) -> Model:
    """Integrate the member's curvature diagrams at the stations of its readings."""
    seen = subject.observations
    stations, station = np.unique(seen.at, return_inverse=True)
    factors = np.array([stage.factors for stage in subject.stages])[seen.stage]
    return Model(
        subject=subject,
        unknowns=tuple(unknowns),
        areas=integrate(subject.member, subject.loads, stations[None]),
        station=station,
        quantity=seen.quantity,
        factors=factors,
        sense=seen.sense,
    )
