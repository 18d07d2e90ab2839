"""Rules of ACI, IBC, AISC and AASHTO.

Sources: a consultancy's method statement for a load test to ACI 318M-11 chapter 20 (2022); a structural consultancy's
note on hollow-core slabs to ACI 318 chapter 20 (undated); Masetti, De Luca and Vatovec, overview of in-situ load
testing, part 3 (2010s); the text of New York City Building Code 1708.3.2 and of IBC 1708; AISC LRFD Specification
1999, N4. None of the codes themselves was at hand: confirm with the clause.
"""

from dataclasses import replace

from fieldfit.judge.rules.declare import Combination, Gate, Input, Mark, Repeat, Rule, Seen, Wait, every, one_of

__all__ = ["AMERICAN"]

CENTRES = (
    "The span is taken from centre to centre of the supports (twice the arm of a cantilever); ACI 318 takes the clear "
    "span plus the depth where that is less, and the limit is then smaller."
)
PROCEDURE = (
    "Asked of the procedure too, and not checked here: concrete at least 56 days old, zero read at most an hour before "
    "the first increment, at least four increments with a reading after each, a load that cannot arch."
)
ARM = "Of a cantilever, its own length is taken for lt (from memory)."
REFERENCE = "A repeat is measured from the position at its own start."
SPALLING, FAILURE = Seen(finding="crushing or spalling"), Seen(finding="sign of failure")
HOLD_24, RECOVERY_24 = Wait(key="hold", hours=24.0), Wait(key="recovery time", hours=24.0)
QUARTER = Gate(key="residual", measure="residual over maximum", sense="at most", number=0.25)
CAP = Gate(key="span over maximum", measure="maximum deflection", sense="at most", number=180.0, form="span / n")


def _aci_318(name: str, clause: str, loads: tuple[Combination, ...], mark: Mark) -> Rule:
    return Rule(
        name=name,
        title="ACI 318 monotonic load test",
        edition=name,
        clause=clause,
        source="method statement to ACI 318M-11 ch. 20 (2022); consultancy note on ACI 318 ch. 20",
        accept=every(
            SPALLING,
            FAILURE,
            one_of(
                Gate(
                    key="span over deflection",
                    measure="maximum deflection",
                    sense="at most",
                    number=20000.0,
                    form="span² / (n × depth)",
                    doubles=True,
                ),
                QUARTER,
            ),
        ),
        repeat=Repeat(
            allowed=every(SPALLING, FAILURE),
            accept=every(
                SPALLING,
                FAILURE,
                Gate(
                    key="residual of repeat",
                    measure="residual over maximum",
                    sense="at most",
                    number=0.2,
                    mark="memory H",
                    of_repeat=True,
                ),
            ),
        ),
        waits=(HOLD_24, RECOVERY_24, Wait(key="wait before repeat", hours=72.0)),
        loads=loads,
        loads_mark=mark,
        readings=(CENTRES, REFERENCE, PROCEDURE),
    )


OLD_LOADS = (
    Combination(says="1.15 D + 1.5 L + 0.4 R", self_weight=1.15, superimposed_dead=1.15, live=1.5, roof=0.4),
    Combination(says="1.15 D + 0.9 L + 1.5 R", self_weight=1.15, superimposed_dead=1.15, live=0.9, roof=1.5),
    Combination(says="1.3 D", self_weight=1.3, superimposed_dead=1.3),
)
NEW_LOADS = (
    Combination(says="1.0 Dw + 1.1 Ds + 1.6 L + 0.5 R", self_weight=1.0, superimposed_dead=1.1, live=1.6, roof=0.5),
    Combination(says="1.0 Dw + 1.1 Ds + 1.0 L + 1.6 R", self_weight=1.0, superimposed_dead=1.1, live=1.0, roof=1.6),
    Combination(says="1.3 (Dw + Ds)", self_weight=1.3, superimposed_dead=1.3),
)
LINEARITY = Gate(key="deviation from linearity", measure="deviation from linearity", sense="at most", number=0.25)

