"""What theory says: members, loads, areas of the curvature diagram, responses. SI; knows nothing of books or fits."""

from fieldfit.beam.areas import Areas, integrate
from fieldfit.beam.jumps import Jumps, jumps
from fieldfit.beam.loads import Bend, Couple, Force, Loads, Movement, Spread, loads, shift, stack_loads
from fieldfit.beam.member import Array, Members, Support, Zone, member, pad, stack
from fieldfit.beam.response import Response, gradient, respond, solve
from fieldfit.beam.sag import Sag, largest_sag
from fieldfit.beam.system import Stiffness, recorded
from fieldfit.beam.theorems import area, tangential_deviation

__all__ = [
    "Areas", "Array", "Bend", "Couple", "Force", "Jumps", "Loads", "Members", "Movement", "Response", "Sag", "Spread",
    "Stiffness", "Support", "Zone", "area", "gradient", "integrate", "jumps", "largest_sag", "loads", "member", "pad",
    "recorded", "respond", "shift", "solve", "stack", "stack_loads", "tangential_deviation",
]  # fmt: skip
