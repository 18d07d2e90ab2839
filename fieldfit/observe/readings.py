"""Readings as observations: the station, sign and uncertainty of each, and whether it can be used."""

import numpy as np
import pandas as pd

from fieldfit.beam import Array
from fieldfit.fieldbook import Book

__all__ = ["SENSE", "observed"]

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
ELASTIC = ("zero", "load", "hold")  # stages that enter the elastic fit; unloading and recovery serve the rules


def observed(book: Book, stages: pd.DataFrame) -> pd.DataFrame:
    """All readings of a book, one row each in its order: what the ledger shows (SI, in the gauge's own sense).

    Columns: member, stage, number (of the stage), gauge, at, quantity, value, sign (to the model's), usual (the
    sign that this kind of gauge has unless the book says otherwise), lever (m below the neutral axis; 1 for other
    gauges), u, u_from (given, resolution or none), scale_u, used_for, why, row.
    """
    gauges = book.tables["gauges"]
    readings = book.tables["readings"].merge(
        gauges.drop(columns=["row"]), on=["member", "gauge"], how="left", suffixes=("", " of gauge")
    )
    at = readings["at"].astype(float).fillna(readings["at of gauge"].astype(float))
    usual = readings["quantity"].map(USUAL_SENSE)
    u, origin = _uncertainty(readings)
    rows = pd.DataFrame(
        {
            "member": readings["member"],
            "stage": readings["stage"],
            "gauge": readings["gauge"].fillna(readings["quantity"] + " at " + at.map("{:g} m".format)),
            "at": at,
            "quantity": readings["quantity"],
            "value": readings["value"].to_numpy(dtype=float),
            "sign": readings["positive sense"].fillna(usual).map(SENSE).to_numpy(dtype=float),
            "usual": usual.map(SENSE).to_numpy(dtype=float),
            "lever": np.where(readings["quantity"] == "strain", readings["below neutral axis"].astype(float), 1.0),
            "u": u,
            "u_from": origin,
            "scale_u": readings["scale u"].astype(float).fillna(0.0).to_numpy(),
            "row": readings["row"],
        }
    )
    role = stages[["member", "stage", "number", "role"]]
    return _with_purpose(rows.merge(role, on=["member", "stage"], how="left"), readings["use"].to_numpy(dtype=bool))


def _uncertainty(readings: pd.DataFrame) -> tuple[Array, Array]:
    """Standard uncertainty of each reading, and where it comes from.

    u2 = u_given2 + step2/12, a half width counting as a/sqrt 3 (JCGM 100:2008, 4.3.7 and F.2.2.1); what stands
    beside the reading comes before what stands with its gauge.
    """
    half = _first_given(readings, "plus or minus") / np.sqrt(3.0)
    given = _first_given(readings, "u")
    given = np.where(np.isnan(given), half, given)
    step = _first_given(readings, "resolution")
    origin = np.where(~np.isnan(given), "given", np.where(~np.isnan(step), "resolution", "none"))
    known = np.hypot(np.nan_to_num(given), np.nan_to_num(step) / np.sqrt(12.0))
    return np.where(origin == "none", np.nan, known), origin


def _first_given(readings: pd.DataFrame, name: str) -> Array:
    own = readings[name].to_numpy(dtype=float)
    return np.where(np.isnan(own), readings[f"{name} of gauge"].to_numpy(dtype=float), own)


def _with_purpose(rows: pd.DataFrame, use: Array) -> pd.DataFrame:
    """Say of every reading what it is used for, and why not for the fit where it is not."""
    elastic = rows["role"].isin(ELASTIC).to_numpy()
    purpose = np.where(use, np.where(elastic, "fit", "rule"), "none")
    why = np.where(use, np.where(elastic, "", "stage " + rows["role"].astype(str)), "set aside in the book (use: no)")
    return rows.assign(used_for=purpose, why=why)
