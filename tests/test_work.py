"""Findings: members by number and name, tables, figures, a notebook's view."""

from collections.abc import Callable

import pytest

from fieldfit import Book, Findings, reconcile
from fieldfit.errors import FieldfitError
from fieldfit.report import FIGURES
from fieldfit.work import UnknownFigureError

BookOf = Callable[..., Book]


@pytest.fixture
def findings(book_of: BookOf) -> Findings:
    return reconcile(book_of())


def test_members_come_by_number_and_by_name(findings: Findings) -> None:
    assert len(findings) == 1
    assert findings["B1"] is findings[0]
    assert list(findings) == [findings[0]]
    with pytest.raises(FieldfitError, match=r"no member 'B1b' \(did you mean B1\?\)"):
        _ = findings["B1b"]


def test_the_tables_are_in_the_books_own_units(findings: Findings) -> None:
    (estimate,) = findings.estimates.to_dict("records")
    assert (estimate["member"], estimate["quantity"], estimate["unit"]) == ("B1", "EI", "kN m2")
    assert estimate["ratio low"] < estimate["ratio"] < estimate["ratio high"]
    (check,) = findings.checks.to_dict("records")
    assert (check["check"], check["verdict"]) == ("EI ratio", "within")
    assert findings.readings["measured"].tolist() == pytest.approx([8.4, 12.3, 8.5])  # mm, as in the book


def test_every_figure_with_something_to_show_can_be_drawn_in_a_notebook(findings: Findings) -> None:
    drawn = {name: findings.plot("B1", name) for name in FIGURES}
    nothing = {"load over time", "load and deflection", "left after unloading", "plateaus"}  # one stage, no times
    assert {name for name, figure in drawn.items() if figure is None} == nothing
    assert all(figure.axes[0].get_children() for figure in drawn.values() if figure is not None)


def test_findings_are_told_in_a_line_and_a_figure_of_no_such_name_is_refused(findings: Findings) -> None:
    assert repr(findings) == "1 member held against the limits of the book: 1 within."
    assert repr(findings["B1"]) == "Verdict(B1: within)"
    assert repr(findings.book) == "Book(book: 1 member)"
    with pytest.raises(UnknownFigureError, match="there is no figure 'nonsense'; there are beam, intervals"):
        findings.plot("B1", "nonsense")


def test_a_notebook_shows_the_answer_with_the_books_text_escaped(book_of: BookOf) -> None:
    name = "<b>B1</b>"
    shown = reconcile(
        book_of(
            members=[["member", "length [m]", "EI [kN m2]"], [name, 6.0, 20000]],
            loads=[["member", "load case", "from [m]", "force [kN]"], [name, "P", 3.0, 50]],
            readings=[["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], [name, "P", 3.0, 11.0, 0.1]],
        )
    )._repr_html_()
    assert "1 member held against the limits of the book" in shown
    assert name not in shown
    assert "&lt;b&gt;B1" in shown
