"""Record: a load test as its rules see it: net deflections by stage and gauge, cycle by cycle.

Deflections are changes from the first stage of their cycle, down, less the chord of their span where it was read.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime

import numpy as np
from numpy.typing import NDArray

from fieldfit.beam import Array, Flags, integrate, recorded, solve
from fieldfit.fit import Noise, Reconciliation
from fieldfit.fit.stations import solved_along
from fieldfit.judge.rules.means import means_of, readable
from fieldfit.judge.rules.ratios import Ratio
from fieldfit.judge.rules.spans import Span, netted, spans_of
from fieldfit.observe import Stage, Subject

__all__ = ["Cycle", "Record", "cycles_of", "hours", "largest_place", "record_of"]

SAME_LOAD = 0.01  # of the test load: loads nearer than this are one load
LEVEL = 1e-9  # of the largest moment: a stretch on which it is as good as constant


@dataclass(frozen=True, slots=True, kw_only=True)
class Cycle:
    """One loading and unloading: numbers of its stages, in order.

    ``start`` is the stage its deflections are measured from (None: readings are changes from unloaded), the last of
    its ``zeros`` before it was loaded, else the end of the cycle before. ``loaded`` are those under load since,
    ``full`` the last unbroken run of them at the largest load, ``held`` those of it at which that was kept on, ``off``
    those after it. ``before`` are stages under load before such a run that was taken off in between. ``recovery`` and
    ``kept`` are the stages at which what was left and what grew under the load count: the last of each, unless a rule
    names a time.
    """

    name: str
    start: int | None
    zeros: tuple[int, ...]
    stages: tuple[int, ...]
    loaded: tuple[int, ...]
    full: tuple[int, ...]
    held: tuple[int, ...]
    off: tuple[int, ...]
    recovery: int | None
    kept: int | None
    before: tuple[int, ...]

    @property
    def trough(self) -> int | None:
        """The last stage with the load off."""
        return self.off[-1] if self.off else None


@dataclass(frozen=True, slots=True, kw_only=True)
class Record:
    """A load test of one member: G gauges that read deflection within spans, T stages.

    ``read`` (T, G) is the mean of what each read (m, down, supports taken off), NaN where nothing was; ``variance``
    (G, T, T) its covariance between stages; ``calculated`` (T, G) what the recorded member would read. ``span``
    (G,) is the length (m) a rule takes, ``place`` (G,) the number of that span among ``spans``. They are ``weights``
    (G, J) of the J gauges at ``stations`` (m), whose own covariances are ``alone`` (J, T, T). ``bent`` holds for each
    span the deflections (T, S) of the recorded member along it, as its gauges would read them. ``load`` (T,) is the
    moment (N m) at the ``section`` (m) where the heaviest stage bends the recorded member most. ``on_chord`` (G,) says
    where readings are from the chord, ``adrift`` (G,) where they are not though the book says that the datum moved.
    """

    subject: Subject
    gauges: tuple[str, ...]
    at: Array
    span: Array
    place: NDArray[np.intp]
    spans: tuple[Span, ...]
    stations: Array
    weights: Array
    alone: Array
    read: Array
    variance: Array
    calculated: Array
    bent: tuple[Array, ...]
    load: Array
    section: float
    cycles: tuple[Cycle, ...]
    on_chord: Flags
    adrift: Flags
    noise: Noise | None

    @property
    def chord(self) -> bool:
        """Whether any gauge is read from the chord of its span."""
        return bool(self.on_chord.any())

    @property
    def heaviest(self) -> Cycle:
        """The first cycle of the largest load: the test itself; what came before led up to it."""
        return self._first_of_largest(self.cycles)

    @property
    def repeat(self) -> Cycle | None:
        """The first cycle of the largest load after the test."""
        later = self.cycles[self.cycles.index(self.heaviest) + 1 :]
        return self._first_of_largest(later) if later else None

    def _first_of_largest(self, cycles: Sequence[Cycle]) -> Cycle:
        loads = [float(self.load[cycle.full[0]]) for cycle in cycles]
        return next(one for one, load in zip(cycles, loads, strict=True) if load >= (1 - SAME_LOAD) * max(loads))

    def top(self, cycle: Cycle) -> float:
        """The largest load of a cycle (moment, N m) over that of its start."""
        return float(self.load[cycle.full[0]] - (0.0 if cycle.start is None else self.load[cycle.start]))

    def form(self, plus: NDArray[np.intp] | int | None, minus: int | None) -> Array:
        """Gradient (G, T) of a reading less another by stage; ``plus`` may differ by gauge, None is no reading."""
        out = np.zeros((len(self.gauges), len(self.read)))
        if plus is not None:
            out[np.arange(len(out)), plus] += 1.0
        if minus is not None:
            out[:, minus] -= 1.0
        return out

    def valued(self, gradient: Array, seen: Array | None = None) -> Array:
        """Value (G,) of a linear form by stage (G, T); NaN where a reading that it needs is missing."""
        seen = self.read if seen is None else seen
        missing = ((gradient != 0) & np.isnan(seen.T)).any(axis=1)
        total: Array = (gradient * np.nan_to_num(seen.T)).sum(axis=1)
        return np.where(missing, np.nan, total)

    def shown(self, gradient: Array) -> Array:
        """How much of the largest deflection of its span the gauges there show by the record, (G,), by forms (G, T)."""
        own = np.abs(self.valued(gradient, self.calculated))
        most = np.array([np.abs(one @ self.bent[span]).max() for one, span in zip(gradient, self.place, strict=True)])
        share = np.divide(own, most, out=np.ones(len(own)), where=most > 0)
        return np.array([share[self.place == span].max() for span in self.place])

    def ratio(self, top: Array, top_slope: Array, bottom: Array, bottom_slope: Array) -> Ratio:
        """A ratio of two functions of the readings by their values (G,) and gradients (G, T)."""
        spread = self.variance
        return Ratio(
            top=top,
            bottom=bottom,
            top_variance=np.einsum("gs,gst,gt->g", top_slope, spread, top_slope),
            bottom_variance=np.einsum("gs,gst,gt->g", bottom_slope, spread, bottom_slope),
            covariance=np.einsum("gs,gst,gt->g", top_slope, spread, bottom_slope),
            noise=self.noise,
        )

    def largest(self, cycle: Cycle) -> NDArray[np.intp]:
        """Of the stages under load of a cycle, that of the largest deflection at each gauge, (G,).

        The load that bends a section most need not be the one under which a gauge moves most. A gauge that was not read
        at the end of a hold, or where the recorded member would deflect more than in any stage that was read, has no
        largest deflection: it is that stage's, which is missing.
        """
        loaded, each = np.array(cycle.loaded, dtype=np.intp), np.arange(len(self.gauges))
        on_record = np.abs(self._changes(self.calculated, cycle)[loaded])
        size, missing = np.abs(self._changes(self.read, cycle)[loaded]), np.isnan(self.read[loaded])
        most = np.where(np.isnan(size), -1.0, size).argmax(axis=0)
        owed = np.where(missing, on_record, -1.0).argmax(axis=0)
        more = missing[owed, each] & (on_record[owed, each] > (1 + SAME_LOAD) * on_record[most, each])
        stage = loaded[np.where(more, owed, most)]
        return stage if not cycle.held else np.where(np.isnan(self.read[cycle.held[-1]]), cycle.held[-1], stage)

    def _changes(self, values: Array, cycle: Cycle) -> Array:
        """Values by stage (T, G) from the start of a cycle."""
        return values if cycle.start is None else values - values[cycle.start]

    def maximum(self, cycle: Cycle) -> tuple[Array, Array]:
        """The maximum deflection of a cycle (G,) from its start, and its gradient (G, T)."""
        slope = self.form(self.largest(cycle), cycle.start)
        return self.valued(slope), slope


def record_of(found: Reconciliation) -> Record | None:
    """The load test in a member's readings; None where no gauge reads deflection in a span or no stage is loaded."""
    subject = found.subject
    seen = subject.observations
    kept = seen.upright & readable(seen)
    if not kept.any() or subject.is_shape_survey:
        return None
    means = means_of(found, kept)
    at, read, variance = seen.at[means.where], means.read, means.variance
    calculated = _calculated(subject, at)
    along, moment, down = _along(subject)
    load, section = _critical(subject, along, moment)
    cycles = tuple(cycle for cycle in _cycles(subject, load) if cycle.full and np.isfinite(read[[*cycle.stages]]).any())
    if not cycles:
        return None
    loaded = [number for cycle in cycles for number in cycle.loaded]
    spans = spans_of(subject, along, _changed(subject, moment)[loaded], _changed(subject, _factors(subject))[loaded])
    weights, place, chord = netted(spans, at)
    inside = place >= 0
    if not inside.any():
        return None
    return Record(
        subject=subject,
        gauges=tuple(np.array(means.gauges)[inside].tolist()),
        at=at[inside],
        span=np.array([spans[number].length for number in place[inside]]),
        place=place[inside],
        spans=spans,
        stations=at,
        weights=weights[inside],
        alone=variance,
        read=_net(read, weights)[:, inside],
        variance=np.einsum("gj,jst->gst", weights**2, variance)[inside],
        calculated=(calculated @ weights.T)[:, inside],
        bent=tuple(_bent(span, along, down, net=bool(own)) for span, own in zip(spans, chord, strict=True)),
        load=load,
        section=section,
        cycles=cycles,
        on_chord=chord[place[inside]],
        adrift=~chord[place[inside]] & any(row.quantity in ("datum shift", "datum tilt") for row in subject.asked),
        noise=None if found.profile is None else found.profile.noise,
    )


