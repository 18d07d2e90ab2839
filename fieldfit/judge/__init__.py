"""The judgement: is a member within what the engineer allows, and how sure is that."""

from fieldfit.judge.checks import VERDICTS, Check, worst
from fieldfit.judge.verdict import CAUTIONS, Verdict, judge_member

__all__ = ["CAUTIONS", "VERDICTS", "Check", "Verdict", "judge_member", "worst"]
