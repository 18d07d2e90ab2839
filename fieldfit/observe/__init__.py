"""From a field book to members and observations: zero, sign, uncertainty, ledger."""

from fieldfit.observe.asked import Asked, Limit
from fieldfit.observe.subject import Observations, Stage, Subject, observe
from fieldfit.observe.traces import Trace

__all__ = ["Asked", "Limit", "Observations", "Stage", "Subject", "Trace", "observe"]
