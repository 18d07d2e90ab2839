"""Spans: how far a span of the fitted member goes down and up, held against one limit on its size."""

from collections.abc import Sequence
from dataclasses import dataclass

from fieldfit.fit import Estimate, Extreme, Reconciliation, Sagging
from fieldfit.judge.checks import VERDICTS, decided

__all__ = ["APPARENT", "UNEXPLAINED", "Judged", "is_apparent", "judged", "why_no_span", "why_not"]

UNEXPLAINED = "the model does not explain the readings at their stated uncertainty"
APPARENT = "only an apparent EI is known: the book declares no camber or no creep"
UNCHANGED = 1e-9  # of a deflection: a standard uncertainty below this share is one that nothing fitted changes
UNSEEN = 1e-12  # m: less than any gauge reads


@dataclass(frozen=True, slots=True, kw_only=True)
class Judged:
    """The way of a span, down or up, that decides, with the limits (m) it was held against and what came of it."""

    extreme: Extreme
    upward: bool
    at_least: float | None
    at_most: float | None
    verdict: str
    probability_within: float | None

    def told(self, reason: str) -> str | None:
        """A reason with the way told where it is up; None where there is nothing to tell."""
        return "; ".join(part for part in ("upward" if self.upward else "", reason) if part) or None


def judged(span: Sagging, at_least: float | None, at_most: float | None) -> Judged:
    """Hold both ways of a span against limits of its size: the worse decides, then the less sure, then the larger.

    Each way must keep to ``at_most``; ``at_least`` is asked of the larger alone.
    """
    ways = [
        _held(extreme, extreme is span.up, at_least if extreme is span.largest else None, at_most)
        for extreme in (span.down, span.up)
    ]
    return min(ways, key=_badness)


def _held(extreme: Extreme, upward: bool, at_least: float | None, at_most: float | None) -> Judged:
    return Judged(
        extreme=extreme,
        upward=upward,
        at_least=at_least,
        at_most=at_most,
        verdict=decided(extreme.low, extreme.high, at_least, at_most),
        probability_within=_probability(extreme, at_least, at_most),
    )


def _probability(extreme: Extreme, at_least: float | None, at_most: float | None) -> float | None:
    under = 1.0 if at_most is None else extreme.probability_up_to(at_most)
    short = 0.0 if at_least is None else extreme.probability_up_to(at_least)
    return None if under is None or short is None else max(under - short, 0.0)


def _badness(one: Judged) -> tuple[int, float, float]:
    sureness = 1.0 if one.probability_within is None else one.probability_within
    return VERDICTS.index(one.verdict), sureness, -one.extreme.size


def is_apparent(estimate: Estimate) -> bool:
    """Whether an estimate is of an EI with camber or creep in it."""
    return estimate.quantity.startswith("apparent")


def why_not(found: Reconciliation, span: Sagging) -> str | None:
    """Why a deflection of the fitted member cannot be held against a limit, None if it can."""
    if found.profile is not None and found.profile.noise.explains_readings is False:
        return UNEXPLAINED
    if any(is_apparent(estimate) for estimate in found.estimates):
        return APPARENT
    largest = span.largest
    if largest.u is None:
        return "the readings do not determine it"
    if largest.size > UNSEEN and largest.u < UNCHANGED * largest.size:
        return "no unknown changes this deflection: it is that of the record, and nothing was fitted to hold against it"
    return None


def why_no_span(found: Reconciliation, where: str | None, spans: Sequence[Sagging]) -> str:
    """Why no span of a loaded member is held against a limit."""
    if found.profile is None:
        return "the readings do not determine it"
    known = ", ".join(span.names[1] for span in spans)
    return f"{where} is no span between supports that hold the member up (they are {known})"
