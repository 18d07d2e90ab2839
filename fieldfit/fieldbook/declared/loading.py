"""What acts on the member: loads, the stages that carry them, and what is imposed."""

from fieldfit.fieldbook.declare import Column, Table
from fieldfit.fieldbook.declared.columns import length_column, member_column
from fieldfit.fieldbook.published import NATURES

__all__ = ["IMPOSED", "LOADS", "STAGES"]

LOADS = Table(
    name="loads",
    meaning="Load cases: each row one force, load a length, or moment; downward positive.",
    columns=(
        member_column(),
        Column(name="load case", kind="name", required=True, meaning="Rows of one name act together."),
        length_column("from", "Where it acts, or its left edge.", required=True),
        length_column("to", "Right edge of a spread load."),
        Column(name="force", kind="force", meaning="Force down; with to: the total, spread evenly."),
        Column(name="intensity", kind="intensity", meaning="Load a length, down, from from to to."),
        Column(name="intensity end", kind="intensity", meaning="Load a length at to, if not the same."),
        Column(name="moment", kind="moment", meaning="Applied moment, anticlockwise."),
        Column(name="u", kind="percent", above=0.0, meaning="Standard uncertainty of the load."),
        Column(
            name="nature",
            kind="word",
            words=NATURES,
            meaning="What the load case stands for in service, where it does; a dead load that no stage carries was "
            "there before the test, and a vehicle is the static one. Blank: what the test applies.",
        ),
    ),
    example=({"member": "example", "load case": "P", "from [m]": "4", "force [kN]": "50", "u [%]": "1"},),
)

STAGES = Table(
    name="stages",
    meaning="What was on the member when readings were taken; several rows add up.",
    left_out="Each load case is a stage of its own name, and readings are changes from unloaded.",
    columns=(
        member_column(),
        Column(name="stage", kind="name", required=True, meaning="A name of the stage."),
        Column(name="load case", kind="name", meaning="A load case present in this stage."),
        Column(name="factor", kind="ratio", bare=True, meaning="How much of the load case; blank: all of it (1)."),
        length_column(
            "offset", "Moves the load case to the right: a vehicle's axles; what leaves the beam is told. Blank: 0."
        ),
        Column(
            name="role",
            kind="word",
            words=("zero", "load", "hold", "unload", "recovery"),
            meaning="What the stage is for; blank: as the stage's other rows say, else load. Rules of load tests "
            "take zero as read before loading, load on reaching a load, hold after keeping it on, unload on taking it "
            "off, recovery after the time the rule gives.",
        ),
        Column(
            name="cycle",
            kind="name",
            meaning="Which loading and unloading it belongs to, such as 1 and 2 or A to F, for a test repeated or in "
            "cycles; blank: that of the stage before, at first of the next; without any, all are one. Only the first "
            "enters the fit, the others serve the rules.",
        ),
        Column(name="start", kind="time", meaning="When it began; with end, its window for readings without a stage."),
        Column(name="end", kind="time", meaning="When it ended; a next stage may begin at that moment."),
    ),
    example=(
        {"member": "example", "stage": "zero", "role": "zero"},
        {"member": "example", "stage": "50 kN", "load case": "P", "factor": "1", "role": "load"},
    ),
)

IMPOSED = Table(
    name="imposed",
    meaning="Known movements: settlements, curvatures, temperature gradients.",
    left_out="None.",
    columns=(
        member_column(),
        Column(name="stage", kind="name", meaning="The stage it belongs to; blank: every stage."),
        Column(name="support", kind="name", meaning="The support that settled."),
        Column(name="settlement", kind="settlement", meaning="Settlement of the support, down."),
        length_column("from", "Left edge of the curvature; blank: the left end."),
        length_column("to", "Right edge of the curvature; blank: the right end."),
        Column(name="curvature", kind="curvature", meaning="Imposed curvature, sagging."),
        Column(
            name="top minus bottom",
            kind="temperature difference",
            meaning="How much warmer the top is; needs expansion here and depth in members.",
        ),
        Column(
            name="top minus bottom u",
            kind="temperature difference",
            above=0.0,
            meaning="Standard uncertainty of that difference, in every row its own; blank: taken as exact. A "
            "temperature curvature asked for in unknowns stands in its place.",
        ),
        Column(name="expansion", kind="expansion", above=0.0, meaning="Coefficient of thermal expansion."),
    ),
    example=({"member": "example", "stage": "50 kN", "support": "B", "settlement [mm]": "0"},),
)
