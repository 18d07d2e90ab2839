"""Checks within one record: what must stand together, what must not, and what a number may be."""

from collections.abc import Callable, Mapping, Sequence

import numpy as np
import numpy.typing as npt
import pandas as pd

from fieldfit.fieldbook.declare import SENSES
from fieldfit.fieldbook.pairs import alike, numbered
from fieldfit.fieldbook.published import DEFLECTION_LIMITS, DYNAMIC, FACTORED, RULE_NUMBERS, SHARES
from fieldfit.fieldbook.sheet import nearest
from fieldfit.fieldbook.typed import Typed

__all__ = ["Mask", "check_records", "refuse"]

Mask = npt.NDArray[np.bool_]

_NO_WHERE = ("datum shift", "datum tilt", "temperature curvature", "creep factor")
_NEEDS_WHERE = ("rotational restraint", "bearing stiffness", "settlement", "load", "temperature coefficient")
_NEEDS_STAGE = ("settlement", "datum shift", "datum tilt", "temperature curvature")
_TELLING = ("value", "at", "member", "stage", "gauge", "load case", "offset")  # in which records mostly differ
_SHARES = ("rotational restraint", "fixity")  # between 0 and 1
_POSITIVE = ("EI", "load", "EI ratio", "span/n", "creep factor", *RULE_NUMBERS, *DEFLECTION_LIMITS)
_WHAT = {
    "rotational restraint": "a support",
    "bearing stiffness": "a support",
    "settlement": "a support",
    "load": "a load case",
    "temperature coefficient": "a gauge",
}


def check_records(tables: Mapping[str, Typed]) -> None:
    """Note every fault that a record shows by itself."""
    checks: Mapping[str, Callable[[Typed], None]] = {
        "supports": _supports,
        "zones": _zones,
        "loads": _loads,
        "stages": _stages,
        "imposed": _imposed,
        "gauges": _gauges,
        "readings": _readings,
        "unknowns": _unknowns,
        "limits": _limits,
    }
    for name, check in checks.items():
        if len(tables[name].frame):
            check(tables[name])
    for typed in tables.values():
        _names_twice(typed)
    for name in ("job", "loads", "stages", "imposed", "readings", "resets"):
        if len(tables[name].frame):
            _rows_twice(tables[name])


def refuse(typed: Typed, where: Mask, kind: str, name: str, expected: str, hint: str | None = None) -> None:
    """Note the same fault of a column in every row that `where` marks."""
    if not where.any():
        return
    for row in typed.frame["row"].to_numpy()[where]:
        typed.refuse(kind, int(row), name, expected, hint)


def _equal(typed: Typed, name: str, words: Sequence[str]) -> Mask:
    values = typed.frame[name].to_numpy(dtype=object)
    return values == words[0] if len(words) == 1 else np.isin(values, words)


def _supports(typed: Typed) -> None:
    for name, word in (("bearing stiffness", "vertical"), ("rotational stiffness", "rotation")):
        spring, known = _equal(typed, word, ["spring"]), typed.frame[word].notna().to_numpy(dtype=bool)
        stated = typed.given(name)
        refuse(typed, spring & ~stated, "stiffness missing", name, f"a {name}, as {word} is a spring")
        hint = f"write spring in the column {word}"
        refuse(
            typed, known & ~spring & stated, "stiffness not wanted", name, f"a blank cell: {word} is no spring", hint
        )
    idle = _equal(typed, "vertical", ["none"]) & _equal(typed, "rotation", ["free"])
    refuse(typed, idle, "support holds nothing", "vertical", "a support that holds the member up or restrains rotation")


def _zones(typed: Typed) -> None:
    refuse(typed, typed.given("EI end") & ~typed.given("EI"), "taper without start", "EI", "EI, as EI end is given")


