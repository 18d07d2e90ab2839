"""From a field book to members and observations: zero, sign, uncertainty, ledger."""

from fieldfit.observe.asked import Asked, Limit
from fieldfit.observe.service import Service
from fieldfit.observe.subject import Observations, Stage, Subject, observe

__all__ = ["Asked", "Limit", "Observations", "Service", "Stage", "Subject", "observe"]
