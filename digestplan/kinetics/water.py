"""Properties of liquid water at 0.1 MPa that scale diffusion and electrolytes with temperature."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]


def viscosity(temperature: ArrayLike) -> Array:
    r"""
    Return the dynamic viscosity of liquid water at 0.1 MPa [1]_.

    Parameters
    ----------
    temperature : array_like
        Absolute temperature, 253 to 383 K. [K]

    Returns
    -------
    viscosity : ndarray
        Dynamic viscosity. [Pa s]

    Notes
    -----
    .. math:: \eta = 10^{-6} \sum_i a_i (T/300)^{b_i}

    References
    ----------
    .. [1] J. Patek et al., J. Phys. Chem. Ref. Data 38, 21, 2009; IAPWS SR6-08 (from memory).
    """
    t = np.asarray(temperature, dtype=float) / 300.0
    result: Array = 1e-6 * (
        280.68 * t**-1.9 + 511.45 * t**-7.7 + 61.131 * t**-19.6 + 0.45903 * t**-40.0
    )
    return result


def stokes_einstein_factor(temperature: ArrayLike, reference_temperature: ArrayLike) -> Array:
    r"""
    Return how diffusion in water scales with temperature, relative to a reference [1]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature. [K]
    reference_temperature : array_like
        Temperature at which the factor is 1. [K]

    Returns
    -------
    factor : ndarray, shape (n_nodes, n_draws)
        Relative diffusivity, T/viscosity. [1]

    References
    ----------
    .. [1] A. Einstein, Ann. Phys. 17, 549, 1905 (from memory).
    """
    t, t0 = np.asarray(temperature, dtype=float), np.asarray(reference_temperature, dtype=float)
    result: Array = t / t0 * viscosity(t0) / viscosity(t)
    return result
