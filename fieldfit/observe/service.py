"""Service: the loads that a member carries in its life, as the book states them beside those of the test."""

from dataclasses import dataclass

import numpy as np

from fieldfit.beam import Array, Loads, Members
from fieldfit.fieldbook import Book
from fieldfit.observe.loading import KEY, placed_loads

__all__ = ["DEAD", "SELF_WEIGHT", "Service", "service_loads"]

SELF_WEIGHT = "self-weight"
DEAD = (SELF_WEIGHT, "superimposed dead")  # natures of what stands on the member all the time


@dataclass(frozen=True, slots=True, kw_only=True)
class Service:
    """Load cases of one member that stand for a load of service, where they stand in the book, N and m.

    ``names`` and ``natures`` (C,) of the cases of ``loads``; ``carried`` says which of them the stages of the test
    place themselves, so that they are counted there and not as present throughout; ``share`` is the member's of all.
    """

    names: tuple[str, ...]
    natures: tuple[str, ...]
    carried: tuple[bool, ...]
    share: float
    loads: Loads

    def factors(self, *natures: str, standing: bool = False) -> Array:
        """The member's share of every case of these natures, (C,); ``standing``: of those no stage carries."""
        out = np.zeros(self.loads.cases)
        for number, (nature, carried) in enumerate(zip(self.natures, self.carried, strict=True)):
            out[number] = self.share * (nature in natures and not (standing and carried))
        return out


def service_loads(book: Book, members: Members) -> dict[str, Service]:
    """The service loads of every member that states some."""
    table = book.tables["loads"]
    if table["nature"].isna().all():
        return {}
    known = table[table["nature"].notna()].drop_duplicates(["member", "load case"])
    placed = known[["member", "load case", "nature"]].assign(offset=0.0)
    placed = placed.assign(case=placed.groupby("member").cumcount()).reset_index(drop=True)
    owners = {name: number for number, name in enumerate(members.name)}
    none = book.tables["imposed"][:0][["member", "stage"]].assign(case=np.empty(0, dtype=int))
    loads = placed_loads(book, placed[[*KEY, "case"]], none, owners, members)
    share = book.tables["members"].set_index("member")["load share"].fillna(1.0)
    stages = book.tables["stages"]
    on_stages = set(zip(stages["member"], stages["load case"], strict=True))
    return {
        str(name): Service(
            names=tuple(rows["load case"]),
            natures=tuple(rows["nature"]),
            carried=tuple((name, case) in on_stages for case in rows["load case"]),
            share=float(share.loc[name]),
            loads=loads.take(owners[str(name)], int(np.isfinite(members.support_at[owners[str(name)]]).sum())),
        )
        for name, rows in placed.groupby("member", sort=False)
    }
