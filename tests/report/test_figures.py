"""Figures: what they draw agrees with the model, and nothing runs into anything else."""

import re
import xml.etree.ElementTree as ET
from collections.abc import Callable, Iterator
from itertools import combinations

import numpy as np
import pytest

from fieldfit import Book, Findings, read_book, reconcile
from fieldfit.observe import observe
from fieldfit.report.canvas import Drawing, Mark, Text, simplified, width_of
from fieldfit.report.curves import curves_of, fitted_area, heaviest, stations
from fieldfit.report.figures import FIGURES, beam, figures_of
from fieldfit.report.illustrate import illustrations
from tests.demos import DATASETS, DEMOS

BookOf = Callable[..., Book]
LONG = "Girder of the covered way <east & west> number $1$ " * 2
GAUGES = [f"gauge {number:03d}" for number in range(200)]


@pytest.fixture
def crowded(book_of: BookOf) -> Findings:
    """Ten spans, 200 gauges, nine stages, the longest names, zones, a hinge, a spring, a couple."""
    at = np.linspace(0.3, 99.7, len(GAUGES))
    stages = [f"stage {number} of a test that went on and on" for number in range(9)]
    noise = np.random.default_rng(1)
    shape = np.abs(np.sin(np.pi * at / 10.0))
    rows = [
        [LONG[:100], stage, *(shape * (n + 1) + noise.normal(0, 0.05, 200)).round(3)] for n, stage in enumerate(stages)
    ]
    supports = [
        ["*", f"support {n} at the road", 10.0 * n, "spring" if n == 2 else "rigid", 80 if n == 2 else ""]
        for n in range(11)
    ]
    return reconcile(
        book_of(
            members=[["member", "length [m]", "EI [kN m2]", "tolerance [%]"], [LONG[:100], 100.0, 20000, 10]],
            supports=[["member", "support", "at [m]", "vertical", "bearing stiffness [kN/mm]"], *supports],
            hinges=[["member", "at [m]"], ["*", 13.0]],
            zones=[
                ["member", "zone", "from [m]", "to [m]"],
                *(["*", f"zone {n} by the wall", 10 * n + 4, 10 * n + 7] for n in range(9)),
            ],
            loads=[
                ["member", "load case", "from [m]", "to [m]", "force [kN]", "moment [kN m]"],
                *(["*", "P", 5.0 + 10 * n, "", 20 - 4 * n, ""] for n in range(10)),
                ["*", "P", 22.0, "", "", 30],
                ["*", "P", 31.0, 39.0, 50, ""],
            ],
            stages=[
                ["member", "stage", "load case", "factor"],
                *(["*", stage, "P", n + 1] for n, stage in enumerate(stages)),
            ],
            gauges=[
                ["member", "gauge", "at [m]", "u [mm]"],
                *(["*", name, x, 0.05] for name, x in zip(GAUGES, at.round(3), strict=True)),
            ],
            readings=[["member", "stage", *(f"{name} [mm]" for name in GAUGES)], *rows],
            unknowns=[
                ["member", "unknown", "where"],
                ["*", "EI", ""],
                ["*", "bearing stiffness", "support 2 at the road"],
            ],
        )
    )


def boxes(drawing: Drawing) -> Iterator[tuple[str, float, float, float, float]]:
    """About where each text stands: left, top, right, bottom."""
    for shape in drawing.shapes:
        if isinstance(shape, Text):
            wide, tall = 0.92 * width_of(shape.text, shape.size), 0.72 * shape.size
            left = shape.x - {"start": 0.0, "middle": wide / 2, "end": wide}[shape.anchor]
            if shape.turned:
                yield shape.text, shape.x - tall, shape.y - wide / 2, shape.x, shape.y + wide / 2
            else:
                yield shape.text, left, shape.y - tall, left + wide, shape.y


def assert_nothing_collides(findings: Findings) -> None:
    for picture in figures_of(findings.book, findings[0].reconciliation):
        texts = list(boxes(picture.drawing))
        for text, left, top, right, bottom in texts:
            inside = left >= 0 and top >= 0 and right <= picture.drawing.width and bottom <= picture.drawing.height
            assert inside, (picture.key, text)
        for a, b in combinations(texts, 2):
            apart = a[3] <= b[1] or b[3] <= a[1] or a[4] <= b[2] or b[4] <= a[2]
            assert apart, (picture.key, a, b)


def test_no_text_runs_into_another_or_out_of_a_crowded_figure(crowded: Findings) -> None:
    assert_nothing_collides(crowded)


