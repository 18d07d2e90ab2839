"""Cycles: which readings of a load test tell of elastic behaviour, and which only serve its rules.

A second cycle starts from what the first one left, and a load that has been kept on makes the member creep: neither
belongs in a fit of the elastic member.
"""

from dataclasses import replace

import numpy as np
import pandas as pd

from fieldfit.beam import Array, Flags, Members
from fieldfit.observe.loading import Loading
from fieldfit.observe.readings import Ledger
from fieldfit.observe.structure import owner_of

__all__ = ["after_the_first"]

SAME = 1e-9  # factors nearer than this are one load
LATER = "a later cycle: it starts from what the first one left, and serves the rules"
CREPT = "a load kept on: an earlier stage reached it, and this one tells of creep"


def after_the_first(ledger: Ledger, loading: Loading, members: Members) -> Ledger:
    """Keep for the rules what was read in a later cycle, or while a load already read was kept on."""
    stages = loading.stages
    kept = stages["role"].eq("hold").to_numpy()
    later = _later(stages)
    if not (kept.any() or later.any()):
        return ledger
    owner = owner_of(stages, {name: number for number, name in enumerate(members.name)})
    number = stages["number"].to_numpy(dtype=np.intp)
    carried = loading.factors[owner, number]
    crept = kept & ~later
    crept[crept] = [_reached_before(stages, carried, int(place)) for place in np.flatnonzero(crept)]
    told = np.full(loading.factors.shape[:2], "", dtype=object)
    told[owner, number] = np.where(later, LATER, np.where(crept, CREPT, ""))
    seen = ledger.readings
    why = told[ledger.owner, seen.stage]
    moved = (seen.used_for == "fit") & (why != "")
    return replace(
        ledger,
        readings=replace(seen, used_for=np.where(moved, "rule", seen.used_for), why=np.where(moved, why, seen.why)),
    )


def _later(stages: pd.DataFrame) -> Flags:
    """Stages of another cycle than the first of their member, (rows,)."""
    if stages["cycle"].isna().all():
        return np.zeros(len(stages), dtype=bool)
    cycle = stages["cycle"].fillna("").astype(str)
    first = cycle.groupby(stages["member"]).transform("first")
    return (cycle != first).to_numpy(dtype=bool)


def _reached_before(stages: pd.DataFrame, carried: Array, place: int) -> bool:
    """Whether an earlier load stage of the same member carries (rows, C) the same as the stage in one row."""
    own = stages.iloc[place]
    before = stages["member"].eq(own["member"]) & stages["number"].lt(own["number"]) & stages["role"].eq("load")
    return bool(np.isclose(carried[before.to_numpy()], carried[place], rtol=SAME, atol=0.0).all(axis=1).any())
