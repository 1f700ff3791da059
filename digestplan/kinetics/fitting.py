"""Nonlinear least-squares fits with exact derivatives and a convergence check of their own.

A curve's model is a function of its parameters alone, written with numpy operations that also
take complex numbers: the derivatives are then exact (complex step), and a fit that has stopped
is not thereby one that has arrived; `Fit.converged` says which.
"""

from collections.abc import Callable, Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.kinetics.linear import (
    Array,
    Fit,
    describe,
    least_squares_step,
    rooted,
)

Model = Callable[[NDArray[Any]], NDArray[Any]]

_STEP = 1e-50  # imaginary step; its square vanishes in doubles, so the derivative is exact


def fit_curve(
    model: Model,
    observed: ArrayLike,
    start: ArrayLike,
    *,
    weights: ArrayLike | None = None,
    names: Sequence[str] = (),
    jacobian: Model | None = None,
    n_starts: int = 1,
) -> Fit:
    """
    Fit a curve by weighted nonlinear least squares [1]_.

    Parameters
    ----------
    model : callable
        From parameters, shape (n_parameters,), to predictions, shape (n_points,). [any]
    observed : array_like, shape (n_points,)
        What was measured. [any]
    start : array_like, shape (n_parameters,)
        Where to begin. [any]
    weights : array_like, shape (n_points,), or None
        Weights, as one over the variance up to a common factor. [any]
    names : sequence of str
        Names of the parameters; ``b1``, ``b2`` … where none are given. [name]
    jacobian : callable or None
        From parameters to derivatives, shape (n_points, n_parameters); by complex step where
        None. [any]
    n_starts : int
        How many starts to try: the one given, and others spread about it by factors of up to
        30 either way. The best that converged is returned. [1]

    Returns
    -------
    fit : Fit
        The best fit found; look at its ``converged``. [any]

    Notes
    -----
    Arrived means that the residuals have no component along the tangent of the model that
    exceeds a millionth of their size across it (relative offset [2]_), and that this tangent
    has full rank.

    References
    ----------
    .. [1] J. J. Moré, The Levenberg-Marquardt algorithm, 1978 (from memory).
    .. [2] D. M. Bates and D. G. Watts, Technometrics 23, 179, 1981 (from memory).
    """
    y, root = rooted(observed, weights)
    derivative = jacobian or complex_step(model)
    best: tuple[bool, float, Array] | None = None
    for trial in _starts(np.asarray(start, dtype=float), n_starts):
        parameters = _descend(model, derivative, y, root, trial)
        if parameters is None:
            continue
        fit = _fit_at(model, derivative, y, root, parameters, names)
        sum_of_squares = fit.residual_sd**2 * fit.degrees_of_freedom
        if best is None or (not fit.converged, sum_of_squares) < best[:2]:
            best = (not fit.converged, sum_of_squares, parameters)
    if best is None:
        raise ValueError("The model gives no finite prediction at any of the starts.")
    return _fit_at(model, derivative, y, root, best[2], names)


def complex_step(model: Model) -> Model:
    """
    Return the exact derivative of a model that takes complex parameters [1]_.

    Parameters
    ----------
    model : callable
        From parameters, shape (n_parameters,), to predictions, shape (n_points,). [any]

    Returns
    -------
    jacobian : callable
        From parameters to derivatives, shape (n_points, n_parameters). [any]

    References
    ----------
    .. [1] W. Squire and G. Trapp, SIAM Rev. 40, 110, 1998 (from memory).
    """

    def jacobian(parameters: NDArray[Any]) -> Array:
        columns = []
        for k in range(len(parameters)):
            stepped = parameters.astype(complex)
            stepped[k] += 1j * _STEP
            predicted = model(stepped)
            if not np.iscomplexobj(predicted):
                raise TypeError("The model drops complex numbers: give its jacobian.")
            columns.append(predicted.imag / _STEP)
        return np.column_stack(columns)

    return jacobian


def _starts(start: Array, n_starts: int) -> Array:
    """The start itself, then others around it: an additive recurrence, the same each time."""
    n = len(start)
    golden = 1.5
    for _ in range(30):  # the root of x^(n+1) = x + 1 makes the recurrence even in n dimensions
        golden = (1 + golden) ** (1 / (n + 1))
    steps = golden ** -np.arange(1.0, n + 1)
    unit = (np.arange(n_starts)[:, None] * steps) % 1.0  # row 0 is 0: the start as given
    unit = np.where(unit > 0.5, unit - 1.0, unit)
    factors = np.exp(2 * np.log(30.0) * unit)
    spread: Array = np.where(start == 0, 2 * unit, start * factors)
    return spread


def _descend(model: Model, derivative: Model, y: Array, root: Array, start: Array) -> Array | None:
    from scipy.optimize import least_squares

    with np.errstate(all="ignore"):
        first = np.concatenate([model(start), derivative(start).ravel()])
        if not np.all(np.isfinite(first)):
            return None
        found = least_squares(
            lambda p: root * (model(p) - y),
            start,
            jac=lambda p: _finite(root[:, None] * derivative(p)),
            method="trf",
            x_scale="jac",
            ftol=1e-15,
            xtol=1e-15,
            gtol=1e-15,
            max_nfev=2000,
        )
        return _polish(model, derivative, y, root, np.asarray(found.x))


def _finite(derivatives: Array) -> Array:
    """Overflow far away from the data must not stop the search: its columns say nothing."""
    return np.nan_to_num(derivatives, nan=0.0, posinf=0.0, neginf=0.0)


def _polish(model: Model, derivative: Model, y: Array, root: Array, at: Array) -> Array:
    """Gauss-Newton steps down to rounding, as long as each brings the optimum nearer."""
    offset, step = _offset_and_step(model, derivative, y, root, at)
    for _ in range(20):
        trial = at + step
        reached, following = _offset_and_step(model, derivative, y, root, trial)
        if not reached < offset:
            break
        at, offset, step = trial, reached, following
    return at


def _offset_and_step(
    model: Model, derivative: Model, y: Array, root: Array, at: Array
) -> tuple[float, Array]:
    """Relative offset of Bates and Watts, and the Gauss-Newton step that would mend it."""
    residuals = root * (y - model(at))
    tangent = root[:, None] * derivative(at)
    if not (np.all(np.isfinite(residuals)) and np.all(np.isfinite(tangent))):
        return np.inf, np.zeros_like(at)
    step = least_squares_step(tangent, residuals)
    along = tangent @ step
    n, p = tangent.shape
    rounding = 1e-13 * np.linalg.norm(root * y)
    across = np.hypot(np.linalg.norm(residuals - along), rounding)
    if across == 0:
        return 0.0, step
    return float(np.linalg.norm(along) / across * np.sqrt(max(n - p, 1) / p)), step


def _fit_at(
    model: Model,
    derivative: Model,
    y: Array,
    root: Array,
    parameters: Array,
    names: Sequence[str],
) -> Fit:
    with np.errstate(all="ignore"):
        offset, _ = _offset_and_step(model, derivative, y, root, parameters)
        tangent = _finite(derivative(parameters))
        residuals = y - model(parameters)
    return describe(names, parameters, tangent, residuals, root, offset)
