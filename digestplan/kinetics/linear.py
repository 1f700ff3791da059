"""Least-squares fits that are linear in what is sought: lines and sums of known columns.

`Fit` is what every fit of the house returns, curves (fitting.py) included.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]

OFFSET = 1e-6  # how far from the optimum, in standard errors, still counts as arrived
_RANK = 1e-11  # smallest singular value, relative, of columns of length 1


@dataclass(frozen=True, slots=True, eq=False)
class Fit:
    """What a least-squares fit found.

    Attributes
    ----------
    names
        Names of the parameters.
    estimates, standard_errors
        Shape (n_parameters,).
    covariance, correlation
        Shape (n_parameters, n_parameters).
    residual_sd
        Root of the (weighted) residual sum of squares over the degrees of freedom.
    degrees_of_freedom
        Points that count, less parameters.
    residuals
        Observed less fitted, unweighted, shape (n_points,).
    converged
        Whether the estimates are an optimum that the data determine.
    message
        In words: arrived, or what went wrong.
    """

    names: tuple[str, ...]
    estimates: Array
    standard_errors: Array
    covariance: Array
    correlation: Array
    residual_sd: float
    degrees_of_freedom: int
    residuals: Array
    converged: bool
    message: str

    def __getitem__(self, name: str) -> float:
        return float(self.estimates[self.names.index(name)])

    def standard_error(self, name: str) -> float:
        """Standard error of one parameter, by name."""
        return float(self.standard_errors[self.names.index(name)])


def student_quantile(probability: float, degrees_of_freedom: float) -> float:
    """
    Quantile of Student's t distribution; of the normal one where the degrees are infinite [1]_.

    Parameters
    ----------
    probability : float
        Probability below the quantile, between 0 and 1. [1]
    degrees_of_freedom : float
        Degrees of freedom, or infinity. [1]

    Returns
    -------
    quantile : float
        The quantile. [1]

    References
    ----------
    .. [1] Student, Biometrika 6, 1, 1908 (from memory).
    """
    from scipy.special import ndtri, stdtrit

    if np.isinf(degrees_of_freedom):
        return float(ndtri(probability))
    return float(stdtrit(degrees_of_freedom, probability))


def fit_linear(
    design: ArrayLike,
    observed: ArrayLike,
    weights: ArrayLike | None = None,
    names: Sequence[str] = (),
) -> Fit:
    """
    Fit observations by a sum of known columns, each with a factor to be found [1]_.

    Parameters
    ----------
    design : array_like, shape (n_points, n_parameters)
        The columns. [any]
    observed : array_like, shape (n_points,)
        What was measured. [any]
    weights : array_like, shape (n_points,), or None
        Weights, as one over the variance up to a common factor; 0 leaves a point out. [any]
    names : sequence of str
        Names of the parameters; ``b1``, ``b2`` … where none are given. [name]

    Returns
    -------
    fit : Fit
        Estimates with their standard errors. [as observed over design]

    References
    ----------
    .. [1] C. F. Gauss, Theoria combinationis observationum, 1823 (from memory).
    """
    columns = np.asarray(design, dtype=float)
    y, root = rooted(observed, weights)
    estimates = least_squares_step(columns * root[:, None], y * root)
    return describe(names, estimates, columns, y - columns @ estimates, root)


def fit_line(x: ArrayLike, observed: ArrayLike, weights: ArrayLike | None = None) -> Fit:
    """
    Fit a straight line; its parameters are named ``intercept`` and ``slope`` [1]_.

    Parameters
    ----------
    x : array_like, shape (n_points,)
        Where it was measured. [any]
    observed : array_like, shape (n_points,)
        What was measured. [any]
    weights : array_like, shape (n_points,), or None
        Weights, as one over the variance up to a common factor. [any]

    Returns
    -------
    line : Fit
        Intercept and slope with their standard errors. [as observed]

    Notes
    -----
    Fitted about the mean of x, where the two are uncorrelated, and moved back to x = 0.

    References
    ----------
    .. [1] N. R. Draper and H. Smith, Applied Regression Analysis, 3rd ed., 1998 (from memory).
    """
    x = np.asarray(x, dtype=float)
    y, root = rooted(observed, weights)
    middle = float(np.average(x, weights=root**2))
    level = float(np.average(y, weights=root**2))
    about = fit_linear(np.column_stack([np.ones_like(x), x - middle]), y - level, root**2)
    back = np.array([[1.0, -middle], [0.0, 1.0]])
    estimates = back @ about.estimates + [level, 0.0]
    return _finish(
        ("intercept", "slope"),
        estimates,
        back @ about.covariance @ back.T,
        about.residual_sd,
        about.degrees_of_freedom,
        about.residuals,
        about.message,
    )


def rooted(observed: ArrayLike, weights: ArrayLike | None) -> tuple[Array, Array]:
    """
    Return observations, and the root of their weights [1]_.

    Parameters
    ----------
    observed : array_like, shape (n_points,)
        What was measured. [any]
    weights : array_like, shape (n_points,), or None
        Weights, as one over the variance up to a common factor; None for all alike. [any]

    Returns
    -------
    observed, root : ndarray, shape (n_points,)
        Observations, and what to multiply them by so that all are equally sure. [any]

    References
    ----------
    .. [1] By definition.
    """
    y = np.asarray(observed, dtype=float)
    if weights is None:
        return y, np.ones_like(y)
    w = np.broadcast_to(np.asarray(weights, dtype=float), y.shape)
    if not (np.all(np.isfinite(w)) and np.all(w >= 0)):
        raise ValueError("Weights must be finite and not negative.")
    return y, np.sqrt(w)


def least_squares_step(tangent: Array, residuals: Array) -> Array:
    """
    Solve a linear least-squares problem, leaving out what the data do not determine [1]_.

    Parameters
    ----------
    tangent : array_like, shape (n_points, n_parameters)
        The columns, or the derivatives of a model. [any]
    residuals : array_like, shape (n_points,)
        What is to be explained. [any]

    Returns
    -------
    step : ndarray, shape (n_parameters,)
        The solution, by singular values of columns scaled to length 1. [any]

    References
    ----------
    .. [1] G. H. Golub and C. F. Van Loan, Matrix Computations, 1983 (from memory).
    """
    length = _lengths(tangent)
    solution, *_ = np.linalg.lstsq(tangent / length, residuals, rcond=_RANK)
    step: Array = solution / length
    return step


def _lengths(tangent: Array) -> Array:
    length = np.linalg.norm(tangent, axis=0)
    usable: Array = np.where(length > 0, length, 1.0)
    return usable


def describe(
    names: Sequence[str],
    estimates: Array,
    tangent: Array,
    residuals: Array,
    root: Array,
    offset: float = 0.0,
) -> Fit:
    """
    Return a fit with the standard errors that its tangent gives, and whether to rely on it [1]_.

    Parameters
    ----------
    names : sequence of str
        Names of the parameters; ``b1``, ``b2`` … where none are given. [name]
    estimates : ndarray, shape (n_parameters,)
        The estimates. [any]
    tangent : ndarray, shape (n_points, n_parameters)
        Derivatives of the predictions, unweighted. [any]
    residuals : ndarray, shape (n_points,)
        Observed less fitted, unweighted. [any]
    root : ndarray, shape (n_points,)
        Roots of the weights. [any]
    offset : float
        How far from the optimum the estimates are, in standard errors. [1]

    Returns
    -------
    fit : Fit
        The whole description. [any]

    References
    ----------
    .. [1] D. M. Bates and D. G. Watts, Nonlinear Regression Analysis and Its Applications, 1988
       (from memory).
    """
    names = tuple(names) or tuple(f"b{k + 1}" for k in range(len(estimates)))
    n_points = int(np.count_nonzero(root))
    freedom = n_points - len(estimates)
    if freedom < 1:
        raise ValueError(
            f"{n_points} points cannot determine {len(estimates)} parameters and their errors."
        )
    weighted = tangent * root[:, None]
    length = _lengths(weighted)
    _, singular, rows = np.linalg.svd(weighted / length, full_matrices=False)
    determined = bool(singular[-1] > _RANK * singular[0] and np.all(np.any(weighted, axis=0)))
    spread = float(np.linalg.norm(root * residuals) / np.sqrt(freedom))
    inverse = rows.T / np.where(determined, singular, np.nan)
    covariance = (inverse @ inverse.T) * spread**2 / np.outer(length, length)
    if not determined:
        message = _undetermined(names, rows[-1])
    elif not offset < OFFSET:
        message = "stopped short of the optimum"
    else:
        message = "arrived"
    return _finish(names, estimates, covariance, spread, freedom, residuals, message)


def _undetermined(names: Sequence[str], direction: Array) -> str:
    share = np.abs(direction)
    culprits = [name for name, s in zip(names, share, strict=True) if s > 0.1 * share.max()]
    return f"the data do not determine {' and '.join(culprits)}"


def _finish(
    names: Sequence[str],
    estimates: Array,
    covariance: Array,
    spread: float,
    freedom: int,
    residuals: Array,
    message: str,
) -> Fit:
    errors = np.sqrt(np.diag(covariance))
    scale = np.where(errors > 0, errors, 1.0)
    correlation = covariance / np.outer(scale, scale)
    np.fill_diagonal(correlation, 1.0)
    converged = message == "arrived"
    return Fit(
        tuple(names),
        estimates,
        errors,
        covariance,
        correlation,
        spread,
        freedom,
        residuals,
        converged,
        message,
    )
