"""The recorded members of a book, as beam theory takes them."""

from dataclasses import replace

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array, Members, pad
from fieldfit.fieldbook import Book

__all__ = ["Owners", "laid_out", "owner_of", "recorded_members", "supports_of"]

Owners = dict[str, int]


def recorded_members(book: Book, supports: pd.DataFrame) -> Members:
    """All members of the book as one stack, in the book's order (SI). A restraint spring becomes a fixity factor."""
    table, zones, hinges = book.tables["members"], book.tables["zones"], book.tables["hinges"]
    owners = {name: number for number, name in enumerate(table["member"])}
    held = supports["rotation"].map({"free": 0.0, "fixed": 1.0, "spring": 0.0}).to_numpy(dtype=float)
    flexibility = np.where(supports["vertical"] == "none", np.inf, 0.0)
    flexibility = np.where(supports["vertical"] == "spring", 1.0 / supports["bearing stiffness"], flexibility)
    zone_EI = zones["EI"].fillna(zones["member"].map(dict(zip(table["member"], table["EI"], strict=True))))
    members = Members(
        name=tuple(table["member"]),
        length=table["length"].to_numpy(dtype=float),
        EI=table["EI"].to_numpy(dtype=float),
        shear_flexibility=_flexibility(table["GA"]),
        **laid_out(supports, owners, support_at=supports["at"], support_flexibility=flexibility, support_fixity=held),
        **laid_out(hinges, owners, hinge_at=hinges["at"]),
        **laid_out(
            zones,
            owners,
            zone_from=zones["from"],
            zone_to=zones["to"],
            zone_EI=zone_EI,
            zone_EI_end=zones["EI end"].fillna(zone_EI),
            zone_shear_flexibility=_flexibility(zones["GA"]),
        ),
    )
    if supports["rotational stiffness"].isna().all():
        return members
    spring = laid_out(supports, owners, spring=supports["rotational stiffness"])["spring"]
    fixity = spring / (spring + members.fixity_stiffness)
    return replace(members, support_fixity=np.where(np.isnan(spring), members.support_fixity, fixity))


def supports_of(book: Book) -> pd.DataFrame:
    """The supports table; a member without any is simple at both ends, A on the left and B on the right."""
    given, members = book.tables["supports"], book.tables["members"]
    bare = members[~members["member"].isin(given["member"])]
    if bare.empty:
        return given.sort_values("at", kind="stable", ignore_index=True)
    ends = pd.DataFrame(
        {
            "member": [*bare["member"], *bare["member"]],
            "support": np.repeat(np.array(["A", "B"], dtype=object), len(bare)),
            "at": [*np.zeros(len(bare)), *bare["length"]],
            "vertical": "rigid",
            "rotation": "free",
        }
    )
    every = pd.concat([given, ends] if len(given) else [ends], ignore_index=True).reindex(columns=given.columns)
    return every.sort_values("at", kind="stable", ignore_index=True)


def laid_out(rows: pd.DataFrame, owners: Owners, **columns: pd.Series | Array) -> dict[str, Array]:
    """Lay columns of one value a row out as (M, widest), padded with NaN, in the order of the rows."""
    owner = owner_of(rows, owners)
    return {name: pad(owner, len(owners), np.asarray(values, dtype=float)) for name, values in columns.items()}


def owner_of(rows: pd.DataFrame, owners: Owners) -> NDArray[np.intp]:
    """Number of the member that owns each row, (R,)."""
    if rows.empty:
        return np.zeros(0, dtype=np.intp)
    codes, names = pd.factorize(rows["member"])
    return np.array([owners[name] for name in names], dtype=np.intp)[codes]


def _flexibility(GA: pd.Series) -> Array:
    """1/GA, 0 where no shear rigidity is recorded: bending alone."""
    return (1.0 / GA.astype(float)).fillna(0.0).to_numpy(dtype=float)
