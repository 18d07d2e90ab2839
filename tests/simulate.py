"""Records whose truth is known: readings made by the independent finite-element model, as field books.

Each cause is a recorded member with gauges and unknowns, and several truths that it may really have, at least half of
them at a bound (pinned, fixed, rigid). ``simulate`` makes one field book of many members, the truths in turn, and says
what the truth of every member is.
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from tests.books import Table, write_book
from tests.outside import hermite

__all__ = ["CAUSES", "Cause", "Truth", "simulate"]

Array = NDArray[np.float64]
EI = 20e6  # N m2 on record, of every member here
RIGID = np.inf


@dataclass(frozen=True, kw_only=True)
class Gauge:
    name: str
    at: float
    measures: str = "deflection"
    below: float = 0.0  # m, of a strain gauge


@dataclass(frozen=True, kw_only=True)
class Truth:
    """What a member is really like. Values are in the unit of ``results.json``'s estimates, SI."""

    ratio: float = 1.0
    zone_ratio: float = 1.0
    fixity: Mapping[str, float] = field(default_factory=dict)
    bearing: Mapping[str, float] = field(default_factory=dict)  # N/m
    settlement: Mapping[str, float] = field(default_factory=dict)  # m down, in the loaded stages
    shift: float = 0.0  # m
    tilt: float = 0.0
    load: float = 1.0
    camber: float = 0.0
    creep: float = 0.0


@dataclass(frozen=True, kw_only=True)
class Cause:
    """A member on record, how it was read, and its possible truths; ``drawn`` redraws a truth's known uncertainties."""

    name: str
    length: float
    supports: Mapping[str, float]
    loads: Mapping[str, Sequence[tuple[float, float]]]  # case: (at m, force N down)
    stages: Mapping[str, str]  # stage: load case, empty for a zero stage
    gauges: Sequence[Gauge]
    u: Mapping[str, float]  # SI, by what is measured
    truths: Sequence[Truth]
    unknowns: Sequence[Sequence[object]] = ()
    targets: Sequence[tuple[str, str, Callable[[Truth], float]]] = ()
    zone: tuple[float, float] | None = None
    load_u: float = 0.0
    give_u: bool = True
    drawn: Callable[[Truth, np.random.Generator], Truth] = lambda truth, _: truth


UNITS = {"deflection": ("mm", 1e3), "level": ("m", 1.0), "rotation": ("mrad", 1e3), "strain": ("microstrain", 1e6)}


def true_readings(cause: Cause, truth: Truth) -> Array:
    """Readings without error, (stages, gauges), SI, in the usual sense of each gauge."""
    rows = []
    for case in cause.stages.values():
        solution = hermite.solve(_beam(cause, truth, case))
        rows.append([_read(cause, truth, solution, gauge, bool(case)) for gauge in cause.gauges])
    return np.array(rows)


def _beam(cause: Cause, truth: Truth, case: str) -> hermite.Beam:
    places = list(cause.supports.items())
    supports = []
    for name, at in places:
        reach = min((abs(at - other) for key, other in places if key != name), default=cause.length)
        fixity = truth.fixity.get(name, 0.0)
        spring = np.inf if fixity == 1 else 3 * EI / reach * fixity / (1 - fixity)
        down = truth.settlement.get(name, 0.0) if case else 0.0
        vertical = truth.bearing.get(name, RIGID)
        supports.append(hermite.Support(at, vertical, spring, -down))
    zones = [hermite.Zone(*cause.zone, EI * truth.zone_ratio)] if cause.zone else []
    forces = [hermite.Force(at, -force * truth.load) for at, force in cause.loads.get(case, ())]
    return hermite.Beam(length=cause.length, EI=EI * truth.ratio, supports=supports, zones=zones, forces=forces)


def _read(cause: Cause, truth: Truth, solution: hermite.Solution, gauge: Gauge, loaded: bool) -> float:
    at = np.array(gauge.at)
    if gauge.measures == "rotation":
        return float(solution.rotation(at))
    if gauge.measures == "strain":
        return float(solution.moment(at)) / (EI * truth.ratio) * gauge.below
    up = float(solution.deflection(at))
    datum = (truth.shift + truth.tilt * gauge.at) * loaded
    if gauge.measures == "deflection":
        return -up + datum
    share = gauge.at / cause.length
    return (1 + truth.creep) * up + truth.camber * 4 * share * (1 - share) + datum


