"""Restraint notes: only where the model holds, and with the EI that they say."""

import re
from collections.abc import Callable

import pytest

from fieldfit.fieldbook import Book
from fieldfit.work import reconcile

BookOf = Callable[..., Book]
HEADING = ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]
UNKNOWNS = ["member", "unknown", "where"]
RESTRAINT = ["B1", "rotational restraint", "A"]


def notes(book: Book) -> list[str]:
    (verdict,) = reconcile(book)
    return [text for text in verdict.warnings if text.startswith("Restraint at")]


def restrained(moment: float, noise: tuple[float, ...] = (0.0,) * 5) -> list[list[object]]:
    """Deflections (mm) of 6 m and 16000 kN m2, 0.8 of the record, under 50 kN in the middle, held by a moment at A.

    P x (3 l2 - 4 x2) / 48 EI less M x (l - x) (2l - x) / 6 l EI (standard tables).
    """
    rows = []
    for at, error in zip((1.0, 2.0, 3.0, 4.0, 5.0), noise, strict=True):
        near = min(at, 6 - at)
        free = 50 * near * (108 - 4 * near**2) / 48 / 16
        rows.append(["B1", "P", at, round(free - moment * at * (6 - at) * (12 - at) / 36 / 16 + error, 5), 0.01])
    return [HEADING, *rows]


def test_it_takes_the_fitted_EI(book_of: BookOf) -> None:
    """Half of the moment 3 P l/16 of a fixed end: kr l/(3 EI + kr l) = 1/2, kr l = 3 EI of the member as it is."""
    unknowns = [UNKNOWNS, ["B1", "EI", ""], RESTRAINT]
    (note,) = notes(book_of(unknowns=unknowns, readings=restrained(0.5 * 3 * 50 * 6 / 16)))
    assert "with the fitted EI" in note
    found = re.search(r"from (\S+) to (\S+), with", note)
    assert found and [float(end) for end in found.groups()] == pytest.approx([3.0, 3.0], rel=0.05)


def test_it_says_where_it_has_only_the_record(book_of: BookOf) -> None:
    """A pinned end: the best fit stands at the bound, where EI has limits and no value."""
    (note,) = notes(book_of(unknowns=[UNKNOWNS, ["B1", "EI", ""], RESTRAINT], readings=restrained(0.0)))
    assert "with the recorded EI" in note


def test_it_keeps_silent_where_the_model_does_not_explain_the_readings(book_of: BookOf) -> None:
    readings = restrained(0.0, (1.0, -1.0, 0.5, 0.2, -0.3))
    assert notes(book_of(unknowns=[UNKNOWNS, ["B1", "EI", ""], RESTRAINT], readings=readings)) == []
