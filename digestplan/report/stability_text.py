"""How an enzyme ages, from its stability data: text and JSON document."""

import math
from collections.abc import Iterator
from typing import Any

from digestplan.lots.shelf_life import BatchShelfLife
from digestplan.lots.stability import StabilityResult
from digestplan.report.as_json import FORMAT, number, numbers
from digestplan.report.lines import wrapped

_DAY = 24.0
_KJ = 1e-3


def stability_document(found: StabilityResult) -> dict[str, Any]:
    """Return what stability data gave, in days, °C and kJ/mol."""
    fit = found.fit.fit
    return {
        "digestplan": FORMAT,
        "temperature_c": number(found.temperature - 273.15),
        "limit": number(found.limit),
        "days_to_limit": number(found.time.hours / _DAY),
        "days_to_limit_lower_95": number(found.time.lower_hours / _DAY),
        "extrapolated": found.time.extrapolated,
        "reference_temperature_c": number(found.fit.reference_temperature - 273.15),
        "estimates": {name: number(fit[name]) for name in fit.names},
        "standard_errors": {name: number(fit.standard_error(name)) for name in fit.names},
        "covariance": [numbers(row) for row in fit.covariance],
        "profile_95": {name: [number(x) for x in pair] for name, pair in found.profile.items()},
        "bends": found.fit.bends,
        "shelf_life_days": None if found.shelf is None else number(found.shelf.time / _DAY),
    }


def stability_text(found: StabilityResult) -> str:
    """Return what stability data gave, in words, at 79 characters."""
    lines = list(_lines(found))
    return "\n".join(wrapped(x, "  ") for x in lines) + "\n"


def _lines(found: StabilityResult) -> Iterator[str]:
    celsius, time = found.temperature - 273.15, found.time
    yield (
        f"At {celsius:.4g} °C {100 * found.limit:.3g} % is left after {_days(time.hours)}; at "
        f"least {_days(time.lower_hours)} (one-sided 95 %)."
    )
    if time.extrapolated:
        yield "note  That temperature lies outside those that were measured."
    if celsius < 0:
        yield "note  Below 0 °C an Arrhenius line bends: it says little there."
    yield from _estimates(found)
    if found.fit.bends:
        yield (
            "care  The logarithm of the activity bends against time: one first-order rate is not "
            "all that happens, and what is told beyond the data is doubtful."
        )
    yield from _shelf(found)


def _estimates(found: StabilityResult) -> Iterator[str]:
    fit, low_high = found.fit.fit, found.profile
    at = found.fit.reference_temperature - 273.15
    low, high = (math.exp(x) * _DAY for x in low_high["log_rate"])
    yield (
        f"Loses {math.exp(fit['log_rate']) * _DAY:.3g} of itself a day at {at:.3g} °C (95 %: "
        f"{low:.3g} to {high:.3g})."
    )
    if "energy" in low_high:
        low, high = (x * _KJ for x in low_high["energy"])
        error = fit.standard_error("energy") * _KJ
        yield (
            f"Activation energy {fit['energy'] * _KJ:.4g} ± {error:.2g} kJ/mol (95 %: "
            f"{low:.4g} to {high:.4g})."
        )
    else:
        yield "One temperature was measured: nothing is known of others."


def _shelf(found: StabilityResult) -> Iterator[str]:
    shelf = found.shelf
    if shelf is None:
        return
    told = f"Shelf life by the rule of ICH Q1E, on the log scale: {_days(shelf.time)}"
    if not isinstance(shelf, BatchShelfLife):
        yield f"{told}."
        return
    tests = shelf.poolability
    which = f"batch {shelf.deciding} decides" if shelf.deciding else "batches are pooled"
    yield (
        f"{told}; {which} (equal slopes p = {tests.slopes_p:.2g}, equal starts p = "
        f"{tests.intercepts_p:.2g}: {tests.decision})."
    )


def _days(hours: float) -> str:
    if math.isinf(hours):
        return "for ever, as far as can be told"
    if hours < 2 * _DAY:
        return f"{hours:.3g} h"
    return f"{hours / _DAY:.3g} d"
