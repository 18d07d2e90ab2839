"""Limits: what the book asks of a member, each limit ending in checks of what was found."""

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import replace

from fieldfit.fieldbook.published import DYNAMIC
from fieldfit.fit import Reconciliation
from fieldfit.judge.checks import Check
from fieldfit.judge.estimated import limit_checks, tolerance_checks
from fieldfit.judge.rules import DEFLECTIONS, RULES, deflection_checks
from fieldfit.judge.sags import sag_checks
from fieldfit.observe import Limit

__all__ = ["checks_of"]


def checks_of(found: Reconciliation) -> tuple[Check, ...]:
    """Every check that the book asks for: the tolerance on each EI, then its limits in order."""
    checks = list(tolerance_checks(found))
    for limit in _asked_for(found.subject.limits):
        checks += MAKERS[limit.limit](found, limit)
    return tuple(checks)


def _asked_for(limits: Sequence[Limit]) -> Iterator[Limit]:
    """Every limit that is a check of its own: a published rule is judged as a whole, and a dynamic factor asks too."""
    plain = {limit.limit for limit in limits if limit.where != DYNAMIC}
    for limit in limits:
        if limit.limit in RULES:
            continue
        if limit.where != DYNAMIC:
            yield limit
        elif limit.limit not in plain:
            yield replace(limit, where=None, at_least=None)


MAKERS: Mapping[str, Callable[[Reconciliation, Limit], list[Check]]] = {
    "EI ratio": limit_checks,
    "fixity": limit_checks,
    "bearing stiffness": limit_checks,
    "settlement": limit_checks,
    "deflection": sag_checks,
    "span/n": sag_checks,
    **dict.fromkeys(DEFLECTIONS, deflection_checks),
}
