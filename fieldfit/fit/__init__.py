"""The fit: unknowns, least squares, intervals. The only package that knows lmfit."""

from fieldfit.fit.ahead import Expected, before_test
from fieldfit.fit.doubts import assumptions
from fieldfit.fit.effects import (
    Actions,
    Extreme,
    Sagging,
    actions_of,
    actions_u,
    sag_of_stage,
    sag_under,
    uplift_notes,
)
from fieldfit.fit.estimates import Estimate
from fieldfit.fit.noise import Noise
from fieldfit.fit.outlook import Candidate, Help, Outlook, outlook
from fieldfit.fit.profile import Profile
from fieldfit.fit.reconcile import Reconciliation, reconcile_member

__all__ = [
    "Actions",
    "Candidate",
    "Estimate",
    "Expected",
    "Extreme",
    "Help",
    "Noise",
    "Outlook",
    "Profile",
    "Reconciliation",
    "Sagging",
    "actions_of",
    "actions_u",
    "assumptions",
    "before_test",
    "outlook",
    "reconcile_member",
    "sag_of_stage",
    "sag_under",
    "uplift_notes",
]
