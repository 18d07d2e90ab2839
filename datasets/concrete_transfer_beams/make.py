"""Make this invented field book again: `python datasets/concrete_transfer_beams/make.py [seed] [folder]`.

Two concrete transfer beams in feet and kips, framed into columns that hold their ends to a degree nobody recorded,
loaded by jacks at the third points one after the other. Dial gauges and tiltmeters. T1 is cracked and well below its
recorded stiffness, T2 is sound. The readings come from the direct-stiffness beam of datasets/independent.py.
"""

import random
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))
from independent import Beam, Support, solve
from writing import main, write_tables, write_truth

FEET, E, I = 32.0, 3600.0, 60_000.0  # ft, ksi, in4, on record  # noqa: E741
LENGTH, EI = 12 * FEET, E * I  # in, kip in2
JACKS = {"jack at 1/3": 10.5, "jack at 2/3": 21.5}  # ft
STAGES = {
    "zero": (0, 0),
    "30 kip left": (30, 0),
    "60 kip left": (60, 0),
    "60 kip both": (60, 60),
    "60 kip right": (0, 60),
}
DIALS = {"D1": 5.0, "D2": 10.0, "D3": 16.0, "D4": 22.0, "D5": 27.0}  # ft
TILTS = {"tilt A": 0.5, "tilt 1": 8.0, "tilt 2": 24.0, "tilt B": 31.5}  # ft
U_DIAL, U_TILT, U_LOAD = 0.0008, 0.006, 1.0  # in, mrad, %
TRUE_EI = {"T1": 0.66, "T2": 0.97}  # over recorded
TRUE_FIXITY = {"T1": {"A": 0.35, "B": 0.55}, "T2": {"A": 0.45, "B": 0.30}}


def supports(member: str) -> list[Support]:
    """End springs of a member: k = (3EI/l) r/(1 - r), with the recorded EI."""
    springs = {name: 3 * EI / LENGTH * r / (1 - r) for name, r in TRUE_FIXITY[member].items()}
    return [Support(0.0, None, springs["A"]), Support(LENGTH, None, springs["B"])]


def readings(seed: int) -> list[list[object]]:
    noise = random.Random(seed)
    rows: list[list[object]] = [
        ["member", "stage", *(f"{name} [in]" for name in DIALS), *(f"{name} [mrad]" for name in TILTS)]
    ]
    stations = tuple(12 * at for at in (*DIALS.values(), *TILTS.values()))
    for member, ratio in TRUE_EI.items():
        weighed = [1 + noise.gauss(0, U_LOAD / 100) for _ in JACKS]
        zeros = [noise.uniform(-0.1, 0.1) for _ in DIALS] + [noise.uniform(-3, 3) for _ in TILTS]
        for stage, sizes in STAGES.items():
            forces = [(12 * at, w * size) for at, w, size in zip(JACKS.values(), weighed, sizes, strict=True)]
            true = solve(Beam(LENGTH, ratio * EI, supports(member), forces, stations=stations))
            values = [*true.deflection[: len(DIALS)], *(1000 * true.rotation[len(DIALS) :])]
            spreads = [U_DIAL] * len(DIALS) + [U_TILT] * len(TILTS)
            read = [v + z + noise.gauss(0, u) for v, z, u in zip(values, zeros, spreads, strict=True)]
            rows.append([member, stage, *(f"{value:.4f}" for value in read)])
    return rows


def tables(seed: int) -> dict[str, list[list[object]]]:
    stages: list[list[object]] = [["member", "stage", "load case", "factor", "role"]]
    for stage, sizes in STAGES.items():
        loaded = [[case, size] for case, size in zip(JACKS, sizes, strict=True) if size]
        stages += [["*", stage, case, size, "load"] for case, size in loaded] or [["*", stage, "", "", "zero"]]
    return {
        "job": [
            ["item", "value"],
            ["structure", "transfer beams T1 and T2 over a loading dock (invented)"],
            ["instruments", "dial gauges to 0.0001 in on a scaffold of its own; tiltmeters on the soffit"],
            ["loads", "hydraulic jacks against the slab above, on load cells, 1 %"],
        ],
        "members": [
            ["member", "length [ft]", "E [ksi]", "I [in4]", "tolerance [%]", "note"],
            *([member, FEET, E, I, 20, "gross section"] for member in TRUE_EI),
        ],
        "supports": [
            ["member", "support", "at [ft]", "vertical", "rotation"],
            *(["*", name, at, "rigid", "free"] for name, at in (("A", 0), ("B", FEET))),
        ],
        "loads": [
            ["member", "load case", "from [ft]", "force [kip]", "u [%]"],
            *(["*", case, at, 1, U_LOAD] for case, at in JACKS.items()),
        ],
        "stages": stages,
        "gauges": [
            ["member", "gauge", "at [ft]", "measures", "u [in]", "u [mrad]"],
            *(["*", name, at, "deflection", U_DIAL, ""] for name, at in DIALS.items()),
            *(["*", name, at, "rotation", "", U_TILT] for name, at in TILTS.items()),
        ],
        "unknowns": [
            ["member", "unknown", "where"],
            ["*", "EI", ""],
            ["*", "rotational restraint", "A"],
            ["*", "rotational restraint", "B"],
        ],
        "limits": [["member", "limit", "stage", "at least"], ["*", "span/n", "60 kip both", 1000]],
        "readings": readings(seed),
    }


def make(folder: Path, seed: int) -> None:
    """Write the tables and the truth to a folder."""
    write_tables(folder, tables(seed))
    true = [{"member": m, "quantity": "EI", "where": "whole", "of": "ratio", "value": r} for m, r in TRUE_EI.items()]
    for member, fixity in TRUE_FIXITY.items():
        rows = fixity.items()
        true += [
            {"member": member, "quantity": "rotational restraint", "where": s, "of": "fixity", "value": r}
            for s, r in rows
        ]
    planted = {"planted": ["T1"], "sound": ["T2"], "flagged at least": 0.9}
    write_truth(folder, {"seed": seed, "estimates": true, **planted})


if __name__ == "__main__":
    main(make, __file__, 3)
