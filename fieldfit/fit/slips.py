"""Slips: readings in another unit or of the other sign than the book says, or exchanged with others.

Found and said; nothing is mended.
"""

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations, islice
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray
from scipy import stats
from scipy.linalg import orth

from fieldfit.beam import Array, Flags
from fieldfit.fit.design import Design
from fieldfit.fit.least_squares import best_of, descend
from fieldfit.fit.profile import Profile
from fieldfit.fit.starts import starts
from fieldfit.fit.unknowns import EI
from fieldfit.observe import Subject

__all__ = ["slip_of"]

#: What readings may have to be multiplied by to be what the book says they are, and how it comes about.
SLIPS = {
    -1.0: "had the other sign",
    25.4: "were 25.4 times too small (inches for mm)",
    1 / 25.4: "were 25.4 times too large (mm for inches)",
    1000.0: "were 1000 times too small (m for mm)",
    1e-3: "were 1000 times too large (mm for m)",
}
UNLIKELY = 0.01  # of finding a slip by chance anywhere, and of what is left after it
UNEXPLAINED = 1e-3  # of the sum of squares of the readings: without a u that can be tested, less is no slip
ALIKE = 9.0  # a sum of squares so little above the least is as good an explanation
LIKELY = 40  # slips that are fitted: with many gauges a thousand can be thought of
AGAIN = 5  # of the slips that leave least, each fitted again from every start
FEW = 24  # gauges or stages, of which every pair is tried
MOST = 1_000_000  # readings in all, each counted once a gauge or stage: beyond that none of these is tried
NAMED = 3  # explanations at the most
OFF = 2.0  # an EI within this factor of the record once a slip of all readings is taken out

Reread = Callable[[Array], Design]  # the design of a fit had the readings (n,) these values


@dataclass(frozen=True, slots=True)
class _Slip:
    """What readings look like: in SI the values (n,) would be ``factor`` times those in the places ``taken``."""

    says: str
    factor: Array
    taken: NDArray[np.intp]


def slip_of(subject: Subject, design: Design, profile: Profile, reread: Reread) -> tuple[str, ...]:
    """A sentence on the one slip that explains the readings, where chance cannot; ``reread`` makes their fit anew.

    Every gauge, stage and kind of reading is taken with each factor of ``SLIPS``, and pairs exchanged; those that leave
    least by the linear model are fitted again. Were the book right, the sum of squares would fall by t² less often than
    a normal deviate lies beyond t (with u from scatter, one of Student), as readings so altered move along one line. It
    is said only where that is unlikely among all that were tried and what is left then agrees with the stated u.
    """
    return tuple(_of_some(subject, design, profile, reread)) or tuple(_of_all(design, profile))


def _of_some(subject: Subject, design: Design, profile: Profile, reread: Reread) -> Iterator[str]:
    noise, before = profile.noise, profile.minimum.sum_of_squares
    if noise.explains_readings or (noise.p is None and before < UNEXPLAINED * _size(design)):
        return
    tried = [*_rescaled(subject), *_exchanged(subject)]
    if not tried:
        return
    value = subject.observations.value
    altered = np.array([one.factor * value[one.taken] for one in tried])
    left = np.full(len(tried), np.inf)
    designs = {place: reread(altered[place]) for place in _likely(subject, design, profile, tried)}
    if not designs:
        return
    for place, one in designs.items():
        left[place] = _left(one, 1)
    for place in np.argsort(left)[: min(AGAIN, len(designs))].tolist():
        left[place] = _left(designs[place], None)
    if not _beyond_chance(profile, before, float(left.min()), len(tried)):
        return
    scale = 1.0 if noise.degrees_of_freedom is None else float(left.min()) / max(noise.spare - 1, 1)
    close = np.flatnonzero(left <= left.min() + ALIKE * scale)
    best = [tried[n] for n in close[np.argsort(left[close], kind="stable")]]
    yield (
        f"{_either(best)}; with that all readings would agree. Nothing was mended: look at the unit in the heading, "
        "the positive sense, the channels and the original record."
    )


