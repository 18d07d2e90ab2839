"""Overview: what a book says before anything is fitted: what would be used, what set aside, what is assumed."""

from collections import Counter
from collections.abc import Iterator, Sequence

import numpy as np

from fieldfit.fieldbook import Book, display
from fieldfit.fit import assumptions
from fieldfit.observe import Subject
from fieldfit.report.drawing import text_drawing
from fieldfit.report.words import plain, printable, typeset

__all__ = ["overview"]


def overview(book: Book, subjects: Sequence[Subject]) -> list[str]:
    """Lines that tell what was read and what would be done with it."""
    readings = sum(int(subject.observations.count.sum()) for subject in subjects)
    tables = ", ".join(f"{name} {len(table)}" for name, table in book.tables.items() if len(table))
    members = f"{len(subjects)} member{'' if len(subjects) == 1 else 's'}"
    lines = [f"{book.name}: {members}, {readings} readings. Rows read: {tables}."]
    lines += [f"Noted: {note}" for note in book.notes]
    for subject in subjects:
        lines += ["", *_member(book, subject)]
    return [printable(line) for line in lines]


def _member(book: Book, subject: Subject) -> Iterator[str]:
    length, unit = display(book.units, "length", float(subject.member.length[0]))
    EI, EI_unit = display(book.units, "EI", float(subject.member.EI[0]))
    yield f"{subject.name}: length {plain(float(length))} {unit}, EI {plain(float(EI))} {typeset(EI_unit)}"
    yield from (f"  {line}" for line in text_drawing(book, subject))
    stages = ", ".join(f"{stage.name} ({stage.role})" for stage in subject.stages)
    yield f"  stages: {stages or 'none'}"
    yield f"  to be determined: {', '.join(_asked(subject))}"
    yield from _ledger(subject)
    yield from (f"  assumed: {sentence}" for sentence in assumptions(subject))
    if subject.is_shape_survey:
        declared = {row.quantity for row in subject.asked}
        if "camber" not in declared:
            yield "  assumed: Straight when built. The estimate will only be an apparent EI, and is not assessed."
        if "creep factor" not in declared:
            yield "  assumed: No creep. The estimate will only be an apparent EI, and is not assessed."
    if not np.isfinite(subject.tolerance):
        yield "  no tolerance on EI is given: stiffness will not be assessed"


def _asked(subject: Subject) -> Iterator[str]:
    for row in subject.asked:
        yield " ".join(part for part in (row.quantity, row.where, row.stage) if part)


def _ledger(subject: Subject) -> Iterator[str]:
    """How many readings would be used for what, by kind; those set aside with their reasons."""
    seen = subject.observations
    fit = seen.used_for == "fit"
    kinds: Counter[str] = Counter()
    for kind, count in zip(seen.quantity[fit], seen.count[fit], strict=True):
        kinds[kind] += int(count)
    used = ", ".join(f"{count} of {kind}" for kind, count in sorted(kinds.items()))
    means = f" as {fit.sum()} means" if seen.count[fit].sum() > fit.sum() else ""
    yield f"  for the fit: {used or 'no reading'}{means}; u: {', '.join(sorted(set(seen.u_from[fit])))}"
    aside: Counter[tuple[str, str]] = Counter()
    for purpose, why, count in zip(seen.used_for, seen.why, seen.count, strict=True):
        aside[purpose, why] += int(count)
    for (purpose, why), number in sorted(aside.items()):
        if purpose != "fit":
            kept = "kept for the rules of load tests" if purpose == "rule" else "set aside"
            yield f"  {kept}: {number} ({why})"
