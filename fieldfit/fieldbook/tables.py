"""Every table and column of a field book, declared once.

Reading, checking, the blank book and the reference page are all made from this declaration.
"""

from collections.abc import Mapping
from types import MappingProxyType

from fieldfit.fieldbook.declare import GAUGE_KINDS, KELVIN_KINDS, LIMIT_KINDS, SENSES, UNKNOWN_KINDS, Column, Table
from fieldfit.fieldbook.published import FINDINGS, NATURES

__all__ = ["TABLES"]


def _u(by: str, kinds: Mapping[str, str]) -> tuple[Column, ...]:
    """The three ways to state how sure a reading is."""
    return (
        Column(name="u", by=by, kinds=kinds, above=0.0, meaning="One standard uncertainty of a reading."),
        Column(
            name="plus or minus",
            by=by,
            kinds=kinds,
            above=0.0,
            meaning="Half width of a reading's tolerance band; its standard uncertainty is this over √3.",
        ),
        Column(name="resolution", by=by, kinds=kinds, above=0.0, meaning="The full step of the last figure read."),
    )


def _member(meaning: str = "The member; * stands for every member with no rows of its own here.") -> Column:
    return Column(name="member", kind="name", required=True, meaning=meaning)


def _length(name: str, meaning: str, *, required: bool = False) -> Column:
    return Column(name=name, kind="length", required=required, meaning=meaning)


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
        _member("A name of the member, given once."),
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
        Column(name="load share u", kind="ratio", bare=True, above=0.0, meaning="Standard uncertainty of that share."),
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
        _member(),
        Column(name="support", kind="name", meaning="Its name; blank: A, B, ... by the order of the positions."),
        _length("at", "Distance from the left end.", required=True),
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
    columns=(_member(), _length("at", "Distance from the left end, inside the member.", required=True)),
)

ZONES = Table(
    name="zones",
    meaning="Stretches with a name, or with a stiffness other than the member's.",
    left_out="The member is one zone.",
    key=("member", "zone"),
    columns=(
        _member(),
        Column(name="zone", kind="name", required=True, meaning="A name of the zone, given once a member."),
        _length("from", "Left edge, from the left end.", required=True),
        _length("to", "Right edge, from the left end.", required=True),
        Column(name="EI", kind="EI", above=0.0, meaning="Recorded stiffness here; blank: the member's."),
        Column(name="EI end", kind="EI", above=0.0, meaning="Stiffness at the right edge of a linear taper."),
        Column(name="GA", kind="GA", above=0.0, meaning="Effective shear stiffness here."),
    ),
    example=({"member": "example", "zone": "middle", "from [m]": "3", "to [m]": "5"},),
)

LOADS = Table(
    name="loads",
    meaning="Load cases: each row one force, load a length, or moment; downward positive.",
    columns=(
        _member(),
        Column(name="load case", kind="name", required=True, meaning="Rows of one name act together."),
        _length("from", "Where it acts, or its left edge.", required=True),
        _length("to", "Right edge of a spread load."),
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
        _member(),
        Column(name="stage", kind="name", required=True, meaning="A name of the stage."),
        Column(name="load case", kind="name", meaning="A load case present in this stage."),
        Column(name="factor", kind="ratio", bare=True, meaning="How much of the load case; blank: all of it (1)."),
        _length("offset", "Moves the load case to the right: a vehicle's axles; blank: 0."),
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
            "cycles; blank: all are one. Only the first enters the fit, the others serve the rules.",
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
        _member(),
        Column(name="stage", kind="name", meaning="The stage it belongs to; blank: every stage."),
        Column(name="support", kind="name", meaning="The support that settled."),
        Column(name="settlement", kind="settlement", meaning="Settlement of the support, down."),
        _length("from", "Left edge of the curvature; blank: the left end."),
        _length("to", "Right edge of the curvature; blank: the right end."),
        Column(name="curvature", kind="curvature", meaning="Imposed curvature, sagging."),
        Column(
            name="top minus bottom",
            kind="temperature difference",
            meaning="How much warmer the top is; needs expansion here and depth in members.",
        ),
        Column(name="expansion", kind="expansion", above=0.0, meaning="Coefficient of thermal expansion."),
    ),
    example=({"member": "example", "stage": "50 kN", "support": "B", "settlement [mm]": "0"},),
)

