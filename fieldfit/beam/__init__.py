"""What theory says: members, loads, areas of the curvature diagram, responses. SI; knows nothing of books or fits."""

from fieldfit.beam.areas import Areas, integrate
from fieldfit.beam.condensed import SEEN, Condensed, condense
from fieldfit.beam.jumps import Jumps, jumps
from fieldfit.beam.loads import (
    Bend,
    Couple,
    Force,
    Loads,
    Movement,
    Spread,
    combine,
    loads,
    shift,
    side_by_side,
    stack_loads,
)
from fieldfit.beam.member import Array, Flags, Members, Support, Zone, member, pad, stack, within
from fieldfit.beam.response import Response, gradient, respond, solve, solve_with_gradient
from fieldfit.beam.sag import Sag, largest_sag
from fieldfit.beam.system import Stiffness, recorded
from fieldfit.beam.theorems import area, tangential_deviation

__all__ = [
    "SEEN",
    "Areas",
    "Array",
    "Bend",
    "Condensed",
    "Couple",
    "Flags",
    "Force",
    "Jumps",
    "Loads",
    "Members",
    "Movement",
    "Response",
    "Sag",
    "Spread",
    "Stiffness",
    "Support",
    "Zone",
    "area",
    "combine",
    "condense",
    "gradient",
    "integrate",
    "jumps",
    "largest_sag",
    "loads",
    "member",
    "pad",
    "recorded",
    "respond",
    "shift",
    "side_by_side",
    "solve",
    "solve_with_gradient",
    "stack",
    "stack_loads",
    "tangential_deviation",
    "within",
]
