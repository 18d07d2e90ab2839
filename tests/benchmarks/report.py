"""How long the report takes beside the fits, and how much memory: `python -m tests.benchmarks.report`."""

import multiprocessing
import resource
import tempfile
import time
from pathlib import Path

import numpy as np

from fieldfit import Findings, read_book
from fieldfit.observe import observe
from fieldfit.report.illustrate import illustrations
from fieldfit.work import judged
from tests.books import Table, write_book

SIZES = ((24, 9), (24, 200), (50, 9), (200, 9))  # members and gauges; three stages each
STAGES = ("one third", "two thirds", "full")


def tables(members: int, gauges: int) -> dict[str, Table]:
    """Simple beams of 10 m under a load at the middle, read along the span."""
    noise = np.random.default_rng(1)
    names = [f"M{number:03d}" for number in range(members)]
    at = np.linspace(0.5, 5.0, gauges).round(4)
    full = 30e3 * at * (3 * 10.0**2 - 4 * at**2) / (48 * 20e6) * 1e3  # mm, P x (3 l2 - 4 x2) / 48 EI
    rows = [
        [member, stage, f"G{place}", round(float(full[place] * (number + 1) / 3 + noise.normal(0, 0.05)), 3)]
        for member in names
        for number, stage in enumerate(STAGES)
        for place in range(gauges)
    ]
    return {
        "members": [
            ["member", "length [m]", "EI [kN m2]", "tolerance [%]"],
            *([name, 10, 20000, 10] for name in names),
        ],
        "loads": [["member", "load case", "from [m]", "force [kN]"], ["*", "P", 5, 30]],
        "stages": [
            ["member", "stage", "load case", "factor"],
            *(["*", stage, "P", (number + 1) / 3] for number, stage in enumerate(STAGES)),
        ],
        "gauges": [
            ["member", "gauge", "at [m]", "u [mm]"],
            *(["*", f"G{place}", float(x), 0.05] for place, x in enumerate(at)),
        ],
        "readings": [["member", "stage", "gauge", "deflection [mm]"], *rows],
    }


def measured(members: int, gauges: int, folder: str) -> tuple[float, ...]:
    """Processor seconds of reading, fitting, figures and everything that is written; largest memory (MB)."""
    book = write_book(Path(folder) / "book", tables(members, gauges))
    laps = [time.process_time()]
    read = read_book(book)
    subjects = observe(read)
    laps.append(time.process_time())
    findings = Findings(book=read, verdicts=tuple(judged(subjects)))
    laps.append(time.process_time())
    for verdict in findings:
        illustrations(read, verdict.reconciliation)
    laps.append(time.process_time())
    findings.write(Path(folder) / "out")
    laps.append(time.process_time())
    return *np.diff(laps), resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024


def main() -> None:
    """Print the table."""
    print("| members | gauges | read [s] | fit [s] | figures [s] | written, figures among it [s] | memory [MB] |")
    print("|---|---|---|---|---|---|---|")
    for members, gauges in SIZES:
        with tempfile.TemporaryDirectory() as folder, multiprocessing.get_context("spawn").Pool(1) as alone:
            *seconds, memory = alone.apply(measured, (members, gauges, folder))
        cells = " | ".join(f"{second:.1f}" for second in seconds)
        print(f"| {members} | {gauges} | {cells} | {memory:.0f} |")


if __name__ == "__main__":
    main()
