"""What a planned test will determine, in words, on the page, as a table and a record."""

import json
from collections.abc import Callable
from pathlib import Path

import pandas as pd
import pytest

from fieldfit import plan
from fieldfit.fieldbook import Book

BookOf = Callable[..., Book]
STAGES = [
    ["member", "stage", "load case", "factor", "role"],
    ["B1", "zero", "", "", "zero"],
    ["B1", "half", "P", 0.5, "load"],
    ["B1", "full", "P", 1, "load"],
]
GAUGES = [["member", "gauge", "at [ft]", "measures", "u [in]"], ["B1", "D", 9.8425, "deflection", 0.01]]
BOTH = [["member", "unknown", "where"], ["B1", "EI", ""], ["B1", "rotational restraint", "A"]]


def test_sentences_say_how_well_and_what_next(book_of: BookOf) -> None:
    """± 1.96 x 0.254 mm x sqrt 2 / 11.25 mm = 6.3 %."""
    (said,) = plan(book_of(stages=STAGES, gauges=GAUGES, readings=None)).says.values()
    assert said[0] == "EI will be determined to ± 6.3\u202f% (95 %)."
    assert said[1].startswith("What to measure next: of ")
    assert "(u 0.01 mrad, a usual figure without a source) helps EI most" in said[1]
    assert " m (u" in said[1]


def test_an_interval_longer_on_one_side_is_promised_with_both(book_of: BookOf) -> None:
    """1/EI is known to 1.96 x 2.54 mm x sqrt 2 / 11.25 mm = 62.6 %: EI is 1/1.626 (-38 %) to 1/0.374 (+167 %)."""
    coarse = [GAUGES[0], [*GAUGES[1][:-1], 0.1]]
    (said,) = plan(book_of(stages=[*STAGES[:2], STAGES[3]], gauges=coarse, readings=None)).says.values()
    assert said[0] == "EI will be determined to \N{MINUS SIGN}38/+170\u202f% (95 %)."


def test_what_stays_open_is_said_to_depend_on_the_supports(book_of: BookOf) -> None:
    (said,) = plan(book_of(stages=STAGES, gauges=GAUGES, unknowns=BOTH, readings=None)).says.values()
    assert not any(text.startswith("EI will be determined") for text in said)
    assert any("a tiltmeter at 0 m" in text for text in said)


def test_page_table_and_record_agree(book_of: BookOf, tmp_path: Path) -> None:
    made = plan(book_of(stages=STAGES, gauges=GAUGES, unknowns=BOTH, readings=None))
    folder = made.write(tmp_path / "out").parent
    page = (folder / "plan.html").read_text(encoding="utf-8")
    assert page.index("What the test will determine") > page.index("Before anything is loaded")
    assert "Unknown supports at their stiffest" in page
    table = pd.read_csv(folder / "outlook.csv")
    record = json.loads((folder / "results.json").read_text(encoding="utf-8"))["outlook"]
    assert len(table) == sum(len(one["estimates"]) for one in record[0]["foreseen"]) == 2 * 3
    assert record[0]["says"] == made.says["B1"]
    first = record[0]["foreseen"][0]["estimates"][0]
    assert table["ratio high"][0] == pytest.approx(first["ratio_high"], rel=1e-6)


def test_a_plan_without_u_says_so_instead(book_of: BookOf, tmp_path: Path) -> None:
    bare = [row[:-1] for row in GAUGES]
    made = plan(book_of(stages=STAGES, gauges=bare, readings=None))
    (said,) = made.says.values()
    assert said == [
        "How well the test will determine anything cannot be said: no u is given for D. Give u, plus or minus or "
        "resolution in gauges."
    ]
    assert said[0] in made.write(tmp_path / "out").read_text(encoding="utf-8")


def test_what_the_book_expects_is_not_promised_as_found(book_of: BookOf) -> None:
    unknowns = [
        ["member", "unknown", "where", "expected", "expected u"],
        ["B1", "EI", "", "", ""],
        ["B1", "camber", "A-B", 10, 2],
        ["B1", "creep factor", "", 0.5, 0.1],
    ]
    survey = [
        ["member", "gauge", "at [m]", "measures", "u [mm]"],
        *(["B1", f"L{n}", n, "level", 0.3] for n in range(7)),
    ]
    stages = [["member", "stage", "load case"], ["B1", "store", "P"]]
    (said,) = plan(book_of(stages=stages, gauges=survey, unknowns=unknowns, readings=None)).says.values()
    assert "Creep factor will be known no better than the book expects it beforehand." in said
    assert not any("tiltmeter" in text for text in said)  # it would have the built shape in it
