"""Checks of the level book: set-ups, points, what tells how sure a sight is, and that every height can be found."""

from collections.abc import Mapping

import numpy as np
import pandas as pd
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components

from fieldfit.fieldbook.links import refuse_name
from fieldfit.fieldbook.records import Mask, refuse
from fieldfit.fieldbook.typed import Typed

__all__ = ["benchmark_names", "check_levels", "levelling_rows"]

_SET_UP = ["stage", "set-up"]


def check_levels(tables: Mapping[str, Typed]) -> None:
    """Note every fault of the level book and its two small tables."""
    levels, levelling = tables["levels"], tables["levelling"]
    if levels.frame.empty:
        return
    _stages(levels, tables)
    _gauges(levels, tables["gauges"])
    _set_ups(levels, benchmark_names(levels.frame, tables["benchmarks"].frame))
    _known_quality(levels, levelling)
    _connected(levels, tables["benchmarks"])


def benchmark_names(levels: pd.DataFrame, benchmarks: pd.DataFrame) -> list[str]:
    """Names of the benchmarks; without a table of them, the first point of the level book that is on no member."""
    if len(benchmarks):
        return [*benchmarks["benchmark"].dropna()]
    return [*levels["point"][levels["member"].isna()].dropna()[:1]]


def levelling_rows(stages: "pd.Series[str]", levelling: pd.DataFrame) -> pd.DataFrame:
    """The row of the levelling table that holds for each stage, or the one that names none; NaN where neither is."""
    own = levelling.dropna(subset="stage").drop_duplicates("stage").set_index("stage")
    general = levelling[levelling["stage"].isna()].drop(columns="stage")
    found = own.reindex(stages.to_numpy(dtype=object)).set_axis(stages.index)
    if len(general):
        without = ~stages.isin(own.index)
        found.loc[without] = general.iloc[0].reindex(found.columns).to_numpy()
    return found


def _stages(levels: Typed, tables: Mapping[str, Typed]) -> None:
    """A sight off the beams is of a stage that some member has; so is a row of the levelling table."""
    known = {*tables["stages"].frame["stage"].dropna(), *tables["loads"].frame["load case"].dropna()}
    for typed in (levels, tables["levelling"]):
        rows = typed.frame if typed is not levels else typed.frame[typed.frame["member"].isna()]
        strange = rows[rows["stage"].notna() & ~rows["stage"].isin(known)].drop_duplicates("stage")
        for row in strange["row"]:
            refuse_name(typed, int(row), "stage", "stage", sorted(known), "of some member")
    levelling = tables["levelling"]
    blank = levelling.frame["stage"].isna()
    again = (blank & blank.cumsum().gt(1)).to_numpy(dtype=bool) & ~levelling.at_fault("stage")
    refuse(levelling, again, "name twice", "stage", "one row for the stages without a row of their own")


def _gauges(levels: Typed, gauges: Typed) -> None:
    """A point on a member is one of its gauges, and measures level."""
    frame = levels.frame
    known = (
        gauges.frame.dropna(subset=["member", "gauge"])
        .drop_duplicates(["member", "gauge"])
        .set_index(["member", "gauge"])["measures"]
    )
    pairs = frame[frame["member"].notna() & frame["point"].notna()].drop_duplicates(["member", "point"])
    for member, point, row in zip(pairs["member"], pairs["point"], pairs["row"], strict=True):
        if (member, point) not in known.index:
            names = [name for owner, name in known.index if owner == member]
            refuse_name(levels, int(row), "point", "gauge", names)
        elif known[member, point] not in ("level", None):
            levels.refuse("gauge of another kind", int(row), "point", "a gauge that measures level")


