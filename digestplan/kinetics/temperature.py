"""How fast an enzyme works at a temperature, relative to its reference temperature."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.kinetics.constants import BOLTZMANN, GAS_CONSTANT, PLANCK

Array = NDArray[np.float64]

_SECONDS_PER_HOUR = 3600.0


def arrhenius_factor(
    temperature: ArrayLike, activation_energy: ArrayLike, reference_temperature: ArrayLike
) -> Array:
    r"""
    Return the rate at a temperature, relative to the reference temperature [1]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature of the sample. [K]
    activation_energy : array_like, shape (n_draws,)
        Apparent activation energy. [J/mol]
    reference_temperature : array_like
        Temperature at which the factor is 1. [K]

    Returns
    -------
    factor : ndarray, shape (n_nodes, n_draws)
        Relative rate. [1]

    Notes
    -----
    .. math:: f = \exp[-(E_a/R)(1/T - 1/T_{ref})]

    Valid within the measured range of the enzyme; below 273 K the line bends.

    References
    ----------
    .. [1] S. Arrhenius, Z. Phys. Chem. 4, 226, 1889.
    """
    scaled = np.asarray(activation_energy, dtype=float) / GAS_CONSTANT
    at_reference: Array = np.asarray(scaled / np.asarray(reference_temperature, dtype=float))
    factor: Array = np.asarray(scaled / np.asarray(temperature, dtype=float))
    if factor.ndim == 0 or np.broadcast_shapes(factor.shape, at_reference.shape) != factor.shape:
        apart: Array = np.exp(at_reference - factor)
        return apart
    # in place: one large array, not three, for fresh memory costs more than the exponential
    np.subtract(at_reference, factor, out=factor)
    np.exp(factor, out=factor)
    return factor


def eyring_factor(
    temperature: ArrayLike, activation_enthalpy: ArrayLike, reference_temperature: ArrayLike
) -> Array:
    r"""
    Return the rate at a temperature by transition-state theory, relative to the reference [1]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature of the sample. [K]
    activation_enthalpy : array_like, shape (n_draws,)
        Activation enthalpy. [J/mol]
    reference_temperature : array_like
        Temperature at which the factor is 1. [K]

    Returns
    -------
    factor : ndarray, shape (n_nodes, n_draws)
        Relative rate. [1]

    Notes
    -----
    .. math:: f = (T/T_{ref}) \exp[-(\Delta H^\ddagger/R)(1/T - 1/T_{ref})]

    References
    ----------
    .. [1] H. Eyring, J. Chem. Phys. 3, 107, 1935 (from memory).
    """
    ratio = np.asarray(temperature) / np.asarray(reference_temperature)
    result: Array = ratio * arrhenius_factor(
        temperature, activation_enthalpy, reference_temperature
    )
    return result


def q10_factor(temperature: ArrayLike, q10: ArrayLike, reference_temperature: ArrayLike) -> Array:
    r"""
    Return the rate at a temperature by a Q10, relative to the reference temperature [1]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature of the sample. [K]
    q10 : array_like, shape (n_draws,)
        Factor by which the rate rises over 10 K. [1]
    reference_temperature : array_like
        Temperature at which the factor is 1. [K]

    Returns
    -------
    factor : ndarray, shape (n_nodes, n_draws)
        Relative rate. [1]

    References
    ----------
    .. [1] J. H. van 't Hoff, Etudes de dynamique chimique, 1884 (from memory).
    """
    tens = (np.asarray(temperature) - np.asarray(reference_temperature)) / 10
    result: Array = np.asarray(q10, dtype=float) ** tens
    return result


def mmrt_factor(
    temperature: ArrayLike,
    activation_enthalpy: ArrayLike,
    heat_capacity_change: ArrayLike,
    reference_temperature: ArrayLike,
) -> Array:
    r"""
    Return the rate by macromolecular rate theory, relative to the reference temperature [1]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature of the sample. [K]
    activation_enthalpy : array_like, shape (n_draws,)
        Activation enthalpy at the reference temperature. [J/mol]
    heat_capacity_change : array_like, shape (n_draws,)
        Activation heat capacity, negative for an optimum. [J/(mol K)]
    reference_temperature : array_like
        Temperature at which the factor is 1. [K]

    Returns
    -------
    factor : ndarray, shape (n_nodes, n_draws)
        Relative rate. [1]

    Notes
    -----
    .. math::
        \ln f = \ln\frac{T}{T_{ref}} - \frac{\Delta H^\ddagger - \Delta C_p^\ddagger T_{ref}}{R}
        \left(\frac1T - \frac1{T_{ref}}\right) + \frac{\Delta C_p^\ddagger}{R}\ln\frac{T}{T_{ref}}

    References
    ----------
    .. [1] J. K. Hobbs et al., ACS Chem. Biol. 8, 2388, 2013 (from memory).
    """
    t, t0 = np.asarray(temperature), np.asarray(reference_temperature)
    capacity = np.asarray(heat_capacity_change)
    constant_part = np.asarray(activation_enthalpy) - capacity * t0
    bend = (capacity / GAS_CONSTANT) * np.log(t / t0)
    result: Array = eyring_factor(t, constant_part, t0) * np.exp(bend)
    return result


def active_share(
    temperature: ArrayLike, equilibrium_temperature: ArrayLike, equilibrium_enthalpy: ArrayLike
) -> Array:
    r"""
    Return the share of enzyme in its active form where that is in fast equilibrium [1]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature of the sample. [K]
    equilibrium_temperature : array_like, shape (n_draws,)
        Temperature at which half is active. [K]
    equilibrium_enthalpy : array_like, shape (n_draws,)
        Enthalpy from the active to the inactive form. [J/mol]

    Returns
    -------
    share : ndarray, shape (n_nodes, n_draws)
        1/(1 + K). [1]

    Notes
    -----
    .. math:: K = \exp[(\Delta H_{eq}/R)(1/T_{eq} - 1/T)]

    References
    ----------
    .. [1] M. E. Peterson et al., Biochem. J. 383, 3, 2004 (from memory).
    """
    return np.exp(-_log_one_plus_k(temperature, equilibrium_temperature, equilibrium_enthalpy))


def _log_one_plus_k(
    temperature: ArrayLike, equilibrium_temperature: ArrayLike, equilibrium_enthalpy: ArrayLike
) -> Array:
    inverse = 1 / np.asarray(equilibrium_temperature) - 1 / np.asarray(temperature)
    log_k = np.asarray(equilibrium_enthalpy) / GAS_CONSTANT * inverse
    return np.logaddexp(0.0, log_k)


def equilibrium_factor(
    temperature: ArrayLike,
    activation_energy: ArrayLike,
    equilibrium_temperature: ArrayLike,
    equilibrium_enthalpy: ArrayLike,
    reference_temperature: ArrayLike,
) -> Array:
    r"""
    Return the rate by the equilibrium model, relative to the reference temperature [1]_ [2]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature of the sample. [K]
    activation_energy : array_like, shape (n_draws,)
        Activation energy of the active form. [J/mol]
    equilibrium_temperature : array_like, shape (n_draws,)
        Temperature at which half is active. [K]
    equilibrium_enthalpy : array_like, shape (n_draws,)
        Enthalpy from the active to the inactive form. [J/mol]
    reference_temperature : array_like
        Temperature at which the factor is 1. [K]

    Returns
    -------
    factor : ndarray, shape (n_nodes, n_draws)
        Relative rate. [1]

    References
    ----------
    .. [1] R. M. Daniel and M. J. Danson, Trends Biochem. Sci. 26, 2001 (from memory).
    .. [2] M. E. Peterson et al., Biochem. J. 383, 3, 2004 (from memory).
    """
    shares = (equilibrium_temperature, equilibrium_enthalpy)
    gone = _log_one_plus_k(reference_temperature, *shares) - _log_one_plus_k(temperature, *shares)
    return arrhenius_factor(temperature, activation_energy, reference_temperature) * np.exp(gone)


def inactive_share_factor(
    temperature: ArrayLike,
    equilibrium_temperature: ArrayLike,
    equilibrium_enthalpy: ArrayLike,
    reference_temperature: ArrayLike,
) -> Array:
    r"""
    Return the share in the inactive form, relative to that at the reference temperature [1]_.

    Parameters
    ----------
    temperature : array_like, shape (n_nodes, n_draws)
        Absolute temperature of the sample. [K]
    equilibrium_temperature : array_like, shape (n_draws,)
        Temperature at which half is active. [K]
    equilibrium_enthalpy : array_like, shape (n_draws,)
        Enthalpy from the active to the inactive form. [J/mol]
    reference_temperature : array_like
        Temperature at which the factor is 1. [K]

    Returns
    -------
    factor : ndarray, shape (n_nodes, n_draws)
        K/(1 + K) at T over the same at the reference temperature. [1]

    References
    ----------
    .. [1] M. E. Peterson et al., Biochem. J. 383, 3, 2004 (from memory).
    """
    shares = (equilibrium_temperature, -np.asarray(equilibrium_enthalpy))
    here = _log_one_plus_k(temperature, *shares)
    there = _log_one_plus_k(reference_temperature, *shares)
    return np.exp(there - here)


def eyring_rate(temperature: ArrayLike, enthalpy: ArrayLike, entropy: ArrayLike) -> Array:
    r"""
    Return a first-order rate constant by transition-state theory [1]_.

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

    Notes
    -----
    .. math:: k = (k_B T/h) \exp(\Delta S^\ddagger/R - \Delta H^\ddagger/RT)

    References
    ----------
    .. [1] H. Eyring, J. Chem. Phys. 3, 107, 1935 (from memory).
    """
    t = np.asarray(temperature)
    exponent = np.asarray(entropy) / GAS_CONSTANT - np.asarray(enthalpy) / (GAS_CONSTANT * t)
    result: Array = BOLTZMANN / PLANCK * _SECONDS_PER_HOUR * t * np.exp(exponent)
    return result
