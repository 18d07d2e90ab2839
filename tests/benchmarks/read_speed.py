"""Reading a large book against pandas' own read of its readings: python -m tests.benchmarks.read_speed."""

import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import pandas as pd

from fieldfit.fieldbook import read_book
from fieldfit.observe import observe
from tests.books import write_book

ROWS = 200_000


def book(folder: Path, members: int) -> Path:
    """A book of so many members that share 200,000 readings."""
    each = ROWS // members
    names = [f"m{number}" for number in range(members)]
    readings = [
        [name, "P", round(0.5 + 5 * n / each, 6), round(1 + n / each, 4), 0.1] for name in names for n in range(each)
    ]
    return write_book(
        folder,
        {
            "members": [["member", "length [m]", "EI [kN m2]"], *([name, 6.0, 20000] for name in names)],
            "loads": [["member", "load case", "from [m]", "force [kN]"], ["*", "P", 3.0, 50]],
            "readings": [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], *readings],
        },
    )


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
    print(f"{'200,000 reading rows over':28} {'read':>8} {'read and observed':>18}  (over pandas' read)")
    for members in (1, 1000):
        with tempfile.TemporaryDirectory() as folder:
            path = book(Path(folder) / "book", members)
            plain = best(lambda path=path: pd.read_csv(path / "readings.csv"))
            read = best(lambda path=path: read_book(path))
            whole = best(lambda path=path: observe(read_book(path)))
        print(f"{members:>20} members {read / plain:8.1f} {whole / plain:18.1f}")


if __name__ == "__main__":
    main()
