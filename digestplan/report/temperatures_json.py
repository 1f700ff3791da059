"""A plan at several temperatures as the JSON document that scripts rely on."""

from typing import Any

from digestplan.forecast.temperatures import Comparison, FineCurve, Option
from digestplan.report.as_json import (
    FORMAT,
    number,
    numbers,
    spread_document,
    window_document,
)
from digestplan.report.limit_words import limit_of

_CELSIUS = 273.15


def temperatures_document(comparison: Comparison) -> dict[str, Any]:
    """Return a comparison of temperatures as the interface's document."""
    plan, main = comparison.plan, comparison.main
    return {
        "digestplan": FORMAT,
        "title": plan.title,
        "draws": comparison.n_draws,
        "seed": comparison.seed,
        "confidence": plan.confidence,
        "set": {"step": main.index, "temperature_c": celsius(main.temperature)},
        "options": [option_document(option) for option in comparison.options],
        "best_by_chance_c": celsius(comparison.best_by_chance),
        "best_by_harm_c": celsius(comparison.best_by_harm),
        "curve": None if comparison.curve is None else _curve(comparison.curve),
    }


def option_document(option: Option) -> dict[str, Any]:
    """Return one temperature."""
    missed, visit = option.missed, option.keep_loss_at_visit
    return {
        "temperature_c": celsius(option.temperature),
        "hours_to_target": spread_document(option.hours_to_target),
        "never_reaches_target": number(option.never_reaches_target),
        "residual_activity_at_target": spread_document(option.residual_activity_at_target),
        "ceiling": spread_document(option.ceiling),
        "window": window_document(option.window),
        "window_width_h": _width(option),
        "charge_for_visit_mg": _milligrams(option.charge_for_visit),
        "chance_in_time": number(option.chance_in_time),
        "keep_loss_at_target": spread_document(option.keep_loss_at_target),
        "keep_loss_at_visit": None if visit is None else spread_document(visit),
        "ph_at_temperature": number(option.ph),
        "in_measured_range": option.measured,
        "not_in_time": {
            "dies": number(missed.dies),
            "slow": number(missed.slow),
            "melts": number(missed.melts),
            "too_soon": number(missed.too_soon),
        },
        "limit": limit_of(missed, visits=option.chance_in_time is not None),
    }


def celsius(temperature: float | None) -> float | None:
    """Return a temperature [K] in degrees Celsius."""
    return None if temperature is None else number(round(temperature - _CELSIUS, 9))


def _milligrams(grams: float | None) -> float | None:
    return None if grams is None else number(1e3 * grams)


def _width(option: Option) -> float | None:
    opens, closes = option.window.opens_h, option.window.closes_h
    return None if opens is None or closes is None else number(closes - opens)


def _curve(curve: FineCurve) -> dict[str, Any]:
    return {
        "temperature_c": [celsius(float(t)) for t in curve.temperature],
        "hours_to_target_p50": numbers(curve.hours_p50),
        "chance_in_time": numbers(curve.chance_in_time),
        "keep_loss_p50": numbers(curve.harm),
    }