def _set_ups(levels: Typed, benchmarks: list[str]) -> None:
    """Sights in use: one backsight a set-up, at most one foresight, no point twice by one kind of sight.

    Nor does a set-up go from a point to itself, but for a benchmark sighted again at the end.
    """
    used = levels.frame[levels.frame["use"] & levels.frame["set-up"].notna() & levels.frame["sight"].notna()]
    for word in ("backsight", "foresight"):
        several = used[(used["sight"] == word) & used.duplicated([*_SET_UP, "sight"])]
        hint = "a further sight at a known point is an intermediate one"
        for row in several["row"]:
            levels.refuse("two backsights", int(row), "sight", f"one {word} a set-up", hint)
    first = used.drop_duplicates(_SET_UP)
    backed = pd.MultiIndex.from_frame(used[used["sight"] == "backsight"][_SET_UP].drop_duplicates())
    without = first[backed.get_indexer(pd.MultiIndex.from_frame(first[_SET_UP])) < 0]
    for row in without["row"]:
        levels.refuse("backsight missing", int(row), "sight", "a backsight in every set-up")
    twice = used[used.duplicated([*_SET_UP, "sight", "member", "point"]) & (used["sight"] == "intermediate")]
    for row in twice["row"]:
        hint = "a second sight for control comes from a set-up of its own; an earlier try is set aside by use: no"
        levels.refuse("sighted twice", int(row), "point", "a point sighted once by a set-up", hint)
    through = used[(used["sight"] != "intermediate") & ~(used["member"].isna() & used["point"].isin(benchmarks))]
    turned = through[through.duplicated([*_SET_UP, "member", "point"]) & ~through.duplicated([*_SET_UP, "sight"])]
    for row in turned["row"]:
        hint = "each turning point has a name of its own"
        levels.refuse("sighted twice", int(row), "point", "another point than the set-up's other turning point", hint)


def _known_quality(levels: Typed, levelling: Typed) -> None:
    """Something tells u of every sight in use, and its length where that is needed."""
    kept = levels.frame["use"] & levels.frame["stage"].notna()
    frame = levels.frame[kept]
    quality = levelling_rows(frame["stage"], levelling.frame)
    unsure = quality["u"].isna() & quality["u per km"].isna()
    for row in frame["row"][unsure & ~frame["stage"].duplicated()]:
        hint = "give u, u per km or both for this stage in the levelling table"
        levels.refuse("uncertainty missing", int(row), "staff", "a stage of which the levelling table says u", hint)
    needs = quality["u per km"].notna() | quality["allowed per km"].notna()
    lacking = needs & frame["distance"].isna() & ~levels.at_fault("distance")[kept.to_numpy(dtype=bool)]
    for row in frame["row"][lacking]:
        levels.refuse(
            "length of sight missing", int(row), "distance", "the length of the sight, as a figure per km is given"
        )


def _connected(levels: Typed, benchmarks: Typed) -> None:
    """Every set-up in use leads, sight by sight, to a benchmark whose height is given (or to the first one)."""
    frame = levels.frame[levels.frame["use"] & levels.frame[[*_SET_UP, "point"]].notna().all(axis=1)]
    if frame.empty:
        return
    names = benchmark_names(levels.frame, benchmarks.frame)
    given = benchmarks.frame.dropna(subset=["benchmark", "height"])["benchmark"]
    roots = [*given] or names[:1]
    fixed = frame["member"].isna() & frame["point"].isin(names)
    set_up = frame.groupby(_SET_UP, sort=False).ngroup().to_numpy()
    place = frame.assign(stage=frame["stage"].mask(fixed, "")).groupby(["stage", "member", "point"], dropna=False)
    point = place.ngroup().to_numpy() + set_up.max() + 1
    count = int(point.max()) + 1
    edges = coo_array((np.ones(len(frame)), (set_up, point)), shape=(count, count))
    label: Mask = connected_components(edges, directed=False)[1][set_up]
    reached = set(label[(fixed & frame["point"].isin(roots)).to_numpy()])
    loose = ~np.isin(label, list(reached))
    for row in pd.Series(frame["row"].to_numpy()[loose]).groupby(label[loose]).min():
        expected = "a point that sights connect with a benchmark of known height"
        hint = f"known: {', '.join(map(str, roots[:5]))}" if roots else "the level book has no benchmark"
        levels.refuse("not connected", int(row), "point", expected, hint)
