"""Outcomes: what a rule came to, gate by gate, with the code's own verdict and the probability beside it."""

from collections.abc import Mapping
from dataclasses import dataclass

from fieldfit.judge.rules.declare import SYMBOLS, Gate, Group, Mark, Part, Rule, Seen

__all__ = ["Condition", "Held", "Outcome", "joined", "sureness"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Held:
    """One gate held against one gauge, SI of its ``kind`` (deflection or ratio).

    ``met`` is the code's own simple comparison, None where it cannot be made, for the ``reason``; ``probability`` is
    that of the true value meeting the limit, None where no uncertainty is known. ``formula`` says how the limit comes
    from span and depth.
    """

    key: str
    measure: str
    where: str
    at: str
    kind: str
    value: float | None
    u: float | None
    low: float | None
    high: float | None
    sense: str
    limit: float | None
    met: bool | None
    probability: float | None
    mark: Mark
    of_repeat: bool
    overridden: bool
    waives: bool = False
    formula: str = ""
    reason: str | None = None

    @property
    def name(self) -> str:
        """What must hold, in words: a finding is one that was not made."""
        if self.measure == "inspection":
            return self.key.removeprefix("not ") if self.key.startswith("not ") else f"no {self.key}"
        return f"{self.measure} of the repeat" if self.of_repeat else self.measure

    @property
    def symbol(self) -> str:
        """What is compared, in symbols; empty for a finding."""
        said = SYMBOLS.get(self.measure, "")
        return said.replace("D1", "D2") if self.of_repeat else said


@dataclass(frozen=True, slots=True, kw_only=True)
class Condition:
    """Something the rule asks of the test itself, in words; ``met`` is None where the book does not tell.

    Unmet or not known, a pass does not count, and unmet where it ``spoils_failure`` a failure neither. ``of_repeat``:
    of the repeat alone; ``of_residual``: only where a pass rests on what was left; ``only_told``: not known, it is told
    and no more.
    """

    says: str
    met: bool | None
    mark: Mark
    of_repeat: bool = False
    of_residual: bool = False
    only_told: bool = False
    spoils_failure: bool = False

    @property
    def is_open(self) -> bool:
        """Whether a pass does not count for it."""
        return self.met is False or (self.met is None and not self.only_told)


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """A rule held against a load test.

    ``result`` is passes, passes on repeat, fails, repeat allowed or not assessed; ``verdict`` the same as a check
    says it. ``decided_by`` is the gate that decided; ``every`` holds every gate at every gauge it was taken at.
    """

    rule: Rule
    result: str
    verdict: str
    reason: str
    decided_by: Held | None
    gates: tuple[Held, ...]
    every: tuple[Held, ...]
    conditions: tuple[Condition, ...]
    notes: tuple[str, ...]


def joined(part: Part, held: Mapping[Gate | Seen, Held]) -> Held | None:
    """The gate that decides a part, its ``met`` being that of the part; None for a part that asks nothing.

    AND: false where one is, else unknown where one is. OR: true where one is, else unknown where one is (Kleene). Of
    several that would do, an AND takes the least sure and an OR the surest.
    """
    if not isinstance(part, Group):
        return held[part]
    parts = [one for one in (joined(inner, held) for inner in part.parts) if one is not None]
    if not parts:
        return None
    strong = part.join == "any"  # what one part alone is enough for
    for met in (strong, None):
        same = [one for one in parts if one.met is met]
        if same:
            return _surest(same) if met is True else _least_sure(same)
    return _surest(parts) if part.join == "any" else _least_sure(parts)


def _surest(parts: list[Held]) -> Held:
    return max(parts, key=sureness)


def _least_sure(parts: list[Held]) -> Held:
    return min(parts, key=sureness)


def sureness(one: Held | None) -> float:
    """How sure a gate is met; a finding counts for more than any number where it was made, and for less where not."""
    if one is None:
        return 0.5
    if one.probability is not None:
        return one.probability
    return {True: 2.0, False: -1.0, None: 0.5}[one.met]
