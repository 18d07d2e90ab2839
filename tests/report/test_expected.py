"""The site sheet and the stages to come: cautions first, the book's own units, nothing of a book as markup."""

from collections.abc import Callable
from html.parser import HTMLParser
from pathlib import Path

import numpy as np
import pandas as pd
import pytest

from fieldfit import plan, reconcile
from fieldfit.fieldbook import Book
from fieldfit.work import NothingPlannedError, UnknownMemberError

BookOf = Callable[..., Book]
STAGES = [
    ["member", "stage", "load case", "factor", "role"],
    ["B1", "zero", "", "", "zero"],
    ["B1", "half", "P", 0.5, "load"],
    ["B1", "full <b>", "P", 1, "load"],
]
GAUGES = [
    ["member", "gauge", "at [m]", "measures", "u [in]", "u [mrad]"],
    ["B1", "@D", 3.0, "deflection", 0.002, ""],
    ["B1", "R", 0.0, "rotation", "", 0.05],
]


class Texts(HTMLParser):
    """The texts of a page, and its tags."""

    def __init__(self, page: str) -> None:
        super().__init__()
        self.texts: list[str] = []
        self.tags: list[str] = []
        self.feed(page)

    def handle_data(self, data: str) -> None:
        self.texts.append(data)

    def handle_starttag(self, tag: str, attrs: object) -> None:
        self.tags.append(tag)


def test_the_site_sheet_begins_with_cautions_and_has_a_place_for_every_reading(book_of: BookOf, tmp_path: Path) -> None:
    sheet = plan(book_of(stages=STAGES, gauges=GAUGES, readings=None)).write(tmp_path / "out")
    page = sheet.read_text(encoding="utf-8")
    assert 0 < page.index("licensed engineer in charge") < page.index("4 readings to come on 1 member")
    assert page.count('<td class="fill">') == 2 * 4
    found = Texts(page)
    assert "b" not in found.tags
    assert "Stage full <b>" in found.texts
    assert "script" not in found.tags
    assert sorted(path.name for path in sheet.parent.iterdir()) == [
        "outlook.csv",
        "plan.csv",
        "plan.html",
        "results.json",
    ]


def test_the_table_is_in_the_books_units_and_no_formula(book_of: BookOf, tmp_path: Path) -> None:
    """P l3 / 48 EI = 11.25 mm = 0.4429 in for the whole load, and P l2 / 16 EI = 5.625 mrad clockwise at the left."""
    made = plan(book_of(stages=STAGES, gauges=GAUGES, readings=None))
    assert made.table["deflection change expected [in]"].dropna().tolist() == pytest.approx(
        [0.22146, 0.44291], rel=1e-4
    )
    assert made.table["rotation change expected [mrad]"].dropna().tolist() == pytest.approx([-2.8125, -5.625])
    table = pd.read_csv(made.write(tmp_path / "out").parent / "plan.csv")
    assert table["gauge"].tolist() == ["'@D", "R"] * 2
    below, above = (table[f"deflection change stop {side} [in]"].dropna() for side in ("below", "above"))
    assert np.all(below < 0.45)
    assert np.all(above > below)


def test_a_plan_needs_gauges_and_knows_its_members(book_of: BookOf) -> None:
    with pytest.raises(NothingPlannedError, match="give a table of gauges"):
        plan(book_of(stages=STAGES, readings=None))
    with pytest.raises(UnknownMemberError, match="it has B1"):
        plan(book_of(stages=STAGES, gauges=GAUGES, readings=None), ["B2"])


def test_a_test_half_done_says_what_comes_next(book_of: BookOf, tmp_path: Path) -> None:
    readings = [["member", "stage", "gauge", "deflection [in]"], ["B1", "zero", "@D", 0.01], ["B1", "half", "@D", 0.25]]
    findings = reconcile(book_of(stages=STAGES, gauges=GAUGES, readings=readings))
    report = findings.write(tmp_path / "out")
    page = report.read_text(encoding="utf-8")
    assert "Stages to come" in page
    assert 'scope="rowgroup">full &lt;b&gt; <span' in page
    assert "Not read: full &lt;b&gt;." in page
    table = pd.read_csv(report.parent / "next_stages.csv")
    row = table[table["gauge"] == "'@D"].iloc[0]
    assert row["deflection expected [in]"] == pytest.approx(0.01 + 2 * 0.24)
    assert row["deflection stop above [in]"] > row["deflection to [in]"] > row["deflection expected [in]"]
    rotation = table[table["gauge"] == "R"].iloc[0]
    assert np.isnan(rotation["rotation to [mrad]"])  # its zero was never read


def test_a_test_that_was_read_whole_has_no_next_stage(book_of: BookOf, tmp_path: Path) -> None:
    report = reconcile(book_of()).write(tmp_path / "out")
    assert not (report.parent / "next_stages.csv").exists()
    assert "Stages to come" not in report.read_text(encoding="utf-8")


def test_rounding_is_shown_as_nothing(book_of: BookOf) -> None:
    supports = [["member", "support", "at [m]", "vertical"], ["B1", "A", 0, "rigid"], ["B1", "B", 6, "rigid"]]
    gauges = [["member", "gauge", "at [m]", "measures"], ["B1", "far", 6, "deflection"], ["B1", "D", 3, "deflection"]]
    made = plan(book_of(stages=STAGES, supports=supports, gauges=gauges, readings=None))
    expected = made.table.set_index("gauge").filter(like="expected")
    assert (expected.loc["far"] == 0.0).all(axis=None)
    assert (expected.loc["D"] > 0.0).all(axis=None)


def test_what_warming_adds_is_said_to_be_left_out(book_of: BookOf) -> None:
    gauges = [
        ["member", "gauge", "at [m]", "measures", "temperature coefficient [mm/K]", "temperature coefficient u [mm/K]"],
        ["B1", "D", 3, "deflection", 0.01, 0.001],
    ]
    made = plan(book_of(stages=STAGES, gauges=gauges, readings=None))
    (one,) = made.expected
    assert any("at the temperature of the zero reading: D." in text for text in one.left_out)
