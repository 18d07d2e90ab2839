"""Say: what was found, in plain sentences."""

from collections import Counter
from collections.abc import Iterator, Sequence

from fieldfit.fieldbook import Book
from fieldfit.fit import Estimate, Reconciliation
from fieldfit.judge import VERDICTS, Check, Verdict
from fieldfit.observe.levelling import Misfit
from fieldfit.observe.naming import first_named
from fieldfit.report.results import in_unit, kind_of, unit_of
from fieldfit.report.words import DASH, number, percent, plain, span_of

__all__ = [
    "NONE",
    "UNEXPLAINED",
    "allowed",
    "answer",
    "check_name",
    "common_warnings",
    "correlated",
    "creeps",
    "findings_by_verdict",
    "fit_words",
    "headline",
    "ledger_words",
    "ratio_span",
    "ratio_u",
    "settled",
    "stiffness_of",
    "unexplained",
]

CHECKS_SAID = 3  # checks of a member named in the answer; its section has them all
MEMBERS_SAID = 12  # members of a verdict named in the answer for all; the table has the rest
PAIRS_SAID = 6
UNEXPLAINED = "The model does not explain the readings at their stated uncertainty: doubt every number here."
FIRM = "\N{NO-BREAK SPACE}"
NONE = "none holds"  # said of an interval where the model does not explain the readings
STRONG = 0.8  # correlations weaker than this need no words


def headline(verdicts: Sequence[Verdict]) -> str:
    """The answer for all members in one sentence."""
    counted = Counter(verdict.verdict for verdict in verdicts)
    parts = [f"{counted[word]} {word}" for word in VERDICTS if counted[word]]
    noun = "member" if len(verdicts) == 1 else "members"
    return f"{len(verdicts)} {noun} held against the limits of the book: {', '.join(parts)}."


def findings_by_verdict(book: Book, verdicts: Sequence[Verdict]) -> Iterator[tuple[str, list[str]]]:
    """Each verdict but ``within``, the worst first, with short sentences on the members that have it."""
    for word in VERDICTS:
        members = [verdict for verdict in verdicts if verdict.verdict == word]
        if not members or word == "within":
            continue
        sentences = _by_reason(members) if word == "not assessed" else [_why(book, verdict) for verdict in members]
        hidden = len(sentences) - MEMBERS_SAID
        more = [f"And {hidden} more; the table of members has them all."] if hidden > 0 else []
        yield word, [*sentences[:MEMBERS_SAID], *more]


def _by_reason(members: Sequence[Verdict]) -> list[str]:
    """Members that cannot be assessed, those with one reason together."""
    reasons: dict[str, list[str]] = {}
    for verdict in members:
        check = next((check for check in verdict.checks if check.verdict == verdict.verdict), None)
        reason = (check.reason if check else None) or "the book gives no limit to hold it against"
        reasons.setdefault(reason, []).append(verdict.reconciliation.subject.name)
    return [f"{first_named(names, MEMBERS_SAID)}: {reason}." for reason, names in reasons.items()]


def _why(book: Book, verdict: Verdict) -> str:
    """What makes the verdict of a member."""
    deciding = [check for check in verdict.checks if check.verdict == verdict.verdict]
    said = [_reached(book, check) for check in deciding[:CHECKS_SAID]]
    if len(deciding) > CHECKS_SAID:
        said.append(f"and {len(deciding) - CHECKS_SAID} more checks")
    return f"{verdict.reconciliation.subject.name}: {'; '.join(said)}."


