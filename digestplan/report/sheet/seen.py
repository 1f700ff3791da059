"""What should be seen at a check-point: common practice in words, the forecast in numbers."""

import numpy as np

from digestplan import library
from digestplan.forecast.result import (
    DemineraliseForecast,
    DigestForecast,
    Forecast,
    StepForecast,
)
from digestplan.plan.model import Demineralise
from digestplan.report import words

# Common practice: what a piece looks like when so much of its matrix is gone.
_DIGESTING = (
    (0.10, "Firm, edges sharp, liquid clear."),
    (0.50, "Softer, edges rounded; liquid slightly cloudy. The core is still firm."),
    (0.90, "Swollen and loose, fraying when the tube is tilted; a core may be left."),
    (1.01, "Falls apart when the tube is gently tilted; little of the matrix left."),
)
_LOOK_ONLY = "Tilt and look; no needle."


def extent_at(step: StepForecast, hours: float) -> tuple[float, float, float] | None:
    """
    Return the extent at a moment of a step.

    Parameters
    ----------
    step
        The forecast of a digestion, a hold, a stop or a demineralisation.
    hours
        From the plan's start. [h]

    Returns
    -------
    extent
        5th, 50th and 95th percentile; None where the moment is not within the step, or the step
        has no extent.
    """
    within = hours - step.start_h
    if not -1e-9 <= within <= step.hours + 1e-9:
        return None
    if isinstance(step, DigestForecast):
        curve = step.curve
        bands = (curve.extent_p05, curve.extent_p50, curve.extent_p95)
        low, middle, high = (float(np.interp(within, curve.hours, band)) for band in bands)
        return low, middle, high
    if isinstance(step, DemineraliseForecast):
        low, middle, high = (
            float(np.interp(within, step.curve_hours, band)) for band in step.curve_extent
        )
        return low, middle, high
    return None


def seen_at(forecast: Forecast, hours: float) -> str:
    """Return what should be seen of the piece at a moment, hours from the plan's start [h]."""
    for told, step in zip(forecast.steps, forecast.plan.steps, strict=True):
        extent = extent_at(told, hours)
        if extent is None:
            continue
        if isinstance(step, Demineralise):
            return mineral_seen(step, told, hours)
        look = next(text for most, text in _DIGESTING if extent[1] < most)
        return f"{look} {_numbers('extent', extent)} {_LOOK_ONLY}"
    return _LOOK_ONLY


def mineral_seen(step: Demineralise, told: StepForecast, hours: float) -> str:
    """Return what should be seen of a demineralisation at a moment of the plan [h]."""
    extent = extent_at(told, hours)
    if extent is None:
        return ""
    chelator = library.reagent(step.reagent).chelator
    if extent[1] < 0.95:
        look = "Still stiff inside." if chelator else "Bubbles, fewer by and by; still stiff."
    else:
        look = "Translucent, bends." if chelator else "No bubbles; translucent, bends."
    return f"{look} {_numbers('mineral gone', extent)}"


def chances_seen(forecast: Forecast, hours: float) -> str:
    """Return how likely the piece is ready, and too far, at a moment of the plan [h]."""
    ready = float((forecast.ready_h <= hours).mean())
    too_far = float((forecast.too_far_h <= hours).mean())
    if len(forecast.ready_h) == 1:
        return "Too far." if too_far else "Ready." if ready else "Not ready yet."
    told = f"Ready by now: {words.percent(ready)}"
    return f"{told}, too far: {words.percent(too_far)}."


def _numbers(what: str, extent: tuple[float, float, float]) -> str:
    low, middle, high = (words.percent(share) for share in extent)
    spread = "" if extent[0] == extent[2] else f" ({low} to {high})"
    return f"Expected {what}: {middle}{spread}."
