"""How often a slip of unit or sign is found, and a right book accused: python -m tests.benchmarks.slips [books].

Books are those of ``tests/simulate.py``, made by an independent finite-element model; in half of them one gauge or
one stage drawn at random is written in another unit or with the other sign.
"""

import sys
import tempfile
from collections import Counter
from dataclasses import replace
from pathlib import Path

import numpy as np

from fieldfit.fieldbook import read_book
from fieldfit.fit import Reconciliation, reconcile_member
from fieldfit.observe import Subject, observe
from tests.simulate import CAUSES, Cause, simulate

__all__ = ["main"]

FACTORS = (-1.0, 25.4, 1 / 25.4, 1000.0, 1e-3)
SEED = 20240601


def main(books: int) -> None:
    random, count = np.random.default_rng(SEED), Counter[tuple[str, str]]()
    for cause in CAUSES:
        for subject in _subjects(cause, books, int(random.integers(2**31))):
            right = reconcile_member(subject)
            count[cause.name, "accused"] += _named(right) != ""
            count[cause.name, "stepped"] += any("stands apart" in text for text in right.warnings)
            slipped, where = _slipped(subject, random)
            said = _named(reconcile_member(slipped))
            count[cause.name, "found"] += where in said
            count[cause.name, "another named"] += bool(said) and where not in said
    print(f"{books} right books and as many slipped ones a cause")
    print("| cause | right books accused | of a step | slips found | another named |\n|---|---|---|---|---|")
    for cause in CAUSES:
        shares = [count[cause.name, what] / books for what in ("accused", "stepped", "found", "another named")]
        print(f"| {cause.name} | " + " | ".join(f"{share:.1%}" for share in shares) + " |")


def _subjects(cause: Cause, books: int, seed: int) -> tuple[Subject, ...]:
    with tempfile.TemporaryDirectory() as folder:
        simulate(Path(folder) / "book", cause, books, seed)
        return observe(read_book(Path(folder) / "book"))


def _slipped(subject: Subject, random: np.random.Generator) -> tuple[Subject, str]:
    """A member with one slip, and how a sentence would name it."""
    seen = subject.observations
    if random.random() < 0.7 or len(np.unique(seen.stage)) == 1:
        name = random.choice(np.unique(seen.gauge.astype(str)))
        rows, where = seen.gauge == name, f"of gauge {name} "
        factor = random.choice(FACTORS)
    else:
        stage = int(random.choice(np.unique(seen.stage)))
        rows, where, factor = seen.stage == stage, f"in stage {subject.stages[stage].name} ", -1.0
    value = np.where(rows, factor, 1.0) * seen.value
    return replace(subject, observations=replace(seen, value=value)), where


def _named(found: Reconciliation) -> str:
    return " ".join(text for text in found.warnings if "look as if" in text or "is no beam" in text)


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 100)
