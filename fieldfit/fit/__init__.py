"""The fit: unknowns, least squares, intervals. The only package that knows lmfit."""

from fieldfit.fit.estimates import Estimate
from fieldfit.fit.profile import Profile
from fieldfit.fit.reconcile import Reconciliation, reconcile_member

__all__ = ["Estimate", "Profile", "Reconciliation", "reconcile_member"]
