"""How far a sample gives way to a scaled dose u = s·D, and the dose for an extent.

A law's name here is the word that a plan file uses.
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.kinetics.roots import rising_root

Array = NDArray[np.float64]


def extent_first_order(scaled_dose: ArrayLike) -> Array:
    """
    Return the extent where what is left gives way in proportion to itself [1]_.

    Parameters
    ----------
    scaled_dose : array_like
        Susceptibility times dose. [1]

    Returns
    -------
    extent : ndarray
        1 - exp(-u). [1]

    References
    ----------
    .. [1] L. Wilhelmy, Ann. Phys. 157, 413, 1850 (from memory).
    """
    extent: Array = -np.expm1(-np.asarray(scaled_dose, dtype=float))
    return extent


def dose_for_extent_first_order(extent: ArrayLike) -> Array:
    """
    Return the scaled dose for an extent under the first-order law [1]_.

    Parameters
    ----------
    extent : array_like
        Fraction removed, 0 to 1. [1]

    Returns
    -------
    scaled_dose : ndarray
        -ln(1 - X); infinite at 1. [1]

    References
    ----------
    .. [1] L. Wilhelmy, Ann. Phys. 157, 413, 1850 (from memory).
    """
    with np.errstate(divide="ignore"):
        scaled: Array = -np.log1p(-np.asarray(extent, dtype=float))
    return scaled


def extent_two_pool(
    scaled_dose: ArrayLike, fast_fraction: ArrayLike, slow_ratio: ArrayLike
) -> Array:
    """
    Return the extent of a substrate with a fast and a slow pool [1]_.

    Parameters
    ----------
    scaled_dose : array_like
        Susceptibility of the fast pool times dose. [1]
    fast_fraction : array_like
        Share of the fast pool. [1]
    slow_ratio : array_like
        Susceptibility of the slow pool over that of the fast one. [1]

    Returns
    -------
    extent : ndarray
        f(1 - exp(-u)) + (1 - f)(1 - exp(-qu)). [1]

    References
    ----------
    .. [1] Two first-order pools side by side; common practice.
    """
    u, f = np.asarray(scaled_dose, dtype=float), np.asarray(fast_fraction, dtype=float)
    slow = np.asarray(slow_ratio, dtype=float) * u
    result: Array = -f * np.expm1(-u) - (1 - f) * np.expm1(-slow)
    return result


def dose_for_extent_two_pool(
    extent: ArrayLike, fast_fraction: ArrayLike, slow_ratio: ArrayLike
) -> Array:
    """
    Return the scaled dose for an extent of two pools, by a bracketing root [1]_.

    Parameters
    ----------
    extent : array_like
        Fraction removed, 0 to 1. [1]
    fast_fraction : array_like
        Share of the fast pool. [1]
    slow_ratio : array_like
        Susceptibility of the slow pool over that of the fast one. [1]

    Returns
    -------
    scaled_dose : ndarray
        Infinite where the extent is never reached. [1]

    References
    ----------
    .. [1] Two first-order pools side by side; common practice.
    """
    x, f, q = np.broadcast_arrays(
        *(np.atleast_1d(np.asarray(a, dtype=float)) for a in (extent, fast_fraction, slow_ratio))
    )
    one = dose_for_extent_first_order(x)
    slowest, fastest = np.minimum(q, 1.0), np.maximum(q, 1.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        high = np.where(slowest > 0, one / slowest, dose_for_extent_first_order(x / f))
    never = ~np.isfinite(high) | (x > np.where(slowest > 0, 1.0, f))
    high = np.where(never, 1.0, high)
    low = np.where(never, 0.0, one / fastest)
    target = np.where(never, extent_two_pool(high, f, q), x)
    root = rising_root(lambda u: extent_two_pool(u, f, q) - target, low, high * (1 + 1e-12))
    result: Array = np.where(never, np.inf, np.where(x <= 0, 0.0, root))
    return result if np.ndim(extent) else result.reshape(np.shape(extent) or (1,))


def extent_stretched(scaled_dose: ArrayLike, exponent: ArrayLike) -> Array:
    """
    Return the extent under a stretched exponential [1]_.

    Parameters
    ----------
    scaled_dose : array_like
        Susceptibility times dose. [1]
    exponent : array_like
        Below 1: ever slower; above 1: with a lag. [1]

    Returns
    -------
    extent : ndarray
        1 - exp(-u^n). [1]

    References
    ----------
    .. [1] R. Kohlrausch, Ann. Phys. 167, 56, 1854 (from memory).
    """
    with np.errstate(over="ignore"):
        extent: Array = -np.expm1(-(np.asarray(scaled_dose, dtype=float) ** np.asarray(exponent)))
    return extent


def dose_for_extent_stretched(extent: ArrayLike, exponent: ArrayLike) -> Array:
    """
    Return the scaled dose for an extent under a stretched exponential [1]_.

    Parameters
    ----------
    extent : array_like
        Fraction removed, 0 to 1. [1]
    exponent : array_like
        As in the law. [1]

    Returns
    -------
    scaled_dose : ndarray
        Infinite at 1. [1]

    References
    ----------
    .. [1] R. Kohlrausch, Ann. Phys. 167, 56, 1854 (from memory).
    """
    result: Array = dose_for_extent_first_order(extent) ** (1 / np.asarray(exponent, dtype=float))
    return result


def extent_erosion(scaled_dose: ArrayLike, exponent: ArrayLike) -> Array:
    """
    Return the extent of a piece that is eaten from its surface at a steady pace [1]_.

    Parameters
    ----------
    scaled_dose : array_like
        Susceptibility times dose; the piece is gone at 1. [1]
    exponent : array_like
        1, 2, 3 for a slab, a cylinder, a sphere. [1]

    Returns
    -------
    extent : ndarray
        1 - (1 - u)^m, and 1 from u = 1 on. [1]

    References
    ----------
    .. [1] A. W. Hixson and J. H. Crowell, Ind. Eng. Chem. 23, 923, 1931 (from memory).
    """
    left = np.maximum(1 - np.asarray(scaled_dose, dtype=float), 0.0)
    result: Array = 1 - left ** np.asarray(exponent, dtype=float)
    return result


def dose_for_extent_erosion(extent: ArrayLike, exponent: ArrayLike) -> Array:
    """
    Return the scaled dose for an extent of a piece that is eaten from its surface [1]_.

    Parameters
    ----------
    extent : array_like
        Fraction removed, 0 to 1. [1]
    exponent : array_like
        1, 2, 3 for a slab, a cylinder, a sphere. [1]

    Returns
    -------
    scaled_dose : ndarray
        1 - (1 - X)^(1/m). [1]

    References
    ----------
    .. [1] A. W. Hixson and J. H. Crowell, Ind. Eng. Chem. 23, 923, 1931 (from memory).
    """
    with np.errstate(divide="ignore"):
        log_left = np.log1p(-np.asarray(extent, dtype=float))
    scaled: Array = -np.expm1(log_left / np.asarray(exponent, dtype=float))
    return scaled


def extent_michaelis_menten(
    scaled_dose: ArrayLike, initial_over_half_saturation: ArrayLike
) -> Array:
    """
    Return the extent under integrated Michaelis-Menten kinetics [1]_.

    Parameters
    ----------
    scaled_dose : array_like
        Vmax t/Km. [1]
    initial_over_half_saturation : array_like
        Initial substrate over its half saturation, S0/Km. [1]

    Returns
    -------
    extent : ndarray
        1 - S/S0 with S/Km = W(S0/Km exp(S0/Km - u)), as the Wright omega function. [1]

    References
    ----------
    .. [1] S. Schnell and C. Mendoza, J. Theor. Biol. 187, 207, 1997 (from memory).
    """
    from scipy.special import wrightomega

    u, start = np.broadcast_arrays(
        np.asarray(scaled_dose, dtype=float), np.asarray(initial_over_half_saturation, dtype=float)
    )
    counts = start > 1e-15  # below that the law is first order to the last digit
    safe = np.where(counts, start, 1.0)
    left = wrightomega(np.log(safe) + safe - u) / safe
    for _ in range(2):  # Newton on ln y + start (y - 1) = -u takes the last digits back
        y = np.maximum(left, 1e-320)
        left = y - y * (np.log(y) + safe * (y - 1) + u) / (1 + safe * y)
    result: Array = np.where(counts, 1 - left, extent_first_order(u))
    return np.clip(result, 0.0, 1.0)


def dose_for_extent_michaelis_menten(
    extent: ArrayLike, initial_over_half_saturation: ArrayLike
) -> Array:
    """
    Return Vmax t/Km for an extent under integrated Michaelis-Menten kinetics [1]_.

    Parameters
    ----------
    extent : array_like
        Fraction removed, 0 to 1. [1]
    initial_over_half_saturation : array_like
        Initial substrate over its half saturation, S0/Km. [1]

    Returns
    -------
    scaled_dose : ndarray
        X S0/Km - ln(1 - X); infinite at 1. [1]

    References
    ----------
    .. [1] V. Henri, Lois generales de l'action des diastases, 1903 (from memory).
    """
    x = np.asarray(extent, dtype=float)
    result: Array = x * np.asarray(initial_over_half_saturation) + dose_for_extent_first_order(x)
    return result


@dataclass(frozen=True, slots=True)
class Law:
    """An extent law: its name, the law, its inverse, and what both take beside the dose."""

    name: str
    extent: Callable[..., Array]
    scaled_dose: Callable[..., Array]
    parameters: tuple[str, ...]


LAWS: Mapping[str, Law] = MappingProxyType(
    {
        law.name: law
        for law in (
            Law("first_order", extent_first_order, dose_for_extent_first_order, ()),
            Law(
                "two_pool",
                extent_two_pool,
                dose_for_extent_two_pool,
                ("fast_fraction", "slow_ratio"),
            ),
            Law("stretched", extent_stretched, dose_for_extent_stretched, ("exponent",)),
            Law("erosion", extent_erosion, dose_for_extent_erosion, ("exponent",)),
            Law(
                "michaelis_menten",
                extent_michaelis_menten,
                dose_for_extent_michaelis_menten,
                ("initial_over_half_saturation",),
            ),
        )
    }
)
