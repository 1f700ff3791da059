"""The values that the forecast rests on, and who says so."""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import fields, is_dataclass
from itertools import groupby
from typing import Any

from digestplan.forecast.library_values import GENERAL, treatment_values
from digestplan.forecast.result import Forecast, RinseForecast
from digestplan.plan.model import Demineralise, Plan, Value
from digestplan.report.sheet.typed import short, value_text

_SAYS = {"plan": "Written in the plan", "lot": "From the lot", "default": "Left open, so taken as"}
_UNKNOWN = {"sample.wet_mass", "sample.substrate_fraction"}  # a default of these says nothing


def assumptions(forecast: Forecast) -> tuple[tuple[str, str], ...]:
    """
    Return the values that entered a forecast, gathered by where they come from.

    Parameters
    ----------
    forecast
        The finished forecast.

    Returns
    -------
    rows
        Where they come from, and the values, those of the library each with its source: the
        plan's own first. What is done at the bench, and stands on the sheet as such, is not
        repeated.
    """
    gathered: dict[str, list[Value]] = {says: [] for says in _SAYS.values()}
    for value in _values(forecast):
        gathered.setdefault(_where(value), []).append(value)
    rows = [(where, _told(values)) for where, values in gathered.items() if values]
    return (*rows, *_laws(forecast.plan))


def _values(forecast: Forecast) -> Iterator[Value]:
    plan = forecast.plan
    for value in _found((plan.sample, plan.lot, plan.enzyme)):
        if not (value.origin == "default" and value.place in _UNKNOWN):
            yield value
    yield from (value for value in treatment_values(plan) if _matters(value, forecast))


def _found(record: Any) -> Iterator[Value]:
    if isinstance(record, Value):
        yield record
        return
    parts: Iterable[Any] = ()
    if isinstance(record, Mapping):
        parts = record.values()
    elif isinstance(record, tuple):
        parts = record
    elif is_dataclass(record):
        parts = [getattr(record, field.name) for field in fields(record)]
    for part in parts:
        yield from _found(part)


def _matters(value: Value, forecast: Forecast) -> bool:
    """Whether a constant of the library is of something that this plan has to do with."""
    key = value.place.split(".")[1]
    used = {step.reagent for step in forecast.plan.steps if isinstance(step, Demineralise)}
    used |= {GENERAL, forecast.plan.sample.material or ""}
    for step in forecast.steps:
        if isinstance(step, RinseForecast):
            used |= set(step.carry_over)
    return key in used


def _where(value: Value) -> str:
    if value.origin in _SAYS:
        return _SAYS[value.origin]
    what = value.place.split(".")[0]
    return {"enzyme": "Library, enzyme", "library": "Library, treatment"}.get(
        what, "Library, piece"
    )


def _told(values: list[Value]) -> str:
    """Values in a row; those of the library that follow one another share their source."""
    parts = []
    for source, group in groupby(values, key=lambda value: value.source):
        together = list(group)
        told = "; ".join(dict.fromkeys(f"{_name(v)} {value_text(v)}" for v in together))
        ours = together[0].origin in _SAYS
        parts.append(told if ours else f"{told} [{short(source, 200)}]")
    return "; ".join(parts)


def _name(value: Value) -> str:
    parts = value.place.split(".")
    if parts[0] in {"library", "sample", "enzyme"} and len(parts) > 1:
        parts = parts[1:]
    return short(": ".join(part.replace("_", " ") for part in parts))


def _laws(plan: Plan) -> Iterator[tuple[str, str]]:
    sample, enzyme = plan.sample, plan.enzyme
    laws = f"extent {sample.law}; rate {enzyme.rate_law}; inactivation {enzyme.inactivation}"
    yield "Laws", short(laws.replace("_", " "), 200)
    for remark in plan.remarks:
        yield "As the plan was read", short(remark, 400)
