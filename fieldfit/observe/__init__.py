"""From a field book to members and observations: zero, sign, uncertainty, ledger."""

from fieldfit.observe.asked import Asked, Limit
from fieldfit.observe.levels import Levelled, Run
from fieldfit.observe.loading import Gradient
from fieldfit.observe.service import DEAD, SELF_WEIGHT, Service
from fieldfit.observe.subject import Observations, Stage, Subject, observe
from fieldfit.observe.traces import Trace

__all__ = [
    "DEAD",
    "SELF_WEIGHT",
    "Asked",
    "Gradient",
    "Levelled",
    "Limit",
    "Observations",
    "Run",
    "Service",
    "Stage",
    "Subject",
    "Trace",
    "observe",
]
