"""From a field book to members and observations: zero, sign, uncertainty, ledger."""

from fieldfit.observe.subject import Observations, Stage, Subject, observe

__all__ = ["Observations", "Stage", "Subject", "observe"]
