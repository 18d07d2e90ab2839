"""An Excel workbook as text cells, looked over before it is opened."""

from fieldfit.errors import Fault
from fieldfit.fieldbook.faults import fault
from fieldfit.fieldbook.sheet import Sheet

__all__ = ["read_workbook"]


def read_workbook(content: bytes) -> tuple[list[Sheet], list[Fault], list[str]]:
    """The sheets of a workbook that are tables, faults and notes."""
    return [], [fault("broken workbook", "book", "an .xlsx workbook", value=f"{len(content)} bytes")], []
