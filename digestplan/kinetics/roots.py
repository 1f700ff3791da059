"""Where a rising function meets a level: one bracketing root for thousands of draws at once."""

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

_ENOUGH = 60


def rising_root(
    function: Callable[[Array], Array],
    low: Array,
    high: Array,
    tolerance: float = 1e-12,
) -> Array:
    """
    Return where a non-decreasing function crosses zero, draw by draw [1]_.

    Inverse quadratic interpolation where it is safe, bisection elsewhere (Chandrupatla's
    rule): the bracket shrinks at every call, so that the root is found for any monotone function.

    Parameters
    ----------
    function : callable
        Takes an array of shape (n_draws,) and returns one of the same shape. [any]
    low : ndarray, shape (n_draws,)
        Where the function is at most zero. [unit of the argument]
    high : ndarray, shape (n_draws,)
        Where the function is at least zero. [unit of the argument]
    tolerance : float
        Relative width of the bracket at which to stop. [1]

    Returns
    -------
    root : ndarray, shape (n_draws,)
        Position of the crossing. [unit of the argument]

    References
    ----------
    .. [1] T. R. Chandrupatla, Adv. Eng. Softw. 28, 145, 1997 (from memory).
    """
    b, a = np.array(low, dtype=float), np.array(high, dtype=float)
    fb, fa = function(b), function(a)
    c, fc = a.copy(), fa.copy()
    share = np.full_like(a, 0.5)
    for _ in range(_ENOUGH):
        x = a + share * (b - a)
        fx = function(x)
        same = np.sign(fx) == np.sign(fa)
        c, fc = np.where(same, a, b), np.where(same, fa, fb)
        b, fb = np.where(same, b, a), np.where(same, fb, fa)
        a, fa = x, fx
        nearest = np.where(np.abs(fa) < np.abs(fb), a, b)
        width = np.abs(b - a)
        limit = tolerance * np.abs(nearest) + 1e-300
        done = (width <= 2 * limit) | (fa == 0) | (fb == 0)
        if done.all():
            break
        share = _next_share(a, b, c, fa, fb, fc, limit)
    return np.where(np.abs(fa) < np.abs(fb), a, b)


def _next_share(
    a: Array, b: Array, c: Array, fa: Array, fb: Array, fc: Array, limit: Array
) -> Array:
    with np.errstate(all="ignore"):
        xi, phi = (a - b) / (c - b), (fa - fb) / (fc - fb)
        safe = (phi**2 < xi) & ((1 - phi) ** 2 < 1 - xi)
        quadratic = fa / (fb - fa) * fc / (fb - fc) + (c - a) / (b - a) * fa / (fc - fa) * fb / (
            fc - fb
        )
        least = np.minimum(0.5, limit / np.abs(b - a))
    share = np.where(safe & np.isfinite(quadratic), quadratic, 0.5)
    least = np.where(np.isfinite(least), least, 0.5)
    return np.clip(share, least, 1 - least)
