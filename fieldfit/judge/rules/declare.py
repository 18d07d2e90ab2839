"""What a published rule declares: gates, how they combine, a repeat, times, the load it asks for. Data only.

How sure each number is stands beside it: ``seen`` (read in the source named), ``memory H`` (from memory, held to be
right) or ``memory M`` (from memory, to be confirmed with the clause). Numbers less sure than that are left out.
"""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Literal

__all__ = [
    "MARKS_SAID",
    "SYMBOLS",
    "Combination",
    "Form",
    "Gate",
    "Group",
    "Input",
    "Mark",
    "Part",
    "Repeat",
    "Rule",
    "Seen",
    "Wait",
    "every",
    "findings_of",
    "gates_of",
    "one_of",
]

Mark = Literal["seen", "memory H", "memory M"]
Sense = Literal["at most", "at least", "less than"]
Form = Literal["number", "span / n", "span² / (n × depth)", "n × span² / depth, m and mm"]

MARKS_SAID: dict[Mark, str] = {
    "seen": "",
    "memory H": "number from memory",
    "memory M": "number from memory: confirm with the clause",
}


#: D1 and D2: largest deflection of the test and of its repeat; Dr: what is left of it; A and B: two equal cycles.
SYMBOLS: Mapping[str, str] = MappingProxyType(
    {
        "maximum deflection": "D1",
        "maximum deflection of the test": "D1",
        "deflection under design load": "D",
        "residual over maximum": "Dr/D1",
        "last residual over maximum": "Dr/D1",
        "recovery": "1 − Dr/D1",
        "deviation from linearity": "I_DL",
        "permanency ratio": "I_PR",
        "repeatability": "(D_B − Dr_B)/(D_A − Dr_A)",
        "permanency": "Dr_B/D_B",
        "gain of recovery": "Dr_A/D_A − Dr_B/D_B",
        "growth under hold": "(D_end − D_start)/D_start",
        "elastic over calculated": "(D1 − Dr)/D_calculated",
        "factor K": "1 + Ka Kb",
    }
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Gate:
    """One comparison: a ``measure`` of the test held against a number.

    ``key`` names the number for whoever overrides it; None: the engineer must give it. ``form`` says how the number
    becomes the limit: alone, or with the span and the depth; a cantilever counts its own length, or ``doubles`` it.
    ``of_repeat``: of the repeat test, not of the first.
    """

    key: str
    measure: str
    sense: Sense
    number: float | None
    form: Form = "number"
    mark: Mark = "seen"
    of_repeat: bool = False
    waives: bool = False
    doubles: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Seen:
    """A finding that must not have been made: the engineer says so in the inspections."""

    finding: str
    mark: Mark = "seen"


@dataclass(frozen=True, slots=True)
class Group:
    """Parts joined by OR (``any``) or AND (``all``): which of the two a code says is data, and is tested."""

    join: Literal["any", "all"]
    parts: "tuple[Part, ...]"


Part = Gate | Seen | Group


def one_of(*parts: Part) -> Group:
    """Parts of which one is enough (OR)."""
    return Group("any", parts)


def every(*parts: Part) -> Group:
    """Parts that must all hold (AND)."""
    return Group("all", parts)


@dataclass(frozen=True, slots=True, kw_only=True)
class Wait:
    """A time the rule asks for, in hours: ``key`` is hold, recovery time or wait before repeat.

    ``open_ended``: a residual may be read later, too; else what came back later than the rule says is not shown to have
    come back in time.
    """

    key: str
    hours: float
    mark: Mark = "seen"
    open_ended: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Input:
    """A number that enters what a rule compares, but is no limit; ``mark`` is None where the engineer must give it."""

    key: str
    mark: Mark | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Repeat:
    """What a repeat test must meet where the first did not pass, and what the first must for it to be allowed."""

    accept: Part
    allowed: Part | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Combination:
    """A load the rule asks for, by natures: factor on self-weight, superimposed dead, live and roof loads."""

    says: str
    self_weight: float
    superimposed_dead: float
    live: float = 0.0
    roof: float = 0.0

    def factor(self, nature: str) -> float:
        """How much of the loads of a nature it takes; nothing of one that it does not know (vehicle)."""
        return float(getattr(self, nature.replace("-", "_").replace(" ", "_"), 0.0))


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """A published rule, by the name it is asked for in ``limits``.

    ``reads`` is what its gauges measure, ``channels`` says whether the gauge that deflects most decides, or every
    gauge. ``loads`` are the combinations of which the greatest is asked for; none where the rule's load is not held
    here. ``pairs`` is how many pairs of equal cycles at rising loads it asks for, the last to the largest load.
    ``readings`` says in words how an open point of the text is read.
    """

    name: str
    title: str
    edition: str
    clause: str
    source: str
    accept: Part
    repeat: Repeat | None = None
    waits: tuple[Wait, ...] = ()
    inputs: tuple[Input, ...] = ()
    reads: Literal["deflection", "strain"] = "deflection"
    channels: Literal["largest", "every"] = "largest"
    loads: tuple[Combination, ...] = ()
    loads_mark: Mark = "seen"
    pairs: int = 0
    readings: tuple[str, ...] = ()

    @property
    def gates(self) -> tuple[Gate, ...]:
        """Every gate, those of the repeat after those of the test."""
        parts = [self.accept]
        if self.repeat:
            parts += [part for part in (self.repeat.allowed, self.repeat.accept) if part is not None]
        return tuple(dict.fromkeys(gate for part in parts for gate in gates_of(part)))

    @property
    def of_repeat(self) -> bool:
        """Whether any gate is of the repeat."""
        return any(gate.of_repeat for gate in self.gates)


def gates_of(part: Part) -> Iterator[Gate]:
    """The gates of a part, in order."""
    if isinstance(part, Group):
        for inner in part.parts:
            yield from gates_of(inner)
    elif isinstance(part, Gate):
        yield part


def findings_of(rule: Rule) -> tuple[Seen, ...]:
    """Every finding that a rule asks for, once."""
    parts: list[Part] = [rule.accept, *([rule.repeat.accept] if rule.repeat else [])]
    found: list[Seen] = []
    while parts:
        part = parts.pop(0)
        if isinstance(part, Group):
            parts += part.parts
        elif isinstance(part, Seen):
            found.append(part)
    return tuple(dict.fromkeys(found))
