"""The initial rate of a trace: of its straight stretch, or at the start of a curve.

A trace that bends is told, and the slope over all of its readings is never its initial rate.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.kinetics.linear import Fit, fit_line, fit_linear, student_quantile
from digestplan.problems import InputError, Problem

Array = NDArray[np.float64]
Shape = Literal["straight", "straight, then bent", "bent", "straight after a lag"]

LEAST = 5  # readings in which a bend can be seen
_BENDS = 0.01  # two-sided level at which a whole trace counts as bending
_FEW, _FEW_BEND = 10, 0.05  # with fewer readings than that, a bend is harder to see
_STRAIGHT = 0.05  # level at which what follows a lag may count as straight
_CHORD = 0.95  # chord over tangent down to which a curve counts as straight
_LEADING = 4  # readings, at least, of a straight stretch before a break


@dataclass(frozen=True, slots=True)
class InitialRate:
    """The initial rate of one trace.

    Attributes
    ----------
    rate, standard_error
        Change of absorbance; the error holds that of the choice of a curve. [1/h]
    degrees_of_freedom
        Those of the residuals.
    shape
        What the trace looks like.
    from_hours, to_hours
        The straight stretch: readings on one line or, of a curve, as far as its chord stays
        within 5 % of the tangent at its start. [h]
    n_readings
        How many readings lie in it.
    bends
        Whether the whole trace bends.
    bend_t
        Student's t of the quadratic term over the whole trace; NaN with fewer than 5 readings.
    notes
        What to know of it, in words.
    """

    rate: float
    standard_error: float
    degrees_of_freedom: int
    shape: Shape
    from_hours: float
    to_hours: float
    n_readings: int
    bends: bool
    bend_t: float
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class _Curve:
    """One way to read a bending trace: slope at its start, and how well it fits."""

    slope: float
    error: float
    freedom: int
    straight_until: float
    sum_of_squares: float
    n_parameters: int
    shape: Shape


def initial_rate(hours: ArrayLike, absorbance: ArrayLike, *, name: str = "") -> InitialRate:
    """
    Find the initial rate of a trace.

    Parameters
    ----------
    hours
        Times of the readings, shape (n_readings,). [h]
    absorbance
        The readings, shape (n_readings,). [1]
    name
        What to call the trace in messages.

    Returns
    -------
    rate
        Slope of the straight trace; of a bending one the slope at its start, or, if it starts
        slowly, that of the straight stretch after the lag.

    Notes
    -----
    A trace bends where the quadratic term of a parabola through all of its readings is
    significant at 1 % (5 % with fewer than ten readings). It is then read as a parabola, a cubic,
    a first-order approach to a plateau, and a straight line that breaks; the slopes at the start
    are averaged by their Akaike weights, and their differences are part of the standard error
    [1]_.

    References
    ----------
    .. [1] K. P. Burnham and D. R. Anderson, Model Selection and Multimodel Inference, 2002 (from
       memory).
    """
    t, y = np.asarray(hours, dtype=float), np.asarray(absorbance, dtype=float)
    order = np.argsort(t, kind="stable")
    t, y = t[order], y[order]
    n_times = len(np.unique(t))
    if n_times < 3:
        message = "at least three readings at different times are needed for a rate"
        raise InputError(Problem(name, message))
    if n_times < LEAST:
        note = f"{len(t)} readings are too few to see whether the trace bends"
        return _straight(t, y, "straight", np.nan, (note,))
    bend_t, significant = _bend(t, y, _BENDS if n_times >= _FEW else _FEW_BEND)
    if not significant:
        return _straight(t, y, "straight", bend_t)
    speeds_up = bend_t * fit_line(t, y)["slope"] > 0
    rate = _after_lag(t, y, bend_t) if speeds_up else _of_curves(t, y, bend_t)
    if rate is None:
        message = (
            "the trace bends and no initial rate can be read from it: "
            "read at shorter intervals, or dilute the enzyme"
        )
        raise InputError(Problem(name, message))
    return rate


def _straight(
    t: Array, y: Array, shape: Shape, bend_t: float, notes: tuple[str, ...] = ()
) -> InitialRate:
    line = fit_line(t, y)
    return InitialRate(
        line["slope"],
        line.standard_error("slope"),
        line.degrees_of_freedom,
        shape,
        float(t[0]),
        float(t[-1]),
        len(t),
        bends=shape != "straight",
        bend_t=bend_t,
        notes=notes,
    )


def _after_lag(t: Array, y: Array, bend_t: float) -> InitialRate | None:
    for first in range(1, len(t) - LEAST + 1):
        rest, values = t[first:], y[first:]
        if len(np.unique(rest)) < LEAST:
            return None
        _, tangent, bend = _polynomial_fit(rest, values, 2).estimates
        slight = abs(bend) <= (1 - _CHORD) / 2 * abs(tangent)
        if slight or not _bend(rest, values, _STRAIGHT)[1]:
            note = "the trace starts slowly: the rate is that of the straight stretch after it"
            return _straight(rest, values, "straight after a lag", bend_t, (note,))
    return None


def _of_curves(t: Array, y: Array, bend_t: float) -> InitialRate | None:
    n = len(t)
    curves = [c for c in _curves(t, y) if n - c.n_parameters - 2 > 0]
    if not curves:
        return None
    scores = np.array([_akaike(c, n, float(np.ptp(y))) for c in curves])
    weights = np.exp(-(scores - scores.min()) / 2)
    weights /= weights.sum()
    slopes = np.array([c.slope for c in curves])
    errors = np.array([c.error for c in curves])
    mean = float(weights @ slopes)
    best = curves[int(np.argmax(weights))]
    what = {
        "bent": "the trace bends from its first reading: the rate is the slope there",
        "straight, then bent": "the trace bends: the rate is that of its straight beginning",
    }
    return InitialRate(
        mean,
        float(np.sqrt(weights @ (errors**2 + (slopes - mean) ** 2))),
        best.freedom,
        best.shape,
        float(t[0]),
        best.straight_until,
        int(np.count_nonzero(t <= best.straight_until)),
        bends=True,
        bend_t=bend_t,
        notes=(what[best.shape],),
    )


def _akaike(curve: _Curve, n: int, size: float) -> float:
    """Akaike's criterion for small samples; exact readings count as good to a millionth."""
    mean_square = max(curve.sum_of_squares / n, (1e-6 * size) ** 2)
    p = curve.n_parameters + 1  # and the variance
    return float(n * np.log(mean_square) + 2 * p + 2 * p * (p + 1) / (n - p - 1))


