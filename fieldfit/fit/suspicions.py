"""Suspicions: gauges that stick, reach the end of their travel, jump or go back past their zero, supports that move.

Each is found and said; nothing is mended. Sizes are told in multiples of the reading's own u.
"""

from collections.abc import Iterator
from typing import NamedTuple

import numpy as np
from scipy import stats

from fieldfit.beam import Array, Flags
from fieldfit.fit.design import Design, basis_of
from fieldfit.fit.profile import Profile
from fieldfit.observe import Subject
from fieldfit.observe.naming import first_named
from fieldfit.observe.repeats import ALONE

__all__ = ["apart_of", "suspicions"]

CLEAR = 4.0  # u of a difference: a change smaller than that may be chance
SHARE = 0.1  # of a gauge's range on record: a difference smaller than that is none to wonder at
UNLIKELY = 0.01  # of finding a step by chance anywhere, and of what is left after it
SUDDEN = 10.0  # usual steps from one reading to the next: a noisy gauge makes 6 of them once in a million readings
ABSORBED = 1e-9  # share of a step that unknowns and zeros leave: below it the step is theirs


def suspicions(subject: Subject, as_recorded: Array) -> tuple[str, ...]:
    """Sentences on what gauges did that beams do not; ``as_recorded`` (n,) is what the member on record would read."""
    said: list[str] = []
    for mine in _gauges(subject):
        said += [*_stuck(subject, as_recorded, mine), *_over_recovered(subject, mine)]
        said += _stopped(subject, mine)
    return (*dict.fromkeys(said), *_jumped(subject, as_recorded), *_moved_supports(subject, as_recorded))


def _gauges(subject: Subject) -> Iterator[Flags]:
    """The readings in use of each gauge from one zero, as flags (n,)."""
    seen = subject.observations
    for name, zero in dict.fromkeys(zip(seen.gauge, seen.zero, strict=True)):
        mine = (seen.gauge == name) & (seen.zero == zero) & (seen.used_for != "none")
        if mine.any():
            yield mine


def _stuck(subject: Subject, as_recorded: Array, mine: Flags) -> Iterator[str]:
    """The same figure in stages that should differ: at the end of its readings twice, elsewhere three times.

    A logger that repeats one figure all through two stages is as good as the end.
    """
    seen = subject.observations
    value, theory = _rounded(seen.value[mine]), as_recorded[mine]
    still = (seen.scatter[mine] == 0) & (seen.count[mine] >= ALONE)
    if len(value) < 2:
        return
    least = np.fmax(CLEAR * np.sqrt(2.0) * seen.u[mine], SHARE * np.ptp(theory))
    for shown in np.unique(value):
        alike = value == shown
        stages = [subject.stages[stage].name for stage in np.unique(seen.stage[mine][alike])]
        extreme = shown in (value.min(), value.max()) and value.min() < value.max()
        if len(stages) < (2 if extreme or still[alike].all() else 3) or np.ptp(theory[alike]) <= least[alike].max():
            continue
        cause = "at the end of its travel, or stuck" if extreme else "stuck"
        yield f"Gauge {seen.gauge[mine][0]} shows one figure in {_list(stages)}, which should differ: {cause}?"


def _rounded(values: Array) -> Array:
    """Values (n,) to ten digits of the largest: means of one figure differ in their last digits."""
    size = np.abs(values).max(initial=0.0)
    return np.round(values / size, 10) * size if size else values


def _stopped(subject: Subject, mine: Flags) -> Iterator[str]:
    """A gauge without readings in all later stages in which others of its kind were read."""
    seen, first = subject.observations, int(np.argmax(mine))
    others = (seen.quantity == seen.quantity[first]) & (seen.gauge != seen.gauge[first]) & (seen.used_for != "none")
    last = seen.stage[(seen.gauge == seen.gauge[first]) & (seen.used_for != "none")].max()
    later = [subject.stages[stage].name for stage in np.unique(seen.stage[others]) if stage > last]
    if later:
        yield (
            f"Gauge {seen.gauge[first]} has no reading in {_list(later)}, where others have: it stopped, was taken "
            "off, or its readings lie outside the windows."
        )


