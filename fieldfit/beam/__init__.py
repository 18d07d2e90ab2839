"""What theory says: members, loads, areas of the curvature diagram, responses. SI; knows nothing of books or fits."""

from fieldfit.beam.areas import Areas, integrate
from fieldfit.beam.loads import Bend, Couple, Force, Loads, Movement, Spread, loads, shift, stack_loads
from fieldfit.beam.member import Array, Members, Support, Zone, member, pad, stack
from fieldfit.beam.response import Response, Stiffness, gradient, recorded, respond, solve

__all__ = [
    "Areas", "Array", "Bend", "Couple", "Force", "Loads", "Members", "Movement", "Response", "Spread", "Stiffness",
    "Support", "Zone", "gradient", "integrate", "loads", "member", "pad", "recorded", "respond", "shift", "solve",
    "stack", "stack_loads",
]  # fmt: skip
