"""Readings as observations: the station, sign and uncertainty of each, and whether it can be used."""

from dataclasses import dataclass, field, fields
from typing import Any

import numpy as np
import numpy.typing as npt
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array, Flags
from fieldfit.fieldbook import Book, numbered, places_of
from fieldfit.fieldbook.clock import comparable, moments
from fieldfit.observe.windows import OUTSIDE, placed, windows_of

__all__ = ["ELASTIC", "SENSE", "SET_ASIDE", "USUAL_SENSE", "Ledger", "Observations", "observed", "purposes"]

#: How a gauge's positive sense stands to the model's (deflection upward, anticlockwise, sagging, tension).
SENSE = {
    "down": -1.0,
    "up": 1.0,
    "anticlockwise": 1.0,
    "clockwise": -1.0,
    "sagging": 1.0,
    "hogging": -1.0,
    "tension": 1.0,
    "compression": -1.0,
}
USUAL_SENSE = {
    "deflection": "down",
    "level": "up",
    "rotation": "anticlockwise",
    "curvature": "sagging",
    "strain": "tension",
}
SET_ASIDE = "set aside in the book (use: no)"
ELASTIC = ("zero", "load", "hold")  # stages that enter the elastic fit; unloading and recovery serve the rules


@dataclass(frozen=True, slots=True, kw_only=True)
class Observations:
    """What was observed on one member, arrays of shape (n,), SI in each gauge's own sense; nothing is left out.

    Readings of one gauge in one stage are one observation, their mean; ``count`` is how many they are, so that its
    sum is the number of readings. ``stage`` numbers the stage, -1 where none is known; ``sign`` turns the model's sign
    into the gauge's, ``usual`` into that which its kind of gauge usually has; ``lever`` (m) of a strain gauge is its
    distance below the neutral axis, 1 elsewhere;
    ``u`` is NaN where the book gives no uncertainty, ``u_from`` says given, resolution or none; ``scale_u`` is
    that of the gauge's scale, a fraction; ``zero`` counts the resets of the gauge; ``used_for`` is fit, rule or none.
    ``time`` (s) is when, ``temperature`` in degC; ``scatter`` is the standard uncertainty of a mean by its scatter, a
    part of ``u``; ``change`` is how far the last third of the stage moved, with ``change_u``; ``jump`` is the largest
    step from one of its readings to the next, ``step`` the usual one; ``per_kelvin`` is what the gauge reads more when
    it is a kelvin warmer, with its u. All these are NaN where not known. Observations at ``together`` (k,) share their
    errors, with ``covariance`` (k, k); all others are independent.
    """

    stage: NDArray[np.intp]
    gauge: NDArray[np.object_]
    at: Array
    quantity: NDArray[np.object_]
    value: Array
    sign: Array
    usual: Array
    lever: Array
    u: Array
    scale_u: Array
    zero: NDArray[np.intp]
    u_from: NDArray[np.object_]
    used_for: NDArray[np.object_]
    why: NDArray[np.object_]
    time: Array
    temperature: Array
    count: Array
    scatter: Array
    change: Array
    change_u: Array
    jump: Array
    step: Array
    per_kelvin: Array
    per_kelvin_u: Array
    together: NDArray[np.intp] = field(default_factory=lambda: np.zeros(0, dtype=np.intp))
    covariance: Array = field(default_factory=lambda: np.zeros((0, 0)))

    def __len__(self) -> int:
        """Return the number of observations."""
        return len(self.value)

    @property
    def upright(self) -> Flags:
        """Which observations (n,) are of deflection or level."""
        return np.isin(self.quantity.astype(str), ("deflection", "level"))

    def take(self, rows: slice | NDArray[np.intp]) -> "Observations":
        """Return some of the observations."""
        columns = {name: getattr(self, name)[rows] for name in COLUMNS}
        if not self.together.size:
            return Observations(**columns)
        place = np.full(len(self), -1)
        place[rows] = np.arange(len(columns["value"]))
        kept = place[self.together] >= 0
        covariance = self.covariance[np.ix_(kept, kept)]
        return Observations(**columns, together=place[self.together][kept], covariance=covariance)


COLUMNS = tuple(field.name for field in fields(Observations) if field.name not in ("together", "covariance"))


@dataclass(frozen=True, slots=True, kw_only=True)
class Ledger:
    """The readings of all members, sorted by member: ``owner`` (n,) numbers the member, ``row`` is the book's."""

    readings: Observations
    owner: NDArray[np.intp]
    row: NDArray[np.int64]