@pytest.mark.parametrize("demo", DEMOS)
def test_no_text_runs_into_another_or_out_of_a_figure_of_the_demos(demo: str) -> None:
    assert_nothing_collides(reconcile(read_book(DATASETS / demo / DEMOS[demo])))


def test_every_figure_is_drawn_with_words_for_those_who_do_not_see_it(crowded: Findings) -> None:
    drawn = illustrations(crowded.book, crowded[0].reconciliation, png=True)
    keys = ["beam", "intervals", "elastic-curve", "ratios", "curvature", "residuals"]
    assert [one.key for one in drawn] == keys
    for one in drawn:
        root = ET.fromstring(one.svg)
        space = "{http://www.w3.org/2000/svg}"
        assert root.get("role") == "img"
        assert root.findtext(f"{space}title")
        assert root.findtext(f"{space}desc")
        assert one.png is not None
        assert one.png.startswith(b"\x89PNG")
        assert not re.search(r"\bnan\b|\binf\b", one.svg)


def test_the_area_of_the_fitted_member_is_the_change_of_its_rotation(book_of: BookOf) -> None:
    readings = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]]
    readings += [["B1", "P", 2.0, 2.6, 0.02], ["B1", "P", 3.0, 3.2, 0.02], ["B1", "P", 4.0, 2.3, 0.02]]
    supports = [["member", "support", "at [m]", "rotation", "rotational stiffness [kN m/rad]"]]
    supports += [["*", "A", 0, "spring", 9000], ["*", "B", 6, "fixed", ""]]
    unknowns = [["member", "unknown", "where"], ["*", "EI", ""], ["*", "rotational restraint", "A"]]
    found = reconcile(book_of(readings=readings, supports=supports, unknowns=unknowns))[0].reconciliation
    rotation = curves_of(found, [0], "rotation")
    assert rotation.fitted is not None
    change = float(np.interp(4.0, rotation.at, rotation.fitted[0]) - rotation.fitted[0, 0])
    assert fitted_area(found, 0, 0.0, 4.0) == pytest.approx(change, rel=1e-3)  # read between stations 0.075 m apart


def test_the_band_at_a_gauge_is_the_uncertainty_of_the_fit_there(book_of: BookOf) -> None:
    # One reading of u determines EI alone, so that the fitted deflection there is known just as well: 1.96 u.
    rows = [["member", "stage", "at [m]", "deflection [mm]", "u [mm]"], ["B1", "P", 3.0, 11.0, 0.1]]
    found = reconcile(book_of(readings=rows))[0].reconciliation
    curves = curves_of(found, [0], "deflection")
    assert curves.reach is not None
    assert np.interp(3.0, curves.at, curves.reach[0]) == pytest.approx(1.96e-4, rel=1e-3)
    assert heaviest(found) == 0
    assert stations(found)[0][-1] == 6.0


def test_every_sign_of_the_residuals_stands_in_their_legend(book_of: BookOf) -> None:
    stages = [["member", "stage", "load case", "role"], ["B1", "before", "", "zero"], ["B1", "P", "P", "load"]]
    gauges = [["member", "gauge", "at [m]", "u [mm]"], ["B1", "C", 1.5, 0.1], ["B1", "D", 3.0, 0.1]]
    rows = [["member", "stage", "C [mm]", "D [mm]"], ["B1", "before", 0.0, 0.1], ["B1", "P", 7.8, 11.3]]
    findings = reconcile(book_of(stages=stages, gauges=gauges, readings=rows))
    picture = FIGURES["residuals"](findings.book, findings[0].reconciliation)
    assert picture is not None
    marks = [one for one in picture.drawing.shapes if isinstance(one, Mark)]
    in_legend = {(one.shape, one.colour) for one in marks[:2]}
    assert {(one.shape, one.colour) for one in marks} == in_legend
    texts = [one.text for one in picture.drawing.shapes if isinstance(one, Text)]
    assert texts[:2] == ["P", "before"]


def test_unnamed_gauges_of_a_small_sketch_keep_their_whole_names(book_of: BookOf) -> None:
    rows = [["member", "stage", "at [m]", "deflection [mm]"], *(["B1", "P", at, 8.4] for at in (1.5, 3.0, 4.5))]
    book = book_of(readings=rows)
    drawing = beam(book, observe(book)[0]).drawing
    texts = {one.text for one in drawing.shapes if isinstance(one, Text)}
    assert {"deflection at 1.5 m", "deflection at 3 m", "deflection at 4.5 m"} <= texts


def test_points_on_a_straight_way_are_left_out() -> None:
    assert simplified([(0, 0), (1, 1), (2, 2), (2, 2), (5, 2)]) == [(0, 0), (2, 2), (5, 2)]
