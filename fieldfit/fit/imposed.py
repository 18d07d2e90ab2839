"""What a book imposes of a settlement or of a temperature curvature that it also asks for.

An unknown of either is the whole of it in its stage, so that what the loads on record hold of it has to be known, and
what the book says of its uncertainty gives way to the unknown.
"""

import numpy as np

from fieldfit.beam import Array
from fieldfit.observe import Gradient, Subject

__all__ = ["TEMPERATURE", "curvatures", "gradient_stages", "is_asked", "settlements"]

TEMPERATURE = "temperature curvature"


def settlements(subject: Subject, which: int) -> Array:
    """Settlement (T,) of a support, m down, that the book imposes in each stage."""
    return 0.0 - _factors(subject) @ subject.loads.support_up[0, :, which]


def curvatures(subject: Subject) -> Array:
    """Curvature (T,), 1/m sagging, that the book imposes on the whole member in each stage.

    What it imposes on a part of the member does not belong to it, nor does a temperature difference that is an unknown
    of its own.
    """
    given = subject.loads
    whole = (given.bend_from[0] <= 0) & (given.bend_to[0] >= subject.member.length[0])
    by_case = np.bincount(given.bend_case[0], np.where(whole, given.bend[0], 0.0), minlength=given.cases)
    held = _factors(subject) @ by_case
    for one in subject.gradients:
        if _is_whole(subject, one) and one.u > 0 and not is_asked(subject, one):
            held = held - gradient_stages(subject, one) * one.bend * one.difference
    return held


def gradient_stages(subject: Subject, one: Gradient) -> Array:
    """Stages (T,) in which the book imposes a temperature difference, 1 or 0."""
    return np.array([float(one.stage in (None, stage.name)) for stage in subject.stages])


def is_asked(subject: Subject, one: Gradient) -> bool:
    """Whether a temperature difference over the whole member is asked for as a curvature, in each of its stages."""
    asked = {row.stage for row in subject.asked if row.quantity == TEMPERATURE}
    stages = {stage.name for stage in subject.stages} if one.stage is None else {one.stage}
    return _is_whole(subject, one) and stages <= asked


def _is_whole(subject: Subject, one: Gradient) -> bool:
    return one.start <= 0 and one.end >= float(subject.member.length[0])


def _factors(subject: Subject) -> Array:
    return np.array([stage.factors for stage in subject.stages])