def _jumped(subject: Subject, as_recorded: Array) -> Iterator[str]:
    """Steps within a stage far beyond the usual one from reading to reading, and more than the gauge's own u."""
    seen, own = subject.observations, subject.gauges
    sudden = np.zeros(len(seen), dtype=bool)
    for mine in _gauges(subject):
        known = own.u[(own.gauge == seen.gauge[mine][0]) & np.isfinite(own.u)]
        least = CLEAR * np.sqrt(2.0) * known[0] if known.size else SHARE * np.ptp(as_recorded[mine])
        sudden |= mine & (seen.jump > np.fmax(SUDDEN * seen.step, least))
    for stage in np.unique(seen.stage[sudden]):
        names = [*dict.fromkeys(seen.gauge[sudden & (seen.stage == stage)])]
        who = f"Gauge {names[0]} jumps" if len(names) == 1 else f"Gauges {first_named(names)} jump"
        yield (
            f"{who} within stage {subject.stages[stage].name} by more than {SUDDEN:.0f} times the usual step from one "
            "reading to the next: a knock, a reset that the book does not tell, load put on within the window, or a "
            "wild reading. Nothing was mended: the mean of the stage has it in."
        )


def _over_recovered(subject: Subject, mine: Flags) -> Iterator[str]:
    """A reading that went back past the zero after the load was taken off."""
    seen, change = subject.observations, _changes(subject, mine, subject.observations.value)
    role = np.array([subject.stages[stage].role for stage in seen.stage], dtype=object)
    loaded, back = mine & np.isin(role, ("load", "hold")), mine & (role == "recovery")
    if change is None or not loaded.any():
        return
    most = change[loaded][np.argmax(np.abs(change[loaded]))]
    chance = np.where(np.isnan(seen.u), SHARE * abs(most), CLEAR * np.sqrt(2.0) * seen.u)
    for n in np.flatnonzero(back & (change * most < 0) & (np.abs(change) > chance)):
        yield (
            f"Gauge {seen.gauge[n]} recovers {100 * (1 - change[n] / most):.0f} % in "
            f"{_list([subject.stages[seen.stage[n]].name])}: past its zero. No recovery is better than full; look for "
            "drift, temperature, or a gauge or support that moved."
        )


def _changes(subject: Subject, mine: Flags, values: Array) -> Array | None:
    """Values (n,) less their mean in the zero stage; None where a gauge has no zero to change from."""
    if subject.zero is None:
        return None if subject.observations.zero[mine].any() else values
    zero = mine & (subject.observations.stage == subject.zero)
    return values - values[zero].mean() if zero.any() else None


def _moved_supports(subject: Subject, as_recorded: Array) -> Iterator[str]:
    """Gauges at a support taken as rigid that move all the same."""
    if subject.is_shape_survey or any(row.quantity.startswith("datum") for row in subject.asked):
        return
    for name, there in subject.gauged_supports.items():
        moved = np.zeros(len(there))
        for mine in _gauges(subject):
            moved = np.where(mine & there, _moved(subject, mine & there, as_recorded), moved)
        clear = moved > CLEAR
        if clear.any():
            seen = subject.observations
            gauges = [*dict.fromkeys(seen.gauge[clear])]
            stages = [subject.stages[stage].name for stage in np.unique(seen.stage[clear])]
            said = f"{'gauges' if len(gauges) > 1 else 'gauge'} {first_named(gauges)} at it moved in {_list(stages)}"
            yield (
                f"Support {name} was taken as rigid, but {said}, by up to {moved.max():.0f} times the u of such a "
                "change. Ask for its settlement or its bearing stiffness in the unknowns."
            )


def _moved(subject: Subject, there: Flags, as_recorded: Array) -> Array:
    """How far (n,) one gauge went beyond its calculated change, over the u of such a change; ``there`` its readings."""
    seen = subject.observations
    change = _changes(subject, there, seen.value - as_recorded) if there.any() else None
    return np.zeros(len(seen)) if change is None else np.nan_to_num(np.abs(change) / (np.sqrt(2.0) * seen.u))


def _list(names: list[str]) -> str:
    return f"{'stage' if len(names) == 1 else 'stages'} {first_named(names)}"


