"""A forecast as the JSON document that scripts rely on (plain numbers in the named unit)."""

import json
import math
from collections.abc import Mapping
from datetime import datetime
from typing import Any

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.result import (
    DemineraliseForecast,
    DigestForecast,
    Forecast,
    RinseForecast,
    StepForecast,
)
from digestplan.forecast.window import Spread, VisitChance, Window

FORMAT = 1  # version of the document

_SIGNIFICANT = 12


def dumps(document: Mapping[str, Any]) -> str:
    """Return the document as text; it never holds NaN or infinity."""
    return json.dumps(document, ensure_ascii=False, allow_nan=False, indent=1)


def forecast_document(forecast: Forecast) -> dict[str, Any]:
    """Return a forecast as the interface's document."""
    plan = forecast.plan
    return {
        "digestplan": FORMAT,
        "title": plan.title,
        "draws": forecast.n_draws,
        "seed": forecast.seed,
        "confidence": plan.confidence,
        "steps": [step_document(step) for step in forecast.steps],
        "window": window_document(forecast.window),
        "visits": [visit_document(visit) for visit in forecast.visits],
        "limits": list(forecast.limits),
        "cautions": [
            {"level": c.level, "step": c.step, "code": c.code, "text": c.text}
            for c in forecast.cautions
        ],
    }


def step_document(step: StepForecast) -> dict[str, Any]:
    """Return one step; what it holds depends on its kind."""
    document: dict[str, Any] = {
        "do": step.do,
        "start": clock(step.start),
        "end": clock(step.end),
        "hours": number(step.hours),
    }
    if isinstance(step, DigestForecast):
        document |= _digest_document(step)
    elif isinstance(step, DemineraliseForecast):
        document |= _demineralise_document(step)
    elif isinstance(step, RinseForecast):
        document |= _rinse_document(step)
    return document


def _demineralise_document(step: DemineraliseForecast) -> dict[str, Any]:
    low, middle, high = step.curve_extent
    return {
        "extent_at_end": spread_document(step.extent_at_end),
        "hours_to_target": spread_document(step.hours_to_target),
        "never_reaches_target": number(step.never_reaches_target),
        "bath_spent": [number(spent) for spent in step.bath_spent],
        "bath_changes_h": [number(time) for time in step.change_times],
        "acid_needed_mmol": number(1e3 * step.reagent_needed),
        "acid_held_mmol": number(1e3 * step.reagent_held),
        "carbon_dioxide_mL": number(step.carbon_dioxide),
        "keep_loss_at_end": spread_document(step.keep_loss_at_end),
        "curve": {
            "hours": numbers(step.curve_hours),
            "extent_p05": numbers(low),
            "extent_p50": numbers(middle),
            "extent_p95": numbers(high),
        },
    }


def _rinse_document(step: RinseForecast) -> dict[str, Any]:
    return {
        "carry_over": {name: number(1e3 * amount) for name, amount in step.carry_over.items()},
        "left_share": {name: number(share) for name, share in step.left_share.items()},
        "more_exchanges": dict(step.more_exchanges),
    }


def _digest_document(step: DigestForecast) -> dict[str, Any]:
    curve = step.curve
    return {
        "extent_at_end": spread_document(step.extent_at_end),
        "extent_at_centre": spread_document(step.extent_at_centre),
        "residual_activity_at_end": spread_document(step.residual_activity_at_end),
        "keep_loss_at_end": spread_document(step.keep_loss_at_end),
        "ceiling": spread_document(step.ceiling),
        "dose_at_end": {**spread_document(step.dose_at_end), "unit": step.dose_unit},
        "hours_to_target": spread_document(step.hours_to_target),
        "never_reaches_target": number(step.never_reaches_target),
        "hours_to_keep_limit": spread_document(step.hours_to_keep_limit),
        "window": window_document(step.window),
        "ph_at_temperature": number(step.ph_at_temperature),
        "free_calcium_mM": None if step.free_calcium is None else number(1e3 * step.free_calcium),
        "curve": {
            "hours": numbers(curve.hours),
            "extent_p05": numbers(curve.extent_p05),
            "extent_p50": numbers(curve.extent_p50),
            "extent_p95": numbers(curve.extent_p95),
            "activity_p50": numbers(curve.activity_p50),
            "temperature_c": numbers(curve.temperature_c),
        },
    }


def spread_document(spread: Spread) -> dict[str, float | None]:
    """Return the three percentiles."""
    return {"p05": number(spread.p05), "p50": number(spread.p50), "p95": number(spread.p95)}


def window_document(window: Window) -> dict[str, Any]:
    """Return a window in hours and on the clock."""
    return {
        "opens_h": number(window.opens_h),
        "closes_h": number(window.closes_h),
        "opens": clock(window.opens),
        "closes": clock(window.closes),
    }


def visit_document(chance: VisitChance) -> dict[str, Any]:
    """Return one visit with its chances."""
    return {
        "from": clock(chance.visit.start),
        "to": clock(chance.visit.end),
        "chance_in_time": number(chance.in_time),
        "chance_not_ready": number(chance.not_ready),
        "chance_too_far": number(chance.too_far),
    }


def clock(time: datetime | None) -> str | None:
    """Return a local wall-clock time as ISO 8601 to the second, or None."""
    return None if time is None else time.replace(microsecond=0).isoformat()


def number(value: float | None) -> float | None:
    """Return a plain number without the noise of its last digits; None where it is not finite."""
    if value is None or not math.isfinite(value):
        return None
    return float(f"{value:.{_SIGNIFICANT}g}")


def numbers(values: NDArray[np.float64]) -> list[float | None]:
    """Return an array as plain numbers."""
    return [number(float(value)) for value in values]
