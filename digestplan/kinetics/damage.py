"""What is lost of the matrix that must be kept: by the enzyme, by heat, by acid."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.kinetics.temperature import arrhenius_factor, eyring_rate

Array = NDArray[np.float64]


def keep_loss(exponent: ArrayLike) -> Array:
    """
    Return the fraction lost of what must be kept [1]_.

    Parameters
    ----------
    exponent : array_like
        Sum of what enzyme, heat and acid did to it. [1]

    Returns
    -------
    loss : ndarray
        1 - exp(-exponent). [1]

    References
    ----------
    .. [1] Independent first-order losses; common practice.
    """
    loss: Array = -np.expm1(-np.asarray(exponent, dtype=float))
    return loss


def melting_rate_eyring(temperature: ArrayLike, enthalpy: ArrayLike, entropy: ArrayLike) -> Array:
    """
    Return how fast native collagen melts, irreversibly and first order [1]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature. [K]
    enthalpy : array_like, shape (n_draws,)
        Activation enthalpy. [J/mol]
    entropy : array_like, shape (n_draws,)
        Activation entropy. [J/(mol K)]

    Returns
    -------
    rate : ndarray, shape (n_nodes, n_draws)
        Rate constant. [1/h]

    References
    ----------
    .. [1] C. E. Weir, J. Res. Natl. Bur. Stand. 42, 17, 1949 (from memory).
    """
    return eyring_rate(temperature, enthalpy, entropy)


def melting_rate_arrhenius(
    temperature: ArrayLike, rate: ArrayLike, energy: ArrayLike, reference_temperature: ArrayLike
) -> Array:
    """
    Return how fast heat destroys a matrix, from its rate at one temperature [1]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature. [K]
    rate : array_like, shape (n_draws,)
        Rate at the reference temperature. [1/h]
    energy : array_like, shape (n_draws,)
        Activation energy. [J/mol]
    reference_temperature : array_like
        Temperature of the rate. [K]

    Returns
    -------
    rate : ndarray, shape (n_nodes, n_draws)
        Rate constant. [1/h]

    References
    ----------
    .. [1] S. Arrhenius, Z. Phys. Chem. 4, 226, 1889.
    """
    return np.asarray(rate) * arrhenius_factor(temperature, energy, reference_temperature)


def acid_loss_rate(
    temperature: ArrayLike,
    hydrogen_ions: ArrayLike,
    rate_per_molar: ArrayLike,
    energy: ArrayLike,
    reference_temperature: ArrayLike = 293.15,
) -> Array:
    """
    Return how fast acid cuts the matrix that must be kept [1]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature. [K]
    hydrogen_ions : array_like, shape (n_nodes, n_draws)
        Concentration of hydrogen ions. [mol/L]
    rate_per_molar : array_like, shape (n_draws,)
        Rate at the reference temperature for each molar of hydrogen ions. [L/(mol h)]
    energy : array_like, shape (n_draws,)
        Activation energy. [J/mol]
    reference_temperature : array_like
        Temperature of the rate. [K]

    Returns
    -------
    rate : ndarray, shape (n_nodes, n_draws)
        Rate constant. [1/h]

    References
    ----------
    .. [1] Acid-catalysed hydrolysis, first order in hydrogen ions; A. Radzicka and
       R. Wolfenden, J. Am. Chem. Soc. 118, 6105, 1996 (from memory).
    """
    scaled = np.asarray(rate_per_molar) * arrhenius_factor(
        temperature, energy, reference_temperature
    )
    result: Array = scaled * np.asarray(hydrogen_ions)
    return result
