"""Visits on a plan's clock, and which draws are in time at any of them."""

from collections.abc import Sequence
from datetime import datetime, timedelta

import numpy as np
from numpy.typing import NDArray

from digestplan.plan.model import Plan, Visit

Array = NDArray[np.float64]
Flags = NDArray[np.bool_]


def hours_of(visits: Sequence[Visit], start: datetime | None) -> list[tuple[float, float]]:
    """Return when each visit begins and ends, in hours from a start; none without one."""
    if start is None:
        return []
    hour = timedelta(hours=1)
    return [((visit.start - start) / hour, (visit.end - start) / hour) for visit in visits]


def visit_hours(plan: Plan) -> list[tuple[float, float]]:
    """Return when each visit begins and ends, in hours from the plan's start; none without."""
    return hours_of(plan.visits, plan.start)


def met(begin: float, end: float, ready: Array, too_far: Array) -> Flags:
    """Say which draws a visit meets: ready before it ends, not too far when it begins."""
    found: Flags = (ready <= end) & (np.maximum(ready, begin) <= np.minimum(too_far, end))
    return found


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
    at_any = np.zeros(len(ready), dtype=bool)
    for begin, end in visit_hours(plan):
        at_any |= met(begin, end, ready, too_far)
    return at_any
