"""Adequacy: whether a test loaded the member as its rule asks, by moment at the critical section, not by total.

Dead load that no stage carries was there before the test and counts towards it. The section is where the load asked
for bends the recorded member most; the moments of service and of the test are compared there.
"""

from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array, Loads, recorded
from fieldfit.fit.stations import solved_at, stations_along
from fieldfit.judge.rules.declare import Combination, Rule
from fieldfit.judge.rules.record import Record, largest_place
from fieldfit.observe import DEAD, Service

__all__ = ["SHARE", "Adequacy", "adequacy_of"]

LEAST = 1.0 - 1e-9  # binary rounding
SHARE = "share of load"  # the number of a rule that takes the place of all of its load


@dataclass(frozen=True, slots=True, kw_only=True)
class Adequacy:
    """Moment (N m) of the test and of the load asked for at the critical section (m), and which combination asks.

    ``enough`` is the share of it that the book takes for enough, 1 as published.
    """

    combination: str
    section: float
    asked: float
    reached: float
    in_place: float
    enough: float = 1.0

    @property
    def share(self) -> float:
        """What was reached over what is asked for."""
        return self.reached / self.asked

    @property
    def met(self) -> bool:
        """Whether the load asked for was reached."""
        return self.share >= LEAST * self.enough

    @property
    def says(self) -> str:
        """The comparison in words."""
        share = f"{100 * self.share:.4g} %"
        instead = "" if self.enough == 1.0 else f", of which the book asks for {100 * self.enough:.4g} %"
        return (
            f"the test reached {share} of the moment asked for ({self.combination}) at the critical section, "
            f"{100 * self.in_place / self.asked:.3g} % of it by dead load in place{instead}"
        )


def adequacy_of(rule: Rule, record: Record, enough: float = 1.0) -> Adequacy | None:
    """The load of a test against that of its rule; None where either is not known."""
    service = record.subject.service
    if service is None or not rule.loads:
        return None
    at, left = stations_along(record.subject.member, record.subject.loads, service.loads)

    def moment(loads: Loads, factors: Array) -> Array:
        """Moment (N m) of the recorded member at the stations (S,) under so much of each case (C,)."""
        member = record.subject.member
        of_all: Array = solved_at(member, loads, factors[None], recorded(member), at, left).moment[0, 0]
        return of_all

    moments = {one.says: moment(service.loads, _asked(one, service)) for one in rule.loads}
    says = max(moments, key=lambda name: float(np.abs(moments[name]).max()))
    place = largest_place(moments[says])
    asked = float(moments[says][place])
    if asked == 0.0:
        return None
    standing = moment(service.loads, service.factors(*DEAD, standing=True))[place]
    stages = np.array([record.subject.stages[number].factors for number in record.cycles[0].full[:1]])[0]
    test = moment(record.subject.loads, stages)[place]
    sign = float(np.sign(asked))
    return Adequacy(
        combination=says,
        section=float(at[place]),
        asked=abs(asked),
        reached=float(standing + test) * sign,
        in_place=float(standing) * sign,
        enough=enough,
    )


def _asked(one: Combination, service: Service) -> Array:
    out = np.zeros(service.loads.cases)
    for nature in dict.fromkeys(service.natures):
        out += one.factor(nature) * service.factors(nature)
    return out
