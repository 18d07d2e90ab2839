"""Numbers as an engineer would write them: an estimate to the digits its uncertainty supports."""

import math
import re
import unicodedata
from collections.abc import Iterable

__all__ = [
    "DASH",
    "MARKS",
    "MINUS",
    "NARROW",
    "decimals_of",
    "fixed",
    "number",
    "percent",
    "plain",
    "printable",
    "span_of",
    "typeset",
]

#: A shape for each verdict, so that no verdict is told by colour alone.
MARKS = {"within": "●", "beyond": "▲", "undecided": "◆", "not assessed": "○"}

DASH, MINUS, NARROW = "–", "−", "\u202f"  # the last is a narrow space at which no line breaks


def number(value: float | None, u: float | None) -> str:
    """A value rounded to two significant digits of its standard uncertainty; a dash where there is none."""
    if value is None or u is None or not (math.isfinite(value) and math.isfinite(u)):
        return DASH
    return plain(value) if u <= 0 else fixed(value, 1 - math.floor(math.log10(u)))


def plain(value: float | None, digits: int = 4) -> str:
    """A recorded or given value to at most so many significant digits, without an exponent where that reads well."""
    if value is None or not math.isfinite(value):
        return DASH
    if value == 0:
        return "0"
    decimals = digits - 1 - math.floor(math.log10(abs(value)))
    if abs(value) >= 1e12 or decimals > 9:
        return f"{value:.{digits - 1}e}".replace("-", MINUS)
    text = fixed(value, decimals)
    return text.rstrip("0").rstrip(".") if decimals > 0 else text


def decimals_of(values: Iterable[float]) -> int:
    """Decimals that the finest of some recorded or given values has."""
    return max((len(plain(value).partition(".")[2]) for value in set(values)), default=0)


def fixed(value: float, decimals: int) -> str:
    """A value to so many decimals, thousands apart; tens and hundreds are rounded where ``decimals`` is negative."""
    rounded = round(value, decimals) + 0.0  # no minus zero
    return f"{rounded:,.{max(decimals, 0)}f}".replace(",", NARROW).replace("-", MINUS)


def percent(probability: float | None) -> str:
    """A probability to two digits, never rounded to certainty."""
    if probability is None:
        return DASH
    if probability > 0.999:
        return f">{NARROW}99.9{NARROW}%"
    if probability < 0.001:
        return f"<{NARROW}0.1{NARROW}%"
    decimals = 0 if 0.0995 <= probability < 0.99 else 1
    return f"{100 * probability:.{decimals}f}{NARROW}%"


def typeset(unit: str) -> str:
    """A unit as it is printed: a raised 2, 3 or 4 after a letter."""
    return re.sub(r"(?<=[A-Za-z])[234]\b", lambda power: "²³⁴"[int(power[0]) - 2], unit)


def span_of(low: float | None, high: float | None, u: float | None) -> str:
    """An interval in words; a side that is open is said to be."""
    if low is None and high is None:
        return "open on both sides"
    if low is None:
        return f"at most {number(high, u)}"
    return f"at least {number(low, u)}" if high is None else f"{number(low, u)} to {number(high, u)}"


def printable(text: str) -> str:
    """Text with its control and direction characters shown instead of sent to a terminal; spaces stay."""
    return "".join(
        one if one.isprintable() or unicodedata.category(one) == "Zs" else one.encode("unicode_escape").decode()
        for one in text
    )
