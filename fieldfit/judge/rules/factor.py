"""Factor: what a diagnostic bridge test makes of a calculated rating factor, by measured over calculated strain.

AASHTO Manual for Bridge Evaluation, section 8 (from memory): RF_T = RF_C K, K = 1 + Ka Kb, Ka = ec/eT - 1, with eT
the greatest strain measured and ec the strain calculated for the same place and position of the vehicle. So
K = ((1 - Kb) eT + Kb ec)/eT, a ratio of functions of the same readings. It is defined on strain: deflections do not
take its place.
"""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace

import numpy as np

from fieldfit.fit import Reconciliation
from fieldfit.judge.rules.declare import Gate, Rule
from fieldfit.judge.rules.gates import compared, unknown
from fieldfit.judge.rules.measures import Taking
from fieldfit.judge.rules.outcome import Held, Outcome
from fieldfit.judge.rules.ratios import Ratio
from fieldfit.judge.rules.remarks import remarks
from fieldfit.judge.rules.strains import Strain, greatest_strain
from fieldfit.observe import Limit, Subject

__all__ = ["EXTRAPOLATES", "factor_outcome"]

EXTRAPOLATES = "behaviour extrapolates to 1.33 W"
CALCULATED, SHARE, KB = "calculated rating factor", "test over rating", "Kb"
LITTLE, MUCH = 0.4, 0.7  # of the rating load's effect, between them the middle column of the table
TABLE = {True: (0.0, 0.8, 1.0), False: (0.0, 0.0, 0.5)}  # Kb by whether behaviour extrapolates (table 8.8.2.3.1-1)
NO_STRAIN = "no gauge of strain or curvature was read under load: deflections do not take the place of strains"
OPPOSITE = "measured and calculated strain are of opposite sense: check the gauge's sense and where it is"
NO_LIMIT = f"K has no limit of its own: write a row of limits with {CALCULATED} in the column where"
SHOWN = {"strain": (1e6, "microstrain"), "curvature": (1e3, "1/km")}


def factor_outcome(rule: Rule, found: Reconciliation, rows: Sequence[Limit]) -> Outcome:
    """K with its uncertainty, held against what it must be for the rating factor asked for."""
    numbers = {row.where: row for row in rows if row.where}
    (gate,) = rule.gates
    strain = greatest_strain(found)
    share = _kb(numbers, found.subject)
    held = _held(gate, strain, share, numbers)
    result = "not assessed" if held.met is None else "passes" if held.met else "fails"
    return Outcome(
        rule=rule,
        result=result,
        verdict={"passes": "within", "fails": "beyond"}.get(result, result),
        reason=held.reason or f"{held.name} {'met' if held.met else 'not met'}",
        decided_by=held,
        gates=(held,),
        every=(held,),
        conditions=(),
        notes=(*remarks(rule, numbers), *_notes(strain, share, held, numbers)),
    )


def _kb(numbers: Mapping[str, Limit], subject: Subject) -> float | str:
    """How much of the benefit counts, or what the book does not say."""
    given, share = (_given(numbers, key) for key in (KB, SHARE))
    if given is not None:
        return given
    if share is None:
        return f"the book does not say how large the test is: write a row of limits with {SHARE} in the column where"
    column = 0 if share < LITTLE else 1 if share <= MUCH else 2
    extrapolates = subject.findings.get(EXTRAPOLATES)
    if extrapolates is None and TABLE[True][column] != TABLE[False][column]:
        return f"the book does not say whether {EXTRAPOLATES} (inspections)"
    return TABLE[bool(extrapolates)][column]


def _given(numbers: Mapping[str, Limit], key: str) -> float | None:
    return numbers[key].at_least if key in numbers else None


def _held(gate: Gate, strain: Strain | None, share: float | str, numbers: Mapping[str, Limit]) -> Held:
    """K against the rating factor asked for over the calculated one."""
    if strain is None:
        return unknown(gate, "", NO_STRAIN)
    where = f"stage {strain.stage}"
    if isinstance(share, str):
        return replace(unknown(gate, where, share), where=strain.gauge)
    ratio = _ratio(strain, share)
    if strain.measured * strain.calculated <= 0 and ratio.is_measurable.all():
        return replace(unknown(gate, where, OPPOSITE), where=strain.gauge)
    asked, calculated = _given(numbers, gate.key) or gate.number or np.nan, _given(numbers, CALCULATED)
    limit = np.array([np.nan if calculated is None else asked / calculated])
    if KB not in numbers:
        gate = replace(gate, mark="memory M")  # the table is less sure than the formula
    taking, no = Taking(where=where, ratio=ratio), np.zeros(1, dtype=bool)
    (held,) = compared(gate, [strain.gauge], taking, ratio, limit, no, asked)
    if calculated is None:
        return replace(held, limit=None, met=None, probability=None, reason=held.reason or NO_LIMIT)
    return replace(held, formula=f"rating factor {asked:g} over the calculated {calculated:g}")


def _ratio(strain: Strain, share: float) -> Ratio:
    """K as a ratio of functions of the greatest strain; the strain calculated errs with the loads."""
    of_test, of_loads = np.array([strain.measured_variance]), np.array([strain.calculated_variance])
    return Ratio(
        top=np.array([(1 - share) * strain.measured + share * strain.calculated]),
        bottom=np.array([strain.measured]),
        top_variance=(1 - share) ** 2 * of_test + share**2 * of_loads,
        bottom_variance=of_test,
        covariance=(1 - share) * of_test,
        noise=strain.noise,
    )


def _notes(strain: Strain | None, share: float | str, held: Held, numbers: Mapping[str, Limit]) -> Iterator[str]:
    """What K is made of, what it makes of the calculated factor, and where it hides a soft member."""
    if strain is None or np.isnan(strain.measured):
        return
    scale, unit = SHOWN[strain.quantity]
    u = np.sqrt(strain.measured_variance)
    sure = f" (u {scale * u:.2g})" if np.isfinite(u) else ""
    more = strain.calculated / strain.measured - 1.0
    yield (
        f"The greatest {strain.quantity} measured is {abs(scale * strain.measured):.4g} {unit}{sure}, by "
        f"{strain.gauge} in stage {strain.stage}; calculated for the same place and stage "
        f"{abs(scale * strain.calculated):.4g} {unit}: Ka = {more:.3g}."
    )
    if isinstance(share, str) or held.value is None:
        return
    yield f"Kb = {share:g}, K = 1 + Ka Kb = {held.value:.4g}."
    calculated = _given(numbers, CALCULATED)
    if calculated is not None and held.low is not None and held.high is not None:
        yield (
            f"Rating factor by the test {calculated * held.value:.3g} (95 % interval {calculated * held.low:.3g} to "
            f"{calculated * held.high:.3g}), calculated {calculated:.3g}."
        )
    if more < 0 and share < 1:
        yield (
            f"The member strains more than calculated, and Kb = {share:g} takes only that share of it into K: look for "
            "the cause before any rating."
        )
