"""The level book: sights adjusted to heights of points on the members, and what checks them.

All stages are adjusted together, as the benchmarks are the same in each.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import pandas as pd

from fieldfit.beam import Array
from fieldfit.fieldbook import Book
from fieldfit.fieldbook.levels import benchmark_names, levelling_rows
from fieldfit.observe.levelling import Adjusted, Misfit, Net, adjusted
from fieldfit.observe.readings import COLUMNS, SENSE, Ledger, Observations, purposes, sorted_by_member

__all__ = ["Levelled", "Run", "levelled", "with_heights"]

UNCHECKED = 1e-6  # redundancy at which an error of a sight would show nowhere
KM = 1000.0  # m


@dataclass(frozen=True, slots=True, kw_only=True)
class Run:
    """Set-ups in line, each taking up the foresight of the one before, from a point to a point (None: it does not end).

    ``misclosure`` (m) is the sum of backsights less that of foresights less the known rise, NaN where nothing closes
    the run, and ``u`` (m) its standard uncertainty by those of its sights; ``allowed`` (m) is c sqrt(K) or c sqrt(n),
    NaN where the book states neither; ``length`` (m) is NaN where a sight has none. ``used`` is false where the book
    sets sights of the run aside; ``parts`` are those of the net that the others are of.
    """

    stage: str
    start: str
    end: str | None
    set_ups: int
    length: float
    misclosure: float
    u: float
    allowed: float
    used: bool
    parts: frozenset[int]

    @property
    def is_beyond(self) -> bool:
        """Whether it closes worse than allowed."""
        return bool(abs(self.misclosure) > self.allowed)


@dataclass(frozen=True, slots=True, kw_only=True)
class Levelled:
    """An adjusted level book, SI.

    ``sights`` has every row of the book with its ``u``, ``residual`` (measured less adjusted) and ``redundancy``, NaN
    where it is set aside; ``heights`` a row a point on a member and stage with ``height``, ``u``, whether another
    sight checks it (``covered``), and the ``row`` of its first sight. ``covariance`` (m2) is that of ``heights``. Both
    have the ``part`` of the net they are of, NaN where a sight is set aside; ``misfits`` are what each part leaves.
    """

    sights: pd.DataFrame
    heights: pd.DataFrame
    covariance: Array
    runs: tuple[Run, ...]
    misfits: tuple[Misfit, ...]

    @property
    def misfit(self) -> Misfit:
        """What all sights leave."""
        return sum(self.misfits, Misfit())

    def misfit_behind(self, heights: pd.DataFrame) -> Misfit:
        """What the sights leave in the parts of the net that hold some of the heights."""
        return sum((self.misfits[part] for part in heights["part"].unique()), Misfit())


def levelled(book: Book) -> Levelled | None:
    """Adjust the level book; None where the book has none, or sets all of it aside."""
    sights = book.tables["levels"]
    used = sights[sights["use"]] if len(sights) else sights
    if used.empty:
        return None
    quality = levelling_rows(sights["stage"], book.tables["levelling"])
    per_km = quality["u per km"].fillna(0.0).astype(float) ** 2 * 2 * sights["distance"].fillna(0.0) / KM
    sights = sights.assign(u=np.sqrt(quality["u"].fillna(0.0).astype(float) ** 2 + per_km))
    point, names = _points(book, sights[sights["use"]])
    net, known = _net(book, sights[sights["use"]], point, names)
    found = adjusted(net)
    told = {"residual": found.residual, "redundancy": found.redundancy, "part": found.set_up_part[net.set_up]}
    for name, values in told.items():
        sights.loc[sights["use"], name] = values
    heights, covariance = _heights(sights[sights["use"]], point, found)
    return Levelled(
        sights=sights,
        heights=heights,
        covariance=covariance,
        runs=tuple(_runs(sights, quality, known)),
        misfits=found.misfits,
    )


def with_heights(
    ledger: Ledger, found: Levelled | None, book: Book, owners: dict[str, int], stages: pd.DataFrame
) -> Ledger:
    """The ledger with the heights of a level book as readings of level, and their covariance."""
    if found is None:
        return ledger
    heights, given = _heights_as_readings(found, book, stages), ledger.readings
    columns = {name: np.concatenate([getattr(given, name), getattr(heights, name)]) for name in COLUMNS}
    both = Observations(**columns, together=len(given) + heights.together, covariance=heights.covariance)
    owner = found.heights["member"].map(owners).to_numpy(dtype=np.intp)
    rows = found.heights["row"].to_numpy(dtype=np.int64)
    return sorted_by_member(both, np.concatenate([ledger.owner, owner]), np.concatenate([ledger.row, rows]))


def _heights_as_readings(found: Levelled, book: Book, stages: pd.DataFrame) -> Observations:
    gauges = book.tables["gauges"][["member", "gauge", "at", "positive sense", "scale u"]]
    rows = found.heights.rename(columns={"point": "gauge"}).merge(gauges, on=["member", "gauge"], how="left")
    rows = rows.merge(stages[["member", "stage", "number", "role"]], on=["member", "stage"], how="left")
    sense = rows["positive sense"].map(SENSE).to_numpy(dtype=float)
    count = len(rows)
    purpose, why = purposes(rows["role"].to_numpy(dtype=object), np.arange(count), np.ones(count, dtype=bool))
    parts = ("scatter", "change", "change_u", "jump", "step")
    untold = ("time", "temperature", *parts, "per_kelvin", "per_kelvin_u")
    return Observations(
        **dict.fromkeys(untold, np.full(count, np.nan)),
        count=np.ones(count),
        stage=rows["number"].to_numpy(dtype=np.intp),
        gauge=rows["gauge"].to_numpy(dtype=object),
        at=rows["at"].to_numpy(dtype=float),
        quantity=np.full(count, "level", dtype=object),
        value=rows["height"].to_numpy() * sense,
        sign=sense,
        usual=np.ones(count),
        lever=np.ones(count),
        u=rows["u"].to_numpy(),
        scale_u=rows["scale u"].fillna(0.0).to_numpy(dtype=float),
        zero=np.zeros(count, dtype=np.intp),
        u_from=np.full(count, "given", dtype=object),
        used_for=purpose,
        why=why,
        together=np.arange(count),
        covariance=found.covariance * np.outer(sense, sense),
    )


def _points(book: Book, used: pd.DataFrame) -> tuple["pd.Series[int]", dict[str, int]]:
    """The point of each sight in use, counted from 0, and those that are benchmarks by their names."""
    names = benchmark_names(book.tables["levels"], book.tables["benchmarks"])
    fixed = used["member"].isna() & used["point"].isin(names)
    keyed = used.assign(stage=used["stage"].mask(fixed, ""), member=used["member"].fillna(""))
    point = keyed.groupby(["stage", "member", "point"], sort=False).ngroup()
    return point, dict(zip(used["point"][fixed], point[fixed], strict=True))


def _net(
    book: Book, used: pd.DataFrame, point: "pd.Series[int]", names: dict[str, int]
) -> tuple[Net, dict[str, float]]:
    """The net of the sights in use, and the heights given by name."""
    table = book.tables["benchmarks"].dropna(subset=["benchmark", "height"])
    table = table[table["benchmark"].isin(list(names))]
    first = next(iter(benchmark_names(book.tables["levels"], book.tables["benchmarks"])))
    known = dict(zip(table["benchmark"], table["height"].astype(float), strict=True)) or {first: 0.0}
    spread = dict(zip(table["benchmark"], table["u"].fillna(0.0).astype(float), strict=True))
    net = Net(
        set_up=np.asarray(used.groupby(["stage", "set-up"], sort=False).ngroup(), dtype=np.intp),
        point=np.asarray(point, dtype=np.intp),
        staff=used["staff"].to_numpy(dtype=float),
        u=used["u"].to_numpy(dtype=float),
        known=np.array([names[name] for name in known], dtype=np.intp),
        height=np.array([*known.values()]),
        height_u=np.array([spread.get(name, 0.0) for name in known]),
    )
    return net, known


def _heights(used: pd.DataFrame, point: "pd.Series[int]", found: Adjusted) -> tuple[pd.DataFrame, Array]:
    """Heights of the points on members, a row a member, stage and point, with their covariance."""
    own = used.assign(place=point)[used["member"].notna()]
    rows = own.groupby("place", sort=False).agg(
        member=("member", "first"),
        stage=("stage", "first"),
        point=("point", "first"),
        covered=("redundancy", lambda shares: bool(shares.max() > UNCHECKED)),
        row=("row", "first"),
    )
    place = rows.index.to_numpy(dtype=np.intp)
    covariance = found.covariance[np.ix_(place, place)]
    rows = rows.assign(height=found.height[place], u=np.sqrt(np.diag(covariance)), part=found.point_part[place])
    return rows.reset_index(drop=True), covariance


def _runs(sights: pd.DataFrame, quality: pd.DataFrame, known: dict[str, float]) -> Iterator[Run]:
    """The runs of every stage, in the order of the book."""
    for stage, rows in sights.groupby("stage", sort=False):
        line: list[pd.DataFrame] = []
        for _, set_up in rows.groupby("set-up", sort=False):
            one = set_up[set_up["use"]] if set_up["use"].any() else set_up
            if line and _at(line[-1], "foresight") != _at(one, "backsight"):
                yield _run(str(stage), line, quality, known)
                line = []
            line.append(one)
            if _closes(line, known):
                yield _run(str(stage), line, quality, known)
                line = []
        if line:
            yield _run(str(stage), line, quality, known)


def _at(set_up: pd.DataFrame, word: str) -> tuple[str | None, str] | None:
    """Member and point of the sight of a kind, None where a set-up has none."""
    found = set_up[set_up["sight"] == word]
    if found.empty:
        return None
    member, point = found[["member", "point"]].iloc[0]
    return (member if isinstance(member, str) else None), point


def _closes(line: list[pd.DataFrame], known: dict[str, float]) -> bool:
    start, end = _at(line[0], "backsight"), _at(line[-1], "foresight")
    if start is None or end is None:
        return False
    return start == end or (start[0] is None and end[0] is None and start[1] in known and end[1] in known)


def _run(stage: str, line: list[pd.DataFrame], quality: pd.DataFrame, known: dict[str, float]) -> Run:
    start, end = _at(line[0], "backsight"), _at(line[-1], "foresight")
    rows = pd.concat(line)
    through = rows[rows["sight"] != "intermediate"]
    back, fore = (through["staff"][through["sight"] == word].sum() for word in ("backsight", "foresight"))
    length = float(through["distance"].sum(skipna=False))
    misclosure = np.nan
    if start is not None and end is not None and _closes(line, known):
        rise = 0.0 if start == end else known[end[1]] - known[start[1]]
        misclosure = float(back - fore - rise)
    c_km, c_each = quality.loc[rows.index[0], ["allowed per km", "allowed per set-up"]].astype(float)
    limits = np.array([c_km * np.sqrt(length / KM), c_each * np.sqrt(len(line))])
    return Run(
        stage=stage,
        start=start[1] if start else str(rows["point"].iloc[0]),
        end=end[1] if end else None,
        set_ups=len(line),
        length=length,
        misclosure=misclosure,
        u=float(np.sqrt((through["u"] ** 2).sum())),
        allowed=float(np.nanmin(limits)) if np.isfinite(limits).any() else np.nan,
        used=bool(rows["use"].all()),
        parts=frozenset(rows["part"].dropna().astype(int)),
    )
