"""How enzyme dies within one cell of a programme, and the activity it leaves behind.

Two kinds of cell: constant temperature, where every integral is closed-form, and moving
temperature, where the same solutions are integrated over the cell's Gauss nodes. Time goes along
the first axis where there is one, draws along the last.
"""

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.programme import NODE_WEIGHTS, RUNNING_WEIGHTS

Array = NDArray[np.float64]

_NEAR = 1e-2  # nearer than this two decays are told apart by a series


def mean_of_decay(exponent: Array) -> Array:
    """
    Return the mean of e^(-x s) over s from 0 to 1, (1 - e^-x)/x [1]_.

    Parameters
    ----------
    exponent : ndarray
        Decay over the whole span, x; 0 or more. [1]

    Returns
    -------
    mean : ndarray
        1 at x = 0, 1/x for large x. [1]

    References
    ----------
    .. [1] M. Hochbruck and A. Ostermann, Acta Numer. 19, 209, 2010 (phi functions; from memory).
    """
    exponent = np.asarray(exponent, dtype=float)
    return _mean_of(np.expm1(-exponent), exponent)


def _mean_of(lost: Array, exponent: Array) -> Array:
    """Mean of a decay, from e^-x - 1 and x."""
    mean = np.ones_like(exponent)
    return np.divide(np.negative(lost), exponent, out=mean, where=exponent != 0)


def _slope_of_mean(a: Array, b: Array) -> Array:
    """Divided difference of `mean_of_decay`, accurate where a and b are near each other."""
    apart = np.abs(b - a) > _NEAR
    gap = np.where(apart, b - a, 1.0)
    far = (mean_of_decay(b) - mean_of_decay(a)) / gap
    if apart.all():
        return far
    m = (a + b) / 2
    first, third = _mean_derivatives(m)
    return np.where(apart, far, first + third * (b - a) ** 2 / 24)


def _mean_derivatives(m: Array) -> tuple[Array, Array]:
    """First and third derivative of `mean_of_decay`."""
    small = m < 1.0
    s = np.where(small, m, 0.0)
    big = np.where(small, 1.0, m)
    e = np.exp(-big)
    first_big = (e * (big + 1) - 1) / big**2
    third_big = (e * (big**3 + 3 * big**2 + 6 * big + 6) - 6) / big**4
    first, third = np.zeros_like(s), np.zeros_like(s)
    factorial, sign = 1.0, 1.0
    for n in range(22):
        factorial *= n + 1
        if n >= 1:
            first += sign * n * s ** (n - 1) / factorial
        if n >= 3:
            third += sign * n * (n - 1) * (n - 2) * s ** (n - 3) / factorial
        sign = -sign
    return np.where(small, first, first_big), np.where(small, third, third_big)


def first_order(amount: Array, rate: Array, hours: Array | float) -> tuple[Array, Array]:
    """
    Return what is left after first-order death, and its integral over the time [1]_.

    Parameters
    ----------
    amount : ndarray
        Active enzyme at the start. [any]
    rate : ndarray
        Inactivation rate. [1/h]
    hours : ndarray or float
        How long. [h]

    Returns
    -------
    left : ndarray
        Active enzyme at the end. [any]
    integral : ndarray
        Integral of the active enzyme over the time. [any h]

    References
    ----------
    .. [1] J. P. Henley and A. Sadana, Enzyme Microb. Technol. 7, 50, 1985 (from memory).
    """
    exponent = rate * hours
    lost = np.expm1(-exponent)
    return amount * (1 + lost), amount * hours * _mean_of(lost, exponent)


def two_stage(
    fresh: Array,
    intermediate: Array,
    first_rate: Array,
    second_rate: Array,
    hours: Array | float,
    extra: Array | float = 0.0,
) -> tuple[Array, Array, Array, Array]:
    """
    Return both populations of a two-stage death, and their integrals over the time [1]_.

    Parameters
    ----------
    fresh : ndarray
        Fresh enzyme at the start. [any]
    intermediate : ndarray
        Enzyme already in the intermediate form at the start. [any]
    first_rate : ndarray
        Rate from the fresh to the intermediate form. [1/h]
    second_rate : ndarray
        Rate from the intermediate to the dead form. [1/h]
    hours : ndarray or float
        How long. [h]
    extra : ndarray or float
        A further decay that both share (a mode of diffusion). [1/h]

    Returns
    -------
    fresh_left : ndarray
        Fresh enzyme at the end. [any]
    intermediate_left : ndarray
        Intermediate enzyme at the end. [any]
    fresh_integral : ndarray
        Integral of the fresh enzyme. [any h]
    intermediate_integral : ndarray
        Integral of the intermediate enzyme. [any h]

    References
    ----------
    .. [1] J. P. Henley and A. Sadana, Enzyme Microb. Technol. 7, 50, 1985 (from memory).
    """
    a, b = (first_rate + extra) * hours, (second_rate + extra) * hours
    passed = first_rate * fresh * hours
    fresh_left = fresh * np.exp(-a)
    between = np.exp(-np.minimum(a, b)) * mean_of_decay(np.abs(b - a))
    intermediate_left = intermediate * np.exp(-b) + passed * between
    fresh_integral = fresh * hours * mean_of_decay(a)
    intermediate_integral = hours * (
        intermediate * mean_of_decay(b) - passed * _slope_of_mean(a, b)
    )
    return fresh_left, intermediate_left, fresh_integral, intermediate_integral


