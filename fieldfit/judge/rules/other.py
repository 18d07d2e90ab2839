"""Rules of India, Britain, Italy, Germany and Spain.

Sources: a testing firm's page quoting IS 456:2000, 17.6; an Indian testing laboratory's article on IRC SP 51; an
engineers' forum post quoting BS 8110-2, 9.5.1 and 9.5.2; Italian engineering notes on NTC 2008 and 2018. The rest is
from memory, as each number says.
"""

from fieldfit.judge.rules.declare import Combination, Gate, Repeat, Rule, Seen, Wait, every, one_of

__all__ = ["OTHER"]

HOLD_24, RECOVERY_24 = Wait(key="hold", hours=24.0), Wait(key="recovery time", hours=24.0)


def _irc(material: str, share: float) -> Rule:
    return Rule(
        name=f"IRC SP 51 {material}",
        title=f"IRC SP 51 bridge load test, {material}",
        edition="IRC SP 51:1999, revised 2015",
        clause="acceptance criteria",
        source="Indian testing laboratory's article on IRC SP 51; recovery by material from memory",
        accept=Gate(key="recovery", measure="recovery", sense="at least", number=share, mark="memory M"),
        waits=(Wait(key="hold", hours=24.0, mark="memory M"), RECOVERY_24),
    )


def _bs_8110(material: str, share: float) -> Rule:
    return Rule(
        name=f"BS 8110-2 {material}",
        title=f"BS 8110-2 load test, {material}",
        edition="BS 8110-2:1985 (withdrawn)",
        clause="9.5",
        source="engineers' forum post quoting BS 8110-2, 9.5.1 and 9.5.2; recovery from memory",
        accept=every(
            Gate(
                key="gain of recovery",
                measure="gain of recovery",
                sense="at least",
                number=0.0,
                mark="memory M",
                of_repeat=True,
            ),
            Gate(key="recovery", measure="recovery", sense="at least", number=share, mark="memory M", of_repeat=True),
        ),
        waits=(Wait(key="wait before repeat", hours=1.0, mark="memory M"),),
        loads=(
            Combination(says="1.0 Gk + 1.0 Qk", self_weight=1.0, superimposed_dead=1.0, live=1.0, roof=1.0),
            Combination(says="Gk + 1.25 Qk", self_weight=1.0, superimposed_dead=1.0, live=1.25, roof=1.25),
            Combination(says="1.125 (Gk + Qk)", self_weight=1.125, superimposed_dead=1.125, live=1.125, roof=1.125),
        ),
        readings=(
            "The load is applied at least twice: the first two cycles to the largest load of the book are meant.",
            "The rule is for deflections that are significant; whether they are is the engineer's to say.",
        ),
    )


def _ehe(material: str, share: float) -> Rule:
    return Rule(
        name=f"EHE-08 {material}",
        title=f"EHE-08 load test, {material}",
        edition="EHE-08",
        clause="art. 101",
        source="from memory",
        accept=Gate(key="residual", measure="residual over maximum", sense="at most", number=share, mark="memory M"),
        waits=(Wait(key="recovery time", hours=24.0, mark="memory M"),),
    )


OTHER = (
    Rule(
        name="IS 456:2000",
        title="IS 456 load test",
        edition="IS 456:2000",
        clause="17.6",
        source="testing firm's page quoting IS 456:2000, 17.6",
        accept=one_of(
            Gate(
                key="waiver",
                measure="maximum deflection",
                sense="less than",
                number=40.0,
                form="n × span² / depth, m and mm",
                waives=True,
            ),
            Gate(key="recovery", measure="recovery", sense="at least", number=0.75),
        ),
        repeat=Repeat(
            accept=Gate(key="recovery of repeat", measure="recovery", sense="at least", number=0.8, of_repeat=True)
        ),
        waits=(HOLD_24, RECOVERY_24, Wait(key="wait before repeat", hours=72.0)),
        loads=(Combination(says="D + 1.25 L", self_weight=1.0, superimposed_dead=1.0, live=1.25, roof=1.25),),
        readings=(
            "Only the deflection due to the imposed load counts: the zero stage is taken as read under the dead load.",
            "80 % is read as the gate of the repeat, the usual reading; the sentence itself does not say so.",
            "The waiver, 40 l²/D, takes l in m and D and the deflection in mm; it is l²/(25000 D) in one unit. Of a "
            "cantilever, l is its own length (22.2, from memory).",
        ),
    ),
    _irc("reinforced", 0.75),
    _irc("prestressed", 0.85),
    _irc("steel", 0.85),
    _irc("composite", 0.75),
    _bs_8110("reinforced", 0.75),
    _bs_8110("prestressed", 0.85),
    Rule(
        name="NTC 2018",
        title="NTC 2018 static load test",
        edition="NTC 2018",
        clause="9.2",
        source="Italian engineering notes on NTC 2008 and 2018; criteria from memory",
        accept=every(
            Gate(
                key="elastic over calculated",
                measure="elastic over calculated",
                sense="at most",
                number=1.0,
                mark="memory H",
            ),
            Seen(finding="not proportional to load", mark="memory H"),
            Seen(finding="residual beyond initial settling", mark="memory H"),
            Seen(finding="damaging cracks", mark="memory H"),
            Seen(finding="instability", mark="memory H"),
        ),
        channels="every",
        readings=(
            "The rule gives no number for proportion and residual: the engineer judges both by the figures.",
            "Calculated is what the recorded member deflects under the recorded load.",
        ),
    ),
    Rule(
        name="DAfStb 2000",
        title="DAfStb guideline, stop criterion on the residual deflection",
        edition="DAfStb Belastungsversuche an Betonbauwerken, 2000",
        clause="stop criteria",
        source="from memory",
        accept=Gate(key="residual", measure="residual over maximum", sense="at most", number=0.1, mark="memory M"),
        readings=("Strains, cracks and marked nonlinearity are stop criteria too, and are not judged here.",),
    ),
    _ehe("reinforced", 0.25),
    _ehe("prestressed or composite", 0.2),
)
