"""What was read: gauges and their readings."""

from fieldfit.fieldbook.declare import GAUGE_KINDS, KELVIN_KINDS, SENSES, Column, Table
from fieldfit.fieldbook.declared.columns import length_column, member_column, sureness

__all__ = ["GAUGES", "READINGS", "RESETS"]

GAUGES = Table(
    name="gauges",
    meaning="What was read where, and how well.",
    left_out="Readings carry their own at.",
    key=("member", "gauge"),
    columns=(
        member_column(),
        Column(name="gauge", kind="name", required=True, meaning="A name of the gauge, given once a member."),
        length_column("at", "Distance from the left end.", required=True),
        Column(
            name="measures",
            kind="word",
            words=tuple(GAUGE_KINDS),
            default="deflection",
            meaning="What it measures.",
        ),
        Column(
            name="below neutral axis",
            kind="depth",
            meaning="Distance of a strain gauge below the neutral axis; needed for strain.",
        ),
        Column(
            name="positive sense",
            kind="word",
            words=tuple(dict.fromkeys(word for pair in SENSES.values() for word in pair)),
            meaning="Which way counts up; blank: deflection down, level up, rotation anticlockwise, "
            "curvature sagging, strain tension.",
        ),
        *sureness("measures", GAUGE_KINDS),
        Column(name="scale u", kind="percent", above=0.0, meaning="Standard uncertainty of its scale."),
        Column(
            name="temperature coefficient",
            by="measures",
            kinds=KELVIN_KINDS,
            meaning="What the gauge itself reads more when it is a kelvin warmer; with its u. Not known: ask for it in "
            "unknowns, for the fit; rules of load tests need it stated.",
        ),
        Column(
            name="temperature coefficient u",
            by="measures",
            kinds=KELVIN_KINDS,
            above=0.0,
            meaning="Standard uncertainty of that coefficient.",
        ),
        Column(name="channel", kind="name", meaning="Its column in a logger's file, if that is not the gauge's name."),
    ),
    example=(
        {
            "member": "example",
            "gauge": "G1",
            "at [m]": "4",
            "measures": "deflection",
            "positive sense": "down",
            "u [mm]": "0.05",
            "resolution [mm]": "0.01",
        },
        {"member": "example", "gauge": "L1", "at [m]": "4", "measures": "level", "positive sense": "up"},
    ),
)

READINGS = Table(
    name="readings",
    meaning="What was read: one value a row, or a row a stage with a column a gauge, such as G1 [mm]; or a logger's "
    "file as it is, a row a time with a column a channel, whose readings go to stages by start and end.",
    columns=(
        member_column("The member that was read; a reading belongs to one, so * is refused."),
        Column(name="stage", kind="name", meaning="The stage it was read in; blank where its time says it."),
        Column(name="gauge", kind="name", meaning="The gauge; not needed where at is given."),
        length_column("at", "Distance from the left end, where no gauge says it."),
        *(
            Column(name=word, kind=kind, meaning=f"The value read, {SENSES[word][0]} positive unless the gauge says.")
            for word, kind in GAUGE_KINDS.items()
        ),
        *sureness("quantity", GAUGE_KINDS),
        Column(
            name="reset",
            kind="yes or no",
            words=("yes", "no"),
            default="no",
            meaning="yes: the gauge was reset or moved in its seat just before this reading, which starts a new zero; "
            "in a row a stage, every gauge of the row.",
        ),
        Column(
            name="time",
            kind="time",
            meaning="When it was read; without a stage it belongs to the stage whose start and end hold it.",
        ),
        Column(name="temperature", kind="temperature", meaning="Temperature when it was read."),
        Column(
            name="use",
            kind="yes or no",
            words=("yes", "no"),
            default="yes",
            meaning="no sets the reading aside; it stays in the ledger.",
        ),
        Column(name="remark", kind="text", meaning="Anything to say of the reading."),
    ),
    example=(
        {"member": "example", "stage": "zero", "gauge": "G1", "deflection [mm]": "0.02", "use": "yes"},
        {
            "member": "example",
            "stage": "50 kN",
            "gauge": "G1",
            "deflection [mm]": "24.5",
            "time": "2024-05-14T10:30:00",
            "temperature [degC]": "18",
            "use": "yes",
            "remark": "example row",
        },
    ),
)

RESETS = Table(
    name="resets",
    meaning="When gauges of a logger's file were reset or moved in their seat: each starts a new zero at that moment.",
    left_out="None was. With readings a row, the column reset says so.",
    columns=(
        member_column("The member of the gauge; * is refused."),
        Column(name="gauge", kind="name", required=True, meaning="The gauge that was reset."),
        Column(name="time", kind="time", required=True, meaning="The first moment of the new zero."),
        Column(name="remark", kind="text", meaning="Why, by whom."),
    ),
)
