"""Names of the published rules and deflection limits that a book can ask for, and of the numbers it can override.

What they mean is declared in ``judge/rules``; ``tests/judge/rules`` holds the two lists together.
"""

from collections.abc import Mapping
from types import MappingProxyType

__all__ = ["DEFLECTION_LIMITS", "DYNAMIC", "FACTORED", "FINDINGS", "NATURES", "RULE_NUMBERS", "SHARES"]

AT_MOST, AT_LEAST = "at most", "at least"
_WAITS = {"hold": AT_LEAST, "recovery time": AT_LEAST}
_REPEAT = {**_WAITS, "wait before repeat": AT_LEAST}
_LOAD = {"share of load": AT_LEAST}  # 1 is all of what the rule's combinations come to
_ACI = {"span over deflection": AT_LEAST, "residual": AT_MOST, "residual of repeat": AT_MOST, **_REPEAT, **_LOAD}
_BS_8110 = {"recovery": AT_LEAST, "gain of recovery": AT_LEAST, "wait before repeat": AT_LEAST, **_LOAD}
_CAP = {"span over maximum": AT_LEAST}
_CYCLIC = {"deviation from linearity": AT_MOST}
_RECOVERY = {"recovery": AT_LEAST, **_WAITS}

#: Each rule's numbers, in hours for times and as plain numbers else, with the side they limit.
RULE_NUMBERS: Mapping[str, Mapping[str, str]] = MappingProxyType(
    {
        "ACI 318-11": _ACI,
        "ACI 318-14": _ACI,
        "ACI 318-19": _ACI,
        "ACI 437.2-13 monotonic": {"residual": AT_MOST, **_CAP, "residual of repeat": AT_MOST, **_WAITS},
        "ACI 437.2-13 cyclic": {
            **_CYCLIC,
            "permanency ratio": AT_MOST,
            "residual": AT_MOST,
            **_CAP,
            "recovery time": AT_LEAST,
        },
        "ACI 437.2-13 cyclic, repeat": {"residual": AT_MOST, "recovery time": AT_LEAST},
        "ACI 437R-03 cyclic": {**_CYCLIC, "repeatability": AT_LEAST, "permanency": AT_MOST},
        "IS 456:2000": {"waiver": AT_LEAST, "recovery": AT_LEAST, "recovery of repeat": AT_LEAST, **_REPEAT, **_LOAD},
        "IBC 1708.2.2": {"span over deflection at design load": AT_LEAST, **_RECOVERY, **_LOAD},
        "AISC hold": {"growth": AT_MOST, "hold": AT_LEAST},
        "AASHTO MBE factor K": dict.fromkeys(
            ("rating factor", "calculated rating factor", "test over rating", "Kb"), AT_LEAST
        ),
        "BS 8110-2 reinforced": _BS_8110,
        "BS 8110-2 prestressed": _BS_8110,
        "IRC SP 51 reinforced": _RECOVERY,
        "IRC SP 51 prestressed": _RECOVERY,
        "IRC SP 51 steel": _RECOVERY,
        "IRC SP 51 composite": _RECOVERY,
        "EHE-08 reinforced": {"residual": AT_MOST, "recovery time": AT_LEAST},
        "EHE-08 prestressed or composite": {"residual": AT_MOST, "recovery time": AT_LEAST},
        "DAfStb 2000": {"residual": AT_MOST},
        "NTC 2018": {"elastic over calculated": AT_MOST},
    }
)

#: The numbers that are shares, with the most that each can be: a number above it is one of percent.
SHARES: Mapping[str, float] = MappingProxyType(
    {
        **dict.fromkeys(
            (
                "residual",
                "residual of repeat",
                "recovery",
                "recovery of repeat",
                "gain of recovery",
                "growth",
                "deviation from linearity",
                "permanency",
                "permanency ratio",
                "repeatability",
                "Kb",
            ),
            1.0,
        ),
        **dict.fromkeys(("share of load", "test over rating", "elastic over calculated"), 2.0),  # may be more than all
    }
)

DEFLECTION_LIMITS = (
    "ACI 318-19 floor live l/360",
    "ACI 318-19 flat roof l/180",
    "ACI 318-19 attached likely damaged l/480",
    "ACI 318-19 attached not likely damaged l/240",
    "IBC floor live l/360",
    "IBC floor dead and live l/240",
    "IBC roof plaster ceiling l/360",
    "IBC roof other ceiling l/240",
    "IBC roof no ceiling l/180",
    "IBC roof plaster ceiling dead and live l/240",
    "IBC roof other ceiling dead and live l/180",
    "IBC roof no ceiling dead and live l/120",
    "IBC farm building dead and live l/180",
    "IBC greenhouse dead and live l/120",
    "AASHTO vehicle l/800",
    "AASHTO vehicle and pedestrian l/1000",
    "AASHTO vehicle on cantilever l/300",
    "AASHTO vehicle and pedestrian on cantilever l/375",
    "AASHTO timber vehicle l/425",
    "BS 5950-1 imposed brittle l/360",
    "BS 5950-1 imposed other l/200",
    "BS 5950-1 imposed cantilever l/180",
    "EN 1995-1-1 w inst",
    "EN 1995-1-1 w net fin",
    "EN 1995-1-1 w fin",
    "EN 1990 w1",
    "EN 1990 w2",
    "EN 1990 w3",
    "EN 1990 w2 and w3",
    "EN 1990 w max",
    "EN 1992-1-1 sag l/250",
    "EN 1992-1-1 after construction l/500",
    "AS 3600 total l/250",
    "AS 3600 incremental l/500",
    "UK housing joists strutted",
    "UK housing joists unstrutted",
)

DYNAMIC = "dynamic factor"  # where a row of these limits gives another factor for dynamic effects
FACTORED = tuple(name for name in DEFLECTION_LIMITS if name.startswith("AASHTO"))

NATURES = ("self-weight", "superimposed dead", "live", "roof", "vehicle")

FINDINGS = (
    "crushing or spalling",
    "sign of failure",
    "damaging cracks",
    "instability",
    "not proportional to load",
    "residual beyond initial settling",
    "behaviour extrapolates to 1.33 W",
)