def _likely(subject: Subject, design: Design, profile: Profile, tried: Sequence[_Slip]) -> list[int]:
    """Places of the slips that would leave least, were the model as straight as at its best fit.

    Readings made small fit anything: they must then fit better than if nothing at all had been read there.
    """
    value, noise = subject.observations.value, profile.noise
    left = _linear(subject, design, profile, np.array([one.factor * value[one.taken] for one in tried]))
    shrunk = np.flatnonzero([bool((np.abs(one.factor) < 1).any()) for one in tried])
    if shrunk.size:
        small = [tried[place] for place in shrunk.tolist()]
        bare = [np.where(np.abs(one.factor) < 1, 0.0, one.factor * value[one.taken]) for one in small]
        scale = 1.0 if noise.degrees_of_freedom is None else left[shrunk] / max(noise.spare - 1, 1)
        idle = _linear(subject, design, profile, np.array(bare)) - left[shrunk] <= ALIKE * scale
        left[shrunk[idle]] = np.inf
    order = np.argsort(left, kind="stable")[:LIKELY]
    return [int(place) for place in order if np.isfinite(left[place])]


def _linear(subject: Subject, design: Design, profile: Profile, altered: Array) -> Array:
    """What altered readings (k, n) would leave, by the model linear about its best fit, sums of squares (k,)."""
    values = profile.minimum.unknowns
    read = altered[:, subject.observations.used_for == "fit"].T
    rows = design.whitening.apply(design.model.predicted(values)[:, None] - read)
    owed = np.repeat(-design.owed[:, None], len(altered), axis=1)
    missed = (values - design.expected)[design.prior] / design.expected_u[design.prior]
    known = np.repeat(missed[:, None], len(altered), axis=1)
    rows = np.concatenate([design.projection.apply(np.concatenate([rows, owed])), known])
    jacobian = profile.minimum.jacobian
    length = np.linalg.norm(jacobian, axis=0)
    basis = orth(jacobian[:, length > 0] / length[length > 0])
    return np.asarray(((rows - basis @ (basis.T @ rows)) ** 2).sum(axis=0))


def _size(design: Design) -> float:
    """Sum of squares of the readings, as far as zeros and other nuisances do not explain them."""
    read = np.append(design.whitening.apply(design.measured), design.owed)
    return float((design.projection.apply(read) ** 2).sum())


def _rescaled(subject: Subject) -> Iterator[_Slip]:
    """Every set of readings in the fit with every factor; a factor on all of them is but another EI."""
    seen = subject.observations
    used = seen.used_for == "fit"
    gauges, kinds, stages = (pd.unique(key[used]) for key in (seen.gauge, seen.quantity, seen.stage))
    sets: list[tuple[Flags, str]] = []
    if len(gauges) * len(seen) <= MOST:
        sets += [(used & (seen.gauge == name), f"readings of gauge {name}") for name in gauges]
    sets += [(used & (seen.quantity == kind), f"readings of {kind}") for kind in kinds]
    if len(stages) * len(seen) <= MOST:
        names = {stage: subject.stages[stage].name for stage in stages.tolist()}
        sets += [(used & (seen.stage == stage), f"readings in stage {name}") for stage, name in names.items()]
    known: set[bytes] = set()
    for rows, where in sets:
        if rows.tobytes() in known:
            continue
        known.add(rows.tobytes())
        for factor in (-1.0,) if rows.sum() == used.sum() else SLIPS:
            says = f"{where} look as if they {SLIPS[factor]}"
            yield _Slip(says, np.where(rows, factor, 1.0), np.arange(len(seen)))


