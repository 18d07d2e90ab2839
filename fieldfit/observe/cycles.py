"""Cycles: which readings of a load test tell of elastic behaviour, and which only serve its rules.

A second cycle starts from what the first one left, and a load that has been kept on makes the member creep: neither
belongs in a fit of the elastic member.
"""

from dataclasses import replace

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from fieldfit.beam import Array, Flags, Members
from fieldfit.observe.loading import Loading
from fieldfit.observe.readings import Ledger
from fieldfit.observe.structure import owner_of

__all__ = ["after_the_first", "kept_on"]

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
    crept = np.zeros(len(stages), dtype=bool)
    roles = stages["role"].to_numpy(dtype=object)
    for member in np.unique(owner[kept]):
        own = np.flatnonzero(owner == member)
        crept[own] = kept_on(roles[own], carried[own])
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
    cycle = stages["cycle"]
    return (cycle.notna() & (cycle != cycle.groupby(stages["member"]).transform("first"))).to_numpy(dtype=bool)


def kept_on(roles: NDArray[np.object_], carried: Array) -> Flags:
    """Which stages (T,) of one member hold a load that one before reached; ``carried`` (T, C) is that of each case."""
    reached = np.isclose(carried[:, None], carried[None], rtol=SAME, atol=0.0).all(axis=2)
    before = np.tri(len(roles), k=-1, dtype=bool) & (roles == "load")
    held: Flags = (roles == "hold") & (reached & before).any(axis=1)
    return held