def _loads(typed: Typed) -> None:
    force, spread, moment = (typed.given(name) for name in ("force", "intensity", "moment"))
    count = force.astype(int) + spread + moment
    to, taper = typed.given("to"), typed.given("intensity end")
    refuse(typed, (count == 0) & ~taper, "no load", "force", "a force, an intensity or a moment")
    several = "one of force, intensity and moment a row"
    refuse(typed, count > 1, "several loads", "moment", several, "rows of one load case act together")
    refuse(
        typed, taper & ~spread, "taper without start", "intensity", "intensity, as intensity end is given (it may be 0)"
    )
    refuse(typed, spread & ~to, "edge missing", "to", "where the spread load ends")
    refuse(typed, moment & to, "edge not wanted", "to", "a blank cell: a moment acts at a point")
    _first_word_holds(typed, "nature", ["member", "load case"], "natures at odds", "this load case")


def _first_word_holds(typed: Typed, name: str, key: list[str], kind: str, what: str) -> None:
    """Rows of one name give it the same word, or leave it blank."""
    if typed.frame[name].nunique() < 2:
        return
    first = typed.frame.groupby(key)[name].transform("first")
    other = (typed.frame[name].notna() & first.notna() & (typed.frame[name] != first)).to_numpy(dtype=bool)
    refuse(typed, other, kind, name, f"the {name} that {what} has in its first row")


def _stages(typed: Typed) -> None:
    loaded = typed.given("load case")
    empty = _equal(typed, "role", ["load"]) & ~loaded & ~typed.given("factor") & ~typed.given("offset")
    hint = "a stage without load has another role, such as zero"
    refuse(typed, empty, "stage without load", "load case", "a load case", hint)
    _first_word_holds(typed, "role", ["member", "stage"], "roles at odds", "this stage")
    _first_word_holds(typed, "cycle", ["member", "stage"], "cycles at odds", "this stage")
    _times(typed)


def _times(typed: Typed) -> None:
    """A stage ends after it begins; times of day and of two zones are not compared."""
    if not typed.given("end").any():
        return
    start, end = (
        pd.to_datetime(typed.frame[name], format="ISO8601", errors="coerce", utc=True) for name in ("start", "end")
    )
    refuse(typed, (end < start).to_numpy(dtype=bool), "ends before start", "end", "a time after start")


def _imposed(typed: Typed) -> None:
    sinks, support = typed.given("settlement"), typed.given("support")
    warm = typed.given("top minus bottom")
    refuse(typed, sinks & ~support, "support missing", "support", "the support that settled")
    refuse(typed, support & ~sinks, "settlement missing", "settlement", "a settlement, as a support is named")
    refuse(typed, warm & ~typed.given("expansion"), "expansion missing", "expansion", "a coefficient of expansion")
    expected = "a temperature difference, as its u is given"
    refuse(typed, typed.given("top minus bottom u") & ~warm, "difference missing", "top minus bottom", expected)
    bent = typed.given("curvature")
    expected = "a curvature or a temperature difference, not both (write a row for each where both act)"
    refuse(typed, bent & warm, "two curvatures", "top minus bottom", expected)
    nothing = ~(sinks | support | warm | bent)
    refuse(typed, nothing, "nothing imposed", "settlement", "a settlement, a curvature or a temperature difference")


def _gauges(typed: Typed) -> None:
    measures = typed.frame["measures"]
    for word, senses in SENSES.items():
        other = (
            _equal(typed, "measures", [word]) & typed.given("positive sense") & ~_equal(typed, "positive sense", senses)
        )
        refuse(typed, other, "sense of another kind", "positive sense", f"{' or '.join(senses)}, as it measures {word}")
    strain, below = _equal(typed, "measures", ["strain"]), typed.given("below neutral axis")
    expected = "how far the strain gauge is below the neutral axis"
    refuse(typed, strain & ~below, "distance missing", "below neutral axis", expected)
    other = measures.notna().to_numpy(dtype=bool) & ~strain & below
    refuse(typed, other, "distance not wanted", "below neutral axis", "a blank cell: it is no strain gauge")
    _one_uncertainty(typed)
    known, sure = typed.given("temperature coefficient"), typed.given("temperature coefficient u")
    expected = "how sure the coefficient is"
    refuse(typed, known & ~sure, "coefficient alone", "temperature coefficient u", expected)
    expected = "a coefficient, as its u is given"
    refuse(typed, sure & ~known, "coefficient alone", "temperature coefficient", expected)