def observed(book: Book, owners: dict[str, int], stages: pd.DataFrame) -> tuple[Ledger, NDArray[np.int64]]:
    """All readings of a book (SI, in the gauge's own sense), by member and then in the book's order.

    A reading that only says when it was taken goes to the stage whose window holds it. Beside them a number for
    each (n,), which the readings of one gauge in one stage share.
    """
    table = book.tables["readings"]
    place, time = _in_time(book, table, stages, _stage_rows(table, stages))
    stage, use = _after(stages["number"], -1).astype(np.intp)[place], table["use"].to_numpy(dtype=bool)
    purpose, why = purposes(_after(stages["role"], None), place, use)
    readings = _readings(book, table, stage, time, _zeros(table), purpose, why)
    owner = _of(table["member"].array, owners, 0)
    gauge, kind = (table[name].array.codes for name in ("gauge", "quantity"))
    stations = [pd.factorize(readings.at)[0]] if (gauge < 0).any() else []  # a gauge with a name has one place
    shared = numbered(owner, stage, readings.zero, gauge, kind, use, *stations)
    order = _by_member(owner)
    ledger = Ledger(readings=readings, owner=owner, row=table["row"].to_numpy())
    return (ledger, shared) if order is None else (_in_order(ledger, order), shared[order])


def gauges_of(book: Book, owners: dict[str, int]) -> Ledger:
    """The gauges of a book as readings still to be taken: of no stage (-1) and no value (NaN)."""
    gauges = book.tables["gauges"]
    count = len(gauges)
    blank = {name: np.full(count, np.nan) for name in ("value", "u", "plus or minus", "resolution", "temperature")}
    words = {name: pd.Categorical(gauges[of]) for name, of in (("gauge", "gauge"), ("quantity", "measures"))}
    table = pd.DataFrame({**words, **blank, "at": gauges["at"], "gauge row": np.arange(count)})
    nothing = np.zeros(count, dtype=np.intp)
    texts = [np.full(count, text, dtype=object) for text in ("fit", "")]
    readings = _readings(book, table, nothing - 1, blank["value"], nothing, *texts)
    return sorted_by_member(readings, np.asarray(gauges["member"].map(owners), dtype=np.intp), gauges["row"].to_numpy())


def sorted_by_member(readings: Observations, owner: NDArray[np.intp], row: NDArray[np.int64]) -> Ledger:
    """Sort readings by member, those of one in the order they had."""
    ledger, order = Ledger(readings=readings, owner=owner, row=row), _by_member(owner)
    return ledger if order is None else _in_order(ledger, order)


def _by_member(owner: NDArray[np.intp]) -> NDArray[np.intp] | None:
    """The order that sorts readings by member; None where they are so already."""
    return None if np.all(owner[:-1] <= owner[1:]) else np.argsort(owner, kind="stable")


def _in_order(ledger: Ledger, order: NDArray[np.intp]) -> Ledger:
    return Ledger(readings=ledger.readings.take(order), owner=ledger.owner[order], row=ledger.row[order])


def _readings(
    book: Book,
    table: pd.DataFrame,
    stage: NDArray[np.intp],
    time: Array,
    zero: NDArray[np.intp],
    purpose: NDArray[np.object_],
    why: NDArray[np.object_],
) -> Observations:
    """Rows of a table like that of the readings, each with what its gauge says of it."""
    gauges, gauge = book.tables["gauges"], table["gauge row"].to_numpy()
    quantity, at = table["quantity"].array, table["at"].to_numpy()
    usual = _of(quantity, {kind: SENSE[sense] for kind, sense in USUAL_SENSE.items()}, np.nan)
    sense = _at_gauge(gauges["positive sense"].map(SENSE), gauge)
    below = _at_gauge(gauges["below neutral axis"], gauge)
    u, origin = _uncertainty(table, gauges)
    unknown = np.full(len(table), np.nan)
    return Observations(
        stage=stage,
        gauge=_gauge_names(table, at),
        at=at,
        quantity=_texts(quantity),
        value=table["value"].to_numpy(),
        sign=np.where(np.isnan(sense), usual, sense),
        usual=usual,
        lever=np.where(_of(quantity, {"strain": True}, False), below, 1.0),
        u=u,
        scale_u=np.nan_to_num(_at_gauge(gauges["scale u"], gauge)),
        zero=zero,
        u_from=origin,
        used_for=purpose,
        why=why,
        time=time,
        temperature=table["temperature"].to_numpy(dtype=float),
        count=np.ones(len(table)),
        scatter=unknown,
        change=unknown,
        change_u=unknown,
        jump=unknown,
        step=unknown,
        per_kelvin=_at_gauge(gauges["temperature coefficient"], gauge),
        per_kelvin_u=_at_gauge(gauges["temperature coefficient u"], gauge),
    )


def _zeros(table: pd.DataFrame) -> NDArray[np.intp]:
    """How often each reading's gauge had been reset by then, down the table; a gauge without a name by its place."""
    reset = table["reset"].to_numpy(dtype=np.intp)
    if not reset.any():
        return reset
    place = np.where(table["gauge"].isna(), table["at"], np.nan)
    columns = [table["member"], table["gauge"], pd.Series(place, index=table.index), table["quantity"]]
    rows = pd.Series(reset, index=table.index).groupby(columns, dropna=False, observed=True)
    return rows.cumsum().to_numpy(dtype=np.intp)


