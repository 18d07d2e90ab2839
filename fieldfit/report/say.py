"""Say: what was found, in plain sentences."""

from collections import Counter
from collections.abc import Iterator, Sequence

from fieldfit.fit import Estimate
from fieldfit.judge import VERDICTS, Check, Verdict
from fieldfit.report.results import kind_of
from fieldfit.report.words import DASH, number, percent, plain, span_of

__all__ = [
    "answer",
    "correlated",
    "findings_by_verdict",
    "fit_words",
    "headline",
    "ledger_words",
    "ratio_span",
    "ratio_u",
    "shared_warnings",
    "stiffness_of",
]

STRONG = 0.8  # correlations weaker than this need no words


def headline(verdicts: Sequence[Verdict]) -> str:
    """The answer for all members in one sentence."""
    counted = Counter(verdict.verdict for verdict in verdicts)
    parts = [f"{counted[word]} {word}" for word in VERDICTS if counted[word]]
    noun = "member" if len(verdicts) == 1 else "members"
    return f"{len(verdicts)} {noun} held against the limits of the book: {', '.join(parts)}."


def findings_by_verdict(verdicts: Sequence[Verdict]) -> Iterator[tuple[str, list[str]]]:
    """Each verdict but ``within``, the worst first, with a short sentence for every member that has it."""
    for word in VERDICTS:
        members = [verdict for verdict in verdicts if verdict.verdict == word]
        if members and word != "within":
            yield word, [_why(verdict) for verdict in members]


def _why(verdict: Verdict) -> str:
    """What makes the verdict of a member."""
    name = verdict.reconciliation.subject.name
    deciding = next((check for check in verdict.checks if check.verdict == verdict.verdict), None)
    if deciding is None:
        return f"{name}: the book gives no limit to hold it against."
    reason = f": {deciding.reason}" if deciding.reason else ""
    span = ""
    if deciding.check == "EI ratio" and deciding.low is not None and deciding.high is not None:
        span = f", {span_of(deciding.low, deciding.high, deciding.u or 0.01)} times the recorded"
    return f"{name}: {_name(deciding)}{span}{reason}."


def answer(verdict: Verdict) -> str:
    """What the readings say of a member: stiffness first, then its checks."""
    found = verdict.reconciliation
    said = [_stiffness(estimate) for estimate in found.estimates if kind_of(estimate) == "EI"]
    return " ".join([*said, *map(_judged, verdict.checks)])


def _stiffness(estimate: Estimate) -> str:
    part = "The member's EI" if estimate.where == "whole" else f"EI of {estimate.where}"
    if estimate.ratio is None or estimate.u is None:
        span = span_of(estimate.ratio_low, estimate.ratio_high, 0.01)
        return f"The readings do not determine {part[0].lower()}{part[1:]} (over the recorded: {span})."
    apparent = ", as it appears," if estimate.quantity != "EI" else ""
    value = number(estimate.ratio, ratio_u(estimate))
    return f"{part}{apparent} is {value} times the recorded value (95 % interval {ratio_span(estimate)})."


def ratio_u(estimate: Estimate) -> float:
    """Standard uncertainty of an EI ratio; a hundredth where it has none, to round by."""
    return 0.01 if estimate.u is None or not estimate.recorded else estimate.u / estimate.recorded


def ratio_span(estimate: Estimate) -> str:
    """Interval of an EI ratio in words."""
    return span_of(estimate.ratio_low, estimate.ratio_high, ratio_u(estimate))


def stiffness_of(verdict: Verdict) -> list[tuple[str, str, str]]:
    """Place (empty for the whole member), ratio and interval of every EI of a member."""
    estimates = [estimate for estimate in verdict.reconciliation.estimates if kind_of(estimate) == "EI"]
    return [
        (
            "" if estimate.where == "whole" else estimate.where,
            number(estimate.ratio, ratio_u(estimate)) if estimate.u is not None else DASH,
            ratio_span(estimate),
        )
        for estimate in estimates
    ]


def _name(check: Check) -> str:
    place = "" if check.where == "whole" else f" of {check.where}"
    return f"{check.check}{place}" + (f" in stage {check.stage}" if check.stage else "")


def _judged(check: Check) -> str:
    name = _name(check)
    if check.verdict == "not assessed":
        return f"{name} is not assessed: {check.reason}."
    side = f" ({check.reason})" if check.reason else ""
    return f"{name} is {check.verdict}{side}; probability within: {percent(check.probability_within)}."


def fit_words(verdict: Verdict) -> str:
    """What the intervals rest on, and whether the model explains the readings."""
    fit = verdict.reconciliation.profile
    if fit is None:
        return (
            "Nothing could be fitted: there is no reading left to judge the scatter by. Give the readings a standard "
            "uncertainty (u), a half width (plus or minus) or their resolution."
        )
    source = {
        "given": "the uncertainty given in the book",
        "scatter": "the scatter of the readings about the fit",
        "resolution": "the resolution of the readings, as a floor",
    }[fit.noise.source]
    if fit.noise.source == "scatter":
        return f"Intervals rest on {source}."
    test = "" if fit.noise.p is None else f", probability of as much or more {percent(fit.noise.p)}"
    scatter = f"chi-square {plain(fit.noise.chi_square, 3)} on {fit.noise.spare} degrees of freedom{test}"
    told = {
        None: "",
        True: " The model explains the readings.",
        False: " The model does not explain the readings at their stated uncertainty: doubt every number here.",
    }[fit.noise.explains_readings]
    return f"Intervals rest on {source}; {scatter}.{told}"


def correlated(verdict: Verdict) -> list[str]:
    """A sentence for each pair of unknowns that the readings can hardly tell apart."""
    return [
        f"{first} and {second} are strongly correlated ({size:+.2f}): the readings fix a combination of the two better "
        "than either alone.".replace("-", "−")
        for pair, size in verdict.reconciliation.correlations.items()
        if abs(size) > STRONG
        for first, second in [pair.split(" ~ ", 1)]
    ]


def ledger_words(verdict: Verdict) -> str:
    """How many readings the book holds and what became of them."""
    used = Counter(verdict.reconciliation.used_for)
    return (
        f"{sum(used.values())} readings in the book: {used['fit']} used for the fit, {used['rule']} kept for the rules "
        f"of load tests, {used['none']} set aside."
    )


def shared_warnings(verdicts: Sequence[Verdict]) -> list[str]:
    """Warnings that every one of several members carries."""
    if len(verdicts) < 2:
        return []
    return [text for text in verdicts[0].warnings if all(text in verdict.warnings for verdict in verdicts)]