def simulate(folder: Path, cause: Cause, members: int, seed: int) -> list[Truth]:
    """Write a field book of so many members to ``folder``; return the truth of each."""
    random = np.random.default_rng(seed)
    truths = [cause.drawn(cause.truths[n % len(cause.truths)], random) for n in range(members)]
    known: dict[int, Array] = {}
    rows: list[list[object]] = [["member", "stage", "gauge", "value"]]
    header = {kind: f"{kind} [{unit}]" for kind, (unit, _) in UNITS.items()}
    kinds = sorted({gauge.measures for gauge in cause.gauges})
    zeros = random.normal(0, 1e-3, len(cause.gauges)) * ("" in cause.stages.values())
    rows = [["member", "stage", "gauge", *(header[kind] for kind in kinds)]]
    for number, truth in enumerate(truths):
        if id(truth) not in known:
            known[id(truth)] = true_readings(cause, truth)
        true = known[id(truth)]
        for stage, values in zip(cause.stages, true, strict=True):
            for gauge, value, zero in zip(cause.gauges, values, zeros, strict=True):
                offset = zero if gauge.measures == "deflection" else 0.0
                read = (value + offset + random.normal(0, cause.u[gauge.measures])) * UNITS[gauge.measures][1]
                cells = [f"{read:.9g}" if kind == gauge.measures else "" for kind in kinds]
                rows.append([f"m{number}", stage, gauge.name, *cells])
    write_book(folder, {**_tables(cause, members), "readings": rows})
    return truths


def _tables(cause: Cause, members: int) -> dict[str, Table]:
    tables: dict[str, Table] = {
        "members": [
            ["member", "length [m]", "EI [N m2]", "tolerance [%]"],
            *([f"m{number}", cause.length, EI, 10] for number in range(members)),
        ],
        "supports": [["member", "support", "at [m]"], *(["*", name, at] for name, at in cause.supports.items())],
        "loads": [
            ["member", "load case", "from [m]", "force [N]", "u [%]"],
            *(
                ["*", case, at, force, 100 * cause.load_u or ""]
                for case, forces in cause.loads.items()
                for at, force in forces
            ),
        ],
        "stages": [
            ["member", "stage", "load case", "role"],
            *(["*", stage, case, "load" if case else "zero"] for stage, case in cause.stages.items()),
        ],
        "gauges": _gauges(cause),
    }
    if cause.zone:
        tables["zones"] = [["member", "zone", "from [m]", "to [m]", "EI [N m2]"], ["*", "soft", *cause.zone, EI]]
    if cause.unknowns:
        tables["unknowns"] = [
            ["member", "unknown", "where", "stage", "expected", "expected u"],
            *(["*", *row] for row in cause.unknowns),
        ]
    return tables


def _gauges(cause: Cause) -> Table:
    kinds = sorted({gauge.measures for gauge in cause.gauges})
    u = [f"u [{UNITS[kind][0]}]" for kind in kinds] if cause.give_u else []
    rows: list[list[object]] = [["member", "gauge", "at [m]", "measures", "below neutral axis [m]", *u]]
    for gauge in cause.gauges:
        values = [cause.u[kind] * UNITS[kind][1] if kind == gauge.measures else "" for kind in kinds if cause.give_u]
        rows.append(["*", gauge.name, gauge.at, gauge.measures, gauge.below or "", *values])
    return rows


def _deflections(*places: float) -> list[Gauge]:
    return [Gauge(name=f"D{number}", at=at) for number, at in enumerate(places, start=1)]


SIMPLE = {"A": 0.0, "B": 8.0}
TWO_SPANS = {"A": 0.0, "B": 8.0, "C": 16.0}
U = {"deflection": 0.05e-3, "level": 0.3e-3, "rotation": 0.01e-3, "strain": 1e-6}


def _ratio(truth: Truth) -> float:
    return truth.ratio


EI_ONLY = (("EI", "whole", _ratio),)

one_EI = Cause(
    name="EI of the whole member",
    length=8.0,
    supports=SIMPLE,
    loads={"P": [(3.0, 40e3)], "Q": [(5.0, 30e3)]},
    stages={"P": "P", "Q": "Q"},
    gauges=_deflections(2.0, 4.0, 6.0),
    u={**U, "deflection": 0.3e-3},
    truths=[Truth(ratio=ratio) for ratio in (0.7, 0.9, 1.0, 1.2)],
    targets=EI_ONLY,
)
by_zone = replace(
    one_EI,
    name="EI by zone",
    zone=(3.0, 5.0),
    gauges=_deflections(1.0, 2.5, 4.0, 5.5, 7.0),
    u=U,
    truths=[Truth(ratio=1.0, zone_ratio=z) for z in (0.5, 1.0, 1.3)],
    unknowns=[["EI", "", "", "", ""], ["EI", "soft", "", "", ""]],
    targets=(("EI", "whole", _ratio), ("EI", "soft", lambda truth: truth.zone_ratio)),
)


def _fixity(name: str) -> tuple[str, str, Callable[[Truth], float]]:
    return "rotational restraint", name, lambda truth: truth.fixity.get(name, 0.0)


