"""Drawing: a member to scale in text, for the terminal."""

from collections.abc import Sequence

import numpy as np

from fieldfit.fieldbook import Book, display
from fieldfit.observe import Subject
from fieldfit.report.words import plain, printable

__all__ = ["text_drawing"]

WIDTH = 64  # characters along the member
SUPPORT = {(True, False): "^", (True, True): "#", (False, True): "#", (False, False): "o"}


def text_drawing(book: Book, subject: Subject) -> list[str]:
    """Gauges above, the member, its supports below, each at its place; hinges are o, zones are drawn with =.

    A support is ^, one whose rotation is held #.
    """
    length = float(subject.member.length[0])
    seen = subject.observations
    places = sorted({(float(at), str(name)) for at, name in zip(seen.at, seen.gauge, strict=True)})
    beam = ["-"] * (WIDTH + 1)
    for start, end in zip(subject.member.zone_from[0], subject.member.zone_to[0], strict=True):
        for column in range(_column(start, length), _column(end, length) + 1):
            beam[column] = "="
    for at in subject.member.hinge_at[0]:
        beam[_column(at, length)] = "o"
    supports = [" "] * (WIDTH + 1)
    for at, flexibility, fixity in zip(*_supports(subject), strict=True):
        supports[_column(at, length)] = SUPPORT[bool(np.isfinite(flexibility)), bool(fixity > 0)]
    shown, unit = display(book.units, "length", length)
    names = [(float(at), str(name)) for at, name in zip(subject.member.support_at[0], subject.supports, strict=True)]
    end = f"{plain(float(shown))} {unit}"
    return [
        *reversed(_labels(places, length)),
        _marks([at for at, _ in places], length),
        "".join(beam),
        "".join(supports).rstrip(),
        *_labels(names, length),
        f"0{end:>{WIDTH}}",
    ]


def _supports(subject: Subject) -> tuple[Sequence[float], ...]:
    member = subject.member
    return member.support_at[0], member.support_flexibility[0], member.support_fixity[0]


def _column(at: float, length: float) -> int:
    return round(WIDTH * at / length)


def _marks(places: Sequence[float], length: float) -> str:
    line = [" "] * (WIDTH + 1)
    for at in places:
        line[_column(at, length)] = "v"
    return "".join(line).rstrip()


def _labels(places: Sequence[tuple[float, str]], length: float) -> list[str]:
    """Names at their places, on as many lines as it takes that none runs into another; control characters shown."""
    lines: list[str] = []
    for at, name in places:
        safe = printable(name)
        column = _column(at, length)
        for number, line in enumerate(lines):
            if len(line) < column:
                lines[number] = line.ljust(column) + safe
                break
        else:
            lines.append(" " * column + safe)
    return lines
