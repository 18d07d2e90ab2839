"""Make this invented field book again: `python datasets/concrete_floor_retest/make.py [seed] [folder]`.

Two concrete floor beams under water ballast, in four increments, held 24 h, read again 24 h after unloading. F1 misses
both gates of ACI 318 in the first test and recovers in a repeat four days later; F2 recovers at once. The elastic
part comes from the direct-stiffness beam of datasets/independent.py; creep and what is left are shares of it, as
stated here.
"""

import random
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))
from independent import Beam, Support, solve
from writing import main, write_tables, write_truth

LENGTH, EI, DEPTH = 7.2, 95_000.0, 400.0  # m, kN m2 on record (gross section), mm
BALLAST = 16.0  # kN/m at full load: 1.15 D + 1.5 L asks for 15.75 beside the dead load in place
SERVICE = {"own weight": (12.0, "self-weight"), "screed": (3.0, "superimposed dead"), "imposed": (9.0, "live")}  # kN/m
GAUGES = {"D1": 1.8, "D2": 2.7, "D3": 3.6, "D4": 4.5, "D5": 5.4}  # m
U_DIAL, U_LOAD = 0.04, 1.0  # mm, %
TRUE_EI = {"F1": 0.78, "F2": 0.86}  # over recorded
# creep under the load kept on, left at once and left a day after, as shares of the elastic deflection at full load;
# of the repeat as against its own start, where REST is left of the first test
FIRST = {"F1": (0.14, 0.42, 0.33), "F2": (0.10, 0.22, 0.13)}
SECOND, REST = {"F1": (0.05, 0.14, 0.09)}, 0.31
#: stage, role, cycle, share of the ballast, start, end
STAGES = [
    ("zero", "zero", "1", 0.0, "2031-03-03T07:30", "2031-03-03T08:00"),
    ("25 %", "load", "1", 0.25, "2031-03-03T08:30", ""),
    ("50 %", "load", "1", 0.50, "2031-03-03T09:30", ""),
    ("75 %", "load", "1", 0.75, "2031-03-03T10:30", ""),
    ("100 %", "load", "1", 1.0, "2031-03-03T11:30", ""),
    ("100 % after 24 h", "hold", "1", 1.0, "2031-03-04T11:30", ""),
    ("unloaded", "unload", "1", 0.0, "2031-03-04T12:30", ""),
    ("24 h after unloading", "recovery", "1", 0.0, "2031-03-05T12:30", ""),
    ("zero again", "zero", "2", 0.0, "2031-03-08T12:00", "2031-03-08T12:30"),
    ("again 50 %", "load", "2", 0.50, "2031-03-08T13:00", ""),
    ("again 100 %", "load", "2", 1.0, "2031-03-08T14:00", ""),
    ("again 100 % after 24 h", "hold", "2", 1.0, "2031-03-09T14:00", ""),
    ("again unloaded", "unload", "2", 0.0, "2031-03-09T15:00", ""),
    ("24 h after unloading again", "recovery", "2", 0.0, "2031-03-10T15:00", ""),
]


def elastic(member: str) -> list[float]:
    """Deflection (mm) at the gauges under the whole ballast."""
    beam = Beam(
        LENGTH,
        TRUE_EI[member] * EI,
        [Support(0.0), Support(LENGTH)],
        even=BALLAST,
        stations=tuple(GAUGES.values()),
    )
    return [1000 * float(value) for value in solve(beam).deflection]


def shares(member: str) -> dict[str, float]:
    """Deflection in every stage that was read, as a share of the elastic one at full load."""
    creep, at_once, after = FIRST[member]
    found = {name: share for name, role, cycle, share, *_ in STAGES if cycle == "1" and role in ("zero", "load")}
    found |= {"100 % after 24 h": 1 + creep, "unloaded": at_once, "24 h after unloading": after}
    if member in SECOND:
        creep, at_once, later = SECOND[member]
        found |= {"zero again": REST, "again 50 %": REST + 0.5, "again 100 %": REST + 1.0}
        found |= {"again 100 % after 24 h": REST + 1.0 + creep}
        found |= {"again unloaded": REST + at_once, "24 h after unloading again": REST + later}
    return found


def readings(seed: int) -> list[list[object]]:
    noise = random.Random(seed)
    rows: list[list[object]] = [["member", "stage", *(f"{name} [mm]" for name in GAUGES)]]
    for member in TRUE_EI:
        weighed = 1 + noise.gauss(0, U_LOAD / 100)
        zeros = [noise.uniform(0.5, 4.5) for _ in GAUGES]
        whole = elastic(member)
        for stage, share in shares(member).items():
            read = [weighed * share * w + z + noise.gauss(0, U_DIAL) for w, z in zip(whole, zeros, strict=True)]
            rows.append([member, stage, *(f"{value:.2f}" for value in read)])
    return rows


def tables(seed: int) -> dict[str, list[list[object]]]:
    return {
        "job": [
            ["item", "value"],
            ["structure", "floor beams F1 and F2 of a printing works, before heavier machines (invented)"],
            ["instruments", "dial gauges to 0.01 mm on a frame standing on the floor below"],
            ["loads", "water basins, by their level, 1 %; concrete more than 56 days old"],
        ],
        "members": [
            ["member", "length [m]", "EI [kN m2]", "depth [mm]", "tolerance [%]", "note"],
            *([member, LENGTH, EI, DEPTH, 35, "gross section"] for member in TRUE_EI),
        ],
        "loads": [
            ["member", "load case", "from [m]", "to [m]", "intensity [kN/m]", "u [%]", "nature"],
            ["*", "ballast", 0, LENGTH, BALLAST, U_LOAD, ""],
            *(["*", name, 0, LENGTH, size, "", nature] for name, (size, nature) in SERVICE.items()),
        ],
        "stages": [
            ["member", "stage", "load case", "factor", "role", "cycle", "start", "end"],
            *(["*", n, "ballast" if f else "", f or "", role, c, start, end] for n, role, c, f, start, end in STAGES),
        ],
        "gauges": [
            ["member", "gauge", "at [m]", "u [mm]", "resolution [mm]"],
            *(["*", name, at, U_DIAL, 0.01] for name, at in GAUGES.items()),
        ],
        "limits": [
            ["member", "limit", "where", "at least"],
            ["*", "ACI 318-14", "", ""],
            ["*", "ACI 318-19 floor live l/360", "", ""],
        ],
        "inspections": [
            ["member", "finding", "found", "remark"],
            ["*", "crushing or spalling", "no", "looked at from below at every stage"],
            ["*", "sign of failure", "no", ""],
        ],
        "readings": readings(seed),
    }


def make(folder: Path, seed: int) -> None:
    """Write the tables and the truth to a folder."""
    write_tables(folder, tables(seed))
    true = [{"member": m, "quantity": "EI", "where": "whole", "of": "ratio", "value": r} for m, r in TRUE_EI.items()]
    left = {"first test": {m: round(v[2] / (1 + v[0]), 4) for m, v in FIRST.items()}}
    left["repeat"] = {m: round(v[2] / (1 + v[0]), 4) for m, v in SECOND.items()}
    results = {"F1": {"ACI 318-14": "passes on repeat"}, "F2": {"ACI 318-14": "passes"}}
    told = {"residual over maximum": left, "results": results}
    write_truth(folder, {"seed": seed, "estimates": true, "planted": [], "sound": ["F1", "F2"], **told})


if __name__ == "__main__":
    main(make, __file__, 1)
