"""Every table of a field book, in the order it is shown in; each is declared once, in `declared/`.

Reading, checking, the blank book and the reference page are all made from these declarations.
"""

from collections.abc import Mapping
from types import MappingProxyType

from fieldfit.fieldbook.declare import Table
from fieldfit.fieldbook.declared.asked import INSPECTIONS, LIMITS, UNKNOWNS
from fieldfit.fieldbook.declared.levelling import BENCHMARKS, LEVELLING, LEVELS
from fieldfit.fieldbook.declared.loading import IMPOSED, LOADS, STAGES
from fieldfit.fieldbook.declared.member import HINGES, JOB, MEMBERS, SUPPORTS, ZONES
from fieldfit.fieldbook.declared.reading import GAUGES, READINGS, RESETS

__all__ = ["TABLES"]

TABLES: Mapping[str, Table] = MappingProxyType(
    {
        table.name: table
        for table in (
            JOB,
            MEMBERS,
            SUPPORTS,
            HINGES,
            ZONES,
            LOADS,
            STAGES,
            IMPOSED,
            GAUGES,
            READINGS,
            RESETS,
            BENCHMARKS,
            LEVELS,
            LEVELLING,
            UNKNOWNS,
            LIMITS,
            INSPECTIONS,
        )
    }
)
