"""Make this invented field book again: `python datasets/steel_walkway_girders/make.py [seed] [folder]`.

Two steel girders of a covered walkway, continuous over two spans on elastomeric bearings, loaded with water tanks in
five stages. Displacement transducers stand at the supports too. The middle bearing of W1 is much softer than recorded,
its neighbour W2 is sound. The readings come from the direct-stiffness beam of datasets/independent.py.
"""

import random
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))
from independent import Beam, Support, solve
from writing import main, write_tables, write_truth

LENGTH, SPANS = 22.0, {"A": 0.0, "B": 11.0, "C": 22.0}  # m
EI, BEARING, EVEN = 61_000.0, 80.0, 1.9  # kN m2, kN/mm, kN/m, on record
TANKS = {"tank in span 1": 5.5, "tank in span 2": 16.5}  # m
STAGES = {  # kN in each tank
    "empty": (0, 0),
    "1: 20 kN in span 1": (20, 0),
    "2: 40 kN in span 1": (40, 0),
    "3: 40 and 20 kN": (40, 20),
    "4: 40 kN in both": (40, 40),
    "5: 40 kN in span 2": (0, 40),
}
GAUGES = {"TA": 0.0, "T1": 2.75, "T2": 5.5, "T3": 8.25, "TB": 11.0, "T4": 13.75, "T5": 16.5, "T6": 19.25, "TC": 22.0}
U, U_LOAD = 0.03, 1.0  # mm, %
TRUE_EI = {"W1": 0.98, "W2": 1.01}  # over recorded
TRUE_BEARING = {"W1": {"A": 78.0, "B": 24.0, "C": 83.0}, "W2": {"A": 81.0, "B": 77.0, "C": 79.0}}  # kN/mm


def readings(seed: int) -> list[list[object]]:
    noise = random.Random(seed)
    rows: list[list[object]] = [["member", "stage", *(f"{name} [mm]" for name in GAUGES)]]
    for member, ratio in TRUE_EI.items():
        weighed = [1 + noise.gauss(0, U_LOAD / 100) for _ in TANKS]
        zeros = [noise.uniform(-2, 2) for _ in GAUGES]
        supports = [Support(at, 1000 * TRUE_BEARING[member][name]) for name, at in SPANS.items()]
        for stage, sizes in STAGES.items():
            forces = [(at, w * size) for at, w, size in zip(TANKS.values(), weighed, sizes, strict=True)]
            true = solve(Beam(LENGTH, ratio * EI, supports, forces, EVEN, tuple(GAUGES.values()))).deflection
            read = [1000 * value + zero + noise.gauss(0, U) for value, zero in zip(true, zeros, strict=True)]
            rows.append([member, stage, *(f"{value:.2f}" for value in read)])
    return rows


def tables(seed: int) -> dict[str, list[list[object]]]:
    stages: list[list[object]] = [["member", "stage", "load case", "factor", "role"]]
    for stage, sizes in STAGES.items():
        role = "load" if any(sizes) else "zero"
        loaded = [[case, size] for case, size in zip(TANKS, sizes, strict=True) if size]
        stages += [["*", stage, case, size, role] for case, size in [["self weight", 1], *loaded]]
    return {
        "job": [
            ["item", "value"],
            ["structure", "covered walkway, girders W1 and W2 (invented)"],
            ["instruments", "displacement transducers on stands, at the bearings too"],
            ["loads", "water tanks on load cells, 1 %"],
        ],
        "members": [
            ["member", "length [m]", "EI [kN m2]", "tolerance [%]"],
            *([member, LENGTH, EI, 10] for member in TRUE_EI),
        ],
        "supports": [
            ["member", "support", "at [m]", "vertical", "bearing stiffness [kN/mm]"],
            *(["*", name, at, "spring", BEARING] for name, at in SPANS.items()),
        ],
        "loads": [
            ["member", "load case", "from [m]", "to [m]", "force [kN]", "intensity [kN/m]", "u [%]"],
            ["*", "self weight", 0, LENGTH, "", EVEN, ""],
            *(["*", case, at, "", 1, "", U_LOAD] for case, at in TANKS.items()),
        ],
        "stages": stages,
        "gauges": [
            ["member", "gauge", "at [m]", "measures", "u [mm]"],
            *(["*", name, at, "deflection", U] for name, at in GAUGES.items()),
        ],
        "unknowns": [
            ["member", "unknown", "where"],
            ["*", "EI", ""],
            *(["*", "bearing stiffness", name] for name in SPANS),
        ],
        "limits": [
            ["member", "limit", "where", "at least"],
            *(["*", "bearing stiffness", name, 50] for name in SPANS),
        ],
        "readings": readings(seed),
    }


def make(folder: Path, seed: int) -> None:
    """Write the tables and the truth to a folder."""
    write_tables(folder, tables(seed))
    true = [{"member": m, "quantity": "EI", "where": "whole", "of": "ratio", "value": r} for m, r in TRUE_EI.items()]
    for member, stiffness in TRUE_BEARING.items():
        rows = stiffness.items()
        true += [
            {"member": member, "quantity": "bearing stiffness", "where": s, "of": "value", "value": k} for s, k in rows
        ]
    planted = {"planted": ["W1"], "sound": ["W2"], "flagged at least": 0.95}
    write_truth(folder, {"seed": seed, "estimates": true, **planted})


if __name__ == "__main__":
    main(make, __file__, 11)
