"""Adequacy: whether a test loaded the member as its rule asks, by moment at the critical section, not by total.

Dead load that no stage carries was there before the test and counts towards it. The section is where the load asked
for bends the recorded member most; the moments of service and of the test are compared there.
"""

from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array, Loads, combine, integrate, recorded, solve
from fieldfit.judge.rules.declare import Combination, Rule
from fieldfit.judge.rules.record import Record, largest_place
from fieldfit.observe import Service, Subject

__all__ = ["Adequacy", "adequacy_of"]

DEAD = ("self-weight", "superimposed dead")
LEAST = 1.0 - 1e-9
GRID = 401


@dataclass(frozen=True, slots=True, kw_only=True)
class Adequacy:
    """Moment (N m) of the test and of the load asked for at the critical section (m), and which combination asks."""

    combination: str
    section: float
    asked: float
    reached: float
    in_place: float

    @property
    def share(self) -> float:
        """What was reached over what is asked for."""
        return self.reached / self.asked

    @property
    def met(self) -> bool:
        """Whether the load asked for was reached."""
        return self.share >= LEAST

    @property
    def says(self) -> str:
        """The comparison in words."""
        share = f"{100 * self.share:.4g} %"
        return (
            f"the test reached {share} of the moment asked for ({self.combination}) at {self.section:.3g} m, "
            f"{100 * self.in_place / self.asked:.3g} % of it by dead load in place"
        )


def adequacy_of(rule: Rule, record: Record) -> Adequacy | None:
    """The load of a test against that of its rule; None where either is not known."""
    service = record.subject.service
    if service is None or not rule.loads:
        return None
    at = _stations(record.subject, service)
    moments = {one.says: _moment(record.subject, service.loads, _asked(one, service), at) for one in rule.loads}
    says = max(moments, key=lambda name: float(np.abs(moments[name]).max()))
    place = largest_place(moments[says])
    asked = float(moments[says][place])
    if asked == 0.0:
        return None
    standing = _moment(record.subject, service.loads, service.factors(*DEAD, standing=True), at)[place]
    stages = np.array([record.subject.stages[number].factors for number in record.cycles[0].full[:1]])[0]
    test = _moment(record.subject, record.subject.loads, stages, at)[place]
    sign = float(np.sign(asked))
    return Adequacy(
        combination=says,
        section=float(at[place]),
        asked=abs(asked),
        reached=float(standing + test) * sign,
        in_place=float(standing) * sign,
    )


def _asked(one: Combination, service: Service) -> Array:
    out = np.zeros(service.loads.cases)
    for nature in dict.fromkeys(service.natures):
        out += one.factor(nature) * service.factors(nature)
    return out


def _stations(subject: Subject, service: Service) -> Array:
    """Stations (S,) where the largest moment may be: a fine grid, every force and every support."""
    length = float(subject.member.length[0])
    places = [np.linspace(0.0, length, GRID), subject.loads.force_at[0], service.loads.force_at[0]]
    at = np.unique(np.concatenate([*places, subject.member.support_at[0]]))
    return at[(at >= 0) & (at <= length)]


def _moment(subject: Subject, loads: Loads, factors: Array, at: Array) -> Array:
    """Moment (N m) of the recorded member at stations (S,) under so much of each case (C,)."""
    together = combine(loads, factors[None, None])
    moment: Array = solve(integrate(subject.member, together, at[None]), recorded(subject.member)).moment[0, 0]
    return moment
