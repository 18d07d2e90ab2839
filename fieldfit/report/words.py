"""Numbers as an engineer would write them: an estimate to the digits its uncertainty supports."""

import math

__all__ = ["DASH", "MARKS", "number", "percent", "plain", "printable", "span_of"]

#: A shape for each verdict, so that no verdict is told by colour alone.
MARKS = {"within": "●", "beyond": "▲", "undecided": "◆", "not assessed": "○"}

DASH = "–"


def number(value: float | None, u: float | None) -> str:
    """A value rounded to two significant digits of its standard uncertainty; a dash where there is none."""
    if value is None or u is None or not (math.isfinite(value) and math.isfinite(u)):
        return DASH
    if u <= 0:
        return plain(value)
    decimals = 1 - math.floor(math.log10(u))
    return f"{round(value, decimals) + 0.0:,.{max(decimals, 0)}f}".replace(",", "\u202f")  # + 0.0: no minus zero


def plain(value: float | None, digits: int = 4) -> str:
    """A recorded or measured value to so many significant digits, without an exponent where that reads well."""
    if value is None or not math.isfinite(value):
        return DASH
    if value == 0:
        return "0"
    decimals = digits - 1 - math.floor(math.log10(abs(value)))
    if abs(value) >= 1e9 or decimals > 9:
        return f"{value:.{digits - 1}e}"
    return f"{round(value, decimals):,.{max(decimals, 0)}f}".replace(",", "\u202f")


def percent(probability: float | None) -> str:
    """A probability in percent, never rounded to certainty."""
    if probability is None:
        return DASH
    if probability > 0.999:
        return "> 99.9 %"
    return "< 0.1 %" if probability < 0.001 else f"{100 * probability:.1f} %"


def span_of(low: float | None, high: float | None, u: float | None) -> str:
    """An interval in words; a side that is open is said to be."""
    if low is None and high is None:
        return "open on both sides"
    if low is None:
        return f"at most {number(high, u)}"
    return f"at least {number(low, u)}" if high is None else f"{number(low, u)} to {number(high, u)}"


def printable(text: str) -> str:
    """Text with its control characters shown instead of sent to a terminal."""
    return text if text.isprintable() else text.encode("unicode_escape").decode()
