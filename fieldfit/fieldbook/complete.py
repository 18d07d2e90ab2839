"""What a table leaves unsaid, filled in by declared rule: * rows, EI from E and I, names of supports, defaults.

Every function takes a typed table (with the members where it needs them) and fills its frame in place.
"""

from collections.abc import Mapping

import numpy as np
import pandas as pd

from fieldfit.fieldbook.declare import SENSES
from fieldfit.fieldbook.sheet import letters
from fieldfit.fieldbook.typed import Typed
from fieldfit.fieldbook.units import display

__all__ = ["complete", "expand_star"]

STAR = "*"
_AGREE = 0.005  # EI and E times I may differ by rounding


def complete(tables: Mapping[str, Typed]) -> None:
    """Fill every table; what a member does not have of its own it takes from the * rows."""
    _stiffness(tables["members"])
    for name, fill in (("supports", _support_names), ("stages", _stage_defaults), ("gauges", _senses)):
        if len(tables[name].frame):
            fill(tables[name])
    members = _names(tables["members"])
    for name, typed in tables.items():
        if name == "members" or "member" not in typed.block.table.names:
            continue
        if name in {"readings", "resets", "levels"}:
            _refuse_star(typed)
        else:
            expand_star(typed, members)
    _refuse_star(tables["members"])


def _names(members: Typed) -> list[str]:
    return [name for name in pd.unique(members.frame["member"]) if name not in {None, STAR}]


def _refuse_star(typed: Typed) -> None:
    for row in typed.frame["row"][typed.frame["member"] == STAR]:
        typed.refuse("star not allowed", int(row), "member", "the name of one member")


def expand_star(typed: Typed, members: list[str]) -> None:
    """Give the rows of * to every member without rows of its own, in the order of the members."""
    frame = typed.frame
    if frame.empty or not members:
        return
    names = frame["member"].to_numpy(dtype=object)
    star, own = np.flatnonzero(names == STAR), np.flatnonzero(names != STAR)
    if not len(star):
        return
    others = [name for name in members if name not in {*names[own]}]
    if not others:
        typed.notes.append(f"{typed.block.table.name}: every member has rows of its own, so the * rows say nothing")
    copied = np.repeat(np.array(others, dtype=object), len(star))
    typed.frame = frame.take(np.concatenate([own, np.tile(star, len(others))])).reset_index(drop=True)
    typed.frame["member"] = pd.Series(np.concatenate([names[own], copied]), dtype=object)


def _stiffness(members: Typed) -> None:
    """EI from E and I where it is not given; both given must agree."""
    frame = members.frame
    product = frame["E"] * frame["I"]
    apart = (frame["EI"] - product).abs() > _AGREE * product
    for row, value in zip(frame["row"][apart], product[apart], strict=True):
        shown, unit = display(members.units, "EI", value)
        expected = f"EI that agrees with E times I within 0.5 % ({shown:.6g} {unit})"
        members.refuse("stiffness at odds", int(row), "EI", expected)
    frame["EI"] = frame["EI"].fillna(product)
    for row in frame["row"][frame["EI"].isna()]:
        if not any((int(row), name) in members.bad for name in ("EI", "E", "I")):
            members.refuse("no stiffness", int(row), "EI", "EI, or both E and I")


def _support_names(supports: Typed) -> None:
    """A, B, ... by the order of the positions on each member, where no name is given."""
    frame = supports.frame
    unnamed = frame["support"].isna()
    place = frame.sort_values("at", kind="stable").groupby("member", dropna=False).cumcount()
    frame.loc[unnamed, "support"] = [letters(int(rank)) for rank in place.reindex(frame.index)[unnamed]]


def _stage_defaults(stages: Typed) -> None:
    """A load case is present whole (factor 1) and unmoved (offset 0); one row's role holds for its stage."""
    frame = stages.frame
    loaded = frame["load case"].notna()
    for name, default in (("factor", 1.0), ("offset", 0.0)):
        for row in frame["row"][frame[name].notna() & ~loaded]:
            stages.refuse("nothing to scale", int(row), "load case", f"a load case, as {name} is given")
        frame[name] = frame[name].where(frame[name].notna() | ~loaded, default)
    if frame["role"].isna().any() and frame["role"].notna().any():
        frame["role"] = frame["role"].fillna(frame.groupby(["member", "stage"])["role"].transform("first"))
    frame["role"] = frame["role"].fillna("load").mask(stages.at_fault("role"), None)


def _senses(gauges: Typed) -> None:
    """The usual positive sense of what a gauge measures, where none is given."""
    frame = gauges.frame
    usual = frame["measures"].map({word: pair[0] for word, pair in SENSES.items()})
    frame["positive sense"] = frame["positive sense"].fillna(usual).astype(object)
