"""Checks: one value with its interval, held against one pair of limits."""

from collections.abc import Iterable
from dataclasses import dataclass

__all__ = ["VERDICTS", "Check", "decided", "worst"]

VERDICTS = ("beyond", "undecided", "not assessed", "within")  # the worst first


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """One value held against one pair of limits (None: no limit on that side), SI of the ``kind`` of quantity.

    ``probability_within`` is None where nothing is known of the value; ``reason`` says why a check is not assessed,
    or which side is beyond.
    """

    check: str
    where: str
    stage: str | None
    kind: str
    value: float | None
    u: float | None
    low: float | None
    high: float | None
    at_least: float | None
    at_most: float | None
    verdict: str
    probability_within: float | None
    source: str
    edition: str | None = None
    reason: str | None = None


def decided(low: float | None, high: float | None, at_least: float | None, at_most: float | None) -> str:
    """Within, beyond or undecided: an interval (None: open) against limits (None: none)."""
    bottom, top = _or(low, -float("inf")), _or(high, float("inf"))
    least, most = _or(at_least, -float("inf")), _or(at_most, float("inf"))
    if least <= bottom and top <= most:
        return "within"
    return "beyond" if top < least or bottom > most else "undecided"


def worst(verdicts: Iterable[str]) -> str:
    """The worst of some verdicts; not assessed if there are none."""
    return min(verdicts, key=VERDICTS.index, default="not assessed")


def _or(value: float | None, default: float) -> float:
    return default if value is None else value
