"""The member to scale: supports, zones, hinges, gauges, and the loads of its heaviest stage."""

from collections.abc import Iterator, Sequence

import numpy as np

from fieldfit.fieldbook import Book
from fieldfit.observe import Subject
from fieldfit.report.axes import tick_texts, ticks
from fieldfit.report.canvas import FAINT, GREY, INK, Area, Drawing, Line, Mark, Shape, Text, moved, shortened, width_of
from fieldfit.report.curves import most_loaded
from fieldfit.report.figures.picture import WIDTH, Picture, in_units
from fieldfit.report.results import unit_of
from fieldfit.report.words import plain

__all__ = ["beam"]

LEFT, RIGHT = 30.0, WIDTH - 30.0
LANE = 15.0  # px, of a line of names
NAME, SHORT = 132.0, 110.0  # px, room of a gauge's name, and where not all find that
LANES = 4  # lines of gauge names at most; what does not fit is counted instead
HALF = 5.0  # px, half the depth the member is drawn with
BLUE, ORANGE, GREEN = "#0072B2", "#E69F00", "#007A59"


def beam(book: Book, subject: Subject) -> Picture:
    """The recorded member to scale, lengths only; what the book asks of a support is marked with a question mark."""
    place = _Place(subject)
    stage = most_loaded(subject)
    gauges, lanes, hidden = _gauges(subject, place)
    loads = [] if stage is None else list(_loads(book, subject, place, stage))
    y = 86.0 + LANE * lanes
    shapes: list[Shape] = [moved(shape, LANE * lanes) for shape in loads]
    shapes = [*gauges, *shapes]
    shapes += _body(subject, place, y)
    shapes += _supports(subject, place, y)
    rule = y + (72 if len(subject.zones) else 58)
    shapes += _scale(book, subject, place, rule)
    return Picture(
        key="beam",
        heading="The member",
        caption=_caption(subject, stage, hidden),
        drawing=Drawing(
            width=WIDTH,
            height=rule + 38,
            title=f"Member {subject.name} to scale",
            description=_description(book, subject),
            shapes=tuple(shapes),
        ),
    )


class _Place:
    """Where (px) a station (m) of a member stands."""

    def __init__(self, subject: Subject) -> None:
        self.length = float(subject.member.length[0])

    def __call__(self, at: float) -> float:
        return LEFT + (RIGHT - LEFT) * float(at) / self.length


def _gauges(subject: Subject, place: _Place) -> tuple[list[Shape], int, int]:
    """Gauges above the member with their names in lanes; the shapes, the lanes used, the names that found no room."""
    seen = subject.observations
    places = sorted({(float(at), str(name)) for at, name in zip(seen.at, seen.gauge, strict=True)})
    room = NAME if _laned(places, place, NAME) is not None else SHORT
    every = next(step for step in range(1, len(places) + 2) if _laned(places[::step], place, room) is not None)
    named = _laned(places[::every], place, room) or []
    lanes = 1 + max((lane for *_, lane in named), default=-1)
    marks = [Mark(place(at), LANE * lanes + 10, "down", BLUE, 4.0 if len(places) <= 60 else 2.2) for at, _ in places]
    tops = [LANE * (lanes - lane) for *_, lane in named]
    lines = [Line(((x, top + 3), (x, LANE * lanes + 6)), FAINT, 0.8) for (x, *_), top in zip(named, tops, strict=True)]
    texts = [Text(start, top, text, size=11) for (_, start, text, _), top in zip(named, tops, strict=True)]
    return [*lines, *texts, *marks], lanes, len(places) - len(named)


def _laned(
    places: Sequence[tuple[float, str]], place: _Place, room: float
) -> list[tuple[float, float, str, int]] | None:
    """Place (px), start of the name (``room`` px at most), name and lane of each gauge; None if not all find room."""
    free, named = [0.0] * LANES, []
    for at, name in places:
        x, text = place(at), shortened(name, room, 11)
        start = min(max(x - width_of(text, 11) / 2, 2.0), WIDTH - 2 - width_of(text, 11))
        lane = next((number for number, end in enumerate(free) if start >= end), None)
        if lane is None:
            return None
        free[lane] = start + width_of(text, 11) + 8
        named.append((x, start, text, lane))
    return named