def _net(read: Array, weights: Array) -> Array:
    """Readings (T, G) less the chord; missing only where a reading that counts is."""
    missing = (np.isnan(read)[:, None, :] & (weights != 0)[None]).any(axis=2)
    return np.where(missing, np.nan, np.nan_to_num(read) @ weights.T)


def _calculated(subject: Subject, at: Array) -> Array:
    """Deflection (m, down) of the recorded member at stations (G,) in every stage, (T, G)."""
    response = solve(integrate(subject.member, subject.loads, at[None]), recorded(subject.member))
    return -_factors(subject) @ response.deflection[0]


def _factors(subject: Subject) -> Array:
    return np.array([stage.factors for stage in subject.stages]).reshape(len(subject.stages), -1)


def _changed(subject: Subject, values: Array) -> Array:
    """Values by stage (T, ...) as against the zero stage."""
    return values if subject.zero is None else values - values[subject.zero]


def _along(subject: Subject) -> tuple[Array, Array, Array]:
    """Stations (S,), m, and moment (N m) and deflection (m, down) of the recorded member there by stage, (T, S)."""
    at, response = solved_along(subject.member, subject.loads, _factors(subject), recorded(subject.member))
    return at, response.moment[0], -response.deflection[0]


def _bent(span: Span, at: Array, down: Array, *, net: bool) -> Array:
    """Deflections (T, S) along a span, out of those (T, S) along the member; ``net`` of its supports."""
    own, out = span.holds(at), down[:, span.holds(at)]
    for x, share in zip(span.supports if net else (), span.chord(at[own]), strict=False):
        out = out - down[:, np.abs(at - x).argmin(), None] * share
    return out


