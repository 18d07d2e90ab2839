"""Adequacy: whether a test loaded the member as its rule asks, by moment at the critical section, not by total.

Dead load that no stage carries was there before the test and counts towards it. The section is where the load asked
for bends the recorded member most; the moments of service and of the test are compared there.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array, Flags, Loads, recorded
from fieldfit.fieldbook.published import NATURES
from fieldfit.fit.stations import solved_at, stations_along
from fieldfit.judge.rules.declare import Combination, Rule
from fieldfit.judge.rules.record import Record, largest_place
from fieldfit.observe import DEAD, Service

__all__ = ["SHARE", "Adequacy", "adequacy_of", "design_share"]

LEAST = 1.0 - 1e-9  # binary rounding
SHARE = "share of load"  # the number of a rule that takes the place of all of its load


@dataclass(frozen=True, slots=True, kw_only=True)
class Adequacy:
    """Moment (N m) of the test and of the load asked for at the critical section (m), and which combination asks.

    ``enough`` is the share of it that the book takes for enough, 1 as published, ``unstated`` says what of it the book
    does not state.
    """

    combination: str
    section: float
    asked: float
    reached: float
    in_place: float
    enough: float = 1.0
    unstated: str = ""

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
        if not self.met and float(share[:-2]) >= 100 * self.enough:
            share = f"a little less than {100 * self.enough:.4g} %"
        instead = "" if self.enough == 1.0 else f", of which the book asks for {100 * self.enough:.4g} %"
        more = f"; and more is asked for: {self.unstated}" if self.unstated else ""
        return (
            f"the test reached {share} of the moment asked for ({self.combination}) at the critical section, "
            f"{100 * self.in_place / self.asked:.3g} % of it by dead load in place{instead}{more}"
        )


def adequacy_of(rule: Rule, record: Record, enough: float = 1.0) -> Adequacy | str:
    """The load of a test against that of its rule; in words why not, where the book does not state all that it counts.

    What is not stated only adds to what is asked for: a test that falls short of the rest falls short.
    """
    service = record.subject.service
    unstated = _unstated(rule.loads, service)
    if not rule.loads or service is None:
        return unstated
    moments = {one.says: _moments(record, service.loads, _asked(one, service)) for one in rule.loads}
    says = max(moments, key=lambda name: float(np.abs(moments[name]).max()))
    place = largest_place(moments[says])
    asked = float(moments[says][place])
    if asked == 0.0:
        return unstated or "the loads of service that the book states do not bend the member"
    standing = _moments(record, service.loads, service.factors(*DEAD, standing=True))[place]
    test = _of_stage(record, record.heaviest.full[0])[place]
    sign = float(np.sign(asked))
    found = Adequacy(
        combination=says,
        section=float(_stations(record)[0][place]),
        asked=abs(asked),
        reached=float(standing + test) * sign,
        in_place=float(standing) * sign,
        enough=enough,
        unstated=unstated,
    )
    return unstated if unstated and found.met else found


def _unstated(loads: Sequence[Combination], service: Service | None) -> str:
    """What of the loads that combinations count the book does not state, or what it states that none counts."""
    if service is None:
        return "the book states no load of service (nature, in the table of loads)"
    counted = [nature for nature in NATURES if any(one.factor(nature) for one in loads)]
    for said, part in (("dead", set(DEAD)), ("imposed", {*counted} - {*DEAD})):
        if part & {*counted} and not part & {*service.natures}:
            names = " or ".join(nature for nature in counted if nature in part)
            return f"the rule counts {said} load, of which the book states none (nature {names}, in the table of loads)"
    other = [nature for nature in dict.fromkeys(service.natures) if nature not in counted]
    return f"no combination of the rule counts the {' and '.join(other)} load of the book" if other else ""


def design_share(record: Record, stage: int) -> float | None:
    """The moment of a stage over that of the design load, where the latter bends the recorded member most.

    The design load is all of service, unfactored, less the dead load in place, from which deflections are read. None
    where the book states none of it.
    """
    service = record.subject.service
    if service is None:
        return None
    factors = service.factors(*service.natures) - service.factors(*DEAD, standing=True)
    asked = _moments(record, service.loads, factors)
    place = largest_place(asked)
    return float(_of_stage(record, stage)[place] / asked[place]) if asked[place] else None


def _stations(record: Record) -> tuple[Array, Flags]:
    """Where moments of the test and of service are compared (m), and on which side of a jump."""
    service = record.subject.service
    return stations_along(record.subject.member, record.subject.loads, *([service.loads] if service else []))


def _moments(record: Record, loads: Loads, factors: Array) -> Array:
    """Moment (N m) of the recorded member at the stations (S,) under so much of each case (C,)."""
    member, (at, left) = record.subject.member, _stations(record)
    of_all: Array = solved_at(member, loads, factors[None], recorded(member), at, left).moment[0, 0]
    return of_all


def _of_stage(record: Record, stage: int) -> Array:
    return _moments(record, record.subject.loads, record.subject.stages[stage].factors)


def _asked(one: Combination, service: Service) -> Array:
    out = np.zeros(service.loads.cases)
    for nature in dict.fromkeys(service.natures):
        out += one.factor(nature) * service.factors(nature)
    return out
