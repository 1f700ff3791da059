"""How a demineralisation front moves into a piece: the shrinking core.

Three resistances stand in the reagent's way: the still film around the piece, the layer that has
lost its mineral, and the reaction at the front. Each gives a law for the time against the extent
(share of the mineral that is gone); at a constant concentration the three times add. A slab has
both faces open and half its thickness as length, a cylinder and a sphere their radius.
"""

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.roots import rising_root

Array = NDArray[np.float64]
Values = Array | float

_DIMENSIONS = {"slab": 1, "cylinder": 2, "sphere": 3}
_SERIES_BELOW = 0.1
_SERIES = tuple(1.0 / (n * (n - 1)) for n in range(2, 20))


def dimension(shape: str) -> int:
    """
    Return in how many directions a shape is attacked [1]_.

    Parameters
    ----------
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    dimension : int
        1, 2 or 3. [1]

    References
    ----------
    .. [1] By definition.
    """
    if shape not in _DIMENSIONS:
        raise ValueError(f"shape {shape!r} is none of {', '.join(_DIMENSIONS)}")
    return _DIMENSIONS[shape]


def film_progress(extent: Values, shape: str) -> Array:
    """
    Return the time to an extent under film control, relative to the whole time [1]_.

    Parameters
    ----------
    extent : ndarray
        Share of the mineral that is gone, 0 to 1. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``: the law is the same for all. [name]

    Returns
    -------
    progress : ndarray
        t/τ = X. [1]

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    dimension(shape)
    return np.asarray(extent, dtype=float)


def reaction_progress(extent: Values, shape: str) -> Array:
    """
    Return the time to an extent under reaction control, relative to the whole time [1]_.

    Parameters
    ----------
    extent : ndarray
        Share of the mineral that is gone, 0 to 1. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    progress : ndarray
        t/τ = 1 − (1 − X)^(1/d); at the same time the depth of the front over the length. [1]

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    x: Array = np.asarray(extent, dtype=float)
    d = dimension(shape)
    if d == 1:
        return x
    with np.errstate(divide="ignore"):
        progress: Array = -np.expm1(np.log1p(-x) / d)
    return progress


def layer_progress(extent: Values, shape: str) -> Array:
    r"""
    Return the time to an extent under layer control, relative to the whole time [1]_ [2]_.

    Parameters
    ----------
    extent : ndarray
        Share of the mineral that is gone, 0 to 1. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    progress : ndarray
        t/τ, the reagent diffusing through the layer that has lost its mineral. [1]

    Notes
    -----
    .. math:: X^2, \quad X + (1-X)\ln(1-X), \quad 1 - 3(1-X)^{2/3} + 2(1-X)

    A sphere's law is s²(3 − 2s) of the front's depth s, which needs no care at small X.

    References
    ----------
    .. [1] S. Yagi and D. Kunii, 5th Symp. (Int.) Combustion, 231, 1955 (from memory).
    .. [2] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    from scipy.special import xlogy

    x: Array = np.asarray(extent, dtype=float)
    d = dimension(shape)
    if d == 1:
        return x * x
    if d == 3:
        depth = reaction_progress(x, shape)
        return depth * depth * (3 - 2 * depth)
    small = np.minimum(x, _SERIES_BELOW)
    series = np.zeros_like(x)
    for coefficient in reversed(_SERIES):
        series = coefficient + small * series
    law = x + xlogy(1 - x, 1 - x)
    return np.where(x < _SERIES_BELOW, small * small * series, law)


def film_extent(progress: Values, shape: str) -> Array:
    """
    Return the extent under film control, the inverse of `film_progress` [1]_.

    Parameters
    ----------
    progress : ndarray
        Time relative to the whole time; beyond 1 counts as 1. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    extent : ndarray
        Share of the mineral that is gone. [1]

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    dimension(shape)
    extent: Array = np.minimum(np.asarray(progress, dtype=float), 1.0)
    return extent


def reaction_extent(progress: Values, shape: str) -> Array:
    """
    Return the extent under reaction control, the inverse of `reaction_progress` [1]_.

    Parameters
    ----------
    progress : ndarray
        Time relative to the whole time; beyond 1 counts as 1. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    extent : ndarray
        Share of the mineral that is gone. [1]

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    p, d = np.minimum(np.asarray(progress, dtype=float), 1.0), dimension(shape)
    return np.asarray(p * (1 + (1 - p) * (1 + (1 - p) * (d == 3))) if d > 1 else p)


def layer_extent(progress: Values, shape: str) -> Array:
    """
    Return the extent under layer control, the inverse of `layer_progress` [1]_.

    Parameters
    ----------
    progress : ndarray
        Time relative to the whole time; beyond 1 counts as 1. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    extent : ndarray
        Share of the mineral that is gone. [1]

    References
    ----------
    .. [1] S. Yagi and D. Kunii, 5th Symp. (Int.) Combustion, 231, 1955 (from memory).
    """
    return extent_after(progress, 1.0, 0.0, 0.0, shape)


def layer_time(
    mineral: Values,
    per_calcium: Values,
    diffusivity: Values,
    length: Values,
    concentration: Values,
    shape: str,
) -> Array:
    """
    Return the whole time if only the demineralised layer holds the reagent up [1]_.

    Parameters
    ----------
    mineral : ndarray
        Calcium per volume of the piece. [mol/L]
    per_calcium : ndarray
        Reagent spent per calcium, z = 1/b. [1]
    diffusivity : ndarray
        Of the reagent in the demineralised layer. [m**2/h]
    length : ndarray
        Half the thickness of a slab, or the radius. [m]
    concentration : ndarray
        Reagent in the bath, as far as it is usable; with 1 the result is a dose. [mol/L]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    time : ndarray
        τ = c z L²/(2 d D C), d = 1, 2, 3. [h]

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    needed = np.asarray(mineral, dtype=float) * per_calcium * length * length
    time: Array = needed / (2 * dimension(shape) * diffusivity * concentration)
    return time


