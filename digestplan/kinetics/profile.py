"""Confidence limits from the profile of the likelihood, which need not lie evenly about the fit."""

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.kinetics.fitting import Model, fit_curve
from digestplan.kinetics.linear import Array, Fit, student_quantile

_EXPANSIONS = 30  # widenings by 1.5 of the search before a limit counts as not there


def profile_limits(
    model: Model,
    observed: ArrayLike,
    fit: Fit,
    name: str,
    *,
    level: float = 0.95,
    weights: ArrayLike | None = None,
) -> tuple[float, float]:
    r"""
    Two-sided confidence limits of one parameter, all the others fitted anew at each value [1]_.

    Parameters
    ----------
    model : callable
        The model that was fitted. [any]
    observed : array_like, shape (n_points,)
        What was measured. [any]
    fit : Fit
        Its converged fit. [any]
    name : str
        The parameter wanted. [name]
    level : float
        Confidence, such as 0.95. [1]
    weights : array_like, shape (n_points,), or None
        The weights of the fit. [any]

    Returns
    -------
    lower, upper : float
        The limits; infinite where the data set none on that side. [as the parameter]

    Notes
    -----
    The limits are where :math:`(S(\theta) - S_{min})/s^2 = t^2`, t the Student quantile.

    References
    ----------
    .. [1] D. M. Bates and D. G. Watts, Nonlinear Regression Analysis and Its Applications, 1988,
       section 6.1 (from memory).
    """
    if not fit.converged:
        raise ValueError(f"There is no profile about a fit that is no optimum: {fit.message}.")
    distance = _profile(model, observed, fit, name, weights)
    quantile = student_quantile(0.5 + level / 2, fit.degrees_of_freedom)
    k = fit.names.index(name)
    centre, step = fit.estimates[k], quantile * fit.standard_errors[k]
    lower = _crossing(lambda value: distance(value) - quantile, centre, -step)
    upper = _crossing(lambda value: distance(value) - quantile, centre, step)
    return lower, upper


def _profile(
    model: Model, observed: ArrayLike, fit: Fit, name: str, weights: ArrayLike | None
) -> Callable[[float], float]:
    """Distance from the optimum in residual standard deviations, as a function of the value."""
    k = fit.names.index(name)
    others = np.delete(np.arange(len(fit.names)), k)
    slope = fit.covariance[others, k] / fit.covariance[k, k]
    least = fit.residual_sd**2 * fit.degrees_of_freedom
    y = np.asarray(observed, dtype=float)
    w = np.ones_like(y) if weights is None else np.broadcast_to(weights, y.shape)
    last: dict[str, Array] = {}

    def distance(value: float) -> float:
        def fixed(free: NDArray[Any]) -> NDArray[Any]:
            return model(np.insert(free, k, value))

        if len(others):
            guess = fit.estimates[others] + slope * (value - fit.estimates[k])
            inner = _better_of(fixed, y, w, [guess, *last.values()])
            last["free"] = inner.estimates
            residuals = inner.residuals
        else:
            residuals = y - fixed(np.empty(0))
        excess = float(np.sum(w * residuals**2)) - least
        if excess < -1e-6 * least:
            raise ValueError(f"A better fit than the one given lies at {name} = {value:g}.")
        return float(np.sqrt(max(excess, 0.0))) / fit.residual_sd

    return distance


def _better_of(model: Model, y: Array, w: Array, guesses: list[Array]) -> Fit:
    """Fit from each guess that has a finite prediction, and keep the closest."""
    best: Fit | None = None
    for guess in guesses:
        try:
            found = fit_curve(model, y, guess, weights=w)
        except ValueError:
            continue
        if found.converged:
            return found
        if best is None or found.residual_sd < best.residual_sd:
            best = found
    if best is None:
        raise ValueError("The profile leaves the range in which the model has finite values.")
    return best


def _crossing(beyond: Callable[[float], float], centre: float, step: float) -> float:
    """Where the profile reaches its quantile on one side, or infinity."""
    from scipy.optimize import brentq

    inside, outside = 0.0, 1.0
    for _ in range(_EXPANSIONS):
        try:
            reached = beyond(centre + outside * step) > 0
        except ValueError:  # no finite prediction out there: come back half of the way
            outside = (inside + outside) / 2
            continue
        if reached:
            root = brentq(lambda f: beyond(centre + f * step), inside, outside, xtol=1e-9)
            return float(centre + root * step)
        inside, outside = outside, outside * 1.5
    return float(np.copysign(np.inf, step))
