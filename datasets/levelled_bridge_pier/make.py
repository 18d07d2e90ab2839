"""Make this invented field book again: `python datasets/levelled_bridge_pier/make.py [seed] [folder]`.

Two girders of a two-span bridge, loaded by lorries and levelled in every stage by one closed run of four set-ups from a
benchmark on one bank over the other bank and back. The pier settles under load, a little more below G2. G1 is sound, G2
is well below its recorded stiffness. In the stage of two lorries the turning plate sank between two sights; the run did
not close, was set aside and levelled again. The readings come from the direct-stiffness beam of
datasets/independent.py, the settlement by superposition of the beam without its pier. The seed was set before anything
was fitted.
"""

import random
import sys
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))
from independent import Beam, Support, solve
from writing import main, write_tables, write_truth

SPAN, EI = 18.0, 2_400_000.0  # m, kN m2, on record
POINTS = tuple(4.5 * n for n in range(9))  # m
LEFT, RIGHT = POINTS[:5], POINTS[4:]  # seen from the two halves of the bridge; the pier from both
LORRY = ((7.4, 50.0), (9.0, 90.0), (10.3, 90.0))  # m, kN: the share of one girder
STAGES = {"zero": {}, "one lorry": {"span 1": 1}, "two lorries": {"span 1": 2}, "far span": {"span 2": 2}}
TRUE_EI = {"G1": 1.03, "G2": 0.72}  # over recorded
SETTLED = {  # mm at the pier
    "G1": {"one lorry": 0.9, "two lorries": 2.2, "far span": 2.6},
    "G2": {"one lorry": 1.1, "two lorries": 2.7, "far span": 3.1},
}
U_LOAD = 0.01  # of the share of a girder, all lorries alike
U_STAFF, U_KM = 0.05, 0.4  # mm a reading, mm per km of double run
SUNK = 3.1  # mm, the turning plate in the first run of two lorries
BM2 = 101.3174  # m, not known to the book


def heights(stage: str, member: str, factor: float) -> list[float]:
    """True height (m) of the points of a girder in a stage."""
    stiffness = TRUE_EI[member] * EI
    shift = {"span 1": 0.0, "span 2": SPAN}
    forces = [
        (at + shift[case], factor * count * force) for case, count in STAGES[stage].items() for at, force in LORRY
    ]
    held = [Support(0.0), Support(SPAN), Support(2 * SPAN)]
    bent = solve(Beam(2 * SPAN, stiffness, held, forces, stations=POINTS)).deflection
    unit = solve(Beam(2 * SPAN, stiffness, [held[0], held[2]], [(SPAN, 1.0)], stations=POINTS)).deflection
    sunk = SETTLED[member].get(stage, 0.0) / 1000 * unit / unit[POINTS.index(SPAN)]
    camber = {"G1": 0.031, "G2": 0.024}[member]
    built = [100.2 + 0.002 * at + camber * (1 - (at / SPAN - 1) ** 2) for at in POINTS]
    return [up - down - sink for up, down, sink in zip(built, bent, sunk, strict=True)]


def level_run(noise: random.Random, stage: str, true: dict[tuple[str, str], float], sunk: float) -> list[list[object]]:
    """One closed run of four set-ups over both banks; the turning plate sinks (mm) between its two sights."""
    fixed = {"BM1": 100.0, "BM2": BM2, "T1": 100.9, "T2": 100.8}
    route = [
        ("1", 101.62, ("BM1", 21.0), LEFT, ("T1", 14.0)),
        ("2", 101.93, ("T1", 16.0), RIGHT, ("BM2", 24.0)),
        ("3", 102.08, ("BM2", 23.0), (), ("T2", 19.0)),
        ("4", 101.71, ("T2", 17.0), (), ("BM1", 26.0)),
    ]
    rows: list[list[object]] = []
    for name, line, (start, back), seen, (end, fore) in route:
        sights = [("", "backsight", start, back)]
        for member in TRUE_EI:
            sights += [(member, "intermediate", point(at), abs(at - (9 if seen is LEFT else 27)) + 6) for at in seen]
        sights.append(("", "foresight", end, fore))
        for member, word, place, distance in sights:
            height = true[member, place] if member else fixed[place]
            if (word, place) == ("backsight", "T1"):
                height -= sunk / 1000
            u = (U_STAFF**2 + 2 * U_KM**2 * distance / 1000) ** 0.5
            staff = line - height + noise.gauss(0, u) / 1000
            rows.append([member, stage, name, word, place, f"{staff:.5f}", distance])
    return rows


