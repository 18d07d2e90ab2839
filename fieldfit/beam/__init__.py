"""What theory says: members, loads, areas of the curvature diagram, responses. SI; knows nothing of books or fits."""

from fieldfit.beam.areas import Areas, integrate
from fieldfit.beam.loads import Bend, Couple, Force, Loads, Movement, Spread, loads, shift, stack_loads
from fieldfit.beam.member import Array, Flags, Members, Support, Zone, member, pad, stack
from fieldfit.beam.response import Response, gradient, respond, solve
from fieldfit.beam.system import Stiffness, recorded

__all__ = [
    "Areas", "Array", "Bend", "Couple", "Flags", "Force", "Loads", "Members", "Movement", "Response", "Spread", "Stiffness",
    "Support", "Zone", "gradient", "integrate", "loads", "member", "pad", "recorded", "respond", "shift", "solve",
    "stack", "stack_loads",
]  # fmt: skip
