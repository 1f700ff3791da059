"""Rinses in baths of limited volume: what each exchange leaves behind in the tissue.

A bath is given by its ratio: its volume over that of the tissue, times what the solute's
concentration in the bath is over that in the tissue at equilibrium (usually 1). The clock is that
of `washout`. What is said of washing out holds for soaking in, with 1 minus the share.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.shrinking_core import dimension
from digestplan.kinetics.washout import SHORTEST, bath_roots, enough_modes, mode_mean

Array = NDArray[np.float64]
Values = Array | float


def uptake_finite_bath(theta: Values, ratio: Values, shape: str) -> Array:
    """
    Return the share of the equilibrium uptake from, or into, a bath of limited volume [1]_.

    Parameters
    ----------
    theta : ndarray, shape (n_draws,)
        Diffusion clock D t/L². [1]
    ratio : ndarray, shape (n_draws,)
        Bath over tissue; may be infinite. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    share : ndarray, shape (n_draws,)
        1 at equilibrium, when 1/(1 + ratio) of the solute is still in the tissue. [1]

    Notes
    -----
    Accurate to 1e-12 for θ above 2e-5, and to 1e-5 below (a boundary layer).

    References
    ----------
    .. [1] J. Crank, The Mathematics of Diffusion, 2nd ed., 1975, eqs 4.37, 5.33, 6.30 (from
       memory).
    """
    d = dimension(shape)
    theta, ratio = np.broadcast_arrays(*np.atleast_1d(theta, ratio))
    b, long_ = 1 / ratio, np.maximum(theta, SHORTEST)
    roots = bath_roots(_one_if_same(b), shape, enough_modes(long_))
    missing = (1 + b) * _mode_shares(roots, b, d) * np.exp(-(roots**2) * long_)
    a = (d - 1) / 2 + d * b  # a boundary layer, to the first order in its thickness over L
    root = np.sqrt(np.minimum(theta, SHORTEST))
    early = (1 + b) * d * root * _one_minus_erfcx(a * root)
    return np.where(theta < SHORTEST, early, 1 - missing.sum(axis=0))


def _one_if_same(values: Array) -> Array:
    return values[:1] if (values == values[0]).all() else values


def _mode_shares(roots: Array, b: Array, d: int) -> Array:
    """Share of a uniformly filled tissue's mean in each mode (the rest is at equilibrium)."""
    shares: Array = 2 * d / (roots**2 + d * d * b * (1 + b))
    return shares


def _one_minus_erfcx(x: Array) -> Array:
    """Evaluate (1 − e^(x²) erfc x)/x without cancellation."""
    from scipy.special import erfcx, gamma

    small = np.minimum(x, 0.1)
    series: Array = np.sum([(-small) ** k / gamma((k + 3) / 2) for k in range(16)], axis=0)
    big = np.maximum(x, 0.1)
    return np.where(x < 0.1, series, np.asarray((1 - erfcx(big)) / big))


@dataclass(frozen=True, slots=True, eq=False)
class RinseCourse:
    """What each exchange of the bath leaves behind, relative to the tissue at the start.

    Attributes
    ----------
    left
        Mean concentration in the tissue before the first and after each exchange. Shape
        (n_exchanges + 1, n_draws). [1]
    centre
        The same at the centre. Shape (n_exchanges + 1, n_draws). [1]
    bath
        Concentration in each bath when it is poured off. Shape (n_exchanges, n_draws). [1]
    """

    left: Array
    centre: Array
    bath: Array


def rinse(thetas: Array, ratio: Values, shape: str, kept: Values = 0.0) -> RinseCourse:
    """
    Return what is left after each of several exchanges of a bath of limited volume [1]_.

    Parameters
    ----------
    thetas : ndarray, shape (n_exchanges, n_draws)
        Diffusion clock D t/L² of each exchange. [1]
    ratio : ndarray, shape (n_draws,)
        Bath over tissue, the same for each exchange; may be infinite. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]
    kept : ndarray, shape (n_draws,)
        Share of the old bath that stays in the vessel at an exchange. [1]

    Returns
    -------
    course : RinseCourse
        The tissue is filled evenly at the start, the first bath is clean. [1]

    Notes
    -----
    The profile in the tissue is handed on as amplitudes of the modes of tissue and bath together.
    A change of the bath by −b adds b to every amplitude and takes b/(1 + β) from the level at
    which all would settle, so that nothing is lost, however many modes are carried.

    References
    ----------
    .. [1] J. Crank, The Mathematics of Diffusion, 2nd ed., 1975, chapters 4 to 6 (from memory),
       superposed.
    """
    d = dimension(shape)
    thetas = np.asarray(thetas, dtype=float)
    n_draws = np.broadcast(thetas[0], np.atleast_1d(ratio), np.atleast_1d(kept)).size
    thetas = np.broadcast_to(thetas, (len(thetas), n_draws))
    b = 1 / np.broadcast_to(np.asarray(ratio, dtype=float), n_draws)
    roots = bath_roots(_one_if_same(b), shape, enough_modes(thetas[thetas > 0]))
    shares = _mode_shares(roots, b, d)
    at_centre = shares / mode_mean(roots, shape)
    level, amplitudes = b / (1 + b), np.ones_like(shares)
    left, centre, baths = [np.ones(n_draws)], [np.ones(n_draws)], []
    for theta in thetas:
        amplitudes = amplitudes * np.exp(-(roots**2) * theta)
        unsettled = (shares * amplitudes).sum(axis=0)
        bath = level - b * unsettled
        left.append(level + unsettled)
        centre.append(level + (at_centre * amplitudes).sum(axis=0))
        baths.append(bath)
        change = bath * (1 - kept)
        level, amplitudes = level - change / (1 + b), amplitudes + change
    return RinseCourse(np.array(left), np.array(centre), np.array(baths))


def left_at_equilibrium(ratio: Values, exchanges: Values) -> Array:
    """
    Return what is left after exchanges that each reach equilibrium [1]_.

    Parameters
    ----------
    ratio : ndarray
        Bath over tissue. [1]
    exchanges : ndarray
        How many. [1]

    Returns
    -------
    left : ndarray
        (1/(1 + ratio))^n: no number of exchanges leaves less, however long each lasts. [1]

    References
    ----------
    .. [1] Mass balance.
    """
    left: Array = (1 + np.asarray(ratio, dtype=float)) ** -np.asarray(exchanges, dtype=float)
    return left


def exchanges_for(
    target: Values, theta: Values, ratio: Values, shape: str, most: int = 40
) -> Array:
    """
    Return how many equal exchanges bring the tissue's mean down to a target [1]_.

    Parameters
    ----------
    target : ndarray, shape (n_draws,)
        Share that may be left. [1]
    theta : ndarray, shape (n_draws,)
        Diffusion clock D t/L² of one exchange. [1]
    ratio : ndarray, shape (n_draws,)
        Bath over tissue. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]
    most : int
        Exchanges that anybody would do. [1]

    Returns
    -------
    exchanges : ndarray, shape (n_draws,)
        Whole numbers; infinite if even the most do not suffice. [1]

    References
    ----------
    .. [1] J. Crank, The Mathematics of Diffusion, 2nd ed., 1975, chapters 4 to 6 (from memory).
    """
    target, theta, ratio = np.broadcast_arrays(*np.atleast_1d(target, theta, ratio))
    course = rinse(np.broadcast_to(theta, (most, theta.size)), ratio, shape)
    enough = course.left <= target
    return np.where(enough.any(axis=0), enough.argmax(axis=0), np.inf)