def _reached(book: Book, check: Check) -> str:
    """A check with its value, interval and limits, and the reason for its verdict."""
    value, low, high, least, most = (
        in_unit(book, check.kind, one) for one in (check.value, check.low, check.high, check.at_least, check.at_most)
    )
    sizes = [abs(one) for one in (low, high, value) if one is not None]
    if not sizes:  # a finding decides, not a number
        return f"{check_name(check)}: {_reason(check)}"
    u = in_unit(book, check.kind, check.u) or 0.01 * max(sizes)
    unit = "" if check.kind == "ratio" else f"{FIRM}{unit_of(book, check.kind)}"
    sure = "its uncertainty is not known" if low is high is None else f"95 % interval {span_of(low, high, u)}"
    found = f"{number(value, u)}{unit} ({sure})"
    if value is None:
        found = f"{span_of(low, high, u)}{unit} (95 % interval)"
    return f"{check_name(check)} {found}, allowed {allowed(least, most)}{unit}: {_reason(check)}"


def _reason(check: Check) -> str:
    """Why a check is not within its limits."""
    if check.verdict != "undecided":
        return check.reason or "within"
    chance = f"the interval holds a limit; the probability of being within is {percent(check.probability_within)}"
    return f"{check.reason}: {chance}" if check.reason else chance


def allowed(at_least: float | None, at_most: float | None) -> str:
    """Limits in words; a dash where there are none."""
    if at_least is None and at_most is None:
        return DASH
    if at_least is None:
        return f"at most {plain(at_most)}"
    return f"at least {plain(at_least)}" if at_most is None else f"{plain(at_least)} to {plain(at_most)}"


def answer(verdict: Verdict) -> str:
    """What the readings say of a member: a doubt of everything first, then stiffness, then its checks by verdict."""
    found = verdict.reconciliation
    lost = unexplained(found)
    said = [UNEXPLAINED] if lost else []
    said += [_stiffness(estimate, lost) for estimate in found.estimates if kind_of(estimate) == "EI"]
    for word in VERDICTS:
        checks = [_judged(check) for check in verdict.checks if check.verdict == word]
        if checks:
            said.append(f"{word[0].upper()}{word[1:]}: {'; '.join(checks)}.")
    return " ".join(said)


def unexplained(found: Reconciliation) -> bool:
    """Whether the model fails to explain the readings, so that no interval of it holds."""
    return found.profile is not None and found.profile.noise.explains_readings is False


def _stiffness(estimate: Estimate, lost: bool) -> str:
    part = "The member's EI" if estimate.where == "whole" else f"EI of {estimate.where}"
    if estimate.ratio is None or estimate.u is None:
        span = span_of(estimate.ratio_low, estimate.ratio_high, 0.01)
        return f"The readings do not determine {part[0].lower()}{part[1:]} (over the recorded: {span})."
    if lost:
        return f"{part} of the best fit is {plain(estimate.ratio, 2)} times the recorded value; no interval holds."
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
    """Place (empty for the whole member), ratio and interval of every EI; neither where the readings contradict it."""
    estimates = [estimate for estimate in verdict.reconciliation.estimates if kind_of(estimate) == "EI"]
    lost = unexplained(verdict.reconciliation)
    return [
        (
            "" if estimate.where == "whole" else estimate.where,
            number(estimate.ratio, ratio_u(estimate)) if estimate.u is not None and not lost else DASH,
            NONE if lost else ratio_span(estimate),
        )
        for estimate in estimates
    ]


def check_name(check: Check) -> str:
    """Name of a check, as it stands in a sentence."""
    name = "deflection" if check.check == "span/n" else check.check
    where = f"span {check.where}" if check.kind == "deflection" else check.where
    return (
        name
        + ("" if check.where == "whole" else f" of {where}")
        + (f" in stage “{check.stage}”" if check.stage else "")
    )