def point(at: float) -> str:
    return f"P{POINTS.index(at) + 1}"


def levels(seed: int) -> list[list[object]]:
    noise = random.Random(seed)
    factor = 1 + noise.gauss(0, U_LOAD)
    rows: list[list[object]] = [
        ["member", "stage", "set-up", "sight", "point", "staff [m]", "distance [m]", "use", "remark"]
    ]
    for stage in STAGES:
        true = {
            (member, point(at)): height
            for member in TRUE_EI
            for at, height in zip(POINTS, heights(stage, member, factor), strict=True)
        }
        if stage == "two lorries":
            first = level_run(noise, stage, true, SUNK)
            rows += [[*row[:2], f"first {row[2]}", *row[3:], "no", "did not close: levelled again"] for row in first]
        rows += [[*row, "yes", ""] for row in level_run(noise, stage, true, 0.0)]
    return rows


def tables(seed: int) -> dict[str, list[list[object]]]:
    loaded = [stage for stage in STAGES if stage != "zero"]
    return {
        "job": [
            ["item", "value"],
            ["structure", "two-span road bridge over a canal, girders G1 and G2 (invented)"],
            ["instruments", "digital level 0.4 mm per km of double run, coded staff; sights up to 26 m"],
            ["loads", "weighed lorries; the share of a girder by a grillage analysis"],
        ],
        "members": [
            ["member", "length [m]", "EI [kN m2]", "tolerance [%]", "load share", "load share u"],
            *([member, 2 * SPAN, EI, 12, 1, U_LOAD] for member in TRUE_EI),
        ],
        "supports": [
            ["member", "support", "at [m]"],
            *(["*", name, at] for name, at in (("A", 0), ("B", SPAN), ("C", 2 * SPAN))),
        ],
        "loads": [
            ["member", "load case", "from [m]", "force [kN]"],
            *(["*", "span 1", at, force] for at, force in LORRY),
            *(["*", "span 2", at + SPAN, force] for at, force in LORRY),
        ],
        "stages": [
            ["member", "stage", "load case", "factor", "role"],
            ["*", "zero", "", "", "zero"],
            *(["*", stage, case, count, "load"] for stage in loaded for case, count in STAGES[stage].items()),
        ],
        "gauges": [
            ["member", "gauge", "at [m]", "measures"],
            *(["*", point(at), at, "level"] for at in POINTS),
        ],
        "benchmarks": [["benchmark", "height [m]"], ["BM1", 100], ["BM2", ""]],
        "levels": levels(seed),
        "levelling": [["u [mm]", "u per km [mm]", "allowed per km [mm]"], [U_STAFF, U_KM, 4]],
        "unknowns": [
            ["member", "unknown", "where", "stage"],
            ["*", "EI", "", ""],
            *(["*", "settlement", "B", stage] for stage in loaded),
        ],
    }


def make(folder: Path, seed: int) -> None:
    """Write the tables and the truth to a folder."""
    write_tables(folder, tables(seed))
    true: list[dict[str, object]] = []
    for member, ratio in TRUE_EI.items():
        true.append({"member": member, "quantity": "EI", "where": "whole", "of": "ratio", "value": ratio})
        true += [
            {"member": member, "quantity": "settlement", "where": "B", "stage": stage, "of": "value", "value": sunk}
            for stage, sunk in SETTLED[member].items()
        ]
    planted = {"planted": ["G2"], "sound": ["G1"], "flagged at least": 0.9}
    write_truth(folder, {"seed": seed, "estimates": true, **planted})


if __name__ == "__main__":
    main(make, __file__, 7)