def _in_time(
    book: Book, table: pd.DataFrame, stages: pd.DataFrame, stage: NDArray[np.intp]
) -> tuple[NDArray[np.intp], Array]:
    """The row of `stages` of each reading, by its time where it names none, -1 outside all windows; and its time (s).

    A reading without a time has that of the middle of its stage's window. Times that cannot be compared are none.
    """
    if not comparable(book.tables):
        return stage, np.full(len(table), np.nan)
    time = _moments(table["time"].array)
    windows = windows_of(book, stages)
    if not len(windows):
        return stage, time
    unsaid = stage < 0
    if unsaid.any():
        stage[unsaid] = placed(table["member"][unsaid], time[unsaid], windows)
    middle = np.full(len(stages) + 1, np.nan)
    middle[windows["place"]] = (windows["start"] + windows["end"]) / 2
    return stage, np.where(np.isnan(time), middle[stage], time)


def _moments(words: Any) -> Array:
    return np.append(moments(words.categories.to_numpy(dtype=object)), np.nan)[words.codes]


def _after(values: "pd.Series[Any]", other: object) -> NDArray[np.object_]:
    """A column with what stands for no row (-1) at its end."""
    return np.append(values.to_numpy(dtype=object), np.array([other], dtype=object))


def _of(words: Any, values: dict[str, Any], other: object) -> npt.NDArray[Any]:
    """What stands for each word of a categorical column, `other` where there is none."""
    return np.array([*(values.get(word, other) for word in words.categories), other])[words.codes]


def _texts(words: Any) -> NDArray[np.object_]:
    """A categorical column as texts, None where missing."""
    return np.append(words.categories.to_numpy(dtype=object), np.array([None], dtype=object))[words.codes]


def _at_gauge(values: "pd.Series[Any]", gauge: NDArray[np.intp]) -> Array:
    """A number of the gauges table for each reading, NaN where its gauge is not in that table."""
    return np.append(values.to_numpy(dtype=float), np.nan)[gauge]


def _stated(readings: "pd.Series[Any]", gauges: "pd.Series[Any]", gauge: NDArray[np.intp]) -> Array:
    """A number for each reading: its own, else that of its gauge."""
    own = readings.to_numpy(dtype=float)
    return own if gauges.isna().all() else np.where(np.isnan(own), _at_gauge(gauges, gauge), own)


def _gauge_names(table: pd.DataFrame, at: Array) -> NDArray[np.object_]:
    """The gauge of each reading; one without a name is named by what it reads and where."""
    names, quantity = _texts(table["gauge"].array), table["quantity"].array
    bare = np.flatnonzero(table["gauge"].array.codes < 0)
    codes, places = pd.factorize(at[bare])
    for code, kind in enumerate(quantity.categories):
        mine = quantity.codes[bare] == code
        if mine.any():
            labels = np.array([f"{kind} at {x:g} m" for x in places.tolist()], dtype=object)
            names[bare[mine]] = labels[codes[mine]]
    return names


def _stage_rows(table: pd.DataFrame, stages: pd.DataFrame) -> NDArray[np.intp]:
    """The row of `stages` that each reading names, -1 where it names none."""
    return places_of(table["member"], table["stage"], (stages["member"].tolist(), stages["stage"].tolist()))


def _uncertainty(table: pd.DataFrame, gauges: pd.DataFrame) -> tuple[Array, NDArray[np.object_]]:
    """Standard uncertainty of each reading, and where it comes from.

    u2 = u_given2 + step2/12, a half width counting as a/sqrt 3 (JCGM 100:2008, 4.3.7 and F.2.2.1); what stands
    beside the reading, be it u or a half width, comes before what stands with its gauge.
    """
    gauge = table["gauge row"].to_numpy()
    given = _stated(_given_u(table), _given_u(gauges), gauge)
    step = _stated(table["resolution"], gauges["resolution"], gauge)
    code = np.where(~np.isnan(given), 0, np.where(~np.isnan(step), 1, 2))
    known = np.sqrt(np.where(np.isnan(given), 0.0, given) ** 2 + np.where(np.isnan(step), 0.0, step) ** 2 / 12.0)
    return np.where(code == 2, np.nan, known), np.array(["given", "resolution", "none"], dtype=object)[code]


def _given_u(rows: pd.DataFrame) -> "pd.Series[Any]":
    """Standard uncertainty that each row gives by its own u or half width, NaN where it gives neither."""
    return rows["u"].astype(float).fillna(rows["plus or minus"].astype(float) / np.sqrt(3.0))


def purposes(
    roles: NDArray[np.object_], stage: NDArray[np.intp], use: NDArray[np.bool_]
) -> tuple[NDArray[np.object_], NDArray[np.object_]]:
    """What every reading (n,) is used for by the role of its stage, and why not for the fit.

    ``stage`` (n,) numbers the stages, whose roles are ``roles``; a role that is missing is that of no stage.
    """
    known = [name if isinstance(name, str) else None for name in roles]
    purpose = ["none" if name is None else "fit" if name in ELASTIC else "rule" for name in known]
    why = [OUTSIDE if name is None else "" if name in ELASTIC else f"stage {name}" for name in known]
    found = np.array(purpose, dtype=object)[stage], np.array(why, dtype=object)[stage]
    for texts, text in zip(found, ("none", SET_ASIDE), strict=True):
        texts[~use] = text
    return found
