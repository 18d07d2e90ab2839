"""Reading a large book against pandas' own read of its readings: python -m tests.benchmarks.read_speed."""

import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import pandas as pd

from fieldfit.fieldbook import read_book
from fieldfit.observe import observe
from tests.books import Table, write_book

ROWS = 200_000
LAYOUTS = ((1, 100, True), (100, 20, True), (1000, 20, True), (1000, 20, False), (1, ROWS, False))


def book(folder: Path, members: int, gauges: int, *, named: bool = True) -> Path:
    """A book of members that share 200,000 readings of so many gauges each, or of as many unnamed stations."""
    stages = ROWS // members // gauges
    names = [f"m{number}" for number in range(members)]
    stations = [round(0.5 + 5 * number / gauges, 6) for number in range(gauges)]
    tables: dict[str, Table] = {
        "members": [["member", "length [m]", "EI [kN m2]"], *([name, 6.0, 20000] for name in names)],
        "loads": [["member", "load case", "from [m]", "force [kN]"], ["*", "P", 3.0, 50]],
        "stages": [
            ["member", "stage", "load case", "factor"],
            *(["*", f"s{number}", "P", (number + 1) / stages] for number in range(stages)),
        ],
        "readings": [
            ["member", "stage", "gauge" if named else "at [m]", "deflection [mm]", "u [mm]"],
            *(
                [name, f"s{stage}", f"D{place}" if named else at, round(stage + place / gauges, 4), 0.1]
                for name in names
                for stage in range(stages)
                for place, at in enumerate(stations)
            ),
        ],
    }
    if named:
        rows = [["*", f"D{place}", at, "deflection"] for place, at in enumerate(stations)]
        tables["gauges"] = [["member", "gauge", "at [m]", "measures"], *rows]
    return write_book(folder, tables)


def best(work: Callable[[], object]) -> float:
    """Shortest of seven runs, seconds of this process, which others on the machine disturb the least."""
    took = []
    for _ in range(7):
        start = time.process_time()
        work()
        took.append(time.process_time() - start)
    return min(took)


def main() -> None:
    """Print the table."""
    print(f"{'200,000 reading rows over':44} {'read':>8} {'read and observed':>18}  (over pandas' read)")
    for members, gauges, named in LAYOUTS:
        with tempfile.TemporaryDirectory() as folder:
            path = book(Path(folder) / "book", members, gauges, named=named)
            plain = best(lambda path=path: pd.read_csv(path / "readings.csv"))
            read = best(lambda path=path: read_book(path))
            whole = best(lambda path=path: observe(read_book(path)))
        what = f"{members} members, {gauges} {'gauges' if named else 'unnamed stations'} each"
        print(f"{what:44} {read / plain:8.1f} {whole / plain:18.1f}")


if __name__ == "__main__":
    main()
