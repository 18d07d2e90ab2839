"""What is asked for: unknowns, limits, and what was seen."""

from fieldfit.fieldbook.declare import LIMIT_KINDS, UNKNOWN_KINDS, Column, Table
from fieldfit.fieldbook.declared.columns import member_column, value_column
from fieldfit.fieldbook.published import FINDINGS

__all__ = ["INSPECTIONS", "LIMITS", "UNKNOWNS"]

UNKNOWNS = Table(
    name="unknowns",
    meaning="What the readings are asked to tell.",
    left_out="One EI for each member.",
    key=("member", "unknown", "where", "stage"),
    columns=(
        member_column(),
        Column(name="unknown", kind="word", required=True, words=tuple(UNKNOWN_KINDS), meaning="What is not known."),
        Column(
            name="where",
            kind="name",
            meaning="EI: a zone (blank: the whole member); rotational restraint, bearing stiffness, settlement: "
            "a support; load: a load case; camber: a span such as 1 or A-B; temperature coefficient: a gauge.",
        ),
        Column(
            name="stage",
            kind="name",
            meaning="The stage of a settlement, a datum or a temperature. A settlement or temperature curvature is the "
            "whole of it, with what imposed has of it in that stage, and so are low, high and expected.",
        ),
        value_column("low", "unknown", UNKNOWN_KINDS, "It cannot be less."),
        value_column("high", "unknown", UNKNOWN_KINDS, "It cannot be more."),
        value_column("expected", "unknown", UNKNOWN_KINDS, "What is known beforehand, with expected u."),
        value_column("expected u", "unknown", UNKNOWN_KINDS, "Standard uncertainty of expected.", above=0.0),
    ),
    example=({"member": "example", "unknown": "EI", "low": "0.2", "high": "2"},),
)

LIMITS = Table(
    name="limits",
    meaning="What the member must meet.",
    left_out="Only the tolerance in members.",
    key=("member", "limit", "where", "stage"),
    columns=(
        member_column(),
        Column(
            name="limit",
            kind="word",
            required=True,
            words=tuple(LIMIT_KINDS),
            meaning="What is limited. EI ratio, fixity, bearing stiffness, settlement: not assessed where it is not "
            "among the unknowns; deflection, span/n: the largest of a span, down or up (of a cantilever, n is of twice "
            "its length).",
        ),
        Column(
            name="where",
            kind="name",
            meaning="EI ratio: a zone; fixity, bearing stiffness, settlement: a support; deflection, span/n and "
            "deflection limits by name: a span such as 1 or A-B; a rule by name: which of its numbers this row gives; "
            "AASHTO deflection limits: also dynamic factor. "
            "Blank: everywhere, or the rule as published.",
        ),
        Column(name="stage", kind="name", meaning="The stage it holds for; blank: every stage."),
        value_column("at least", "limit", LIMIT_KINDS, "It must not be less."),
        value_column("at most", "limit", LIMIT_KINDS, "It must not be more."),
    ),
    example=({"member": "example", "limit": "deflection", "at most": "30"},),
)

INSPECTIONS = Table(
    name="inspections",
    meaning="What was seen of the member during and after a load test.",
    left_out="Nothing is known of it: a rule that asks is not assessed.",
    key=("member", "finding"),
    columns=(
        member_column(),
        Column(name="finding", kind="word", required=True, words=FINDINGS, meaning="What was looked for."),
        Column(name="found", kind="yes or no", words=("yes", "no"), required=True, meaning="Whether it was found."),
        Column(name="remark", kind="text", meaning="Where, by whom, how large."),
    ),
    example=({"member": "example", "finding": "crushing or spalling", "found": "no", "remark": "example row"},),
)
