"""The level book: sights, benchmarks, and how sure the levelling is."""

from fieldfit.fieldbook.declare import Column, Table

__all__ = ["BENCHMARKS", "LEVELLING", "LEVELS"]

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
