"""End-point assays against a standard curve: a weighted line, read backwards with its interval."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.kinetics.linear import Fit, fit_line, fit_linear, student_quantile
from digestplan.lots.uncertainty import Measured, Result, propagate
from digestplan.problems import InputError, Problem

Array = NDArray[np.float64]

_BENDS = 0.01


@dataclass(frozen=True, slots=True, eq=False)
class StandardCurve:
    """A line through standards.

    Attributes
    ----------
    line
        Signal against amount.
    lowest, highest
        Range of the standards. [as the amounts]
    bends
        Whether a parabola would fit clearly better: then the line is not to be used to its end.
    """

    line: Fit
    lowest: float
    highest: float
    bends: bool


@dataclass(frozen=True, slots=True)
class InversePrediction:
    """The amount behind a signal.

    Attributes
    ----------
    amount, standard_error
        The amount, and its standard error by first-order propagation.
    lower, upper
        Fieller's confidence limits, which need not lie evenly about the amount.
    degrees_of_freedom
        Of the pooled residual variance.
    outside
        Whether the amount lies outside the standards.
    """

    amount: float
    standard_error: float
    lower: float
    upper: float
    degrees_of_freedom: int
    outside: bool

    def measured(self) -> Measured:
        """The amount with its standard error, for `end_point_activity`."""
        return Measured(self.amount, self.standard_error, self.degrees_of_freedom)


@dataclass(frozen=True, slots=True)
class AmountDefinition:
    """A unit defined by an amount of product in a time.

    1 CDU, say: 1.0 µmol in 5 h; 1 U: 1 µmol in 1 min.

    Attributes
    ----------
    amount
        What one unit makes. [mol]
    hours
        In this time. [h]
    """

    amount: float
    hours: float


def fit_standard_curve(
    amount: ArrayLike, signal: ArrayLike, weights: ArrayLike | None = None
) -> StandardCurve:
    """
    Fit the line through the standards.

    Parameters
    ----------
    amount
        Amounts of the standards, shape (n_points,). [any]
    signal
        Their signals, shape (n_points,). [any]
    weights
        One over the variance of each signal up to a common factor, or None for all alike.

    Returns
    -------
    curve
        The line, its range, and whether it bends.
    """
    x, y = np.asarray(amount, dtype=float), np.asarray(signal, dtype=float)
    if len(np.unique(x)) < 2 or len(x) < 3:
        message = "a standard curve needs three standards or more, at two amounts or more"
        raise InputError(Problem("standards", message))
    line = fit_line(x, y, weights)
    bends = False
    if len(np.unique(x)) >= 3 and len(x) >= 5:
        u = (x - x.mean()) / np.ptp(x)
        curve = fit_linear(u[:, None] ** np.arange(3), y, weights)
        bend, error = curve.estimates[2], curve.standard_errors[2]
        beyond = student_quantile(1 - _BENDS / 2, curve.degrees_of_freedom) * error
        bends = bool(abs(bend) > max(beyond, 1e-9 * np.ptp(y)))
    return StandardCurve(line, float(x.min()), float(x.max()), bends)


def inverse_prediction(
    curve: StandardCurve, signals: ArrayLike, *, weight: float = 1.0, level: float = 0.95
) -> InversePrediction:
    """
    Read the amount behind a signal, measured once or several times.

    Parameters
    ----------
    curve
        The standard curve.
    signals
        Signals of the unknown, shape (n_repeats,). [as the curve's]
    weight
        Weight of one signal, on the scale of the curve's weights.
    level
        Confidence of the limits.

    Returns
    -------
    prediction
        Amount, standard error and limits.

    Notes
    -----
    The scatter of the repeats is pooled with that of the standards.

    References
    ----------
    E. C. Fieller, J. R. Stat. Soc. B 16, 175, 1954; N. R. Draper and H. Smith, Applied
    Regression Analysis, 3rd ed., 1998, section 3.2 (both from memory).
    """
    y = np.atleast_1d(np.asarray(signals, dtype=float))
    line, n = curve.line, len(y)
    freedom = line.degrees_of_freedom + n - 1
    rest = line.degrees_of_freedom * line.residual_sd**2
    variance = (rest + weight * float(np.sum((y - y.mean()) ** 2))) / freedom
    if line.residual_sd > 0:
        v = line.covariance * (variance / line.residual_sd**2)
    else:
        v = line.covariance
    of_signal = variance / (n * weight)
    intercept, slope = line.estimates
    above = float(y.mean() - intercept)
    t = student_quantile(0.5 + level / 2, freedom)
    a = slope**2 - t**2 * v[1, 1]
    if not a > 0:
        message = "the slope cannot be told from nothing: no amount can be read from this curve"
        raise InputError(Problem("standards", message))
    b = slope * above + t**2 * v[0, 1]
    c = above**2 - t**2 * (v[0, 0] + of_signal)
    root = float(np.sqrt(max(b * b - a * c, 0.0)))
    amount = above / slope
    at = np.array([1.0, amount])
    error = float(np.sqrt(of_signal + at @ v @ at) / abs(slope))
    outside = not curve.lowest <= amount <= curve.highest
    return InversePrediction(
        float(amount), error, float((b - root) / a), float((b + root) / a), freedom, outside
    )


def end_point_activity(
    amount: Measured,
    blank: Measured,
    hours: Measured,
    sample_volume: Measured,
    definition: AmountDefinition,
    dilution: Measured | None = None,
) -> Result:
    """
    Activity from the amount that an end-point assay made.

    Parameters
    ----------
    amount, blank
        Product in the sample and in the blank. [mol]
    hours
        How long the assay ran. [h]
    sample_volume
        Of diluted enzyme in it. [mL]
    definition
        Of the unit.
    dilution
        How many times the stock was diluted before; none if None.

    Returns
    -------
    activity
        Of the stock, with its budget. [unit/mL]

    Notes
    -----
    Product must grow in proportion to time for as long as the assay runs.
    """

    def formula(v: Mapping[str, Any]) -> Any:
        made = (v["amount"] - v["blank"]) / definition.amount
        return made * definition.hours / v["hours"] / v["sample volume"] * v["dilution"]

    inputs = {
        "amount": amount,
        "blank": blank,
        "hours": hours,
        "sample volume": sample_volume,
        "dilution": dilution or Measured(1.0),
    }
    for name in ("hours", "sample volume", "dilution"):
        if not inputs[name].value > 0:
            raise InputError(Problem(name.replace(" ", "_"), "must be above zero"))
    return propagate(formula, inputs)
