"""fieldfit reconciles readings taken on existing beams with beam theory.

``read_book`` reads a field book, ``reconcile`` fits and judges its members; ``Findings.write`` writes what was found.
``plan`` says what gauges should read before a test.
Everything heavy is imported when first asked for, so that the command line answers at once.
"""

from importlib import import_module
from importlib.metadata import version
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from fieldfit.errors import FieldBookError, ModelError
    from fieldfit.fieldbook import Book, read_book
    from fieldfit.work import Findings, Plan, plan, reconcile

__all__ = ["Book", "FieldBookError", "Findings", "ModelError", "Plan", "__version__", "plan", "read_book", "reconcile"]

__version__: str = version("fieldfit")

_HOMES = {
    "Book": "fieldfit.fieldbook",
    "FieldBookError": "fieldfit.errors",
    "Findings": "fieldfit.work",
    "ModelError": "fieldfit.errors",
    "Plan": "fieldfit.work",
    "plan": "fieldfit.work",
    "read_book": "fieldfit.fieldbook",
    "reconcile": "fieldfit.work",
}


def __getattr__(name: str) -> Any:
    if name not in _HOMES:
        raise AttributeError(f"module 'fieldfit' has no attribute {name!r}")
    return getattr(import_module(_HOMES[name]), name)