def reaction_time(
    mineral: Values,
    per_calcium: Values,
    surface_rate: Values,
    length: Values,
    concentration: Values,
    shape: str,
) -> Array:
    """
    Return the whole time if only the reaction at the front is slow [1]_.

    Parameters
    ----------
    mineral : ndarray
        Calcium per volume of the piece. [mol/L]
    per_calcium : ndarray
        Reagent spent per calcium, z = 1/b. [1]
    surface_rate : ndarray
        First-order rate constant of the reaction at the front; may be infinite. [m/h]
    length : ndarray
        Half the thickness of a slab, or the radius. [m]
    concentration : ndarray
        Reagent in the bath, as far as it is usable; with 1 the result is a dose. [mol/L]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    time : ndarray
        τ = c z L/(k C). [h]

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    dimension(shape)
    needed = np.asarray(mineral, dtype=float) * per_calcium * length
    time: Array = needed / (np.asarray(surface_rate, dtype=float) * concentration)
    return time


def film_time(
    mineral: Values,
    per_calcium: Values,
    transfer: Values,
    length: Values,
    concentration: Values,
    shape: str,
) -> Array:
    """
    Return the whole time if only the film around the piece is slow [1]_.

    Parameters
    ----------
    mineral : ndarray
        Calcium per volume of the piece. [mol/L]
    per_calcium : ndarray
        Reagent spent per calcium, z = 1/b. [1]
    transfer : ndarray
        Mass transfer coefficient of the film; may be infinite. [m/h]
    length : ndarray
        Half the thickness of a slab, or the radius. [m]
    concentration : ndarray
        Reagent in the bath, as far as it is usable; with 1 the result is a dose. [mol/L]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    time : ndarray
        τ = c z L/(d k C), d = 1, 2, 3. [h]

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    needed = np.asarray(mineral, dtype=float) * per_calcium * length
    time: Array = needed / (dimension(shape) * np.asarray(transfer, dtype=float) * concentration)
    return time


def extent_after(dose: Values, layer: Values, reaction: Values, film: Values, shape: str) -> Array:
    """
    Return the extent after a dose, three resistances in series [1]_.

    Parameters
    ----------
    dose : ndarray, shape (n_draws,)
        Concentration of the reagent integrated over time. [h mol/L]
    layer : ndarray, shape (n_draws,)
        Dose that the layer alone would need for the whole piece. [h mol/L]
    reaction : ndarray, shape (n_draws,)
        Dose that the reaction alone would need. [h mol/L]
    film : ndarray, shape (n_draws,)
        Dose that the film alone would need. [h mol/L]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    extent : ndarray, shape (n_draws,)
        Share of the mineral that is gone, at most 1. [1]

    Notes
    -----
    Times at constant concentration do as well as doses, if all four are times.

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    d = dimension(shape)
    dose, layer, reaction, film = np.broadcast_arrays(
        *(np.asarray(a, dtype=float) for a in (dose, layer, reaction, film))
    )
    low = _slab_extent(dose, layer, reaction + film)
    if d == 1:
        return low
    # A round piece is faster than a slab, but never by more than d in layer and reaction.
    high = _slab_extent(dose, layer / d, reaction / d + film)

    def surplus(extent: Array) -> Array:
        spent = layer * layer_progress(extent, shape) + film * extent
        surplus: Array = spent + reaction * reaction_progress(extent, shape) - dose
        return surplus

    root = rising_root(surplus, low, high, tolerance=1e-14)
    finished = (dose > 0) & (dose >= layer + reaction + film)
    return np.where(finished, 1.0, np.clip(root, low, high))


def _slab_extent(dose: Array, layer: Array, linear: Array) -> Array:
    """Positive root of layer X² + linear X = dose, at most 1."""
    bottom = linear + np.sqrt(linear * linear + 4 * layer * dose)
    at_once = (bottom == 0) & (dose > 0)
    extent = np.minimum(2 * dose / np.where(bottom == 0, 1.0, bottom), 1.0)
    return np.where(at_once, 1.0, extent)