GAUGES = Table(
    name="gauges",
    meaning="What was read where, and how well.",
    left_out="Readings carry their own at.",
    key=("member", "gauge"),
    columns=(
        _member(),
        Column(name="gauge", kind="name", required=True, meaning="A name of the gauge, given once a member."),
        _length("at", "Distance from the left end.", required=True),
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
        *_u("measures", GAUGE_KINDS),
        Column(name="scale u", kind="percent", above=0.0, meaning="Standard uncertainty of its scale."),
        Column(
            name="temperature coefficient",
            by="measures",
            kinds=KELVIN_KINDS,
            meaning="What the gauge itself reads more when it is a kelvin warmer; with its u. Not known: ask for it in "
            "unknowns.",
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
        _member("The member that was read; a reading belongs to one, so * is refused."),
        Column(name="stage", kind="name", meaning="The stage it was read in; blank where its time says it."),
        Column(name="gauge", kind="name", meaning="The gauge; not needed where at is given."),
        _length("at", "Distance from the left end, where no gauge says it."),
        *(
            Column(name=word, kind=kind, meaning=f"The value read, {SENSES[word][0]} positive unless the gauge says.")
            for word, kind in GAUGE_KINDS.items()
        ),
        *_u("quantity", GAUGE_KINDS),
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


LEVELS = Table(
    name="levels",
    meaning="The level book: a row a sight. Heights follow by least squares with all their correlations and are read "
    "like any other readings. A larger staff reading is a lower point.",
    left_out="Levels are only those among the readings.",
    columns=(
        Column(
            name="member", kind="name", meaning="The member of a point on a beam; blank: a benchmark or turning point."
        ),
        Column(name="stage", kind="name", required=True, meaning="The stage it was levelled in."),
        Column(
            name="set-up",
            kind="name",
            required=True,
            meaning="A standing of the instrument, named within its stage; its sights share one line of sight.",
        ),
        Column(
            name="sight",
            kind="word",
            required=True,
            words=("backsight", "intermediate", "foresight"),
            meaning="A set-up has one backsight, any intermediate sights, and one foresight, which the next set-up "
            "takes up as its backsight.",
        ),
        Column(
            name="point",
            kind="name",
            required=True,
            meaning="With a member: its gauge, which measures level. Without: a benchmark, or a turning point of this "
            "stage.",
        ),
        Column(
            name="staff", kind="level", required=True, meaning="Staff reading; negative on a staff held upside down."
        ),
        Column(name="distance", kind="length", above=0.0, meaning="Length of the sight."),
        Column(
            name="use",
            kind="yes or no",
            words=("yes", "no"),
            default="yes",
            meaning="no sets the sight aside; it stays in the ledger.",
        ),
        Column(name="remark", kind="text", meaning="Anything to say of the sight."),
    ),
    example=tuple(
        {
            "member": "" if point == "BM1" else "example",
            "stage": stage,
            "set-up": "1",
            "sight": sight,
            "point": point,
            "staff [m]": staff,
            "distance [m]": "20",
            "use": "yes",
        }
        for stage, values in (("zero", ("1.4312", "1.8840", "1.4313")), ("50 kN", ("1.4275", "1.9045", "1.4274")))
        for sight, point, staff in zip(
            ("backsight", "intermediate", "foresight"), ("BM1", "L1", "BM1"), values, strict=True
        )
    ),
)

BENCHMARKS = Table(
    name="benchmarks",
    meaning="Points that do not move with the load; they are the same in every stage.",
    key=("benchmark",),
    left_out="The first point of the level book is the only benchmark, at height 0.",
    columns=(
        Column(name="benchmark", kind="name", required=True, meaning="Its name in the level book."),
        Column(
            name="height",
            kind="level",
            meaning="Its height; blank: found from the levels. Where no benchmark has one, the first is at 0.",
        ),
        Column(name="u", kind="deflection", above=0.0, meaning="Standard uncertainty of that height; blank: exact."),
    ),
    example=({"benchmark": "BM1", "height [m]": "100"},),
)

LEVELLING = Table(
    name="levelling",
    meaning="How well the level book was kept: u of a sight is the root of u² + 2 (u per km)² times its length in km.",
    key=("stage",),
    left_out="Needed with a level book: it says how sure a sight is.",
    columns=(
        Column(
            name="stage", kind="name", meaning="The stage it holds for; blank: every stage without a row of its own."
        ),
        Column(name="u", kind="deflection", above=0.0, meaning="Standard uncertainty of one staff reading."),
        Column(
            name="u per km",
            kind="deflection",
            above=0.0,
            meaning="The instrument's standard deviation for 1 km of double run (ISO 17123-2); needs distance.",
        ),
        Column(
            name="allowed per km",
            kind="deflection",
            above=0.0,
            meaning="c of the allowed misclosure c √K, K the length of a run in km; needs distance.",
        ),
        Column(
            name="allowed per set-up",
            kind="deflection",
            above=0.0,
            meaning="c of the allowed misclosure c √n, n the set-ups of a run; with both, the smaller holds.",
        ),
    ),
    example=({"u [mm]": "0.1", "allowed per km [mm]": "4"},),
)


def _value(name: str, by: str, kinds: Mapping[str, str], meaning: str, above: float | None = None) -> Column:
    return Column(name=name, by=by, kinds=kinds, bare=True, above=above, meaning=meaning)


UNKNOWNS = Table(
    name="unknowns",
    meaning="What the readings are asked to tell.",
    left_out="One EI for each member.",
    key=("member", "unknown", "where", "stage"),
    columns=(
        _member(),
        Column(name="unknown", kind="word", required=True, words=tuple(UNKNOWN_KINDS), meaning="What is not known."),
        Column(
            name="where",
            kind="name",
            meaning="EI: a zone (blank: the whole member); rotational restraint, bearing stiffness, settlement: "
            "a support; load: a load case; camber: a span such as 1 or A-B; temperature coefficient: a gauge.",
        ),
        Column(name="stage", kind="name", meaning="The stage of a settlement, a datum or a temperature."),
        _value("low", "unknown", UNKNOWN_KINDS, "It cannot be less."),
        _value("high", "unknown", UNKNOWN_KINDS, "It cannot be more."),
        _value("expected", "unknown", UNKNOWN_KINDS, "What is known beforehand, with expected u."),
        _value("expected u", "unknown", UNKNOWN_KINDS, "Standard uncertainty of expected.", above=0.0),
    ),
    example=({"member": "example", "unknown": "EI", "low": "0.2", "high": "2"},),
)

LIMITS = Table(
    name="limits",
    meaning="What the member must meet.",
    left_out="Only the tolerance in members.",
    key=("member", "limit", "where", "stage"),
    columns=(
        _member(),
        Column(name="limit", kind="word", required=True, words=tuple(LIMIT_KINDS), meaning="What is limited."),
        Column(
            name="where",
            kind="name",
            meaning="EI ratio: a zone; fixity, bearing stiffness: a support; deflection, span/n and deflection "
            "limits by name: a span such as 1 or A-B; a rule by name: which of its numbers this row overrides. "
            "Blank: everywhere, or the rule as published.",
        ),
        Column(name="stage", kind="name", meaning="The stage it holds for; blank: every stage."),
        _value("at least", "limit", LIMIT_KINDS, "It must not be less."),
        _value("at most", "limit", LIMIT_KINDS, "It must not be more."),
    ),
    example=({"member": "example", "limit": "deflection", "at most": "30"},),
)

INSPECTIONS = Table(
    name="inspections",
    meaning="What was seen of the member during and after a load test.",
    left_out="Nothing is known of it: a rule that asks is not assessed.",
    key=("member", "finding"),
    columns=(
        _member(),
        Column(name="finding", kind="word", required=True, words=FINDINGS, meaning="What was looked for."),
        Column(name="found", kind="yes or no", words=("yes", "no"), required=True, meaning="Whether it was found."),
        Column(name="remark", kind="text", meaning="Where, by whom, how large."),
    ),
    example=({"member": "example", "finding": "crushing or spalling", "found": "no", "remark": "example row"},),
)

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
            BENCHMARKS,
            LEVELS,
            LEVELLING,
            UNKNOWNS,
            LIMITS,
            INSPECTIONS,
        )
    }
)
