"""Checks: one value with its interval, held against one pair of limits."""

from collections.abc import Iterable
from dataclasses import dataclass

__all__ = ["BOOK", "VERDICTS", "Check", "decided", "missed_side", "unassessed", "worst"]

BOOK = "limit in the field book"  # the source of a check that no published rule asks for
ROUNDING = 1e-9  # a limit missed by less than this share of it is met: the rest is binary rounding
VERDICTS = ("beyond", "undecided", "not assessed", "within")  # the worst first


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """One value held against one pair of limits (None: no limit on that side), SI of the ``kind`` of quantity.

    ``probability_within`` is None where nothing is known of the value, or what is known is not to be judged by;
    ``reason`` says why a check is not assessed, which side is beyond, or that a deflection is upward.
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
    """Within, beyond or undecided: an interval (None: open) against limits (None: none), which may be met exactly."""
    bottom, top = _or(low, -float("inf")), _or(high, float("inf"))
    least = -float("inf") if at_least is None else at_least - ROUNDING * abs(at_least)
    most = float("inf") if at_most is None else at_most + ROUNDING * abs(at_most)
    if least <= bottom and top <= most:
        return "within"
    return "beyond" if top < least or bottom > most else "undecided"


def missed_side(high: float | None, at_least: float | None) -> str:
    """Which limit an interval misses."""
    return "below its limit" if at_least is not None and high is not None and high < at_least else "above its limit"


def unassessed(
    check: str,
    where: str,
    kind: str,
    source: str,
    reason: str,
    ends: tuple[float | None, float | None] = (None, None),
) -> Check:
    """A check of a limit (at least, at most) that there is nothing to hold against, and why."""
    return Check(
        check=check,
        where=where,
        stage=None,
        kind=kind,
        value=None,
        u=None,
        low=None,
        high=None,
        at_least=ends[0],
        at_most=ends[1],
        verdict="not assessed",
        probability_within=None,
        source=source,
        reason=reason,
    )


def worst(verdicts: Iterable[str]) -> str:
    """The worst of some verdicts; not assessed if there are none."""
    return min(verdicts, key=VERDICTS.index, default="not assessed")


def _or(value: float | None, default: float) -> float:
    return default if value is None else value
