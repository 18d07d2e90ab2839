"""The demos with other seeds: `python -m tests.benchmarks.demos [seeds [demo ...]]`, 50 if left out.

Prints for each demo in how many runs the planted truth lies inside its interval (the worst and the mean of its
quantities), how often planted members are beyond, how often a sound member is, and how often a load test comes out
by its rules as planted. Demos named after the number are run alone.
"""

import sys
import tempfile
from collections.abc import Mapping, Sequence
from pathlib import Path

from tests.demos import DEMOS, Outcome, run


def share(parts: Sequence[Mapping[str, bool]]) -> dict[str, float]:
    """How often each name is true."""
    return {name: sum(part[name] for part in parts) / len(parts) for name in parts[0]}


def line(demo: str, outcomes: Sequence[Outcome]) -> str:
    inside = share([outcome.inside for outcome in outcomes])
    flagged = share([outcome.flagged for outcome in outcomes])
    accused = share([outcome.accused for outcome in outcomes])
    ruled = share([outcome.ruled for outcome in outcomes])
    worst = min(inside, key=lambda name: inside[name])
    return (
        f"{demo:26} inside: mean {sum(inside.values()) / len(inside):.3f}, worst {inside[worst]:.2f} ({worst}); "
        f"planted beyond: {', '.join(f'{name} {part:.2f}' for name, part in flagged.items())}; "
        f"sound beyond: {sum(accused.values()) / len(accused):.4f}"
        + "".join(f"; {name} as planted {part:.2f}" for name, part in ruled.items())
    )


def main() -> None:
    seeds = int(sys.argv[1]) if len(sys.argv) > 1 else 50
    for demo in sys.argv[2:] or DEMOS:
        with tempfile.TemporaryDirectory() as folder:
            outcomes = [run(demo, Path(folder) / str(seed), 1000 + seed) for seed in range(seeds)]
        print(line(demo, outcomes), flush=True)


if __name__ == "__main__":
    main()
