"""Make this invented field book again: `python datasets/cyclic_floor_beams/make.py [seed] [folder]`.

Two concrete beams loaded by jacks at the third points in three pairs of equal cycles, A to F, down to a seating load
between them. C1 cracks above half of the load: its secant falls by more than a quarter, while what stays behind is
small. C2 stays nearly linear. The elastic part comes from the direct-stiffness beam of datasets/independent.py, with
the secant EI of each peak; what is left is a share of it, as stated here.
"""

import random
import sys
from collections.abc import Sequence
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))
from independent import Beam, Support, solve
from writing import main, write_tables, write_truth

LENGTH, EI, DEPTH = 6.6, 60_000.0, 450.0  # m, kN m2 on record, mm
JACKS = (2.2, 4.4)  # m
FULL, SEATING = 90.0, 9.0  # kN a jack
GAUGES = {"L1": 1.65, "L2": 2.475, "L3": 3.3, "L4": 4.125, "L5": 4.95}  # m
U_GAUGE, U_LOAD = 0.008, 1.0  # mm, %
PEAKS = {"A": 0.5, "B": 0.5, "C": 0.75, "D": 0.75, "E": 1.0, "F": 1.0}  # of the full load
TRUE_EI = {"C1": 0.95, "C2": 0.92}  # over recorded, in the first cycle
SOFTER = {"C1": {0.5: 1.0, 0.75: 0.80, 1.0: 0.68}, "C2": {0.5: 1.0, 0.75: 0.98, 1.0: 0.95}}  # secant over the first
LEFT = (0.10, 0.025)  # of the maximum of a cycle: the first of a pair, the second
AFTER = 0.5  # of what a cycle leaves: what is left a day after the last


def deflection(member: str, load: float, softer: float, weighed: Sequence[float]) -> list[float]:
    """Deflection (mm) at the gauges under a load (kN a jack) with so much of the first EI."""
    forces = [(at, one * load) for at, one in zip(JACKS, weighed, strict=True)]
    stiffness, held = TRUE_EI[member] * softer * EI, [Support(0.0), Support(LENGTH)]
    beam = Beam(LENGTH, stiffness, held, forces, stations=tuple(GAUGES.values()))
    return [1000 * float(value) for value in solve(beam).deflection]


def stages() -> list[tuple[str, str, str, float, str]]:
    """Stage, role, cycle, load (kN a jack) and start."""
    rows = [("seated", "zero", "A", SEATING, "2031-09-10T08:00")]
    for number, (cycle, share) in enumerate(PEAKS.items()):
        steps = (0.5, 1.0) if cycle == "A" else (1.0,)
        hour = 9 + number
        for step, part in enumerate(steps):
            load = round(SEATING + part * share * (FULL - SEATING), 6)
            time = f"2031-09-10T{hour:02d}:{10 * step:02d}"
            rows.append((f"{cycle} {round(100 * part)} %", "load", cycle, load, time))
        rows.append((f"{cycle} seated", "unload", cycle, SEATING, f"2031-09-10T{hour:02d}:40"))
    return [*rows, ("next day", "recovery", "F", SEATING, "2031-09-11T15:00")]


def true_deflections(member: str, weighed: Sequence[float]) -> dict[str, list[float]]:
    """Deflection (mm) at the gauges in every stage, from the seated zero on."""
    rest, found, most = [0.0] * len(GAUGES), {}, [0.0] * len(GAUGES)
    for name, role, cycle, load, _ in stages():
        softer = SOFTER[member][PEAKS[cycle]]
        if role == "load":
            most = deflection(member, load - SEATING, softer, weighed)
            found[name] = [r + m for r, m in zip(rest, most, strict=True)]
        elif role == "unload":
            share = LEFT[0] if cycle in "ACE" else LEFT[1]
            rest = [r + share * m for r, m in zip(rest, most, strict=True)]
            found[name] = rest
        else:
            share = AFTER * LEFT[1] if role == "recovery" else 0.0
            found[name] = [r - share * m for r, m in zip(rest, most, strict=True)]
    return found


def readings(seed: int) -> list[list[object]]:
    noise = random.Random(seed)
    rows: list[list[object]] = [["member", "stage", *(f"{name} [mm]" for name in GAUGES)]]
    for member in TRUE_EI:
        weighed = [1 + noise.gauss(0, U_LOAD / 100) for _ in JACKS]
        zeros = [noise.uniform(-2, 2) for _ in GAUGES]
        for stage, values in true_deflections(member, weighed).items():
            read = [v + z + noise.gauss(0, U_GAUGE) for v, z in zip(values, zeros, strict=True)]
            rows.append([member, stage, *(f"{value:.3f}" for value in read)])
    return rows


def tables(seed: int) -> dict[str, list[list[object]]]:
    return {
        "job": [
            ["item", "value"],
            ["structure", "floor beams C1 and C2 of a depot (invented)"],
            ["instruments", "displacement transducers to 0.001 mm on a frame standing on the floor below"],
            ["loads", "two hydraulic jacks on load cells, 1 %, never below a tenth of the test load"],
        ],
        "members": [
            ["member", "length [m]", "EI [kN m2]", "depth [mm]", "tolerance [%]"],
            *([member, LENGTH, EI, DEPTH, 25] for member in TRUE_EI),
        ],
        "loads": [
            ["member", "load case", "from [m]", "force [kN]", "u [%]"],
            *(["*", "jacks", at, 1, U_LOAD] for at in JACKS),
        ],
        "stages": [
            ["member", "stage", "load case", "factor", "role", "cycle", "start"],
            *(["*", name, "jacks", load, role, cycle, start] for name, role, cycle, load, start in stages()),
        ],
        "gauges": [
            ["member", "gauge", "at [m]", "u [mm]", "resolution [mm]"],
            *(["*", name, at, U_GAUGE, 0.001] for name, at in GAUGES.items()),
        ],
        "limits": [["member", "limit"], ["*", "ACI 437.2-13 cyclic"], ["*", "ACI 437R-03 cyclic"]],
        "readings": readings(seed),
    }


def make(folder: Path, seed: int) -> None:
    """Write the tables and the truth to a folder."""
    write_tables(folder, tables(seed))
    true = [{"member": m, "quantity": "EI", "where": "whole", "of": "ratio", "value": r} for m, r in TRUE_EI.items()]
    passes = {"ACI 437.2-13 cyclic": "passes", "ACI 437R-03 cyclic": "passes"}
    results = {"C1": {"ACI 437.2-13 cyclic": "repeat allowed", "ACI 437R-03 cyclic": "fails"}, "C2": passes}
    told = {"gate not met": {"C1": "deviation from linearity"}, "results": results}
    write_truth(folder, {"seed": seed, "estimates": true, "planted": ["C1"], "sound": ["C2"], **told})


if __name__ == "__main__":
    main(make, __file__, 1)
