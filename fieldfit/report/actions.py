"""Actions: reactions and moments of a member in the stage that loads it most, as recorded and as fitted."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array
from fieldfit.fit import Reconciliation, actions_of, actions_u
from fieldfit.judge import Verdict
from fieldfit.report.curves import most_loaded

__all__ = ["Action", "actions_in", "every_action"]

ROUNDING = 1e-9  # of the largest reaction, or of that times the length: what is smaller is none


@dataclass(frozen=True, slots=True, kw_only=True)
class Action:
    """A reaction (N, up), a restraint couple (N m, clockwise on the member) or a largest moment (N m).

    Moments are sagging or hogging by their name and never negative. ``fitted`` is None where nothing was fitted, its
    standard uncertainty ``u`` also where the readings leave an unknown open.
    """

    action: str
    where: str
    stage: str
    kind: str
    recorded: float
    fitted: float | None
    u: float | None


def every_action(verdicts: Sequence[Verdict]) -> list[tuple[Action, ...]]:
    """The actions of each member: worked out once for all files of a report, as they take a third as long as a fit."""
    return [tuple(actions_in(verdict.reconciliation)) for verdict in verdicts]


def actions_in(found: Reconciliation) -> Iterator[Action]:
    """Every reaction, and the restraint couples and largest moments that are not zero; none where no stage loads."""
    subject, stage = found.subject, most_loaded(found.subject)
    if stage is None:
        return
    before, after = actions_of(found)
    length = float(subject.member.length[0])
    recorded = _sizes(before.flat()[stage], len(subject.supports), length)
    fitted = None if after is None else _sizes(after.flat()[stage], len(subject.supports), length)
    u = actions_u(found, stage)
    for number, (action, where, kind) in enumerate(_named(subject.supports)):
        now = None if fitted is None else float(fitted[number])
        if kind == "moment" and not recorded[number] and not now:
            continue
        yield Action(
            action=action,
            where=where,
            stage=subject.stages[stage].name,
            kind=kind,
            recorded=float(recorded[number]),
            fitted=now,
            u=float(u[number]) if u is not None and np.isfinite(u[number]) else None,
        )


def _named(supports: tuple[str, ...]) -> list[tuple[str, str, str]]:
    """Action, place and kind of quantity, in the order of ``Actions.flat``."""
    reactions = [("reaction", name, "force") for name in supports]
    couples = [("restraint couple", name, "moment") for name in supports]
    moments = [(f"largest {way} moment", "whole", "moment") for way in ("sagging", "hogging")]
    return [*reactions, *couples, *moments]


def _sizes(values: Array, supports: int, length: float) -> Array:
    """The values with what is only rounding made zero, and a hogging moment as its size."""
    largest = float(np.abs(values[:supports]).max(initial=0.0))
    scale = np.where(np.arange(len(values)) < supports, largest, largest * length)
    clean = np.where(np.abs(values) <= ROUNDING * scale, 0.0, values)
    clean[-1] = abs(clean[-1])
    return clean