def _one_uncertainty(typed: Typed) -> None:
    both = typed.given("u") & typed.given("plus or minus")
    refuse(typed, both, "two uncertainties", "plus or minus", "u or plus or minus, not both")


def _readings(typed: Typed) -> None:
    nowhere = ~typed.given("gauge") & ~typed.given("at")
    refuse(typed, nowhere, "no station", "at", "a gauge, or at")
    _one_uncertainty(typed)


def _unknowns(typed: Typed) -> None:
    where, stage = typed.given("where"), typed.given("stage")
    for word in _NEEDS_WHERE:
        refuse(typed, _equal(typed, "unknown", [word]) & ~where, "where missing", "where", f"{_WHAT[word]}, for {word}")
    lacking = _equal(typed, "unknown", _NEEDS_STAGE) & ~stage
    refuse(typed, lacking, "stage missing", "stage", "a stage, for this unknown")
    known = typed.frame["unknown"].notna().to_numpy(dtype=bool)
    idle = stage & known & ~_equal(typed, "unknown", [*_NEEDS_STAGE, "creep factor"])
    refuse(typed, idle, "stage not wanted", "stage", "a blank cell: this unknown holds for every stage")
    refuse(
        typed, _equal(typed, "unknown", _NO_WHERE) & where, "where not wanted", "where", "a blank cell for this unknown"
    )
    expected, u = typed.given("expected"), typed.given("expected u")
    refuse(typed, expected & ~u, "expected alone", "expected u", "how sure the expected value is")
    refuse(typed, u & ~expected, "expected alone", "expected", "an expected value, as expected u is given")
    of_gauge = _equal(typed, "unknown", ["temperature coefficient"])
    for name in ("low", "high", "expected", "expected u"):
        hint = "what is known of it stands with the gauge, as its unit is the gauge's"
        refuse(typed, of_gauge & typed.given(name), "value not wanted", name, "a blank cell for this unknown", hint)
    _crossed(typed, "low", "high")
    for name in ("low", "high", "expected"):
        _ranges(typed, "unknown", name)
    _inside(typed)


def _inside(typed: Typed) -> None:
    """The expected value lies between the bounds."""
    frame = typed.frame
    outside = (frame["expected"] < frame["low"]) | (frame["expected"] > frame["high"])
    refuse(typed, outside.to_numpy(dtype=bool), "expected out of bounds", "expected", "a value from low to high")


def _limits(typed: Typed) -> None:
    none = ~typed.given("at least") & ~typed.given("at most") & ~_equal(typed, "limit", [*RULE_NUMBERS])
    none &= ~_equal(typed, "limit", DEFLECTION_LIMITS) & ~typed.at_fault("limit")
    refuse(typed, none, "no limit", "at most", "at least, at most, or both")
    _crossed(typed, "at least", "at most")
    for name in ("at least", "at most"):
        _ranges(typed, "limit", name)
    unsaid = _equal(typed, "where", [DYNAMIC]) & _equal(typed, "limit", FACTORED) & ~typed.given("at least")
    refuse(typed, unsaid, "number missing", "at least", "the factor for dynamic effects")
    refuse(
        typed,
        _equal(typed, "limit", ["span/n", *DEFLECTION_LIMITS]) & typed.given("at most"),
        "wrong side",
        "at most",
        "a blank cell: the span over the deflection goes in the column at least",
    )
    if _equal(typed, "limit", [*RULE_NUMBERS]).any():
        _rule_numbers(typed)