def _judged(check: Check) -> str:
    """A check with the reason for its verdict."""
    why = f"within with a probability of {percent(check.probability_within)}" if check.verdict == "undecided" else ""
    reason = ": ".join(part for part in (check.reason, why) if part)
    return check_name(check) + (f" ({reason})" if reason else "")


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
    noise, tested = fit.noise, fit.noise.tested
    if tested is None or not tested.spare:
        return f"Intervals rest on {source}; no reading is left over to test the model by."
    scatter = f"chi-square is {_on(tested)} degree{'' if tested.spare == 1 else 's'} of freedom"
    if noise.sights.spare:
        scatter += f" (of it {_on(noise.sights)} among the sights of the level book)"
    if noise.p is None:
        return f"Intervals rest on {source}; {scatter}."
    told = "The model explains the readings." if noise.explains_readings else UNEXPLAINED
    return (
        f"Intervals rest on {source}; {scatter}. Sound readings would stray that far or farther with a probability of "
        f"{percent(noise.p)}; below 1 % the model counts as not explaining them. {told}"
    )


def _on(misfit: Misfit) -> str:
    return f"{plain(misfit.chi_square, 3)} on {misfit.spare}"


def settled(book: Book, verdict: Verdict) -> str:
    """The settlements that the readings determine, in words; empty where there are none, or no interval holds."""
    found = verdict.reconciliation
    moved = [one for one in found.estimates if one.quantity == "settlement" and one.value is not None]
    if not moved or unexplained(found):
        return ""
    unit, said = unit_of(book, "settlement"), []
    for one in moved:
        value, u, low, high = (in_unit(book, "settlement", end) for end in (one.value, one.u, one.low, one.high))
        sure = f"95 % interval {span_of(low, high, u or 0.0)}"
        stage = f" in stage {one.stage}" if one.stage else ""
        said.append(f"{one.where}{stage} by {number(value, u)}{FIRM}{unit} ({sure})")
    return f"Settled, down: {'; '.join(said)}."


def correlated(verdict: Verdict) -> str:
    """The pairs of unknowns that the readings can hardly tell apart, in words; empty where there are none."""
    strong = [
        f"{_unknown(first)} with {_unknown(second)} ({f'{size:+.2f}'.replace('-', '−')})"
        for pair, size in verdict.reconciliation.correlations.items()
        if abs(size) > STRONG
        for first, second in [pair.split(" ~ ", 1)]
    ]
    if not strong:
        return ""
    more = f" and {len(strong) - PAIRS_SAID} more pairs" if len(strong) > PAIRS_SAID else ""
    which = "either of the two" if len(strong) == 1 else "either of a pair"
    named = "; ".join(strong[:PAIRS_SAID])
    return f"Strongly correlated: {named}{more}. The readings fix a combination better than {which}."


def _unknown(name: str) -> str:
    """Name of an unknown, as it stands in a sentence."""
    name = name.removesuffix(" whole")
    if name == "load all":
        return "the load as a whole"
    return f"the load “{name.removeprefix('load ')}”" if name.startswith("load ") else name


def ledger_words(verdict: Verdict) -> str:
    """How many readings the book holds and what became of them."""
    found = verdict.reconciliation
    count = found.subject.observations.count.astype(int)
    fit, rule, none = (int(count[found.used_for == purpose].sum()) for purpose in ("fit", "rule", "none"))
    means = int(((count > 1) & (found.used_for != "none")).sum())
    averaged = f" {means} rows are the mean of several readings of one gauge in one stage." if means else ""
    return (
        f"{count.sum()} readings in the book: {fit} used for the fit, {rule} kept for the rules "
        f"of load tests, {none} set aside.{averaged} ‘As recorded’ is the bare reading of the recorded member; "
        f"‘fitted’ has zeros{', datum and creep' if creeps(verdict.reconciliation) else ' and datum'} in it as well."
    )


def creeps(found: Reconciliation) -> bool:
    """Whether creep is among what was fitted; what is as recorded leaves it out."""
    return any(estimate.quantity == "creep factor" for estimate in found.estimates)


def common_warnings(verdicts: Sequence[Verdict]) -> list[str]:
    """Warnings that every one of several members carries."""
    if len(verdicts) < 2:
        return []
    return [text for text in verdicts[0].warnings if all(text in verdict.warnings for verdict in verdicts)]
