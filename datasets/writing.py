"""What the scripts of the demos share: writing a field book with the truth beside it."""

import csv
import json
import sys
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path

Tables = Mapping[str, Sequence[Sequence[object]]]


def write_tables(folder: Path, tables: Tables) -> None:
    """Tables, heading first, as a folder of CSV files."""
    folder.mkdir(parents=True, exist_ok=True)
    for name, rows in tables.items():
        with (folder / f"{name}.csv").open("w", newline="", encoding="utf-8") as file:
            csv.writer(file, lineterminator="\n").writerows(rows)


def write_truth(folder: Path, truth: Mapping[str, object]) -> None:
    """What the readings were made from, as truth.json."""
    text = json.dumps(truth, indent=1, ensure_ascii=False)
    (folder / "truth.json").write_text(text + "\n", encoding="utf-8")


def main(make: Callable[[Path, int], None], script: str, seed: int) -> None:
    """Run a script: ``python make.py [seed] [folder]``, its own seed and folder if left out."""
    given = sys.argv[1:]
    make(Path(given[1]) if len(given) > 1 else Path(script).parent, int(given[0]) if given else seed)
