"""Make this invented field book again: `python datasets/warehouse_floor_beam/make.py [seed]`.

Three steel floor beams of a warehouse, each loaded through two stacks of weighed blocks in three stages; dial gauges
at the quarter points and at midspan. The readings come from the closed form for a point load on a simple span, not
from fieldfit, with the truths that truth.json holds.
"""

import csv
import json
import random
import sys
from pathlib import Path

HERE = Path(__file__).parent
SPAN, STACKS, GAUGES = 7.2, (2.4, 4.8), {"D1": 1.8, "D2": 3.6, "D3": 5.4}  # m
STAGES = {"4 blocks": 12.0, "8 blocks": 24.0, "12 blocks": 36.0}  # kN on each of the two stacks
EI_RECORDED, TOLERANCE, U = 48_200.0, 10, 0.03  # kN m2, %, mm
TRUTH = {"F1": 0.97, "F2": 0.83, "F3": 1.03}  # EI over recorded


def deflection(x: float, at: float, force: float, EI: float) -> float:
    """Deflection (mm) of a simple span at x under a force (kN) at ``at`` (m): P b x (L2 - b2 - x2) / 6 L EI."""
    if x > at:
        x, at = SPAN - x, SPAN - at
    b = SPAN - at
    return 1000 * force * b * x * (SPAN**2 - b**2 - x**2) / (6 * SPAN * EI)


def tables(seed: int) -> dict[str, list[list[object]]]:
    """The tables of the book, heading first."""
    noise = random.Random(seed)
    readings: list[list[object]] = [["member", "stage", *(f"{name} [mm]" for name in GAUGES)]]
    for member, ratio in TRUTH.items():
        for stage, force in STAGES.items():
            true = [sum(deflection(x, at, force, ratio * EI_RECORDED) for at in STACKS) for x in GAUGES.values()]
            readings.append([member, stage, *(f"{value + noise.gauss(0, U):.2f}" for value in true)])
    return {
        "job": [
            ["item", "value"],
            ["structure", "warehouse floor beams F1 to F3 (invented)"],
            ["instruments", "dial gauges, 0.01 mm, on a frame standing on the slab below"],
            ["loads", "blocks weighed one by one"],
        ],
        "members": [
            ["member", "length [m]", "EI [kN m2]", "tolerance [%]"],
            *([member, SPAN, EI_RECORDED, TOLERANCE] for member in TRUTH),
        ],
        "loads": [
            ["member", "load case", "from [m]", "force [kN]"],
            *(["*", "one block on each stack", at, 3.0] for at in STACKS),
        ],
        "stages": [
            ["member", "stage", "load case", "factor"],
            *(["*", stage, "one block on each stack", f"{force / 3.0:g}"] for stage, force in STAGES.items()),
        ],
        "gauges": [
            ["member", "gauge", "at [m]", "measures", "u [mm]", "resolution [mm]"],
            *(["*", name, at, "deflection", U, 0.01] for name, at in GAUGES.items()),
        ],
        "readings": readings,
    }


def main() -> None:
    """Write the tables and the truth beside this script."""
    seed = int(sys.argv[1]) if len(sys.argv) > 1 else 7
    for name, rows in tables(seed).items():
        with (HERE / f"{name}.csv").open("w", newline="", encoding="utf-8") as file:
            csv.writer(file, lineterminator="\n").writerows(rows)
    truth = {"seed": seed, "EI over recorded": TRUTH, "u of a reading [mm]": U}
    (HERE / "truth.json").write_text(json.dumps(truth, indent=1) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main()
