"""A logger's file of a million rows by 24 channels against pandas' own read: python -m tests.benchmarks.logger [rows].

Read, checked, made into observations and averaged: processor time as a ratio of one run, and the peak of memory, each
in a process of its own.
"""

import subprocess
import sys
import tempfile
from pathlib import Path

import numpy as np
import pandas as pd

from tests.books import write_book

CHANNELS, STAGES = 24, 10


def book(folder: Path, rows: int) -> Path:
    """A book with a logger's file of so many rows, one a second."""
    at = np.linspace(0.5, 11.5, CHANNELS).round(3)
    start = pd.Timestamp("2024-05-14T08:00:00")
    clock = pd.date_range(start, periods=rows, freq="s")
    stages = [["member", "stage", "load case", "factor", "role", "start", "end"]]
    each = rows // STAGES
    for n in range(STAGES):
        first, last = clock[n * each + each // 10], clock[(n + 1) * each - 1]
        load = ["", "", "zero"] if n in (0, STAGES - 1) else ["P", n, "load"]
        stages.append(["B1", f"stage {n}", *load, first.isoformat(), last.isoformat()])
    path = write_book(
        folder,
        {
            "members": [["member", "length [m]", "EI [kN m2]"], ["B1", 12.0, 20000]],
            "loads": [["member", "load case", "from [m]", "force [kN]"], ["B1", "P", 6.0, 5]],
            "stages": stages,
            "gauges": [
                ["member", "gauge", "at [m]", "u [mm]", "channel"],
                *(["B1", f"G{n}", x, 0.05, f"CH{n:02}"] for n, x in enumerate(at)),
            ],
        },
    )
    noise = np.random.default_rng(1)
    columns = {f"CH{n:02} [mm]": noise.normal(5.0, 0.02, rows).round(4) for n in range(CHANNELS)}
    frame = pd.DataFrame({"time": clock.strftime("%Y-%m-%dT%H:%M:%S"), **columns})
    frame.to_csv(path / "readings.csv", index=False)
    return path


def peak(code: str, path: Path) -> tuple[float, float]:
    """Seconds and peak memory (GB) of some Python in a process of its own, imports not timed."""
    timed = f"import time, resource\nfrom pathlib import Path\npath = Path({str(path)!r})\n{code}"
    timed += "\nprint(took, resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1e6)"
    out = subprocess.run([sys.executable, "-c", timed], check=True, capture_output=True, text=True).stdout
    took, size = out.split()
    return float(took), float(size)


PANDAS = """import pandas as pd
start = time.process_time()
pd.read_csv(path / "readings.csv")
took = time.process_time() - start"""
FIELDFIT = """from fieldfit.fieldbook import read_book
from fieldfit.observe import observe
start = time.process_time()
(subject,) = observe(read_book(path))
took = time.process_time() - start"""


def main() -> None:
    rows = int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000
    with tempfile.TemporaryDirectory() as folder:
        path = book(Path(folder) / "book", rows)
        size = (path / "readings.csv").stat().st_size / 1e6
        print(f"{rows:,} rows by {CHANNELS} channels, {size:.0f} MB")
        plain, plain_memory = min(peak(PANDAS, path) for _ in range(2))
        whole, memory = min(peak(FIELDFIT, path) for _ in range(2))
        print(f"pandas' read {plain:.1f} s, {plain_memory:.2f} GB")
        print(f"read, checked, averaged {whole:.1f} s, {memory:.2f} GB: {whole / plain:.1f} times")


if __name__ == "__main__":
    main()
