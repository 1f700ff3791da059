"""Properties of liquid water at 0.1 MPa that scale diffusion and electrolytes with temperature."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.kinetics.constants import AVOGADRO, BOLTZMANN

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


def density(temperature: ArrayLike) -> Array:
    """
    Return the density of air-free water at 0.1 MPa [1]_.

    Parameters
    ----------
    temperature : array_like
        Absolute temperature, 273 to 423 K. [K]

    Returns
    -------
    density : ndarray
        Density. [g/mL]

    References
    ----------
    .. [1] G. S. Kell, J. Chem. Eng. Data 20, 97, 1975 (from memory).
    """
    t = np.asarray(temperature, dtype=float) - 273.15
    above = np.polynomial.polynomial.polyval(
        t, (999.83952, 16.945176, -7.9870401e-3, -46.170461e-6, 105.56302e-9, -280.54253e-12)
    )
    result: Array = above / (1 + 16.879850e-3 * t) / 1000
    return result


_CORRELATION = (  # coefficient, power of the density, power of the inverse temperature
    (0.978224486826, 1, 0.25),
    (-0.957771379375, 1, 1),
    (0.237511794148, 1, 2.5),
    (0.714692244396, 2, 1.5),
    (-0.298217036956, 3, 1.5),
    (-0.108863472196, 3, 2.5),
    (0.949327488264e-1, 4, 2),
    (-0.980469816509e-2, 5, 2),
    (0.165167634970e-4, 6, 5),
    (0.937359795772e-4, 7, 0.5),
    (-0.123179218720e-9, 10, 10),
)


def relative_permittivity(temperature: ArrayLike) -> Array:
    r"""
    Return the static relative permittivity of liquid water at 0.1 MPa [1]_.

    Parameters
    ----------
    temperature : array_like
        Absolute temperature, 238 to 373 K. [K]

    Returns
    -------
    permittivity : ndarray
        Relative to vacuum. [1]

    Notes
    -----
    The Kirkwood factor is a sum of powers of density and temperature; the permittivity follows
    from it by a quadratic.

    References
    ----------
    .. [1] D. P. Fernandez et al., J. Phys. Chem. Ref. Data 26, 1125, 1997; IAPWS R8-97
       (from memory).
    """
    t = np.asarray(temperature, dtype=float)
    molar = density(t) * 1e6 / 18.015268  # [mol/m**3]
    d, tau = molar / (322e3 / 18.015268), 647.096 / t
    factor = 1 + sum(n * d**i * tau**j for n, i, j in _CORRELATION)
    factor = factor + 0.196096504426e-2 * d * (t / 228 - 1) ** -1.2
    vacuum, dipole, polarisability = 8.8541878128e-12, 6.138e-30, 1.636e-40
    a = AVOGADRO * dipole**2 * molar * factor / (vacuum * BOLTZMANN * t)
    b = AVOGADRO * polarisability * molar / (3 * vacuum)
    root = np.sqrt(9 + 2 * a + 18 * b + a**2 + 10 * a * b + 9 * b**2)
    result: Array = (1 + a + 5 * b + root) / (4 - 4 * b)
    return result


def ionisation_pk(temperature: ArrayLike) -> Array:
    r"""
    Return pKw, the negative logarithm of the ion product of water, at 0.1 MPa [1]_.

    Parameters
    ----------
    temperature : array_like
        Absolute temperature, 273 to 373 K. [K]

    Returns
    -------
    pk : ndarray
        Molal ion product, as -log10. [1]

    References
    ----------
    .. [1] A. V. Bandura and S. N. Lvov, J. Phys. Chem. Ref. Data 35, 15, 2006; IAPWS R11-07
       (from memory).
    """
    t, rho = np.asarray(temperature, dtype=float), density(temperature)
    q = rho * np.exp(-0.864671 + 8659.19 / t - 22786.2 / t**2 * rho ** (2 / 3))
    bracket = np.log10(1 + q) - q / (q + 1) * rho * (0.642044 - 56.8534 / t - 0.375754 * rho)
    gas = 0.61415 + 48251.33 / t - 67707.93 / t**2 + 10102100.0 / t**3
    result: Array = -12 * bracket + gas + 2 * np.log10(18.015268 / 1000)
    return result


def debye_huckel_slope(temperature: ArrayLike) -> Array:
    r"""
    Return the Debye-Hückel limiting slope A for log10 of an activity coefficient [1]_.

    Parameters
    ----------
    temperature : array_like
        Absolute temperature, 273 to 373 K. [K]

    Returns
    -------
    slope : ndarray
        A, on the molal scale. [(kg/mol)^0.5]

    Notes
    -----
    .. math:: A = 1.82483 \times 10^6 \rho^{1/2} (\epsilon T)^{-3/2}

    References
    ----------
    .. [1] P. Debye and E. Hückel, Phys. Z. 24, 185, 1923 (constants of nature as of 2019).
    """
    t = np.asarray(temperature, dtype=float)
    result: Array = 1.82483e6 * np.sqrt(density(t)) / (relative_permittivity(t) * t) ** 1.5
    return result
