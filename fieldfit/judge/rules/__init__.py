"""Published rules of load tests and deflection limits: what each says, and what a recorded test comes to by it."""

from fieldfit.judge.rules.asked import check_of
from fieldfit.judge.rules.behaviour import Behaviour, Mirrored
from fieldfit.judge.rules.catalogue import RULES
from fieldfit.judge.rules.declare import MARKS_SAID, Rule
from fieldfit.judge.rules.deflections import DEFLECTIONS, deflection_checks
from fieldfit.judge.rules.evaluate import evaluate
from fieldfit.judge.rules.gates import largest_gauge
from fieldfit.judge.rules.load_test import LoadTest, load_test_of
from fieldfit.judge.rules.means import corrected_gauges
from fieldfit.judge.rules.outcome import Condition, Held, Outcome
from fieldfit.judge.rules.ratios import Ratio
from fieldfit.judge.rules.record import Cycle, Record, record_of
from fieldfit.judge.rules.stages import StageStiffness

__all__ = [
    "DEFLECTIONS",
    "MARKS_SAID",
    "RULES",
    "Behaviour",
    "Condition",
    "Cycle",
    "Held",
    "LoadTest",
    "Mirrored",
    "Outcome",
    "Ratio",
    "Record",
    "Rule",
    "StageStiffness",
    "check_of",
    "corrected_gauges",
    "deflection_checks",
    "evaluate",
    "largest_gauge",
    "load_test_of",
    "record_of",
]
