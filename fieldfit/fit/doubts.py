"""Doubts: what a licensed engineer would raise before believing the numbers."""

from collections.abc import Iterator, Sequence

import numpy as np

from fieldfit.beam import Array, Flags, recorded
from fieldfit.fit.columns import axial_columns
from fieldfit.fit.gauge_effects import drifting, timeless
from fieldfit.fit.imposed import is_asked
from fieldfit.fit.noise import Noise
from fieldfit.fit.settling import unsettled, unsettled_words
from fieldfit.fit.stations import solved_at, stations_along
from fieldfit.observe import DEAD, Service, Subject
from fieldfit.observe.level_doubts import level_doubts
from fieldfit.observe.naming import first_named

__all__ = ["assumptions", "too_good"]

SMALL = 0.5  # of the moment of a stage that was never read; common practice, no source
TOO_GOOD = 0.999  # probability of more scatter, above which a fit is too good to be true


def assumptions(subject: Subject) -> tuple[str, ...]:
    """What was taken for granted, in sentences."""
    said = []
    if not any(subject.load_u.values()) and not subject.share_u:
        said.append("Loads were taken as exact: the book gives no uncertainty for them.")
    exact = [one.stage for one in subject.gradients if not one.u and not is_asked(subject, one)]
    if exact:
        stages = "every stage" if None in exact else first_named([*dict.fromkeys(map(str, exact))])
        said.append(
            f"The temperature difference over the depth was taken as exact in {stages}: the book gives no u for it."
        )
    unmeasured = _unmeasured_supports(subject)
    if unmeasured:
        noun, verb = ("Supports", "were") if len(unmeasured) > 1 else ("Support", "was")
        names = " and ".join(unmeasured) if len(unmeasured) < 3 else ", ".join(unmeasured)
        said.append(f"{noun} {names} {verb} taken as rigid without a gauge there: an assumption, not a finding.")
    if _one_case(subject):
        said.append("All stages carry one load case: a wrong load and a wrong EI look the same.")
    if _single_strain(subject):
        said.append(
            "Strain gauges that stand alone at their station were read as bending strain, without axial strain."
        )
    return (*said, *_small_tests(subject), *_of_time(subject), *level_doubts(subject.levelled, subject.name))


def _of_time(subject: Subject) -> Iterator[str]:
    """Stages that had not settled, and what was taken for granted of drift."""
    yield from map(unsettled_words, unsettled(subject))
    if drifting(subject):
        yield (
            "Each gauge read at zero before and after the load was given a drift that is linear in time, found with "
            "its uncertainty; a permanent set would look the same."
        )
    if timeless(subject):
        yield (
            "Zero stages stand before and after the load, but without times: no drift was told from the readings, as "
            "the order of stages is not time."
        )


def too_good(noise: Noise) -> tuple[str, ...]:
    """A sentence where readings scatter so little that their stated uncertainty can hardly be theirs."""
    if noise.p is None or noise.p <= TOO_GOOD:
        return ()
    return (
        "The readings lie closer to the model than their stated uncertainty lets them but once in a thousand records: "
        "either that uncertainty is too large, and the intervals wider than need be, or these are not raw readings.",
    )


def _read(subject: Subject) -> Flags:
    """Stages (T,) of which a reading is in the fit."""
    seen = subject.observations
    return np.isin(np.arange(len(subject.stages)), seen.stage[seen.used_for == "fit"])


def _changes(subject: Subject) -> Array:
    """How much of each load case the stages carry (T, C) beside what the reference zero stage carries."""
    factors = np.array([stage.factors for stage in subject.stages])
    return factors if subject.zero is None else factors - factors[subject.zero]


def _one_case(subject: Subject) -> bool:
    """Whether one load case, wherever it was put, makes all the changes that were read."""
    moved = np.asarray(_changes(subject)[_read(subject)].any(axis=0))
    return len({case for case, carried in zip(subject.load_cases, moved, strict=True) if case and carried}) == 1


def _small_tests(subject: Subject) -> Iterator[str]:
    """How little of the moment of a stage that nobody read, or of the service loads, was on the member in the test.

    By the member on record, at the section where these bend it most, in the same sense.
    """
    read = _read(subject)
    if not read.any():
        return
    service, member = subject.service, subject.member
    at, left = stations_along(member, subject.loads, *([service.loads] if service else []))
    changes = _changes(subject)
    tested = solved_at(member, subject.loads, changes, recorded(member), at, left).moment[0]
    unread = [n for n, stage in enumerate(subject.stages) if not read[n] and stage.role in ("load", "hold")]
    whole = {f"stage {subject.stages[number].name}": tested[number] for number in unread}
    if service and not _among(subject, service.names, changes[unread]):
        factors = _to_come(subject, service)
        natures = ", ".join(dict.fromkeys(np.array(service.natures)[factors > 0].tolist()))
        moment = solved_at(member, service.loads, factors[None], recorded(member), at, left).moment[0, 0]
        whole[f"the service loads ({natures})"] = moment
    shares = {}
    for name, moment in whole.items():
        worst = int(np.argmax(np.abs(moment)))
        reached = (tested[read, worst] * np.sign(moment[worst])).max()
        share = max(reached / abs(moment[worst]), 0.0) if moment[worst] else 1.0
        if share < SMALL:
            shares[name] = (share, at[worst] / member.length[0])
    if shares:
        least = min(shares, key=lambda name: shares[name][0])
        share, where = shares[least]
        others = f" (and less than half of that of {len(shares) - 1} more)" if len(shares) > 1 else ""
        yield (
            f"The loads under which readings were taken reach {share:.0%} of the moment of {least} at {where:.2g} of "
            f"the length, where it is largest{others}: a stiffness found at so small a load need not hold under that "
            "load (cracking, slip, friction at the bearings)."
        )


def _among(subject: Subject, names: Sequence[str], carried: Array) -> bool:
    """Whether stages that carry so much of each placed case (T, C) carry any of these load cases."""
    return bool(carried[:, [case in names for case in subject.load_cases]].any())


def _to_come(subject: Subject, service: Service) -> Array:
    """How much of each service load (C,) was not yet on the member when its gauges were read at zero."""
    factors = service.factors(*service.natures) - service.factors(*DEAD, standing=True)
    if subject.zero is not None:
        there = subject.stages[subject.zero].factors
        for number, name in enumerate(service.names):
            factors[number] -= there[[case == name for case in subject.load_cases]].sum()
    return np.maximum(factors, 0.0)


def _single_strain(subject: Subject) -> bool:
    seen = subject.observations
    strain = (seen.quantity == "strain") & (seen.used_for != "none")
    shared = sum((column != 0).astype(int) for column in axial_columns(subject).values())
    unzeroed = strain & (seen.stage != (-1 if subject.zero is None else subject.zero))
    return bool(np.any(unzeroed & (np.asarray(shared) == 0)))


def _unmeasured_supports(subject: Subject) -> Sequence[str]:
    """Rigid supports at which no deflection or level in the fit was read, nor asked for."""
    used = subject.observations.used_for == "fit"
    return [name for name, there in subject.gauged_supports.items() if not np.any(there & used)]
