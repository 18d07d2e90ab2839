"""How printed numbers are compared."""

import pytest

__all__ = ["printed"]


def printed(value: float, last_digit: float) -> object:
    """A printed number is good to one unit of its last digit: books cut as often as they round."""
    return pytest.approx(value, rel=0, abs=last_digit)