def apart_of(subject: Subject, design: Design, profile: Profile, used: Flags) -> tuple[str, ...]:
    """A sentence on the one step of a gauge, or the one reading, that explains the readings best, where chance cannot.

    Every reading, and every gauge with every stage after which it may have stepped, is tried as a further unknown of
    the fit: the sum of squares would fall by t² (the score test of an added column; Cook and Weisberg, 1982). It is
    said only where the fall is beyond chance among all those tried, and what is left then agrees with the stated u.
    """
    found = [*_steps(subject, design, profile, used)]
    if not found:
        return ()
    best = max(found, key=lambda one: abs(one.root))
    noise, spare = profile.noise, profile.noise.spare - 1
    left = profile.minimum.sum_of_squares - best.root**2
    if spare < 1 or left < 0:
        return ()
    variance = left / spare if noise.degrees_of_freedom is not None else 1.0
    if not variance:
        return ()
    size = abs(best.root) / np.sqrt(variance)
    tail = stats.t(spare).sf(size) if noise.degrees_of_freedom is not None else stats.norm.sf(size)
    explained = noise.degrees_of_freedom is not None or stats.chi2.sf(left, spare) > UNLIKELY
    if 2 * tail > UNLIKELY / len(found) or not explained:
        return ()
    if best.is_step:
        return (
            f"Gauge {best.gauge} stands apart {best.when}, by {size:.0f} times the u of such a step: a knock, a reset "
            "that the book does not tell, a slip in writing it down, or a movement of what it stands on. Nothing was "
            "mended; where it was a reset, reset (yes) on its next reading, or with a logger's file a row of resets, "
            "starts a new zero.",
        )
    return (
        f"The reading of gauge {best.gauge} {best.when} stands apart, by {size:.0f} times the u of such a difference; "
        "all others agree with each other. A slip in reading or writing it down (a digit, two digits exchanged, a "
        "decimal point, a sign)? Look at the original record. Nothing was mended; use (no) sets a reading aside.",
    )


class _Apart(NamedTuple):
    """Root t of the fall of the sum of squares, the gauge, and when it is told to stand apart."""

    root: float
    gauge: str
    when: str
    is_step: bool


def _steps(subject: Subject, design: Design, profile: Profile, used: Flags) -> Iterator[_Apart]:
    """Every step of every gauge, of its last reading too, then every other reading by itself."""
    seen = subject.observations
    gauge, stage = seen.gauge[used], seen.stage[used]
    basis = basis_of(design.whole_jacobian(profile.minimum.unknowns))[: len(gauge)]
    residual = profile.minimum.residual[: len(gauge)]

    def roots(columns: Array, own: Flags) -> Array:
        """Root of the fall for each white column (n, k), zero but for rows ``own`` (n,); NaN where it is absorbed."""
        size = (columns[own] ** 2).sum(axis=0)
        left = size - ((basis[own].T @ columns[own]) ** 2).sum(axis=0)
        clear = left > ABSORBED * size
        return np.where(clear, residual[own] @ columns[own] / np.sqrt(np.where(clear, left, 1.0)), np.nan)

    alone = np.ones(len(gauge), dtype=bool)
    for name in dict.fromkeys(gauge):
        mine = gauge == name
        places = np.unique(stage[mine])
        after = [place for place in places if (mine & (stage < place)).sum() > 1]
        if not after:
            continue
        columns = design.whitening.apply((mine[:, None] & (stage[:, None] >= np.array(after))).astype(float))
        for place, root in zip(after, roots(columns, (columns != 0).any(axis=1)), strict=True):
            when = f"from stage {subject.stages[place].name} on"
            if place == places[-1]:
                when = f"in stage {subject.stages[place].name}, its last in the fit"
                alone &= ~(mine & (stage == place))
            if np.isfinite(root):
                yield _Apart(float(root), str(name), when, is_step=True)
    single = np.where(
        (left := 1.0 - (basis**2).sum(axis=1)) > ABSORBED, residual / np.sqrt(np.fmax(left, ABSORBED)), np.nan
    )
    together = design.whitening.together
    single[together] = roots(design.whitening.apply(np.eye(len(gauge))[:, together]), np.ones(len(gauge), dtype=bool))
    for n in np.flatnonzero(alone & np.isfinite(single)):
        yield _Apart(float(single[n]), str(gauge[n]), f"in stage {subject.stages[stage[n]].name}", is_step=False)
