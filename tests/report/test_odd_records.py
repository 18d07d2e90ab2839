"""Records out of the ordinary, carried through to the report: sensible words everywhere, and no NaN anywhere."""

import json
import re
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import pytest

from fieldfit.fieldbook import Book
from fieldfit.work import reconcile

BookOf = Callable[..., Book]

HEADING = ["member", "stage", "at [m]", "deflection [mm]", "u [mm]"]
PLACES = (0.75, 1.5, 2.25, 3.0, 3.75, 4.5, 5.25)
# P x (3 l2 - 4 x2) / 48 EI of the simple book, typed to 1e-9 mm: a record without any noise.
PERFECT = (4.130859375, 7.734375, 10.283203125, 11.25, 10.283203125, 7.734375, 4.130859375)
NOTHING, EVEN = (0.0,) * 7, (5.0,) * 7


def carried(book_of: BookOf, out: Path, values: Sequence[float], u: object) -> tuple[dict[str, Any], str]:
    """The member in results.json and the text of the page."""
    rows = [["B1", "P", at, value, u] for at, value in zip(PLACES, values, strict=True)]
    reconcile(book_of(readings=[HEADING, *rows])).write(out)
    texts = [path.read_text(encoding="utf-8") for path in out.rglob("*") if path.suffix in (".json", ".csv", ".html")]
    assert not any(re.search(r"\b(nan|inf)\b", text, re.IGNORECASE) for text in texts)
    (member,) = json.loads((out / "results.json").read_text(encoding="utf-8"))["members"]
    return member, (out / "report.html").read_text(encoding="utf-8")


@pytest.mark.parametrize("u", [0.1, ""])
def test_an_all_zero_record_says_nothing_of_ei(book_of: BookOf, tmp_path: Path, u: object) -> None:
    member, page = carried(book_of, tmp_path / "out", NOTHING, u)
    (EI,) = member["estimates"]
    assert (EI["determined"], EI["value"]) == ("no", None)
    assert member["verdict"] == "not assessed"
    assert "not assessed" in page


def test_a_constant_record_is_not_explained(book_of: BookOf, tmp_path: Path) -> None:
    member, page = carried(book_of, tmp_path / "out", EVEN, 0.1)
    assert member["fit"]["explains_readings"] is False
    assert member["verdict"] == "not assessed"
    assert "does not explain the readings" in page


def test_a_perfect_record_with_u_is_fitted_and_called_too_good(book_of: BookOf, tmp_path: Path) -> None:
    member, page = carried(book_of, tmp_path / "out", PERFECT, 0.1)
    (EI,) = member["estimates"]
    assert EI["ratio"] == pytest.approx(1.0, abs=1e-9)
    assert EI["u"] > 0
    assert member["fit"]["chi_square"] == pytest.approx(0.0, abs=1e-12)
    assert member["fit"]["p"] == pytest.approx(1.0)
    assert any("closer to the model than their stated uncertainty" in text for text in member["warnings"])
    assert "The model explains the readings." in page


def test_an_ordinary_record_is_not_called_too_good(book_of: BookOf, tmp_path: Path) -> None:
    errors = (0.08, -0.05, 0.11, -0.09, 0.02, 0.1, -0.07)
    values = [true + error for true, error in zip(PERFECT, errors, strict=True)]
    member, _ = carried(book_of, tmp_path / "out", values, 0.1)
    assert not any("closer to the model" in text for text in member["warnings"])


def test_a_perfect_record_without_u_has_nothing_to_judge_by(book_of: BookOf, tmp_path: Path) -> None:
    member, page = carried(book_of, tmp_path / "out", PERFECT, "")
    (EI,) = member["estimates"]
    assert (EI["determined"], EI["value"], member["verdict"]) == ("no", None, "not assessed")
    assert "no reading left to judge the scatter by" in page
