"""What the member is on record: the job, its members, supports, hinges and zones."""

from fieldfit.fieldbook.declare import Column, Table
from fieldfit.fieldbook.declared.columns import length_column, member_column

__all__ = ["HINGES", "JOB", "MEMBERS", "SUPPORTS", "ZONES"]

JOB = Table(
    name="job",
    meaning="What the report says about the job.",
    left_out="The report names the book only.",
    columns=(
        Column(
            name="item",
            kind="text",
            required=True,
            meaning="structure, reference, date, weather, observers, instruments and calibration, "
            "how loads were weighed, ...",
        ),
        Column(name="value", kind="text", required=True, meaning="What there is to say about it."),
    ),
    example=({"item": "structure", "value": "example: overwrite or delete the example rows"},),
)

MEMBERS = Table(
    name="members",
    meaning="The beams and their recorded stiffness. State EI, or both E and I.",
    key=("member",),
    columns=(
        member_column("A name of the member, given once."),
        Column(name="length", kind="length", required=True, above=0.0, meaning="Length of the member, end to end."),
        Column(name="EI", kind="EI", above=0.0, meaning="Recorded bending stiffness, as drawings say."),
        Column(name="E", kind="E", above=0.0, meaning="Recorded modulus, with I instead of EI."),
        Column(name="I", kind="I", above=0.0, meaning="Recorded second moment of area, with E instead of EI."),
        Column(
            name="GA",
            kind="GA",
            above=0.0,
            meaning="Effective shear stiffness, shape factor included; blank: no shear deformation.",
        ),
        Column(
            name="depth",
            kind="depth",
            above=0.0,
            meaning="Overall depth of the section, for temperature effects and the rules of load tests.",
        ),
        Column(
            name="tolerance",
            kind="percent",
            above=0.0,
            meaning="Tolerance on EI, both sides of the recorded one; blank: not assessed.",
        ),
        Column(name="load share", kind="ratio", bare=True, above=0.0, meaning="Share of the load this member takes."),
        Column(
            name="load share u",
            kind="ratio",
            bare=True,
            above=0.0,
            meaning="Standard uncertainty of that share itself: 0.025 with a share of 0.25 is 10 % of the load.",
        ),
        Column(name="group", kind="name", meaning="A group of like members."),
        Column(name="note", kind="text", meaning="Anything to say of the member."),
    ),
    example=(
        {
            "member": "example",
            "length [m]": "8",
            "EI [kN m2]": "25000",
            "depth [mm]": "400",
            "tolerance [%]": "15",
            "note": "example row",
        },
    ),
)

SUPPORTS = Table(
    name="supports",
    meaning="Where and how the members are held.",
    left_out="Simple supports at both ends.",
    key=("member", "support"),
    columns=(
        member_column(),
        Column(name="support", kind="name", meaning="Its name; blank: A, B, ... by the order of the positions."),
        length_column("at", "Distance from the left end.", required=True),
        Column(
            name="vertical",
            kind="word",
            words=("rigid", "spring", "none"),
            default="rigid",
            meaning="How it holds the member up.",
        ),
        Column(
            name="bearing stiffness",
            kind="bearing stiffness",
            above=0.0,
            meaning="Stiffness of a vertical spring; stated with spring only.",
        ),
        Column(
            name="rotation",
            kind="word",
            words=("free", "fixed", "spring"),
            default="free",
            meaning="How it restrains rotation.",
        ),
        Column(
            name="rotational stiffness",
            kind="rotational stiffness",
            above=0.0,
            meaning="Stiffness of a rotational spring; stated with spring only.",
        ),
    ),
    example=(
        {"member": "example", "support": "A", "at [m]": "0", "vertical": "rigid", "rotation": "free"},
        {"member": "example", "support": "B", "at [m]": "8", "vertical": "rigid", "rotation": "free"},
    ),
)

HINGES = Table(
    name="hinges",
    meaning="Internal hinges.",
    left_out="No hinges.",
    columns=(member_column(), length_column("at", "Distance from the left end, inside the member.", required=True)),
)

ZONES = Table(
    name="zones",
    meaning="Stretches with a name, or with a stiffness other than the member's.",
    left_out="The member is one zone.",
    key=("member", "zone"),
    columns=(
        member_column(),
        Column(name="zone", kind="name", required=True, meaning="A name of the zone, given once a member."),
        length_column("from", "Left edge, from the left end.", required=True),
        length_column("to", "Right edge, from the left end.", required=True),
        Column(name="EI", kind="EI", above=0.0, meaning="Recorded stiffness here; blank: the member's."),
        Column(name="EI end", kind="EI", above=0.0, meaning="Stiffness at the right edge of a linear taper."),
        Column(name="GA", kind="GA", above=0.0, meaning="Effective shear stiffness here."),
    ),
    example=({"member": "example", "zone": "middle", "from [m]": "3", "to [m]": "5"},),
)