def _loads(book: Book, subject: Subject, place: _Place, stage: int) -> Iterator[Shape]:
    """Loads of a stage on the member, whose top is at 81 px; sizes are those of the stage."""
    loads, factors = subject.loads, subject.stages[stage].factors
    labelled = _Labels()
    spreads = zip(loads.spread_from[0], loads.spread_to[0], loads.spread_start[0], loads.spread_end[0], strict=True)
    for (start, end, first, last), case in zip(spreads, loads.spread_case[0], strict=True):
        if factors[case]:
            yield from _spread(place, (start, end), (factors[case] * first, factors[case] * last))
            text = _sized(book, "intensity", max(first, last, key=abs) * factors[case])
            yield from labelled(text, place((start + end) / 2))
    acting = loads.force[0] * factors[loads.force_case[0]]
    for at in np.unique(loads.force_at[0, acting != 0]):
        force = float(acting[loads.force_at[0] == at].sum())
        yield from _arrow(place(at), up=force > 0)
        yield from labelled(_sized(book, "force", force), place(at))
    for at, couple, case in zip(loads.couple_at[0], loads.couple[0], loads.couple_case[0], strict=True):
        if factors[case] * couple:
            yield from _couple(place(at), anticlockwise=factors[case] * couple > 0)
            yield from labelled(_sized(book, "moment", couple * factors[case]), place(at))


class _Labels:
    """Texts above the loads, in two lanes; a text that finds no room there is left out."""

    def __init__(self) -> None:
        self.free = [0.0, 0.0]

    def __call__(self, text: str, x: float) -> Iterator[Shape]:
        half = width_of(text, 11) / 2
        x = min(max(x, half + 2), WIDTH - half - 2)
        for lane, end in enumerate(self.free):
            if x - half >= end:
                self.free[lane] = x + half + 8
                yield Text(x, 42.0 - 13 * lane, text, "middle", size=11)
                return


def _sized(book: Book, kind: str, up: float) -> str:
    return f"{plain(abs(float(in_units(book, kind, up))), 3)} {unit_of(book, kind)}"


def _arrow(x: float, *, up: bool) -> Iterator[Shape]:
    tail, head = (81.0, 48.0) if up else (48.0, 81.0)
    way = 1 if head > tail else -1
    yield Line(((x, tail), (x, head - 5 * way)), INK, 1.8)
    yield Area([(x, head), (x - 4, head - 9 * way), (x + 4, head - 9 * way)], INK)


def _spread(place: _Place, ends: tuple[float, float], sizes: tuple[float, float]) -> Iterator[Shape]:
    largest = max(abs(size) for size in sizes)
    tall = [81.0 - 4 - 22 * abs(size) / largest for size in sizes]
    a, b = map(place, ends)
    yield Area([(a, 81.0), (a, tall[0]), (b, tall[1]), (b, 81.0)], ORANGE, 0.45, 1.0)


def _couple(x: float, *, anticlockwise: bool) -> Iterator[Shape]:
    turns = np.linspace(-0.2, 1.2, 16) * np.pi
    arc = [(x + 13 * float(np.cos(turn)), 68.0 - 13 * float(np.sin(turn))) for turn in turns]
    yield Line(arc, INK, 1.6)
    tip, near = (arc[-1], arc[-3]) if anticlockwise else (arc[0], arc[2])
    along = np.subtract(tip, near) / np.hypot(*np.subtract(tip, near))
    side = np.array([-along[1], along[0]])
    corners = [tip + 5 * along, tip - 3 * along + 5 * side, tip - 3 * along - 5 * side]
    yield Area([(float(px), float(py)) for px, py in corners], INK)


def _body(subject: Subject, place: _Place, y: float) -> Iterator[Shape]:
    """The member, its zones deeper and named below the supports, its hinges."""
    member = subject.member
    yield Area(_box(place(0), place(member.length[0]), y, HALF), "#9a9a9a", 1.0, 1.0)
    free = 0.0
    for name, start, end in zip(subject.zones, member.zone_from[0], member.zone_to[0], strict=True):
        a, b = place(start), place(end)
        yield Area(_box(a, b, y, HALF + 2), GREEN, 1.0, 1.0)
        text = shortened(name, max(b - a + 16, 40.0), 11)
        left = (a + b - width_of(text, 11)) / 2
        if left >= free and left + width_of(text, 11) < WIDTH:
            free = left + width_of(text, 11) + 4
            yield Text(left, y + 60, text, size=11, colour=GREEN)
    for at in member.hinge_at[0]:
        yield Mark(place(at), y, "circle", INK, 5.5, hollow=True)


