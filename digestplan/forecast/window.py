"""From draws to what is told: percentiles, the window, and the chances at each visit."""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.visits import hours_of, met
from digestplan.plan.model import Visit

Array = NDArray[np.float64]

PERCENTS = (5.0, 50.0, 95.0)


@dataclass(frozen=True, slots=True)
class Spread:
    """5th, 50th and 95th percentile of a result; None where that share never gets there."""

    p05: float | None
    p50: float | None
    p95: float | None


@dataclass(frozen=True, slots=True)
class Window:
    """From "ready" to "too far", each with the asked confidence.

    Hours from the start of the step, and the clock where the plan has one; None where it never
    happens. It may close before it opens: then there is no safe moment at that confidence.
    """

    opens_h: float | None
    closes_h: float | None
    opens: datetime | None
    closes: datetime | None

    @property
    def exists(self) -> bool:
        """Whether there is a moment that is ready and not yet too far, at that confidence."""
        if self.opens_h is None:
            return False
        return self.closes_h is None or self.closes_h >= self.opens_h


@dataclass(frozen=True, slots=True)
class VisitChance:
    """One visit and the shares of futures in which it comes in time, too early or too late."""

    visit: Visit
    in_time: float
    not_ready: float
    too_far: float


def quantile(values: Array, share: float) -> float | None:
    """
    Return a quantile of draws, some of which may be infinite.

    Parameters
    ----------
    values
        Shape (n_draws,); infinite where something never happens.
    share
        0 to 1. [1]

    Returns
    -------
    quantile
        Interpolated between neighbouring draws, or None where it is not finite.
    """
    ordered = np.sort(values)
    place = share * (len(ordered) - 1)
    low = int(np.floor(place + 1e-9))
    high = min(low + 1, len(ordered) - 1)
    weight = place - low if place - low > 1e-9 else 0.0
    if weight == 0.0:
        result = float(ordered[low])
    elif np.isfinite(ordered[high]):
        result = float(ordered[low] + weight * (ordered[high] - ordered[low]))
    else:
        return None
    return result if np.isfinite(result) else None


def spread(values: Array) -> Spread:
    """Return the three percentiles of draws, shape (n_draws,)."""
    return Spread(*(quantile(values, percent / 100) for percent in PERCENTS))


def bands(values: Array) -> Array:
    """Return the three percentiles over time, shape (3, n_times), of (n_times, n_draws)."""
    if values.shape[1] == 1:
        return np.repeat(values.T, 3, axis=0)
    result: Array = np.percentile(values, PERCENTS, axis=1)
    return result


def window(ready: Array, too_far: Array, confidence: float, start: datetime | None) -> Window:
    """
    Return the window between ready and too far.

    Parameters
    ----------
    ready, too_far
        Hours at which each draw is ready and too far; infinite for never. Shape (n_draws,). [h]
    confidence
        How sure both must be. [1]
    start
        Clock time from which the hours count, or None.

    Returns
    -------
    window
        Open from when the share ``confidence`` is ready until the share 1 − ``confidence`` is
        too far.
    """
    opens = quantile(ready, confidence)
    closes = quantile(too_far, 1 - confidence)
    return Window(opens, closes, on_clock(start, opens), on_clock(start, closes))


def on_clock(start: datetime | None, hours: float | None) -> datetime | None:
    """Return the clock time so many hours after a start; None where either is unknown."""
    if start is None or hours is None:
        return None
    try:
        return start + timedelta(hours=hours)
    except OverflowError:
        return None


def visit_chances(
    visits: Sequence[Visit], start: datetime | None, ready: Array, too_far: Array
) -> tuple[VisitChance, ...]:
    """
    Return each visit's chances.

    Parameters
    ----------
    visits
        When someone is at the bench.
    start
        Clock time from which the hours count.
    ready, too_far
        Shape (n_draws,); infinite for never. [h]

    Returns
    -------
    chances
        In time: someone is there between ready and too far. Not ready: the visit is over before
        the sample is ready. Too far: the rest. The three sum to 1.
    """
    result = []
    for visit, (begins, ends) in zip(visits, hours_of(visits, start), strict=False):
        early, good = ready > ends, met(begins, ends, ready, too_far)
        result.append(
            VisitChance(
                visit, float(good.mean()), float(early.mean()), float((~early & ~good).mean())
            )
        )
    return tuple(result)