one_restraint = replace(
    one_EI,
    name="EI and one restraint",
    gauges=[*_deflections(1.0, 2.5, 4.0, 5.5, 7.0), Gauge(name="R", at=0.0, measures="rotation")],
    u={**U, "rotation": 0.03e-3},
    truths=[Truth(ratio=0.9, fixity={"A": r}) for r in (0.0, 0.3, 0.6, 1.0)],
    unknowns=[["EI", "", "", "", ""], ["rotational restraint", "A", "", "", ""]],
    targets=(*EI_ONLY, _fixity("A")),
)
two_restraints = replace(
    one_EI,
    name="EI and two restraints",
    gauges=_deflections(1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0),
    truths=[Truth(fixity={"A": a, "B": b}) for a, b in ((0, 0), (0.3, 0.6), (0.4, 0.2), (1, 1))],
    u={**U, "deflection": 0.1e-3},
    unknowns=[
        ["EI", "", "", "", ""],
        ["rotational restraint", "A", "", "", ""],
        ["rotational restraint", "B", "", "", ""],
    ],
    targets=(*EI_ONLY, _fixity("A"), _fixity("B")),
)
bearing = Cause(
    name="EI and a bearing",
    length=16.0,
    supports=TWO_SPANS,
    loads={"P": [(4.0, 60e3)], "Q": [(12.0, 60e3)]},
    stages={"P": "P", "Q": "Q"},
    gauges=_deflections(2.0, 4.0, 6.0, 8.0, 10.0, 12.0, 14.0),
    u={**U, "deflection": 0.1e-3},
    truths=[Truth(ratio=0.95, bearing={"B": k}) for k in (RIGID, RIGID, 40e6, 10e6)],
    unknowns=[["EI", "", "", "", ""], ["bearing stiffness", "B", "", "", ""]],
    targets=(*EI_ONLY, ("bearing stiffness", "B", lambda truth: truth.bearing["B"])),
)
settlement = replace(
    bearing,
    name="settlement of a continuous beam",
    truths=[Truth(ratio=r, settlement={"B": s}) for r, s in ((0.9, 0.0), (1.0, 0.002), (1.1, 0.0), (0.8, 0.004))],
    unknowns=[["EI", "", "", "", ""], ["settlement", "B", "P", "", ""], ["settlement", "B", "Q", "", ""]],
    targets=(*EI_ONLY, ("settlement", "B", lambda truth: truth.settlement["B"])),
)
load_prior = replace(
    one_EI,
    name="load with a known uncertainty",
    load_u=0.05,
    stages={"P": "P"},
    loads={"P": [(3.0, 40e3)]},
    u={**U, "deflection": 0.2e-3},
    drawn=lambda truth, random: replace(truth, load=float(1 + 0.05 * random.normal())),
)
datum = replace(
    one_EI,
    name="datum shift and tilt",
    stages={"before": "", "P": "P"},
    gauges=_deflections(0.0, 2.0, 4.0, 6.0, 8.0),
    u={**U, "deflection": 0.2e-3},
    truths=[Truth(ratio=0.9, shift=0.002, tilt=0.0005), Truth(ratio=1.0), Truth(ratio=1.1, shift=-0.001)],
    unknowns=[["EI", "", "", "", ""], ["datum shift", "", "P", "", ""], ["datum tilt", "", "P", "", ""]],
    targets=(*EI_ONLY, ("datum shift", "whole", lambda truth: truth.shift)),
)
zeros = replace(one_EI, name="zeros and two stages", stages={"before": "", "P": "P", "Q": "Q"})
mixed = replace(
    one_restraint,
    name="mixed kinds of gauge",
    gauges=[
        *_deflections(2.0, 4.0, 6.0),
        Gauge(name="R", at=0.0, measures="rotation"),
        Gauge(name="top", at=4.5, measures="strain", below=-0.2),
        Gauge(name="bottom", at=4.5, measures="strain", below=0.2),
    ],
    u={**U, "deflection": 0.1e-3, "rotation": 0.05e-3, "strain": 4e-6},
)
survey = Cause(
    name="shape survey with camber",
    length=8.0,
    supports=SIMPLE,
    loads={"dead": [(at, 12e3) for at in (1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0)]},
    stages={"survey": "dead"},
    gauges=[Gauge(name=f"L{n}", at=float(n), measures="level") for n in range(9)],
    u=U,
    truths=[Truth(ratio=ratio, creep=0.0) for ratio in (0.7, 0.9, 1.0, 1.2)],
    unknowns=[["EI", "", "", "", ""], ["camber", "", "", 10, 2], ["creep factor", "", "", 0.5, 0.1]],
    targets=EI_ONLY,
    drawn=lambda truth, random: replace(
        truth, camber=float(0.010 + 0.002 * random.normal()), creep=float(0.5 + 0.1 * random.normal())
    ),
)
scatter = replace(one_EI, name="EI, u from scatter", give_u=False)
load_scatter = replace(load_prior, name="load with a known uncertainty, u from scatter", give_u=False)
scatter_restraints = replace(two_restraints, name="EI and two restraints, u from scatter", give_u=False)

CAUSES = (
    one_EI,
    by_zone,
    one_restraint,
    two_restraints,
    bearing,
    settlement,
    load_prior,
    datum,
    zeros,
    mixed,
    survey,
    scatter,
    load_scatter,
    scatter_restraints,
)