def _box(left: float, right: float, y: float, half: float) -> list[tuple[float, float]]:
    return [(left, y - half), (right, y - half), (right, y + half), (left, y + half)]


def _supports(subject: Subject, place: _Place, y: float) -> Iterator[Shape]:
    member = subject.member
    asked = {row.where for row in subject.asked if row.quantity in ("bearing stiffness", "rotational restraint")}
    rows = zip(
        subject.supports, member.support_at[0], member.support_flexibility[0], member.support_fixity[0], strict=True
    )
    free = 0.0
    for name, at, flexibility, fixity in rows:
        x, top = place(at), y + HALF
        if fixity > 0:
            yield Area(_box(x - 8, x + 8, y, HALF + 6), INK, 0.35 if fixity < 1 else 1.0)
        if np.isfinite(flexibility):
            yield from _rigid(x, top) if flexibility == 0 else _spring(x, top)
        mark = " ?" if name in asked else ""
        label = shortened(name, 78, 12) + mark
        wide = width_of(label, bold=True)
        start = min(max(x - wide / 2, 2), WIDTH - 2 - wide)
        if start >= free:
            free = start + wide + 6
            yield Text(start, y + 44, label, bold=True)


def _rigid(x: float, top: float) -> Iterator[Shape]:
    yield Area([(x, top), (x - 9, top + 16), (x + 9, top + 16)], INK, 1.0)
    yield Line(((x - 13, top + 18), (x + 13, top + 18)), INK, 1.6)


def _spring(x: float, top: float) -> Iterator[Shape]:
    coil = [(x + side * 6, top + 2 + 2.4 * turn) for turn, side in enumerate((0, 1, -1, 1, -1, 0))]
    yield Line([(x, top), *coil, (x, top + 17)], INK, 1.6)
    yield Line(((x - 13, top + 18), (x + 13, top + 18)), INK, 1.6)


def _scale(book: Book, subject: Subject, place: _Place, y: float) -> Iterator[Shape]:
    """A rule along the member in the book's unit of length."""
    length = float(in_units(book, "length", float(subject.member.length[0])))
    unit = float(in_units(book, "length", 1.0))
    values = ticks(0.0, length, wanted=8)
    yield Line(((place(0), y), (place(length / unit), y)), GREY, 0.8)
    places = [place(value / unit) for value in values]
    yield from (Line(((x, y), (x, y + 4)), GREY, 0.8) for x in places)
    for x, text in zip(places, tick_texts(values), strict=True):
        yield Text(x, y + 17, text, "middle", colour=GREY)
    label = f"distance from the left end [{unit_of(book, 'length')}]"
    yield Text((LEFT + RIGHT) / 2, y + 33, label, "middle", colour=GREY)


def _caption(subject: Subject, stage: int | None, hidden: int) -> str:
    said = ["To scale along its length; triangles above are gauges."]
    if stage is not None:
        said.append(f"Loads are those of stage “{subject.stages[stage].name}”; no stage carries more.")
    if hidden:
        said.append(f"{hidden} gauges stand too close to be named; the ledger lists them.")
    if len(subject.zones):
        said.append("Deeper stretches are zones.")
    if any(row.quantity in ("bearing stiffness", "rotational restraint") for row in subject.asked):
        said.append("A question mark means that the readings were asked how that support behaves.")
    return " ".join(said)


def _description(book: Book, subject: Subject) -> str:
    member = subject.member
    unit = unit_of(book, "length")
    shown: Sequence[str] = [
        f"{name} at {plain(float(in_units(book, 'length', at)))} {unit}"
        for name, at in zip(subject.supports, member.support_at[0], strict=True)
    ]
    gauges = len({str(name) for name in subject.observations.gauge})
    length = plain(float(in_units(book, "length", float(member.length[0]))))
    return f"Length {length} {unit}; supports: {', '.join(shown)}; {gauges} gauges."
