"""Make this invented field book again: `python datasets/footbridge_logged_test/make.py [seed] [folder]`.

One steel girder of a footbridge, simple over 16 m, loaded with concrete blocks in three stages on a morning that warms
up. A logger reads seven displacement transducers twice a minute for three hours. Each transducer drifts by its own
rate. One of them (D4) follows the temperature by a coefficient that its maker states with an uncertainty, another (D2)
by one that nobody knows. Stands move in the wind, so that the noise is a first-order autoregression. The readings come
from the direct-stiffness beam of datasets/independent.py; drift, temperature and noise are added here.
"""

import math
import random
import sys
from datetime import datetime, timedelta
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))
from independent import Beam, Support, solve
from writing import main, write_tables, write_truth

LENGTH, EI = 16.0, 148_000.0  # m, kN m2 on record
RATIO = 0.93  # true over recorded
GAUGES = {"D1": 2.0, "D2": 4.0, "D3": 6.0, "D4": 8.0, "D5": 10.0, "D6": 12.0, "D7": 14.0}
BLOCKS = {"blocks": 24.0}  # kN at midspan for a factor of 1
STAGES = {  # factor, role, minutes of start and end
    "before": (0, "zero", 5, 25),
    "24 kN": (1, "load", 35, 55),
    "48 kN": (2, "load", 65, 90),
    "72 kN": (3, "load", 100, 130),
    "after": (0, "zero", 150, 175),
}
EVERY, MINUTES = 30, 180  # s, min
U, U_LOAD, RESOLUTION = 0.02, 0.5, 0.01  # mm, %, mm
NOISE, COEFFICIENT = 0.03, 0.8  # mm, of one reading to the next
COEFFICIENTS = {"D4": 0.006, "D2": -0.004}  # mm/K
STATED_U = 0.002  # mm/K
START = datetime(2024, 6, 11, 8, 0, 0)


def factor_at(minute: float) -> float:
    """How much of the blocks is on the bridge: steps half way between the windows."""
    now = 0.0
    for factor, _, start, _ in STAGES.values():
        if minute >= start - 6:
            now = factor
    return now


def temperature_at(minute: float) -> float:
    """Shade temperature, degC: a morning that warms up and then clouds over."""
    return 14.0 + 7.0 * math.sin(math.pi * minute / 260) + 0.6 * math.sin(2 * math.pi * minute / 45)


def drawn(seed: int) -> tuple[list[list[object]], dict[str, float], dict[str, float]]:
    """The readings, the drifts (mm/h) and the temperature coefficients (mm/K)."""
    noise = random.Random(seed)
    weighed = BLOCKS["blocks"] * (1 + noise.gauss(0, U_LOAD / 100))
    drift = {name: noise.uniform(-0.12, 0.12) for name in GAUGES}
    warmth = {"D2": COEFFICIENTS["D2"], "D4": COEFFICIENTS["D4"] + noise.gauss(0, STATED_U)}
    zero = {name: noise.uniform(-1, 1) for name in GAUGES}
    own = {name: noise.gauss(0, U) for name in [f"{g} {s}" for g in GAUGES for s in STAGES]}
    beam = Beam(
        LENGTH, RATIO * EI, [Support(0.0), Support(LENGTH)], [(LENGTH / 2, weighed)], 0.0, tuple(GAUGES.values())
    )
    unit = dict(zip(GAUGES, 1000 * solve(beam).deflection, strict=True))
    state = {name: noise.gauss(0, NOISE) for name in GAUGES}
    rows: list[list[object]] = [["time", "temperature [degC]", *(f"CH{n + 1} [mm]" for n in range(len(GAUGES)))]]
    for step in range(MINUTES * 60 // EVERY):
        minute = step * EVERY / 60
        warm = temperature_at(minute)
        stage = next((s for s, (_, _, a, b) in STAGES.items() if a <= minute <= b), None)
        row: list[object] = [(START + timedelta(minutes=minute)).isoformat(), f"{warm:.2f}"]
        for name in GAUGES:
            push = math.sqrt(1 - COEFFICIENT**2) * noise.gauss(0, NOISE)
            state[name] = COEFFICIENT * state[name] + push
            still = factor_at(minute) * unit[name] + zero[name] + drift[name] * minute / 60
            still += warmth.get(name, 0.0) * (warm - temperature_at(0)) + own.get(f"{name} {stage}", 0.0)
            row.append(f"{still + state[name]:.2f}")
        rows.append(row)
    return rows, drift, warmth


def tables(rows: list[list[object]]) -> dict[str, list[list[object]]]:
    stages: list[list[object]] = [["member", "stage", "load case", "factor", "role", "start", "end"]]
    for name, (factor, role, start, end) in STAGES.items():
        window = [(START + timedelta(minutes=minute)).isoformat() for minute in (start, end)]
        stages.append(["G1", name, "blocks" if factor else "", factor or "", role, *window])
    return {
        "job": [
            ["item", "value"],
            ["structure", "footbridge over a mill stream, girder G1 (invented)"],
            ["instruments", "displacement transducers on stands, logger twice a minute"],
            ["weather", "clear, warming up"],
        ],
        "members": [["member", "length [m]", "EI [kN m2]", "tolerance [%]"], ["G1", LENGTH, EI, 10]],
        "loads": [
            ["member", "load case", "from [m]", "force [kN]", "u [%]"],
            ["G1", "blocks", LENGTH / 2, BLOCKS["blocks"], U_LOAD],
        ],
        "stages": stages,
        "gauges": [
            [
                "member",
                "gauge",
                "at [m]",
                "u [mm]",
                "resolution [mm]",
                "temperature coefficient [mm/K]",
                "temperature coefficient u [mm/K]",
                "channel",
            ],
            *(
                [
                    "G1",
                    name,
                    at,
                    U,
                    RESOLUTION,
                    *([COEFFICIENTS["D4"], STATED_U] if name == "D4" else ["", ""]),
                    f"CH{n}",
                ]
                for n, (name, at) in enumerate(GAUGES.items(), 1)
            ),
        ],
        "unknowns": [
            ["member", "unknown", "where"],
            ["G1", "EI", ""],
            ["G1", "temperature coefficient", "D2"],
        ],
        "readings": rows,
    }


def make(folder: Path, seed: int) -> None:
    """Write the tables and the truth to a folder."""
    rows, drift, warmth = drawn(seed)
    write_tables(folder, tables(rows))
    true: list[dict[str, object]] = [
        {"member": "G1", "quantity": "EI", "where": "whole", "of": "ratio", "value": RATIO},
        *({"member": "G1", "quantity": "drift", "where": g, "of": "value", "value": rate} for g, rate in drift.items()),
        *(
            {"member": "G1", "quantity": "temperature coefficient", "where": g, "of": "value", "value": c}
            for g, c in warmth.items()
        ),
    ]
    write_truth(folder, {"seed": seed, "estimates": true, "planted": [], "sound": ["G1"]})


if __name__ == "__main__":
    main(make, __file__, 11)
