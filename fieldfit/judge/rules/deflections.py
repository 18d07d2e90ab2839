"""Deflection limits in common use: each a denominator, a component of the deflection, and the load it is of.

A load test is not held against a service limit as it stands: the fitted member is put under the load of service that
the book states, or the limit is refused. What a limit counts beside (creep, camber) a load test does not show; there
the part that it does show can only tell that the limit is exceeded.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import Literal

from fieldfit.fieldbook.published import DYNAMIC
from fieldfit.fit import Reconciliation, Sagging, sag_under
from fieldfit.judge.checks import Check, unassessed
from fieldfit.judge.rules.declare import MARKS_SAID, Mark
from fieldfit.judge.spans import judged, why_no_span, why_not
from fieldfit.observe import DEAD, Limit, Service

__all__ = ["DEFLECTIONS", "Deflection", "deflection_checks"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Deflection:
    """A deflection limit: length over ``denominator`` (None: the engineer must say), at most ``cap`` (m).

    ``natures`` are the loads whose immediate deflection is meant, times ``factor``, ``still`` those that count as they
    are where there are any; ``beside`` says what else the limit counts, so that the immediate part alone can show only
    that it is exceeded, and ``less`` that something is taken off, so that it cannot show even that. A cantilever counts
    its own length (from memory), or ``doubles`` it; ``of`` says where the standard limits cantilevers apart.
    """

    name: str
    denominator: float | None
    natures: tuple[str, ...]
    source: str
    edition: str
    mark: Mark = "seen"
    factor: float = 1.0
    still: tuple[str, ...] = ()
    cap: float | None = None
    beside: str = ""
    less: bool = False
    doubles: bool = False
    of: Literal["any", "spans", "cantilevers"] = "any"

    def is_of(self, span: Sagging) -> bool:
        """Whether it limits a span of this sort at all."""
        return self.of == "any" or span.is_overhang == (self.of == "cantilevers")

    def limit(self, length: float, denominator: float) -> float:
        """The largest deflection (m) of a span of this length (m)."""
        plain = length / denominator
        return plain if self.cap is None else min(plain, self.cap)


def _apart(name: str) -> Literal["spans", "cantilevers"]:
    """What a limit of a standard is of that has others for cantilevers."""
    return "cantilevers" if "cantilever" in name else "spans"


def _aci(name: str, n: float, natures: tuple[str, ...], beside: str = "") -> Deflection:
    return Deflection(
        name=f"ACI 318-19 {name}",
        denominator=n,
        natures=natures,
        source="copy of ACI 318-19, page 456",
        edition="ACI 318-19, table 24.2.2",
        beside=beside,
    )


def _ibc(name: str, n: float, natures: tuple[str, ...], beside: str = "") -> Deflection:
    return Deflection(
        name=f"IBC {name}",
        denominator=n,
        natures=natures,
        source="text copy of IBC table 1604.3",
        edition="IBC, table 1604.3",
        beside=beside,
        doubles=True,
    )


def _aashto(name: str, n: float, mark: Mark = "seen") -> Deflection:
    return Deflection(
        name=f"AASHTO {name}",
        denominator=n,
        natures=("vehicle",),
        factor=1.33,
        still=("live",) if "pedestrian" in name else (),
        source="page copy of AASHTO LRFD 2.5.2.6.2; the dynamic allowance of 33 % from memory; optional guidance",
        edition="AASHTO LRFD, 2.5.2.6.2",
        mark=mark,
        of="any" if "timber" in name else _apart(name),
    )


def _bs_5950(name: str, n: float, mark: Mark) -> Deflection:
    return Deflection(
        name=f"BS 5950-1 imposed {name}",
        denominator=n,
        natures=("live", "roof"),
        source="article on Eurocode design factors and limits (imposed load only); numbers from memory",
        edition="BS 5950-1, table 8",
        mark=mark,
        of=_apart(name),
    )


def _eurocode(name: str, natures: tuple[str, ...], source: str, edition: str, beside: str = "") -> Deflection:
    less = "precamber" in beside
    return Deflection(
        name=name, denominator=None, natures=natures, source=source, edition=edition, beside=beside, less=less
    )


def _housing(name: str, cap: float) -> Deflection:
    return Deflection(
        name=f"UK housing joists {name}",
        denominator=1 / 0.003,
        natures=(*DEAD, "live"),
        cap=cap,
        source="UK house-building standards, 6.4.9: 0.003 of the span, under dead and imposed load",
        edition="2020",
    )


TIMBER = "EN 1995-1-1, table 7.2, from memory: l/300 to l/500 for w inst, l/250 to l/350 for w net fin, l/150 to l/300 "
TIMBER += "for w fin"
STEEL = "Steel buildings in Europe, part 4, on EN 1990 A1.4.3; values are national"
LATER = "creep after attachment"
APART = {
    "spans": "the limit is of spans between supports: the standard has another for cantilevers",
    "cantilevers": "the limit is of cantilevers: the standard has others for spans between supports",
}
OWN = "of a cantilever its own length is taken (from memory)"
_ALL = (
    _aci("floor live l/360", 360.0, ("live",)),
    _aci("flat roof l/180", 180.0, ("roof",)),
    _aci("attached likely damaged l/480", 480.0, ("live", "roof"), LATER),
    _aci("attached not likely damaged l/240", 240.0, ("live", "roof"), LATER),
    _ibc("floor live l/360", 360.0, ("live",)),
    _ibc("floor dead and live l/240", 240.0, ("live",), "creep under dead load"),
    _ibc("roof plaster ceiling l/360", 360.0, ("roof",)),
    _ibc("roof other ceiling l/240", 240.0, ("roof",)),
    _ibc("roof no ceiling l/180", 180.0, ("roof",)),
    _ibc("roof plaster ceiling dead and live l/240", 240.0, ("roof",), "creep under dead load"),
    _ibc("roof other ceiling dead and live l/180", 180.0, ("roof",), "creep under dead load"),
    _ibc("roof no ceiling dead and live l/120", 120.0, ("roof",), "creep under dead load"),
    _ibc("farm building dead and live l/180", 180.0, ("live", "roof"), "creep under dead load"),
    _ibc("greenhouse dead and live l/120", 120.0, ("live", "roof"), "creep under dead load"),
    _aashto("vehicle l/800", 800.0),
    _aashto("vehicle and pedestrian l/1000", 1000.0),
    _aashto("vehicle on cantilever l/300", 300.0),
    _aashto("vehicle and pedestrian on cantilever l/375", 375.0),
    _aashto("timber vehicle l/425", 425.0, "memory M"),
    _bs_5950("brittle l/360", 360.0, "memory H"),
    _bs_5950("other l/200", 200.0, "memory H"),
    _bs_5950("cantilever l/180", 180.0, "memory H"),
    _eurocode("EN 1995-1-1 w inst", (*DEAD, "live", "roof"), TIMBER, "EN 1995-1-1, table 7.2"),
    _eurocode(
        "EN 1995-1-1 w net fin",
        (*DEAD, "live", "roof"),
        TIMBER,
        "EN 1995-1-1, table 7.2",
        "creep, and the precamber is taken off",
    ),
    _eurocode("EN 1995-1-1 w fin", (*DEAD, "live", "roof"), TIMBER, "EN 1995-1-1, table 7.2", "creep"),
    _eurocode("EN 1990 w1", DEAD, STEEL, "EN 1990, A1.4.3"),
    _eurocode("EN 1990 w2", (), STEEL, "EN 1990, A1.4.3", "the long-term part w2"),
    _eurocode("EN 1990 w3", ("live", "roof"), STEEL, "EN 1990, A1.4.3"),
    _eurocode("EN 1990 w2 and w3", ("live", "roof"), STEEL, "EN 1990, A1.4.3", "the long-term part w2"),
    _eurocode(
        "EN 1990 w max",
        (*DEAD, "live", "roof"),
        STEEL,
        "EN 1990, A1.4.3",
        "the long-term part w2, and the precamber is taken off",
    ),
    Deflection(
        name="EN 1992-1-1 sag l/250",
        denominator=250.0,
        natures=DEAD,
        source="guide on Eurocode 2 deflections: quasi-permanent load",
        edition="EN 1992-1-1, 7.4.1",
        beside="creep, and the lasting part of the variable load",
    ),
    Deflection(
        name="EN 1992-1-1 after construction l/500",
        denominator=500.0,
        natures=(),
        source="guide on Eurocode 2 deflections: quasi-permanent load",
        edition="EN 1992-1-1, 7.4.1",
        beside="creep, and the lasting part of the variable load",
    ),
    Deflection(
        name="AS 3600 total l/250",
        denominator=250.0,
        natures=(*DEAD, "live"),
        source="from memory",
        edition="AS 3600",
        mark="memory M",
        beside="creep",
        doubles=True,  # the table has numbers twice as large for cantilevers
    ),
    Deflection(
        name="AS 3600 incremental l/500",
        denominator=500.0,
        natures=("live",),
        source="from memory",
        edition="AS 3600",
        mark="memory M",
        beside=LATER,
        doubles=True,
    ),
    _housing("strutted", 0.014),
    _housing("unstrutted", 0.012),
)
DEFLECTIONS: Mapping[str, Deflection] = MappingProxyType({one.name: one for one in _ALL})


def deflection_checks(found: Reconciliation, limit: Limit) -> list[Check]:
    """A published deflection limit on every span it is asked of, by the fitted member under its load of service."""
    asked = _with_own_factor(DEFLECTIONS[limit.limit], found.subject.limits)
    denominator = asked.denominator if limit.at_least is None else limit.at_least
    source = _source(asked, limit)
    service, where = found.subject.service, limit.where
    refused = _refused(asked, denominator, service)
    if refused or denominator is None or service is None:
        return [_unassessed(asked, source, where or "whole", refused)]
    factors = asked.factor * service.factors(*asked.natures) + service.factors(*asked.still)
    spans = sag_under(found, service.loads, factors)
    there = [one for one in spans if where in (None, *one.names)]
    held = [one for one in there if asked.is_of(one)]
    said = _loads_said(asked, service) + ("" if len(held) == len(there) else f"; {asked.of} alone are held to it")
    if held:
        return [_check(found, asked, limit, one, denominator, said) for one in held]
    return [
        _unassessed(asked, source, where or "whole", APART[asked.of] if there else why_no_span(found, where, spans))
    ]


def _with_own_factor(asked: Deflection, limits: Sequence[Limit]) -> Deflection:
    """The limit with the factor for dynamic effects that the book gives for it, if it does."""
    given = [row.at_least for row in limits if (row.limit, row.where) == (asked.name, DYNAMIC) and row.at_least]
    if not given:
        return asked
    return replace(asked, factor=given[0], source=f"{asked.source} (dynamic factor given in the field book)")


def _refused(asked: Deflection, denominator: float | None, service: Service | None) -> str:
    """Why a limit cannot be held against this book at all; empty where it can."""
    if denominator is None:
        return "the standard gives a range or leaves the number to the nation: write it in the column at least"
    if not asked.natures:
        return f"the limit is of {asked.beside}: a load test does not show it"
    if asked.less:
        return f"the limit also counts {asked.beside}: a load test does not show it"
    dead = tuple(nature for nature in asked.natures if nature in DEAD)
    others = tuple(nature for nature in (*asked.natures, *asked.still) if nature not in DEAD)
    for part in (dead, others):
        if part and not {*part} & {*(() if service is None else service.natures)}:
            return (
                f"the limit counts {' or '.join(part)} load in service, of which the book states none (nature, in the "
                "table of loads); a test load is not held against it"
            )
    return ""


def _source(asked: Deflection, limit: Limit, span: Sagging | None = None) -> str:
    """Where a limit was read, how sure its number is, and what length is taken of a cantilever."""
    given = "number given in the field book" if limit.at_least is not None else MARKS_SAID[asked.mark]
    arm = "of a cantilever twice its length is taken" if asked.doubles else OWN
    return f"{asked.source}{f' ({given})' if given else ''}{f'; {arm}' if span and span.is_overhang else ''}"


def _loads_said(asked: Deflection, service: Service) -> str:
    """The loads of service that a deflection is worked out for, of those that the limit counts."""
    own, still = (
        ", ".join(nature for nature in part if nature in service.natures) for part in (asked.natures, asked.still)
    )
    factor = f", times {asked.factor:g} for dynamic effects" if asked.factor != 1.0 else ""
    return ", and ".join(
        part for part in (f"{own} load{factor}" if own else "", f"{still} load" if still else "") if part
    )


def _check(
    found: Reconciliation, asked: Deflection, limit: Limit, span: Sagging, denominator: float, loads: str
) -> Check:
    one = judged(span, None, asked.limit(span.doubled if asked.doubles else span.length, denominator))
    refused = why_not(found, span)
    held = replace(
        _unassessed(asked, _source(asked, limit, span), span.names[0], refused or ""),
        value=one.extreme.size,
        u=one.extreme.u,
        low=one.extreme.low,
        high=one.extreme.high,
        at_most=one.at_most,
    )
    if refused:
        return held
    if asked.beside and one.verdict != "beyond":
        reason = f"the limit also counts {asked.beside}: the immediate part alone does not exceed it"
        return replace(held, reason=one.told(reason))
    said = f"by the fitted member under {loads}"
    return replace(held, verdict=one.verdict, probability_within=one.probability_within, reason=one.told(said))


def _unassessed(asked: Deflection, source: str, where: str, reason: str) -> Check:
    return replace(unassessed(asked.name, where, "deflection", source, reason), edition=asked.edition)
