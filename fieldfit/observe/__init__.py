"""From a field book to members and observations: zero, sign, uncertainty, ledger."""

from fieldfit.observe.asked import Asked
from fieldfit.observe.subject import Observations, Stage, Subject, observe

__all__ = ["Asked", "Observations", "Stage", "Subject", "observe"]
