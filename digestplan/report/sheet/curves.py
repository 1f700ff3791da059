"""From a forecast to the charts of its sheet."""

from collections.abc import Sequence
from datetime import timedelta

import numpy as np

from digestplan.forecast.result import DemineraliseForecast, DigestForecast, Forecast
from digestplan.plan.model import Demineralise, Stretch
from digestplan.report import words
from digestplan.report.sheet.model import Chart

_END_POINT = 0.95  # of the mineral, by common practice


def charts(told: Forecast) -> tuple[Chart, ...]:
    """
    Return the charts of a forecast.

    Parameters
    ----------
    told
        The finished forecast.

    Returns
    -------
    charts
        One for each demineralisation, and one for all that the enzyme does.
    """
    dissolving = [s for s in told.steps if isinstance(s, DemineraliseForecast)]
    digesting = [s for s in told.steps if isinstance(s, DigestForecast)]
    found = [_mineral(told, step) for step in dissolving]
    if digesting:
        found.append(_matrix(told, digesting))
    return tuple(found)


def _matrix(told: Forecast, steps: Sequence[DigestForecast]) -> Chart:
    curves = [(step.start_h, step.curve) for step in steps]
    hours, low, middle, high = (
        np.concatenate(parts)
        for parts in zip(
            *((at + c.hours, c.extent_p05, c.extent_p50, c.extent_p95) for at, c in curves),
            strict=True,
        )
    )
    celsius = np.concatenate([curve.temperature_c for _, curve in curves])
    plan = told.plan
    target = plan.sample.target_extent.quantity.value
    return Chart(
        caption="Extent: fraction of the matrix that is gone",
        start=plan.start,
        hours=_tuple(hours),
        low=_tuple(low),
        middle=_tuple(middle),
        high=_tuple(high),
        target=target,
        target_name=f"target {words.percent(target)}",
        temperature_hours=_tuple(hours),
        celsius=_tuple(celsius),
        opens=told.window.opens_h,
        closes=told.window.closes_h,
        visits=_visits(told),
        sure="" if told.n_draws == 1 else f"{words.percent(plan.confidence)} sure",
    )


def _mineral(told: Forecast, step: DemineraliseForecast) -> Chart:
    written = told.plan.steps[step.index]
    assert isinstance(written, Demineralise)
    low, middle, high = step.curve_extent
    hours, celsius = _programme(written.programme)
    return Chart(
        caption=f"Step {step.index + 1}: fraction of the mineral that is gone",
        start=told.plan.start,
        hours=_tuple(step.start_h + step.curve_hours),
        low=_tuple(low),
        middle=_tuple(middle),
        high=_tuple(high),
        target=_END_POINT,
        target_name=f"end-point {words.percent(_END_POINT)}",
        temperature_hours=tuple(step.start_h + hour for hour in hours),
        celsius=celsius,
        opens=None,
        closes=None,
        visits=_visits(told),
        sure="",
        low_drawn=True,
    )


def _programme(programme: Sequence[Stretch]) -> tuple[tuple[float, ...], tuple[float, ...]]:
    hours: list[float] = []
    celsius: list[float] = []
    at = 0.0
    for stretch in programme:
        here = stretch.temperature.quantity.value - 273.15
        if not stretch.ramp or not celsius:
            hours.append(at)
            celsius.append(here)
        at += stretch.hours
        hours.append(at)
        celsius.append(here)
    return tuple(hours), tuple(celsius)


def _visits(told: Forecast) -> tuple[tuple[float, float], ...]:
    start = told.plan.start
    if start is None:
        return ()
    hour = timedelta(hours=1)
    return tuple(
        ((visit.start - start) / hour, (visit.end - start) / hour) for visit in told.plan.visits
    )


def _tuple(values: "np.ndarray[tuple[int], np.dtype[np.float64]]") -> tuple[float, ...]:
    return tuple(float(value) for value in values)
