"""Estimates: what an end of an interval is made of."""

from collections.abc import Callable

import pytest

from fieldfit.fieldbook import Book
from fieldfit.fit import reconcile_member
from fieldfit.observe import observe

BookOf = Callable[..., Book]


def test_an_end_that_moves_with_the_edge_of_the_search_is_none(book_of: BookOf) -> None:
    """Load over EI is all that deflections tell: neither has an end, however far the search goes."""
    unknowns = [["member", "unknown", "where"], ["B1", "EI", ""], ["B1", "load", "P"]]
    stiffness, load = reconcile_member(observe(book_of(unknowns=unknowns))[0]).estimates
    for one in (stiffness, load):
        assert (one.determined, one.value, one.low, one.high) == ("no", None, None, None)


def test_bounds_of_the_book_still_make_ends(book_of: BookOf) -> None:
    """With EI from 0.8 to 1.2 times the record the load is 0.8 to 1.2 times 1/0.91 or so, and no better known."""
    unknowns = [["member", "unknown", "where", "low", "high"], ["B1", "EI", "", 0.8, 1.2], ["B1", "load", "P", "", ""]]
    readings = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], ["B1", "P", 3.0, 11.25, 0.01]]
    _, load = reconcile_member(observe(book_of(unknowns=unknowns, readings=readings))[0]).estimates
    assert load.determined == "between"
    # The reading is that of the record, its u 0.09 %: load = EI ratio, ends widened by 1.96 u.
    assert (load.low, load.high) == (pytest.approx(0.8, rel=3e-3), pytest.approx(1.2, rel=3e-3))


def test_what_an_unbounded_other_leaves_is_an_end(book_of: BookOf) -> None:
    """Each half of a beam gives half of a midspan deflection, P l3 / 96 EI: 5.625 mm of the 11.25 mm read.

    Were the other half rigid, EI of this one would be at the least 5.625 / (11.25 + 1.96 x 0.1) of the record.
    """
    zones = [["member", "zone", "from [m]", "to [m]"], ["B1", "left", 0, 3], ["B1", "right", 3, 6]]
    unknowns = [["member", "unknown", "where"], ["B1", "EI", "left"], ["B1", "EI", "right"]]
    readings = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], ["B1", "P", 3.0, 11.25, 0.1]]
    book = book_of(zones=zones, unknowns=unknowns, readings=readings)
    for one in reconcile_member(observe(book)[0]).estimates:
        assert (one.determined, one.low_ends) == ("at least", "found")
        # A half a thousand times as stiff still gives 0.006 mm.
        assert one.ratio_low == pytest.approx(5.625 / (11.25 + 1.959964 * 0.1), rel=1e-3)
        assert one.ratio_high is None
