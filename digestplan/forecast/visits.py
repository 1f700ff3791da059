"""Visits on a plan's clock, and which draws are in time at any of them."""

from datetime import timedelta

import numpy as np
from numpy.typing import NDArray

from digestplan.plan.model import Plan

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]


def visit_hours(plan: Plan) -> list[tuple[float, float]]:
    """Return when each visit begins and ends, in hours from the plan's start; none without."""
    if plan.start is None:
        return []
    hour = timedelta(hours=1)
    return [
        ((visit.start - plan.start) / hour, (visit.end - plan.start) / hour)
        for visit in plan.visits
    ]


def first_after(plan: Plan, hour: float) -> float | None:
    """Return when the first visit after an hour begins, in hours from the plan's start."""
    later = [begin for begin, _ in visit_hours(plan) if begin > hour]
    return min(later) if later else None


def in_time(plan: Plan, ready: Array, too_far: Array) -> Flags:
    """
    Say which draws somebody meets between ready and too far, at one visit or another.

    Parameters
    ----------
    plan
        The plan with its visits.
    ready, too_far
        Hours from the plan's start; infinite for never. Shape (n_draws,). [h]

    Returns
    -------
    flags
        Shape (n_draws,); all false without visits.
    """
    met = np.zeros(len(ready), dtype=bool)
    for begin, end in visit_hours(plan):
        met |= (ready <= end) & (np.maximum(ready, begin) <= np.minimum(too_far, end))
    return met
