"""The fit: unknowns, least squares, intervals. The only package that knows lmfit."""

from fieldfit.fit.reconcile import Estimate, Fitted, Reconciliation, reconcile_member

__all__ = ["Estimate", "Fitted", "Reconciliation", "reconcile_member"]
