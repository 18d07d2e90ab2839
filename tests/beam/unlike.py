"""Unlike members and what acts on them, from a seeded generator: spans, hinges, zones, shear, springs, every load."""

import numpy as np

from fieldfit.beam import (
    Bend,
    Couple,
    Force,
    Loads,
    Members,
    Movement,
    Spread,
    Support,
    Zone,
    loads,
    member,
)

__all__ = ["unlike"]


def unlike(seed: int, *, hinged: bool | None = None) -> tuple[Members, Loads, np.ndarray]:
    """One member, its loads in two cases and four stations (1, 4) that stand on nothing."""
    rng = np.random.default_rng(seed)
    length, EI = rng.choice([0.5, 4.0, 30.0]), rng.choice([50.0, 3e7])
    supports = _supports(rng, length, EI)
    if hinged or (hinged is None and rng.random() < 0.3):
        # The fixed end holds the left piece, the hinge and the last support the right one.
        supports[0] = Support(0.0, fixity=1.0)
        hinges = [0.37 * length]
        supports = [s for s in supports if s.at != hinges[0]]
    else:
        hinges = []
    GA = rng.choice([np.inf, 100 * EI / length**2])
    zones = [Zone(0.1 * length, 0.3 * length, EI * rng.uniform(0.3, 3), EI * rng.uniform(0.3, 3), 2 * GA)]
    zones += [Zone(0.5 * length, 0.8 * length, EI * rng.uniform(0.3, 3))]
    one = member(
        f"B{seed}", length=length, EI=EI, GA=GA, supports=supports, hinges=hinges, zones=zones[: rng.integers(3)]
    )
    return one, _loads(rng, one, length, EI), length * np.sort(rng.uniform(0, 1, (1, 4)))


def _supports(rng: np.random.Generator, length: float, EI: float) -> list[Support]:
    at = [rng.uniform(0, 0.1), *rng.uniform(0.2, 0.8, rng.integers(3)), rng.choice([0.9, 1.0])]
    soft = length**3 / EI
    return [Support(x * length, soft * rng.choice([0, 1e-3, 0.05]), rng.choice([0, 0.4, 1.0])) for x in sorted(at)]


def _loads(rng: np.random.Generator, one: Members, length: float, EI: float) -> Loads:
    load = 0.01 * EI / length**2

    def some(most: int):
        return range(rng.integers(most + 1))

    def part():
        return np.sort(rng.uniform(0, length, 2))

    return loads(
        one,
        forces=[Force(rng.uniform(0, length), load * rng.normal(), int(n % 2)) for n in range(2)],
        couples=[Couple(rng.uniform(0, length), load * length * rng.normal(), int(n % 2)) for n in some(2)],
        spreads=[Spread(*part(), *(load / length * rng.normal(size=2)), int(n % 2)) for n in some(2)],
        bends=[Bend(*part(), 0.01 / length * rng.normal(), int(n % 2)) for n in some(1)],
        movements=[Movement(0, 1e-3 * length * rng.normal(), 1) for _ in some(1)],
    )