# -- four ways to read a bending trace ------------------------------------------------------


def _curves(t: Array, y: Array) -> list[_Curve]:
    n_times = len(np.unique(t))
    found = [_polynomial(t, y, degree) for degree in (2, 3) if n_times > degree + 2]
    if n_times > 4:
        found.append(_approach(t, y))
    if n_times > _LEADING + 2:
        found.append(_broken(t, y))
    return found


def _unit(t: Array) -> Array:
    unit: Array = (t - t[0]) / np.ptp(t)
    return unit


def _polynomial_fit(t: Array, y: Array, degree: int) -> Fit:
    return fit_linear(_unit(t)[:, None] ** np.arange(degree + 1), y)


def _bend(t: Array, y: Array, level: float) -> tuple[float, bool]:
    """Student's t of the quadratic term, and whether it is more than chance."""
    fit = _polynomial_fit(t, y, 2)
    value, error = fit.estimates[-1], fit.standard_errors[-1]
    if abs(value) <= 1e-9 * np.ptp(y):  # exact readings: rounding is no bend
        return 0.0, False
    bend_t = float(value / error) if error > 0 else float(np.copysign(np.inf, value))
    return bend_t, abs(bend_t) > student_quantile(1 - level / 2, fit.degrees_of_freedom)


def _polynomial(t: Array, y: Array, degree: int) -> _Curve:
    fit = _polynomial_fit(t, y, degree)
    u = np.linspace(0, 1, 200)[1:]
    chord = (u[:, None] ** np.arange(degree)) @ fit.estimates[1:]
    return _curve(t, fit, chord / fit.estimates[1], degree + 1, "bent")


def _approach(t: Array, y: Array) -> _Curve:
    """First-order approach to a plateau; its rate constant by search, then one step."""
    u = _unit(t)

    def columns(k: float) -> Array:
        return np.column_stack([np.ones_like(u), -np.expm1(-k * u) / k])

    def misfit(k: float) -> float:
        fit = fit_linear(columns(k), y)
        return fit.residual_sd**2 * fit.degrees_of_freedom

    grid = np.geomspace(0.02, 50.0, 40)
    k = float(grid[int(np.argmin([misfit(float(g)) for g in grid]))])
    for factor in (1.2, 1.05, 1.01):
        finer = k * np.geomspace(1 / factor, factor, 5)
        k = float(finer[int(np.argmin([misfit(float(g)) for g in finer]))])
    slope = fit_linear(columns(k), y).estimates[1]
    by_rate = slope * (np.exp(-k * u) * u / k + np.expm1(-k * u) / k**2)
    fit = fit_linear(np.column_stack([columns(k), by_rate]), y)
    at = np.linspace(0, 1, 200)[1:]
    return _curve(t, fit, -np.expm1(-k * at) / (k * at), 3, "bent")


def _curve(t: Array, fit: Fit, chord: Array, n_parameters: int, shape: Shape) -> _Curve:
    """From a fit in unit time whose second estimate is the slope at the start."""
    span = float(np.ptp(t))
    left = np.flatnonzero(~(chord >= _CHORD))
    until = left[0] / len(chord) if len(left) else 1.0
    return _Curve(
        float(fit.estimates[1] / span),
        float(fit.standard_errors[1] / span),
        fit.degrees_of_freedom,
        float(t[0] + until * span),
        fit.residual_sd**2 * fit.degrees_of_freedom,
        n_parameters,
        shape,
    )


def _broken(t: Array, y: Array) -> _Curve:
    """Two straight lines that meet; the slope is that of the readings before they do."""
    breaks = np.unique(t)[_LEADING - 1 : -2]
    best: tuple[float, float] | None = None
    for at in np.concatenate([breaks, (breaks[1:] + breaks[:-1]) / 2]):
        columns = np.column_stack([np.ones_like(t), t - t[0], np.maximum(t - at, 0)])
        fit = fit_linear(columns, y)
        misfit = fit.residual_sd**2 * fit.degrees_of_freedom
        if best is None or misfit < best[0]:
            best = misfit, float(at)
    assert best is not None
    leading = t <= best[1]
    line = fit_line(t[leading], y[leading])
    return _Curve(
        line["slope"],
        line.standard_error("slope"),
        line.degrees_of_freedom,
        float(t[leading][-1]),
        best[0],
        4,
        "straight, then bent",
    )
