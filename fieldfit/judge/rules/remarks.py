"""Remarks: what is to be said of a rule itself: how it is read, what the book gives, what is from memory."""

from collections.abc import Iterator, Mapping

from fieldfit.judge.rules.declare import MARKS_SAID, Rule
from fieldfit.observe import Limit

__all__ = ["remarks"]


def remarks(rule: Rule, numbers: Mapping[str, Limit]) -> Iterator[str]:
    """Sentences on the rule; ``numbers`` are those that the book gives, by their names."""
    yield from rule.readings
    if not rule.loads and rule.reads == "deflection":
        yield "What load the rule asks for is not held here: whether the test reached it was not checked."
    asked = {one.key for one in rule.inputs if one.mark is None} | {one.key for one in rule.gates if one.number is None}
    for key, row in numbers.items():
        number = row.at_most if row.at_least is None else row.at_least
        instead = "" if key in asked else " in the place of the published number"
        yield f"The book gives {number:g} for {key}{instead}."
    marked = [(one.key, one.mark) for one in rule.gates]
    marked += [(one.key, one.mark) for one in rule.waits]
    marked += [(one.key, one.mark) for one in rule.inputs if one.mark is not None]
    told: dict[str, list[str]] = {}
    for key, mark in marked:
        if key not in numbers and MARKS_SAID[mark]:
            told.setdefault(MARKS_SAID[mark], []).append(key)
    if rule.loads and MARKS_SAID[rule.loads_mark]:
        told.setdefault(MARKS_SAID[rule.loads_mark], []).append("load")
    yield from (f"{', '.join(dict.fromkeys(keys))}: {mark}." for mark, keys in told.items())