AMERICAN = (
    _aci_318("ACI 318-11", "chapter 20", OLD_LOADS, "seen"),
    _aci_318("ACI 318-14", "27.4.2 to 27.4.5 (clause from memory)", OLD_LOADS, "memory H"),
    _aci_318("ACI 318-19", "27.5 (clause from memory)", NEW_LOADS, "memory M"),
    Rule(
        name="ACI 437.2-13 monotonic",
        title="ACI 437.2 monotonic load test",
        edition="437.2-13 (a CODE-437.2-22 exists whose limits were not read)",
        clause="acceptance criteria of the monotonic protocol",
        source="Masetti, De Luca and Vatovec, overview of in-situ load testing, part 3, of the cyclic protocol",
        accept=every(
            Gate(key="residual", measure="residual over maximum", sense="at most", number=0.25, mark="memory M"),
            replace(CAP, mark="memory M"),
        ),
        repeat=Repeat(
            allowed=replace(CAP, mark="memory M"),
            accept=Gate(
                key="residual of repeat",
                measure="residual over maximum",
                sense="at most",
                number=0.1,
                mark="memory M",
                of_repeat=True,
            ),
        ),
        waits=(
            Wait(key="hold", hours=24.0, mark="memory M"),
            Wait(key="recovery time", hours=24.0, mark="memory M", open_ended=True),
        ),
        readings=(REFERENCE, ARM, "The waiver for very small deflections is left out: its wording is not certain."),
    ),
    Rule(
        name="ACI 437.2-13 cyclic",
        title="ACI 437.2 cyclic load test",
        edition="437.2-13 (a CODE-437.2-22 exists whose limits were not read)",
        clause="acceptance criteria of the cyclic protocol",
        source="Masetti, De Luca and Vatovec, overview of in-situ load testing, part 3",
        accept=every(
            LINEARITY,
            Gate(key="permanency ratio", measure="permanency ratio", sense="at most", number=0.5),
            Gate(key="residual", measure="last residual over maximum", sense="at most", number=0.25),
        ),
        repeat=Repeat(allowed=replace(CAP, measure="maximum deflection of the test"), accept=every()),
        waits=(replace(RECOVERY_24, open_ended=True),),
        channels="every",
        pairs=3,
        readings=(
            "Each cycle is measured from its own start; secants from the start of the test, by the deflection that "
            "the recorded member would have at the same load (the load itself where all stages load it alike); "
            "reference: the peak of the first cycle (from memory).",
            ARM,
            "A repeat of the cyclic test, which must recover to a tenth, belongs in a field book of its own, which "
            "asks for ACI 437.2-13 cyclic, repeat.",
        ),
    ),
    Rule(
        name="ACI 437.2-13 cyclic, repeat",
        title="ACI 437.2 cyclic load test, repeat of one that did not pass",
        edition="437.2-13 (a CODE-437.2-22 exists whose limits were not read)",
        clause="acceptance criteria of the cyclic protocol",
        source="Masetti, De Luca and Vatovec, overview of in-situ load testing, part 3",
        accept=Gate(key="residual", measure="last residual over maximum", sense="at most", number=0.1),
        waits=(replace(RECOVERY_24, open_ended=True),),
        channels="every",
        readings=(
            "The book holds the repeat alone; whether the first test allowed one (its largest deflection at most "
            "span/180) is judged by ACI 437.2-13 cyclic in its own book.",
        ),
    ),
    Rule(
        name="ACI 437R-03 cyclic",
        title="ACI 437R cyclic load test",
        edition="437R-03 and 437.1R-07 (reports)",
        clause="acceptance criteria of the cyclic load test",
        source="from memory",
        accept=every(
            Gate(key="repeatability", measure="repeatability", sense="at least", number=0.95, mark="memory H"),
            Gate(key="permanency", measure="permanency", sense="at most", number=0.1, mark="memory H"),
            Gate(
                key="deviation from linearity",
                measure="deviation from linearity",
                sense="at most",
                number=0.25,
                mark="memory H",
            ),
        ),
        channels="every",
        pairs=1,
        readings=("Each cycle is measured from its own start; A and B are two successive cycles to the same load.",),
    ),
    Rule(
        name="IBC 1708.2.2",
        title="IBC in-situ load test, any material",
        edition="IBC 1708.2.2, in the wording of New York City Building Code 1708.3.2",
        clause="1708.2.2",
        source="text of New York City Building Code 1708.3.2; IBC 1708 text copy, legible in part",
        accept=every(
            Gate(
                key="span over deflection at design load",
                measure="deflection under design load",
                sense="at most",
                number=None,
                form="span / n",
                doubles=True,
            ),
            Gate(key="recovery", measure="recovery", sense="at least", number=0.75),
            FAILURE,
        ),
        waits=(HOLD_24, RECOVERY_24),
        loads=(Combination(says="2 (D + L + R)", self_weight=2.0, superimposed_dead=2.0, live=2.0, roof=2.0),),
        readings=(
            "The limit under design load is that of table 1604.3: the book gives it, with the stage it is of. What "
            "that stage carries is held against the loads of service where the book states them (nature); else it is "
            "taken as named.",
            "Of a cantilever, twice its length is taken.",
        ),
    ),
    Rule(
        name="AISC hold",
        title="AISC evaluation by load test, growth while the load is kept on",
        edition="LRFD Specification 1999, N4; AISC 360 appendix 5.4",
        clause="N4",
        source="AISC LRFD Specification 1999, section N4, page copy",
        accept=Gate(key="growth", measure="growth under hold", sense="at most", number=0.1),
        waits=(Wait(key="hold", hours=1.0),),
        readings=("The rule rates strength by the load reached; only its limit on growth is held here.",),
    ),
    Rule(
        name="AASHTO MBE factor K",
        title="AASHTO Manual for Bridge Evaluation, diagnostic test",
        edition="Manual for Bridge Evaluation, edition not at hand",
        clause="section 8, 8.8.2.3 (clause from memory)",
        source="from memory; the mechanisms that a test may show from an excerpt of section 8",
        accept=Gate(key="rating factor", measure="factor K", sense="at least", number=1.0, mark="memory H"),
        inputs=(
            Input(key="calculated rating factor"),
            Input(key="test over rating"),
            Input(key="Kb", mark="memory M"),
        ),
        reads="strain",
        readings=(
            "K = 1 + Ka Kb with Ka = calculated over measured strain, less 1 (not the other way round): K above 1 is "
            "in favour of the member.",
            "Calculated is the bending strain of the recorded member (its recorded EI, supports and section, taken as "
            "exact) under the recorded load; what the loads are uncertain by is in the interval, where the vehicle "
            "stood is not.",
            "What makes K differ from 1 (unintended composite action, restraint, secondary and non-structural members) "
            "may not be there at the rating load: whether behaviour extrapolates is the engineer's to say.",
        ),
    ),
)
