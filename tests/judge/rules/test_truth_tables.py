"""A truth table for every published rule: each gate met, not met, exactly at its limit, and without its reading.

The tables are themselves tested: with a comparison reversed, or OR and AND exchanged, some row comes out otherwise.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, field, replace
from functools import cached_property

import pytest

from fieldfit.fieldbook.published import DEFLECTION_LIMITS, FINDINGS, RULE_NUMBERS, SHARES
from fieldfit.fit import Reconciliation, reconcile_member
from fieldfit.judge.rules import DEFLECTIONS, RULES, Record, Rule, evaluate
from fieldfit.judge.rules.adequacy import SHARE
from fieldfit.judge.rules.declare import SYMBOLS, Gate, Group, Part, findings_of, gates_of
from fieldfit.judge.rules.factor import EXTRAPOLATES, factor_outcome
from fieldfit.observe import observe
from tests.load_tests import ONE, SOUND, TWO, Stages, book_of, cyclic, one, record, strained, two

PASS, REPEATED, FAIL, AGAIN, NOT = "passes", "passes on repeat", "fails", "repeat allowed", "not assessed"


@dataclass(eq=False)
class Row:
    """Readings of a test, what was seen, and what the rule makes of it. Span 6 m, depth 450 mm unless said."""

    result: str
    readings: dict[str, float]
    stages: Stages = ()
    findings: dict[str, str] = field(default_factory=lambda: SOUND)
    limits: tuple[tuple[object, ...], ...] = ()
    depth: float | str = 450

    def outcome(self, rule: Rule) -> str:
        found = self.record
        rows = [one for one in found.subject.limits if one.where]
        return evaluate(rule, found, rows).result

    @cached_property
    def record(self) -> Record:
        """The test, read and observed once for a rule and everything that could be wrong with it."""
        stages = self.stages or (TWO if any("again" in name for name in self.readings) else ONE)
        rows = [["IBC 1708.2.2", *row] for row in self.limits]
        return record(book_of(self.readings, stages, limits=rows, findings=self.findings, depth=self.depth))


def in_cycles(result: str, *peaks: tuple[float, float, float | None], **more: object) -> Row:
    return Row(result, *cyclic(peaks), **more)  # type: ignore[arg-type]


# ACI 318: span²/(20000 depth) = 4.00 mm; Dr against D1/4, in the repeat against D2/5.
ACI = [
    Row(PASS, one(3.6, 1.2)),  # first met, second not
    Row(PASS, one(6.0, 1.4)),  # second met, first not
    Row(PASS, one(3.6, 0.5)),
    Row(AGAIN, one(6.0, 1.8)),  # neither
    Row(PASS, one(4.0, 2.0)),  # exactly at the first limit
    Row(AGAIN, one(4.0001, 2.0)),
    Row(PASS, one(6.0, 1.5)),  # exactly a quarter
    Row(AGAIN, one(6.0, 1.5001)),
    Row(PASS, one(3.6, None)),  # unknown OR met is met
    Row(NOT, one(6.0, None)),  # unknown OR not met is unknown
    Row(NOT, {"zero": 0.0, "day after": 0.5}),  # nothing read under load
    Row(NOT, {"full": 3.6, "day after": 0.5}),  # no zero
    Row(NOT, one(6.0, 1.8), depth=""),  # no depth: the first limit is not known
    Row(PASS, one(6.0, 1.4), depth=""),
    Row(FAIL, one(3.6, 0.5), findings={**SOUND, "crushing or spalling": "yes"}),
    Row(FAIL, one(3.6, 0.5), findings={**SOUND, "sign of failure": "yes"}),
    Row(NOT, one(3.6, 0.5), findings={"sign of failure": "no"}),
    Row(NOT, one(3.6, 0.5), findings={}),
    Row(REPEATED, two(6.0, 1.8, 5.5, 1.05)),
    Row(REPEATED, two(6.0, 1.8, 5.5, 1.10)),  # exactly a fifth
    Row(FAIL, two(6.0, 1.8, 5.5, 1.15)),
    Row(NOT, two(6.0, 1.8, 5.5, None)),
    Row(PASS, two(6.0, 1.4, 5.5, 3.0)),  # the first test has passed: a second one changes nothing
]
# ACI 437.2 monotonic: a quarter AND span/180 = 33.33 mm; repeat a tenth, allowed below span/180.
MONOTONIC = [
    Row(PASS, one(20.0, 4.0)),
    Row(PASS, one(20.0, 5.0)),  # exactly a quarter
    Row(AGAIN, one(20.0, 5.001)),
    Row(FAIL, one(34.0, 4.0)),  # over span/180: no repeat
    Row(PASS, one(100 / 3, 4.0)),  # exactly span/180
    Row(FAIL, one(34.0, 12.0)),
    Row(NOT, one(20.0, None)),
    Row(REPEATED, two(21.0, 6.0, 20.0, 1.9)),
    Row(REPEATED, two(21.0, 6.0, 20.0, 2.0)),  # exactly a tenth
    Row(FAIL, two(21.0, 6.0, 20.0, 2.1)),
    Row(NOT, two(21.0, 6.0, 20.0, None)),
]
# ACI 437.2 cyclic: deviation from linearity 25 %, permanency ratio 50 %, residual 25 %; all three.
_A, _B, _C, _D = (0.25, 2.0, 0.20), (0.25, 2.1, 0.10), (0.5, 4.0, 0.20), (0.5, 4.2, 0.10)  # permanency 47.6 %
CYCLIC = [
    in_cycles(PASS, _A, _B, _C, _D, (1.0, 8.0, 0.60), (1.0, 8.1, 0.28)),
    in_cycles(AGAIN, _A, _B, _C, _D, (1.0, 8.0, 0.60), (1.0, 8.1, 0.31)),  # permanency 51.0 %
    in_cycles(PASS, _A, _B, _C, _D, (1.0, 8.0, 0.60), (1.0, 8.0, 0.30)),  # permanency exactly 50 %
    in_cycles(AGAIN, _A, _B, _C, _D, (1.0, 10.4, 0.60), (1.0, 9.7, 0.28)),  # 2/0.25 over 11/1: deviation 27.3 %
    in_cycles(AGAIN, _A, _B, _C, _D, (1.0, 8.0, 2.00), (1.0, 6.5, 0.80)),  # residual 3.4/9.1
    in_cycles(NOT, _A, _B, _C, _D, (1.0, 8.0, 0.60), (1.0, 8.1, None)),
    in_cycles(NOT, _A, (1.0, 8.1, 0.28)),  # no pair
    in_cycles(NOT, _A, _B, (1.0, 8.0, 0.60), (1.0, 8.1, 0.28)),  # two pairs
    in_cycles(NOT, _A, _B, _C, _D, (1.0, 8.0, 0.60)),  # the largest load has no twin
    in_cycles(  # three pairs at falling loads
        NOT, (1.0, 8.0, 0.4), (1.0, 8.1, 0.18), (0.75, 6.0, 0.3), (0.75, 6.1, 0.13), (0.7, 5.6, 0.25), (0.7, 5.7, 0.11)
    ),
    in_cycles(AGAIN, _A, _B, (1.0, 10.4, 0.60), (1.0, 9.7, 0.28)),  # what fails, fails with two pairs
    in_cycles(AGAIN, _A, _B, _C, _D, (1.0, 8.0, 0.00), (1.0, 8.1, 0.70)),  # nothing left, then much
    in_cycles(
        FAIL, _A, _B, _C, _D, (1.0, 40.0, 0.60), (1.0, 40.0, 0.28)
    ),  # linearity fails, and over span/180: no repeat
]
# Its repeat, in a book of its own: residual of the whole test at most a tenth.
CYCLIC_REPEAT = [
    in_cycles(PASS, (0.25, 2.0, 0.40), (1.0, 8.0, 0.40)),  # 0.8/8.4
    in_cycles(PASS, (0.25, 2.0, 0.20), (1.0, 7.8, 0.60)),  # exactly a tenth: 0.8/8.0
    in_cycles(FAIL, (0.25, 2.0, 0.20), (1.0, 7.8, 0.61)),
    in_cycles(NOT, (0.25, 2.0, 0.40), (1.0, 8.0, None)),
]
# ACI 437R: repeatability 95 %, permanency 10 %, deviation from linearity 25 %; all three.
REPORT = [
    in_cycles(PASS, (1.0, 6.00, 0.20), (1.0, 5.95, 0.30)),
    in_cycles(FAIL, (1.0, 6.00, 0.20), (1.0, 5.75, 0.30)),  # repeatability 5.45/5.80 = 94.0 %
    in_cycles(PASS, (1.0, 6.00, 0.00), (1.0, 6.00, 0.30)),  # repeatability exactly 95 %
    in_cycles(FAIL, (1.0, 6.60, 0.60), (1.0, 6.65, 0.67)),  # permanency 10.1 %
    in_cycles(PASS, (1.0, 6.00, 0.60), (1.0, 6.00, 0.60)),  # permanency exactly 10 %
    in_cycles(FAIL, (0.25, 2.0, 0.1), (0.25, 2.0, 0.1), (1.0, 11.0, 0.2), (1.0, 11.0, 0.2)),
    in_cycles(NOT, (1.0, 6.00, 0.20), (1.0, 5.95, None)),
    in_cycles(NOT, (0.5, 3.00, 0.10), (0.5, 3.00, 0.10), (1.0, 6.00, 0.20)),  # the largest load has no twin
    Row(NOT, one(6.0, 0.2)),
]
# IS 456: less than 40 l²/D = 3.20 mm waives; recovery 75 %, in the repeat 80 %.
IS_456 = [
    Row(PASS, one(3.1, 2.0)),
    Row(PASS, one(3.1, None)),  # recovery need not be measured
    Row(AGAIN, one(3.2, 2.0)),  # not less than the limit
    Row(PASS, one(5.0, 1.2)),
    Row(PASS, one(5.0, 1.25)),  # exactly 75 %
    Row(AGAIN, one(5.0, 1.3)),
    Row(NOT, one(5.0, None)),
    Row(NOT, one(5.0, 1.3), depth=""),
    Row(REPEATED, two(5.0, 1.3, 4.8, 0.90)),
    Row(REPEATED, two(5.0, 1.3, 4.8, 0.96)),  # exactly 80 %
    Row(FAIL, two(5.0, 1.3, 4.8, 1.0)),
    Row(NOT, two(5.0, 1.3, 4.8, None)),
]
# IBC: span/360 = 16.67 mm at design load, 75 %, no sign of failure; all three, no repeat.
_HALF: Stages = [ONE[0], ("half", "load", "1", 0.5, "2024-05-01T08:30", ""), *ONE[1:]]
_LIMIT = (("span over deflection at design load", "half", 360, ""),)


def _ibc(result: str, design: float | None, left: float | None, failure: str = "no", *, limited: bool = True) -> Row:
    readings = one(23.0, left) if design is None else {**one(23.0, left), "half": design}
    return Row(result, readings, _HALF, {"sign of failure": failure}, _LIMIT if limited else ())


IBC = [
    _ibc(PASS, 11.2, 5.7),
    _ibc(FAIL, 11.2, 5.9),  # recovery 74.3 %
    _ibc(PASS, 11.2, 5.75),  # exactly 75 %
    _ibc(FAIL, 17.0, 5.7),
    _ibc(PASS, 100 / 6, 5.7),  # exactly span/360
    _ibc(FAIL, 11.2, 5.7, "yes"),
    _ibc(NOT, None, 5.7),
    _ibc(NOT, 11.2, None),
    _ibc(NOT, 11.2, 5.7, limited=False),
    Row(NOT, {**one(23.0, 5.7), "half": 11.2}, _HALF, {}, _LIMIT),
]
HOLD = [
    Row(PASS, {"zero": 0.0, "full": 18.0, "held": 19.6}),
    Row(FAIL, {"zero": 0.0, "full": 18.0, "held": 19.9}),
    Row(PASS, {"zero": 0.0, "full": 18.0, "held": 19.8}),  # exactly 10 %
    Row(NOT, {"zero": 0.0, "full": 18.0}),
]


def _irc(share: float) -> list[Row]:
    return [
        Row(PASS, one(12.0, 12.0 * (1 - share) - 0.1)),
        Row(FAIL, one(12.0, 12.0 * (1 - share) + 0.1)),
        Row(PASS, one(12.0, 12.0 * (1 - share))),
        Row(NOT, one(12.0, None)),
    ]


def _bs(share: float) -> list[Row]:
    left = 4.0 * (1 - share)
    return [
        Row(PASS, two(4.0, left, 4.0, left - 0.1)),
        Row(PASS, two(4.0, left, 4.0, left)),  # exactly as much as the first, exactly the share
        Row(PASS, two(4.0, 0.1, 4.0, 0.1)),  # as much, in readings whose gain is rounded to less than nothing
        Row(FAIL, two(4.0, left - 0.2, 4.0, left - 0.1)),  # less than after the first
        Row(FAIL, two(4.0, left + 0.3, 4.0, left + 0.2)),  # more than after the first, less than the share
        Row(NOT, two(4.0, left, 4.0, None)),
        Row(NOT, one(4.0, left)),
    ]


def _residual(share: float) -> list[Row]:
    return [
        Row(PASS, one(5.0, 5.0 * share - 0.05)),
        Row(FAIL, one(5.0, 5.0 * share + 0.05)),
        Row(PASS, one(5.0, 5.0 * share)),
        Row(NOT, one(5.0, None)),
    ]


# NTC: elastic part not above the calculated one, 20 kN x (6 m)³ / 48 EI = 4.5 mm; four findings.
CLEAN = dict.fromkeys(FINDINGS, "no")
NTC = [
    Row(PASS, one(4.9, 0.5), findings=CLEAN),
    Row(PASS, one(5.0, 0.5), findings=CLEAN),  # exactly the calculated
    Row(FAIL, one(5.2, 0.5), findings=CLEAN),
    Row(NOT, one(4.9, None), findings=CLEAN),
    *(
        Row(FAIL, one(4.9, 0.5), findings={**CLEAN, name: "yes"})
        for name in ("not proportional to load", "residual beyond initial settling", "damaging cracks", "instability")
    ),
    Row(NOT, one(4.9, 0.5), findings={name: said for name, said in CLEAN.items() if name != "instability"}),
]


@dataclass(eq=False)
class Strained:
    """The greatest strain measured (None: not read), what the book gives, and what becomes of K; 100 are calculated."""

    result: str
    measured: float | None
    share: float | None = 0.5
    extrapolates: str | None = "yes"
    calculated: float | None = 0.95

    @cached_property
    def found(self) -> Reconciliation:
        """The test, read and fitted once."""
        given = {"calculated rating factor": self.calculated, "test over rating": self.share}
        read = [("zero", "G", 0), ("V1", "H", 10)] + ([] if self.measured is None else [("V1", "G", self.measured)])
        book = strained(
            read,
            limits=[[key, "", number] for key, number in given.items() if number is not None],
            findings={} if self.extrapolates is None else {EXTRAPOLATES: self.extrapolates},
            u=0.1,
        )
        (subject,) = observe(book)
        return reconcile_member(subject)

    def outcome(self, rule: Rule) -> str:
        return factor_outcome(rule, self.found, self.found.subject.limits).result


# AASHTO MBE: K = 1 + Kb (100/eT - 1), at least 1/0.95 for a rating factor of 1; Kb 0, 0.8, 1.0 or 0, 0, 0.5.
MBE = [
    Strained(PASS, 80.0),  # K = 1.20
    Strained(PASS, 93.82716),  # K = 1.05263, just over
    Strained(FAIL, 93.9),
    Strained(FAIL, 80.0, extrapolates="no"),  # Kb = 0
    Strained(FAIL, 80.0, share=0.399),  # Kb = 0
    Strained(PASS, 80.0, share=0.4),  # exactly at the lower end
    Strained(FAIL, 80.0, share=0.7, calculated=0.82),  # exactly at the upper end: Kb still 0.8, K = 1.20 < 1.22
    Strained(PASS, 80.0, share=0.701, calculated=0.82),  # Kb = 1, K = 1.25
    Strained(PASS, 80.0, share=0.701, extrapolates="no"),  # Kb = 0.5, K = 1.125
    Strained(FAIL, 100.0),  # K = 1: as calculated
    Strained(PASS, 100.0, calculated=1.0),  # exactly at the limit
    Strained(FAIL, 125.0, calculated=1.1),  # softer: K = 0.84
    Strained(NOT, None),
    Strained(NOT, 80.0, share=None),
    Strained(NOT, 80.0, extrapolates=None),
    Strained(FAIL, 80.0, share=0.3, extrapolates=None),  # Kb is 0 either way
    Strained(NOT, 80.0, calculated=None),
    Strained(NOT, -80.0),
]
TABLE: dict[str, list[Row] | list[Strained]] = {
    "ACI 318-11": ACI,
    "ACI 318-14": ACI,
    "ACI 318-19": ACI,
    "ACI 437.2-13 monotonic": MONOTONIC,
    "ACI 437.2-13 cyclic": CYCLIC,
    "ACI 437.2-13 cyclic, repeat": CYCLIC_REPEAT,
    "ACI 437R-03 cyclic": REPORT,
    "IS 456:2000": IS_456,
    "IBC 1708.2.2": IBC,
    "AISC hold": HOLD,
    "IRC SP 51 reinforced": _irc(0.75),
    "IRC SP 51 prestressed": _irc(0.85),
    "IRC SP 51 steel": _irc(0.85),
    "IRC SP 51 composite": _irc(0.75),
    "BS 8110-2 reinforced": _bs(0.75),
    "BS 8110-2 prestressed": _bs(0.85),
    "DAfStb 2000": _residual(0.1),
    "EHE-08 reinforced": _residual(0.25),
    "EHE-08 prestressed or composite": _residual(0.2),
    "NTC 2018": NTC,
    "AASHTO MBE factor K": MBE,
}


@pytest.mark.parametrize(
    ("rule", "row"), [(rule, row) for rule, rows in TABLE.items() for row in rows], ids=lambda one: str(one)[:40]
)
def test_the_rule_comes_out_so(rule: str, row: Row | Strained) -> None:
    assert row.outcome(RULES[rule]) == row.result


def test_every_rule_has_a_table_and_can_be_asked_for() -> None:
    assert set(TABLE) == set(RULES) == set(RULE_NUMBERS)
    assert set(DEFLECTIONS) == set(DEFLECTION_LIMITS)
    for name, rule in RULES.items():
        numbers = {gate.key: "at least" if gate.sense == "at least" else "at most" for gate in rule.gates}
        inverted = {gate.key for gate in rule.gates if gate.form.startswith("span")}  # a larger n is a smaller limit
        asked = {key: "at least" if key in inverted else side for key, side in numbers.items()}
        asked |= dict.fromkeys((one.key for one in (*rule.waits, *rule.inputs)), "at least")
        asked |= {SHARE: "at least"} if rule.loads else {}
        assert {**RULE_NUMBERS[name], "waiver": ""} == {**asked, "waiver": ""}, name
        assert {seen.finding for seen in findings_of(rule)} <= set(FINDINGS)
        assert {gate.measure for gate in rule.gates} <= set(SYMBOLS)
        shares = {gate.key for gate in rule.gates if gate.form == "number" and gate.key != "rating factor"}
        assert shares <= set(SHARES)


def mutated(rule: Rule, change: Callable[[Part], Part]) -> Rule:
    def inside(part: Part) -> Part:
        part = change(part)
        return replace(part, parts=tuple(map(inside, part.parts))) if isinstance(part, Group) else part

    repeat = rule.repeat and replace(
        rule.repeat,
        accept=inside(rule.repeat.accept),
        allowed=None if rule.repeat.allowed is None else inside(rule.repeat.allowed),
    )
    return replace(rule, accept=inside(rule.accept), repeat=repeat)


def reversed_gates(rule: Rule) -> Iterator[Rule]:
    """The rule with one of its comparisons turned round."""
    turned = {"at most": "at least", "at least": "at most", "less than": "at least"}
    for gate in rule.gates:
        yield mutated(
            rule,
            lambda part, gate=gate: replace(part, sense=turned[gate.sense]) if part is gate else part,  # type: ignore[misc]
        )


def exchanged_joins(rule: Rule) -> Iterator[Rule]:
    """The rule with OR for AND in one of its groups, or the other way round."""
    groups = list(_groups(rule.accept)) + (list(_groups(rule.repeat.accept)) if rule.repeat else [])
    for group in groups:
        if len(group.parts) > 1:
            other = "all" if group.join == "any" else "any"
            yield mutated(
                rule, lambda part, group=group, other=other: replace(part, join=other) if part is group else part
            )  # type: ignore[misc]


def _groups(part: Part) -> Iterator[Group]:
    if isinstance(part, Group):
        yield part
        for inner in part.parts:
            yield from _groups(inner)


@pytest.mark.parametrize("name", RULES)
def test_a_reversed_comparison_or_join_does_not_go_unseen(name: str) -> None:
    rule = RULES[name]
    assert list(gates_of(rule.accept))
    for wrong in (*reversed_gates(rule), *exchanged_joins(rule)):
        assert any(row.outcome(wrong) != row.result for row in TABLE[name]), wrong


def test_aci_joins_its_two_gates_by_or_and_the_others_do_not() -> None:
    """Digests in circulation turn the OR of ACI 318 into an AND."""
    joins = {name: [part.join for part in _groups(rule.accept) if len(gates(part)) > 1] for name, rule in RULES.items()}
    assert joins["ACI 318-19"][-1] == "any"
    assert joins["IS 456:2000"] == ["any"]
    assert joins["IBC 1708.2.2"] == joins["ACI 437.2-13 cyclic"] == joins["ACI 437.2-13 monotonic"] == ["all"]


def gates(part: Group) -> list[Gate]:
    return [one for one in part.parts if isinstance(one, Gate)]
