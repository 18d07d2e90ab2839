"""The site sheet: what every gauge should read in every stage, with stop values; cautions first."""

import json
from collections.abc import Sequence
from datetime import datetime
from pathlib import Path

from fieldfit.fieldbook import Book
from fieldfit.fit import Expected, Outlook
from fieldfit.judge import CAUTIONS
from fieldfit.report.expected import expected_section, expected_table
from fieldfit.report.folder import replace_folder
from fieldfit.report.outlook import outlook_record, outlook_section, outlook_table
from fieldfit.report.provenance import VERSION, provenance
from fieldfit.report.results import FORMAT, safe_cells, without_nan
from fieldfit.report.templates import asset, template

__all__ = ["write_plan"]

SITE_CAUTIONS = (
    "Stop values are an aid. They stand beside the criteria of the licensed engineer in charge of the test (cracks, "
    "noise, movement of supports, load, time) and never replace them.",
    "A member can fail before any gauge reaches its stop value: shear, anchorage, connections and buckling give little "
    "warning in deflections. Nobody stands below; props and exclusion zones come first.",
    "What the book leaves out, a restraint, a soft bearing, a settlement, is in no band: read it as a reason to stop, "
    "not as a reason to go on.",
)
SIGNATURES = ("Test engineer", "Readings taken by", "Reviewed by (licensed engineer)")


def write_plan(book: Book, several: Sequence[Expected], outlooks: Sequence[Outlook], out: Path) -> Path:
    """Write the site sheet (plan.html), its tables (plan.csv, outlook.csv) and a record; return the sheet's path.

    Raises OutputError where ``out`` holds something else.
    """
    time = datetime.now().astimezone().strftime("%Y-%m-%d %H:%M %z")
    record = {"format": FORMAT, "fieldfit": VERSION, "book": {"name": book.name, "sha256": book.sha256}}
    table = safe_cells(expected_table(book, several)).to_csv(index=False, lineterminator="\n", float_format="%.7g")
    told = safe_cells(outlook_table(book, outlooks)).to_csv(index=False, lineterminator="\n", float_format="%.7g")
    record |= without_nan({"plan": "plan.csv", "outlook": [outlook_record(book, one) for one in outlooks]})
    contents = {
        "plan.html": plan_page(book, several, outlooks, time),
        "plan.csv": table,
        "outlook.csv": told,
        "results.json": json.dumps(record, indent=1, ensure_ascii=False, allow_nan=False) + "\n",
    }
    replace_folder(out, contents)
    return out / "plan.html"


def plan_page(book: Book, several: Sequence[Expected], outlooks: Sequence[Outlook], time: str) -> str:
    """The site sheet as one self-contained HTML text. Every text of the book is escaped."""
    style, sheet_style = asset("page.css"), asset("sheet.css")
    readings = sum(len(one.expected) for one in several)
    job = book.tables["job"]
    return template("plan.html").render(
        book=book,
        style=style,
        sheet_style=sheet_style,
        cautions=(*SITE_CAUTIONS, *CAUTIONS),
        headline=f"{readings} readings to come on {len(several)} {'member' if len(several) == 1 else 'members'}.",
        job=list(zip(job["item"].astype(str), job["value"].fillna("").astype(str), strict=True)),
        members=[
            {"name": one.subject.name, "ahead": expected_section(book, one), "outlook": outlook_section(book, other)}
            for one, other in zip(several, outlooks, strict=True)
        ],
        provenance=provenance(book),
        signatures=SIGNATURES,
        time=time,
    )