def _exchanged(subject: Subject) -> Iterator[_Slip]:
    """Every two stages, and every two gauges of one kind, in all stages or in one, with their readings exchanged.

    Only where stages and gauges are few.
    """
    seen = subject.observations
    used = seen.used_for == "fit"
    names, stages = sorted(set(seen.gauge[used])), np.unique(seen.stage[used]).tolist()
    for a, b in combinations(stages, 2) if len(stages) <= FEW else ():
        told = f"stages {subject.stages[a].name} and {subject.stages[b].name}"
        yield from _swap(used & (seen.stage == a), used & (seen.stage == b), seen.gauge, f"readings in {told}")
    for a, b in combinations(names, 2) if len(names) <= FEW else ():
        first, second = used & (seen.gauge == a), used & (seen.gauge == b)
        if seen.quantity[first][0] != seen.quantity[second][0]:
            continue
        yield from _swap(first, second, seen.stage, f"readings of gauges {a} and {b}")
        for stage in stages if 1 < len(stages) <= FEW else ():
            once, told = seen.stage == stage, f" in stage {subject.stages[stage].name}"
            yield from _swap(first & once, second & once, seen.stage, f"readings of gauges {a} and {b}{told}")


def _swap(first: Flags, second: Flags, key: NDArray[Any], where: str) -> Iterator[_Slip]:
    """Two sets of readings exchanged, those of one ``key`` (n,) with each other; keys that are not in both stay."""
    place = dict(zip(key[second], np.flatnonzero(second), strict=True))
    pairs = [(n, place[key[n]]) for n in np.flatnonzero(first) if key[n] in place]
    if pairs:
        taken = np.arange(len(key))
        one, other = np.array(pairs).T
        taken[one], taken[other] = other, one
        yield _Slip(f"{where} look as if they were exchanged", np.ones(len(key)), taken)


def _left(design: Design, most: int | None) -> float:
    """Least sum of squares of a design, from so many of its starts at the most."""
    problem, points = design.problem(), [*islice(starts(design), most)]
    if not points[0].size:
        return float((problem.evaluate(points[0])[0] ** 2).sum())
    return descend(problem, best_of(problem, points)).cost


def _beyond_chance(profile: Profile, before: float, left: float, tried: int) -> bool:
    """Whether a fall of the sum of squares is beyond chance among so many, and what is left as it should be."""
    noise = profile.noise
    if left >= before:
        return False
    if noise.degrees_of_freedom is None:
        tail = stats.norm.sf(np.sqrt(before - left))
        return bool(2 * tail < UNLIKELY / tried and noise.spare > 0 and stats.chi2.sf(left, noise.spare) > UNLIKELY)
    spare = noise.spare - 1
    if spare < 1 or not left:
        return False
    size = np.sqrt((before - left) * spare / left)
    return bool(2 * stats.t(spare).sf(size) < UNLIKELY / tried and left < UNLIKELY * before)


def _either(several: Sequence[_Slip]) -> str:
    """What looks slipped; several where readings cannot tell which."""
    return ", or ".join(one.says for one in several[:NAMED]).replace("readings", "Readings", 1)


def _of_all(design: Design, profile: Profile) -> Iterator[str]:
    """An EI so far off the record that a unit is likelier than the beam."""
    spread = np.sqrt(profile.noise.variance * np.diag(profile.minimum.covariance))
    for unknown, value, u in zip(design.model.unknowns, profile.minimum.unknowns, spread, strict=True):
        if unknown.quantity != EI or unknown.where != "whole" or not u < np.log(OFF) / 2:
            continue
        near = [f for f in SLIPS if f > 0 and abs(value - np.log(f)) < np.log(OFF)]
        if near:
            times = f"{near[0]:g} times" if near[0] > 1 else f"1/{1 / near[0]:g} of"
            yield (
                f"EI comes out at about {times} what is on record: that is no beam but a wrong unit, such as inches "
                "for mm, m for mm or N for kN. Look at the units of readings, loads, length and EI."
            )