def autolysis(
    amount: Array, rate: Array, self_rate: Array, hours: Array | float
) -> tuple[Array, Array]:
    r"""
    Return what is left where enzyme also digests itself, and its integral over the time [1]_.

    Parameters
    ----------
    amount : ndarray
        Active enzyme at the start. [any]
    rate : ndarray
        First-order inactivation rate. [1/h]
    self_rate : ndarray
        Second-order rate of autolysis per amount of active enzyme. [1/(any h)]
    hours : ndarray or float
        How long. [h]

    Returns
    -------
    left : ndarray
        Active enzyme at the end. [any]
    integral : ndarray
        Integral of the active enzyme over the time. [any h]

    Notes
    -----
    .. math:: a(t) = a_0 e^{-kt} / (1 + \\kappa a_0 (1 - e^{-kt})/k)

    References
    ----------
    .. [1] Bernoulli's equation; elementary integration.
    """
    exponent = rate * hours
    without = amount * hours * mean_of_decay(exponent)
    y = self_rate * without
    safe = np.where(y == 0, 1.0, y)
    slowing = np.where(y == 0, 1.0, np.log1p(y) / safe)
    return amount * np.exp(-exponent) / (1 + y), without * slowing


def survival_at_nodes(rate: Array, hours: float) -> tuple[Array, Array]:
    """
    Return first-order survival within a cell at its nodes and at its end [1]_.

    Parameters
    ----------
    rate : ndarray, shape (n_nodes, n_draws)
        Inactivation rate at the nodes. [1/h]
    hours : float
        Length of the cell. [h]

    Returns
    -------
    at_nodes : ndarray, shape (n_nodes, n_draws)
        Share that survives to each node. [1]
    at_end : ndarray, shape (n_draws,)
        Share that survives the cell. [1]

    References
    ----------
    .. [1] P. J. Davis and P. Rabinowitz, Methods of Numerical Integration, 1984 (from memory).
    """
    return (
        np.exp(-hours * np.maximum(RUNNING_WEIGHTS @ rate, 0.0)),
        np.exp(-hours * (NODE_WEIGHTS @ rate)),
    )


def autolysis_at_nodes(
    amount: Array, rate: Array, self_rate: Array, hours: float
) -> tuple[Array, Array]:
    """
    Return survival with autolysis within a cell at its nodes and at its end [1]_.

    Parameters
    ----------
    amount : ndarray, shape (n_draws,)
        Active enzyme at the start of the cell. [any]
    rate : ndarray, shape (n_nodes, n_draws)
        First-order inactivation rate at the nodes. [1/h]
    self_rate : ndarray, shape (n_nodes, n_draws)
        Second-order rate at the nodes. [1/(any h)]
    hours : float
        Length of the cell. [h]

    Returns
    -------
    at_nodes : ndarray, shape (n_nodes, n_draws)
        Share that survives to each node. [1]
    at_end : ndarray, shape (n_draws,)
        Share that survives the cell. [1]

    References
    ----------
    .. [1] Bernoulli's equation with rates that change with time; elementary integration.
    """
    nodes, end = survival_at_nodes(rate, hours)
    eaten = hours * self_rate * nodes
    at_nodes = nodes / (1 + amount * np.maximum(RUNNING_WEIGHTS @ eaten, 0.0))
    at_end = end / (1 + amount * (NODE_WEIGHTS @ eaten))
    return at_nodes, at_end


def two_stage_at_nodes(
    first_rate: Array, second_rate: Array, hours: float
) -> tuple[tuple[Array, Array, Array], tuple[Array, Array, Array]]:
    """
    Return how two-stage death carries a cell's start to its nodes and to its end [1]_.

    Parameters
    ----------
    first_rate : ndarray, shape (n_nodes, n_draws)
        Rate from the fresh to the intermediate form. [1/h]
    second_rate : ndarray, shape (n_nodes, n_draws)
        Rate from the intermediate to the dead form. [1/h]
    hours : float
        Length of the cell. [h]

    Returns
    -------
    at_nodes : tuple of three ndarray, shape (n_nodes, n_draws)
        Shares fresh → fresh, fresh → intermediate, intermediate → intermediate. [1]
    at_end : tuple of three ndarray, shape (n_draws,)
        The same at the end of the cell. [1]

    References
    ----------
    .. [1] J. P. Henley and A. Sadana, Enzyme Microb. Technol. 7, 50, 1985 (from memory).
    """
    f_nodes, f_end = survival_at_nodes(first_rate, hours)
    lost = np.minimum(hours * np.maximum(RUNNING_WEIGHTS @ second_rate, 0.0), 600.0)
    g_nodes = np.exp(-lost)
    _, g_end = survival_at_nodes(second_rate, hours)
    flow = hours * first_rate * f_nodes * np.exp(lost)
    passed_nodes = g_nodes * np.maximum(RUNNING_WEIGHTS @ flow, 0.0)
    passed_end = g_end * (NODE_WEIGHTS @ flow)
    return (f_nodes, passed_nodes, g_nodes), (f_end, passed_end, g_end)