def _rule_numbers(typed: Typed) -> None:
    """A row of a published rule asks for it, or names one of its numbers and gives another in its place."""
    frame = typed.frame
    stated = {side: typed.given(side) for side in ("at least", "at most")}
    for place in np.flatnonzero(_equal(typed, "limit", [*RULE_NUMBERS])):
        row, rule, where = int(frame["row"].iloc[place]), frame["limit"].iloc[place], frame["where"].iloc[place]
        numbers = RULE_NUMBERS[rule]
        given = [side for side, there in stated.items() if there[place]]
        known = f"known: {', '.join(numbers)}"
        if where is None and given:
            expected = f"which number of {rule} this one takes the place of"
            typed.refuse("number not named", row, "where", expected, known)
        elif where is not None and where not in numbers:
            hint = nearest(where, list(numbers)) or known
            typed.refuse("unknown number", row, "where", f"a number of {rule}", hint)
        elif where is not None and numbers[where] not in given and not given:
            expected = f"the number that takes the place of the published {where}"
            typed.refuse("number missing", row, numbers[where], expected)
        elif where is not None and given != [numbers[where]]:
            (side,) = set(given) - {numbers[where]}
            typed.refuse("wrong side", row, side, f"a blank cell: write it in the column {numbers[where]}")
        elif where in SHARES and frame[numbers[where]].iloc[place] > SHARES[where]:
            expected = f"a share up to {SHARES[where]:g}"
            typed.refuse("out of range", row, numbers[where], expected, "write 0.25 for 25 %")


def _crossed(typed: Typed, low: str, high: str) -> None:
    crossed = (typed.frame[low] >= typed.frame[high]).to_numpy(dtype=bool)
    refuse(typed, crossed, "bounds crossed", high, f"more than {low}")


def _ranges(typed: Typed, by: str, name: str) -> None:
    """Numbers that can only be shares, or only be positive."""
    values = typed.frame[name].to_numpy(dtype=np.float64)
    beyond = (values < 0) | (values > 1)
    refuse(
        typed, _equal(typed, by, _SHARES) & beyond, "out of range", name, "a fixity factor from 0 (free) to 1 (fixed)"
    )
    refuse(typed, _equal(typed, by, _POSITIVE) & (values <= 0), "out of range", name, "a number above 0")
    soft = _equal(typed, by, ["bearing stiffness"]) & (values < 0)
    refuse(typed, soft, "out of range", name, "a stiffness of 0 or more")
    signed = _equal(typed, by, ["deflection"]) & (values < 0)
    refuse(typed, signed, "out of range", name, "the size of a deflection, 0 or more: down and up count alike")


def _names_twice(typed: Typed) -> None:
    """A record named like an earlier one."""
    key = list(typed.block.table.key)
    if not key or not typed.frame.duplicated(key).any():
        return
    named = typed.frame[typed.frame[key[:2]].notna().all(axis=1)]
    again = named.duplicated(key)
    first = named.groupby(key, dropna=False)["row"].transform("first")
    for row, earlier in zip(named["row"][again], first[again], strict=True):
        typed.refuse("name twice", int(row), key[-1], "a name given once", f"it is that of row {earlier}")


def _rows_twice(typed: Typed) -> None:
    """A record that repeats an earlier one in every column."""
    names = [name for name in typed.frame.columns if name not in {"row", "column"}]
    repeated = _repeated(typed.frame, names)
    if repeated.any():
        first = next((name for name in names if typed.frame[name].notna().any()), "")
        readings = typed.block.table.name == "readings"
        hint = "a repeated reading differs by its time" if readings else "delete one of them"
        refuse(typed, repeated, "row twice", first, "a row that differs from every earlier one", hint)


def _repeated(frame: pd.DataFrame, names: list[str]) -> Mask:
    """Rows equal to an earlier one in all those columns; only those alike in some telling ones are compared."""
    repeated, some = np.zeros(len(frame), dtype=bool), np.ones(len(frame), dtype=bool)
    named = [frame[name].array for name in ("member", "stage", "gauge") if name in names]
    if named:
        some = alike(numbered(*(each.codes if hasattr(each, "codes") else pd.factorize(each)[0] for each in named)))
    if some.any():
        first = [name for name in _TELLING if name in names] or names
        some[some] = pd.util.hash_pandas_object(frame.loc[some, first], index=False).duplicated(keep=False).to_numpy()
        repeated[some] = frame[some].duplicated(names).to_numpy()
    return repeated
