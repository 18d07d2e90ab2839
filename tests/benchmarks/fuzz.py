"""Ten thousand damaged books, others each time: python -m tests.benchmarks.fuzz [10000].

Every one must end in a reconciliation whose ledger holds each reading, or in a refusal in words; a tenth go
through the command, which must leave a whole result or nothing.
"""

import sys
from collections import Counter
from collections.abc import Callable
from pathlib import Path

from tests.fieldbook.damaged import DAMAGE
from tests.fieldbook.test_fuzz import command, outcome, try_books


def main(books: int) -> None:
    """Print a table of how they ended; the first that ends otherwise stops it, as small as it can be made."""
    total = sum(count for _, count in DAMAGE.values())
    heads = ("books", "reconciled", "refused", "by command", "written", "refused")
    print("damage            " + "".join(f"{head:>12}" for head in heads))
    for kind, (damage, share) in DAMAGE.items():
        ends: tuple[Counter[bool], Counter[bool]] = (Counter(), Counter())

        def read(book: Path, seen: Counter[bool] = ends[0]) -> None:
            seen[outcome(book) is not None] += 1

        def run(book: Path, seen: Counter[bool] = ends[1]) -> None:
            seen[command(book) == 0] += 1

        tasks: tuple[tuple[Callable[[Path], object], int], ...] = ((read, 9), (run, 1))
        for task, tenths in tasks:
            try_books(damage, max(1, books * share * tenths // (10 * total)), task, fixed=False)
        first, second = ends
        counts = (first.total(), first[True], first[False], second.total(), second[True], second[False])
        print(f"{kind:18}" + "".join(f"{count:12}" for count in counts))


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 10_000)
