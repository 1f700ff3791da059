"""What the widgets draw: a forecast put on one clock, as plain numbers."""

from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from digestplan.forecast.result import Forecast

Array = NDArray[np.float64]
_MOST = 24 * 366.0  # [h]


@dataclass(frozen=True, slots=True, eq=False)
class Band:
    """A share on the clock with its 5–95 % band; arrays of shape (n_times,). [h], [1]."""

    hours: Array
    low: Array
    middle: Array
    high: Array


@dataclass(frozen=True, slots=True, eq=False)
class Line:
    """A value on the clock; arrays of shape (n_times,)."""

    hours: Array
    values: Array


@dataclass(frozen=True, slots=True)
class Bar:
    """A stretch of the clock with a name: a step, or a visit. [h]."""

    start: float
    end: float
    name: str


@dataclass(frozen=True, slots=True, eq=False)
class Picture:
    """
    A plan's forecast on one clock; all hours count from the plan's start.

    Attributes
    ----------
    start
        On the wall clock; None where the plan has no clock.
    end
        Of the last step or visit. [h]
    extents
        Of the matrix that is digested, a band a step.
    minerals
        Of the mineral that is dissolved, likewise.
    activity
        Share of the enzyme that is still active, a line a step.
    temperature
        Line of the bath. [°C]
    target
        The extent that is wanted.
    ready, too_far
        The window; None where it does not open or close. [h]
    steps, visits
        Bars.
    """

    start: datetime | None
    end: float
    extents: tuple[Band, ...]
    minerals: tuple[Band, ...]
    activity: tuple[Line, ...]
    temperature: Line
    target: float
    ready: float | None
    too_far: float | None
    steps: tuple[Bar, ...]
    visits: tuple[Bar, ...]

    def clock(self, hours: float) -> datetime | None:
        """Return the wall-clock time so many hours after the start."""
        if self.start is None or abs(hours) > 100 * _MOST:
            return None
        return self.start + timedelta(hours=hours)

    @property
    def digests(self) -> tuple[float, float] | None:
        """From the start of the first digestion to the end of the last; None without one. [h]."""
        bars = [bar for bar in self.steps if bar.name == "digest"]
        return (bars[0].start, bars[-1].end) if bars else None


def picture_of(forecast: "Forecast") -> Picture:
    """Put a finished forecast on one clock."""
    from digestplan.forecast.result import DemineraliseForecast, DigestForecast

    plan = forecast.plan
    digests = [s for s in forecast.steps if isinstance(s, DigestForecast)]
    baths = [s for s in forecast.steps if isinstance(s, DemineraliseForecast)]
    steps = tuple(Bar(s.start_h, s.start_h + s.hours, s.do) for s in forecast.steps)
    visits = _visits(forecast)
    window = forecast.window
    return Picture(
        start=plan.start,
        end=max([bar.end for bar in (*steps, *visits)], default=1.0) or 1.0,
        extents=tuple(
            Band(s.start_h + c.hours, c.extent_p05, c.extent_p50, c.extent_p95)
            for s in digests
            for c in [s.curve]
        ),
        minerals=tuple(Band(s.start_h + s.curve_hours, *s.curve_extent) for s in baths),
        activity=tuple(Line(s.start_h + s.curve.hours, s.curve.activity_p50) for s in digests),
        temperature=_temperature(forecast),
        target=plan.sample.target_extent.quantity.value,
        ready=window.opens_h,
        too_far=window.closes_h if window.closes_h is None or window.closes_h < _MOST else None,
        steps=steps,
        visits=visits,
    )


def _visits(forecast: "Forecast") -> tuple[Bar, ...]:
    from digestplan.report.words import percent

    start = forecast.plan.start
    if start is None:
        return ()
    hour = timedelta(hours=1)
    return tuple(
        Bar((v.visit.start - start) / hour, (v.visit.end - start) / hour, percent(v.in_time))
        for v in forecast.visits
    )


def _temperature(forecast: "Forecast") -> Line:
    """Return the bath's temperature over all steps, from curves or from the plan."""
    from digestplan.forecast.result import DigestForecast
    from digestplan.plan.model import Demineralise, Rinse, Stop

    hours: list[float] = []
    celsius: list[float] = []
    for result in forecast.steps:
        step = forecast.plan.steps[result.index]
        if isinstance(result, DigestForecast) and len(result.curve.hours):
            hours += (result.start_h + result.curve.hours).tolist()
            celsius += result.curve.temperature_c.tolist()
            continue
        value = None
        if isinstance(step, Rinse | Stop):
            value = step.temperature
        elif isinstance(step, Demineralise) and step.programme:
            value = step.programme[0].temperature
        at = value.quantity.value - 273.15 if value is not None else (celsius or [20.0])[-1]
        hours += [result.start_h, result.start_h + result.hours]
        celsius += [at, at]
    return Line(np.array(hours), np.array(celsius))
