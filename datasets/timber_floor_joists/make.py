"""Make this invented field book again: `python datasets/timber_floor_joists/make.py [seed] [folder]`.

The 24 timber joists of a records store, levelled along their soffits with the store as full as it has been for years:
a shape survey, with no zero stage. It came in as an untidy workbook: title rows, notes below, decimal commas, blank
rows. Three joists are soft; one is boxed in and could only be levelled at its ends. The readings come from the closed
form for an even load on a simple span, not from fieldfit.
"""

import random
import sys
from pathlib import Path

from openpyxl import Workbook
from openpyxl.styles import Font

sys.path.insert(0, str(Path(__file__).parents[1]))
from writing import main, write_truth

SPAN, EI = 4.2, 780.0  # m, kN m2, on record
EVEN, U_LOAD = 2.6, 3.0  # kN/m, %
STATIONS = (0.0, 0.7, 1.4, 2.1, 2.8, 3.5, 4.2)  # m
U, U_CAMBER, CREEP, U_CREEP = 0.3, 1.0, 0.50, 0.08  # mm, mm, of the elastic sag
JOISTS = [f"J{number:02d}" for number in range(1, 25)]
SOFT = {"J05": 0.50, "J14": 0.46, "J21": 0.53}  # EI over recorded
BOXED_IN = "J17"


def sag(x: float, EI: float, even: float) -> float:
    """Deflection (mm) at x of a simple span under an even load: w x (L3 - 2 L x2 + x3) / 24 EI."""
    return 1000 * even * x * (SPAN**3 - 2 * SPAN * x**2 + x**3) / (24 * EI)


def true_ratios() -> dict[str, float]:
    """EI over recorded, the same whatever the seed of the readings."""
    nature = random.Random(1)
    return {joist: SOFT.get(joist, round(nature.uniform(0.94, 1.08), 3)) for joist in JOISTS}


def levels(joist: str, ratio: float, noise: random.Random) -> list[str]:
    """Levels (mm) of one joist as they were noted, with a decimal comma; blank where there was no access."""
    even = EVEN * (1 + noise.gauss(0, U_LOAD / 100))
    creep, camber = 1 + CREEP + noise.gauss(0, U_CREEP), noise.gauss(0, U_CAMBER)
    datum, tilt = noise.uniform(2400, 2430), noise.uniform(-2, 2)  # mm, mm/m
    cells = []
    for x in STATIONS:
        built = camber * 4 * (x / SPAN) * (1 - x / SPAN)
        read = datum + tilt * x + built - creep * sag(x, ratio * EI, even) + noise.gauss(0, U)
        hidden = joist == BOXED_IN and 0 < x < SPAN
        cells.append("" if hidden else f"{read:.1f}".replace(".", ","))
    return cells


def sheets(seed: int) -> dict[str, list[list[object]]]:
    """The sheets as they were handed in, cell by cell."""
    noise = random.Random(seed)
    rows: list[list[object]] = []
    for joist, ratio in true_ratios().items():
        rows.append(
            [joist, "full store", *levels(joist, ratio, noise), "boxed in, ends only" if joist == BOXED_IN else ""]
        )
        if joist in ("J08", "J16"):
            rows.append([])  # between the bays
    names = [f"L{number}" for number in range(len(STATIONS))]
    return {
        "Job": [
            ["item", "value"],
            ["structure", "joists J01 to J24 of a records store (invented)"],
            ["instruments", "digital level with invar staff held to the soffit"],
            ["loads", "shelves counted and weighed bay by bay: 2.6 kN/m a joist with the floor itself, 3 %"],
            ["creep", "0.5 of the elastic sag, u 0.08: timber long loaded, dry, service class 1"],
        ],
        "Members": [
            ["Floor joists, east wing", "", "", "", ""],
            ["member", "length [m]", "EI [kN m2]", "tolerance [%]", "note"],
            *([joist, "4,2", EI, 30, ""] for joist in JOISTS),
        ],
        "Loads": [
            ["member", "load case", "from [m]", "to [m]", "intensity [kN/m]", "u [%]"],
            ["*", "store and floor", 0, SPAN, EVEN, U_LOAD],
        ],
        "Stages": [["member", "stage", "load case", "role"], ["*", "full store", "store and floor", "load"]],
        "Gauges": [
            ["member", "gauge", "at [m]", "measures", "u [mm]"],
            *(["*", name, at, "level", U] for name, at in zip(names, STATIONS, strict=True)),
        ],
        "Unknowns": [
            ["member", "unknown", "where", "stage", "expected", "expected u"],
            ["*", "EI", "", "", "", ""],
            ["*", "camber", "1", "", 0, U_CAMBER],
            ["*", "creep factor", "", "", CREEP, U_CREEP],
            ["*", "datum shift", "", "full store", "", ""],
            ["*", "datum tilt", "", "full store", "", ""],
        ],
        "Readings": [
            ["Levels of soffits, east wing, all bays"],
            ["staff upright on the soffit, heights above the instrument's own bench mark"],
            [],
            ["member", "stage", *(f"{name} [mm]" for name in names), "remark"],
            *rows,
            [],
            ["", "Note: J17 is boxed in behind the goods lift."],
        ],
    }


def make(folder: Path, seed: int) -> None:
    """Write the workbook and the truth to a folder."""
    folder.mkdir(parents=True, exist_ok=True)
    workbook = Workbook()
    workbook.remove(workbook.worksheets[0])
    for title, rows in sheets(seed).items():
        sheet = workbook.create_sheet(title)
        for row in rows:
            sheet.append([None if cell == "" else cell for cell in row])
        sheet["A1"].font = Font(bold=True)
    workbook.save(folder / "timber_floor_joists.xlsx")
    ratios = true_ratios()
    true = [{"member": m, "quantity": "EI", "where": "whole", "of": "ratio", "value": r} for m, r in ratios.items()]
    sound = [joist for joist in JOISTS if joist not in SOFT and joist != BOXED_IN]
    planted = {"planted": list(SOFT), "sound": sound, "unreadable": [BOXED_IN], "flagged at least": 0.9}
    write_truth(folder, {"seed": seed, "estimates": true, **planted})


if __name__ == "__main__":
    main(make, __file__, 2)