def _critical(subject: Subject, at: Array, moment: Array) -> tuple[Array, float]:
    """Moment (N m) at the critical section in every stage (T,), and where that section is (m).

    Critical is where the heaviest stage, as against the zero stage, bends the recorded member most.
    """
    change = _changed(subject, moment)
    stage = int(np.abs(change).max(axis=1).argmax())
    place = largest_place(change[stage])
    return moment[:, place] * (-1.0 if change[stage, place] < 0 else 1.0), float(at[place])


def largest_place(moment: Array) -> int:
    """Where a moment (S,) is largest in size; the middle of a stretch on which it is."""
    size = np.abs(moment)
    places = np.flatnonzero(size >= (1 - LEVEL) * size.max())
    return int(places[len(places) // 2])


def cycles_of(subject: Subject) -> Sequence[Cycle]:
    """The cycles of a test in the order of the book; one where the book names none."""
    at, moment, _ = _along(subject)
    return _cycles(subject, _critical(subject, at, moment)[0])


def _cycles(subject: Subject, load: Array) -> Sequence[Cycle]:
    names = [stage.cycle or "" for stage in subject.stages]
    found: list[Cycle] = []
    for name in dict.fromkeys(names):
        stages = [number for number, own in enumerate(names) if own == name]
        before = found[-1].trough if found else None
        found.append(_cycle(subject, load, name or str(len(found) + 1), stages, before))
    return found


def _last_run(stages: list[int], on: set[int]) -> list[int]:
    """Of some stages the last that follow each other without another between."""
    until = [number for number in stages if on and number <= max(on)]
    broken = max((number for number in until if number not in on), default=-1)
    return [number for number in until if number > broken]


def _cycle(subject: Subject, load: Array, name: str, stages: list[int], before: int | None) -> Cycle:
    role = {number: subject.stages[number].role for number in stages}
    loaded = [number for number in stages if role[number] in ("load", "hold")]
    every_zero = [number for number in stages if role[number] == "zero"]
    first = every_zero[0] if every_zero else before
    rest = 0.0 if first is None else load[first]
    top = max((load[number] - rest for number in loaded), default=0.0)
    on = {number for number in loaded if top > 0 and load[number] - rest >= (1 - SAME_LOAD) * top}
    full = _last_run(stages, on)
    zeros = [number for number in every_zero if number < min(full, default=len(load))] or every_zero[:1]
    zero = zeros[-1] if zeros else before
    bare = [number for number in stages if role[number] in ("unload", "recovery")]
    bare = [number for number in bare if load[number] - rest <= SAME_LOAD * top]
    off = [number for number in bare if full and number > full[-1]]
    taken_off = max((number for number in bare if full and number < full[0]), default=-1)
    return Cycle(
        name=name,
        start=zero,
        zeros=tuple(zeros),
        stages=tuple(stages),
        loaded=tuple([number for number in loaded if zero is None or number > zero] or loaded),
        full=tuple(full),
        held=tuple(number for number in full if role[number] == "hold"),
        off=tuple(off),
        recovery=max((number for number in off if role[number] == "recovery"), default=None),
        kept=max((number for number in full if role[number] == "hold"), default=None),
        before=tuple(number for number in loaded if number < taken_off),
    )


def hours(stage: Stage, *, last: bool) -> float:
    """When a stage ended (``last``) or began, in hours of a common clock; NaN where the book gives no date and time."""
    text = (stage.end or stage.start) if last else (stage.start or stage.end)
    if text is None or "T" not in text:
        return float("nan")
    time = datetime.fromisoformat(text)
    time = time.replace(tzinfo=UTC) if time.tzinfo is None else time
    return time.timestamp() / 3600.0
