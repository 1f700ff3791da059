"""pH of buffers and mixtures: pK with temperature and ionic strength, and the charge balance.

pH means −log10 of the activity of H⁺; all other concentrations are molar, at 0.1 MPa, and molar
stands for molal.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.constants import GAS_CONSTANT
from digestplan.kinetics.roots import rising_root
from digestplan.kinetics.water import debye_huckel_slope, ionisation_pk

Array = NDArray[np.float64]
Values = Array | float

STANDARD = 298.15  # [K]
_LOWEST, _HIGHEST = -2.0, 16.0  # pH between which every mixture lies
_ROUNDS = 60
_SETTLED = 1e-10  # [mol/L] by which the ionic strength may still change


def pk_at(temperature: Values, pk: Values, enthalpy: Values, heat_capacity: Values = 0.0) -> Array:
    r"""
    Return a pK at a temperature from its value, enthalpy and heat capacity at 25 °C [1]_.

    Parameters
    ----------
    temperature : ndarray
        Absolute temperature. [K]
    pk : ndarray
        pK at 298.15 K and infinite dilution. [1]
    enthalpy : ndarray
        Enthalpy of the dissociation at 298.15 K. [J/mol]
    heat_capacity : ndarray
        Change of the heat capacity on dissociation. [J/(mol K)]

    Returns
    -------
    pk : ndarray
        pK at the temperature, infinite dilution. [1]

    Notes
    -----
    .. math:: pK = pK_0 + \frac{1}{R\ln 10}\left[\Delta H\left(\frac1T-\frac1{T_0}\right)
        - \Delta C_p\left(\frac{T_0}{T}-1+\ln\frac{T}{T_0}\right)\right]

    References
    ----------
    .. [1] R. N. Goldberg, N. Kishore and R. M. Lennen, J. Phys. Chem. Ref. Data 31, 231, 2002
       (as quoted elsewhere).
    """
    over = STANDARD / np.asarray(temperature, dtype=float) - 1
    scale = 1 / (GAS_CONSTANT * np.log(10))
    by_enthalpy = np.asarray(enthalpy, dtype=float) * scale / STANDARD
    by_capacity = np.asarray(heat_capacity, dtype=float) * scale
    moved: Array = pk + (by_enthalpy - by_capacity) * over + by_capacity * np.log1p(over)
    return moved


def davies_term(ionic_strength: Values, temperature: Values) -> Array:
    r"""
    Return −log10 of the activity coefficient of a singly charged ion [1]_.

    Parameters
    ----------
    ionic_strength : ndarray
        Ionic strength. [mol/L]
    temperature : ndarray
        Absolute temperature. [K]

    Returns
    -------
    term : ndarray
        For charge z it is z² times as much. [1]

    Notes
    -----
    .. math:: A\left(\frac{\sqrt I}{1+\sqrt I} - 0.3 I\right)

    Good to some 0.02 up to 0.1 mol/L, a guess beyond 0.5 mol/L.

    References
    ----------
    .. [1] C. W. Davies, Ion Association, 1962 (from memory).
    """
    strength = np.asarray(ionic_strength, dtype=float)
    root = np.sqrt(strength)
    term: Array = debye_huckel_slope(temperature) * (root / (1 + root) - 0.3 * strength)
    return term


def apparent_pk(pk: Values, charge: int, ionic_strength: Values, temperature: Values) -> Array:
    """
    Return the pK that goes with pH and molar concentrations at an ionic strength [1]_.

    Parameters
    ----------
    pk : ndarray
        pK at infinite dilution and the temperature. [1]
    charge : int
        Charge of the acid form: 1 for Tris, 0 for acetic acid, −1 for phosphate pK2. [1]
    ionic_strength : ndarray
        Ionic strength. [mol/L]
    temperature : ndarray
        Absolute temperature. [K]

    Returns
    -------
    pk : ndarray
        Such that pH = pK' + log10(base/acid). [1]

    References
    ----------
    .. [1] C. W. Davies, Ion Association, 1962 (from memory).
    """
    return np.asarray(pk + (2 * charge - 1) * davies_term(ionic_strength, temperature))


def protonated_share(ph: Values, pk: Values) -> Array:
    """
    Return which share of an acid with one proton still carries it [1]_.

    Parameters
    ----------
    ph : ndarray
        pH. [1]
    pk : ndarray
        pK. [1]

    Returns
    -------
    share : ndarray
        Of hydrazoic acid, for example, in a liquid with azide. [1]

    References
    ----------
    .. [1] Mass action.
    """
    with np.errstate(over="ignore"):
        share: Array = 1 / (1 + 10 ** (np.asarray(ph, dtype=float) - pk))
    return share


def ph_of_buffer(
    ph: Values,
    set_at: Values,
    temperature: Values,
    pk: Values,
    enthalpy: Values,
    heat_capacity: Values = 0.0,
    charge: int = 0,
    ionic_strength: Values = 0.0,
) -> Array:
    """
    Return the pH of a buffer at another temperature than that at which it was set [1]_.

    Parameters
    ----------
    ph : ndarray
        pH as set. [1]
    set_at : ndarray
        Absolute temperature at which it was set. [K]
    temperature : ndarray
        Absolute temperature at which it is used. [K]
    pk : ndarray
        pK at 298.15 K and infinite dilution. [1]
    enthalpy : ndarray
        Enthalpy of the dissociation at 298.15 K. [J/mol]
    heat_capacity : ndarray
        Change of the heat capacity on dissociation. [J/(mol K)]
    charge : int
        Charge of the acid form; it counts only with an ionic strength. [1]
    ionic_strength : ndarray
        Ionic strength. [mol/L]

    Returns
    -------
    ph : ndarray
        pH in use: acid and base keep their ratio, so that it moves with the pK. [1]

    References
    ----------
    .. [1] R. N. Goldberg, N. Kishore and R. M. Lennen, J. Phys. Chem. Ref. Data 31, 231, 2002
       (as quoted elsewhere).
    """
    here, there = (
        apparent_pk(pk_at(t, pk, enthalpy, heat_capacity), charge, ionic_strength, t)
        for t in (temperature, set_at)
    )
    return np.asarray(ph + here - there)


@dataclass(frozen=True, slots=True, eq=False)
class Buffer:
    """An acid that loses its protons one after the other. Shapes (n_draws,) or scalars.

    Attributes
    ----------
    total
        Concentration of all its forms together. [mol/L]
    pks
        pK at the temperature and infinite dilution, in the order in which protons leave. [1]
    charge
        Charge of the form with all its protons: 1 for Tris, 0 for phosphoric acid. [1]
    """

    total: Values
    pks: Sequence[Values]
    charge: int = 0

    def charges(self, ph: Array, term: Values) -> tuple[Array, Array]:
        """Mean charge, and mean square of it, at a pH and a `davies_term` [1]."""
        exponent = np.zeros_like(ph + term)
        exponents = [exponent]
        for lost, pk in enumerate(self.pks):
            acid = self.charge - lost
            exponent = exponent + ph - (pk + (2 * acid - 1) * term)
            exponents.append(exponent)
        weights = 10 ** (np.array(exponents) - np.max(exponents, axis=0))
        weights /= weights.sum(axis=0)
        charges = (self.charge - np.arange(len(exponents))).reshape(-1, *(1,) * exponent.ndim)
        return (weights * charges).sum(axis=0), (weights * charges**2).sum(axis=0)


def strong_ions(
    buffers: Sequence[Buffer], ph: Values, temperature: Values, ionic_strength: Values = 0.0
) -> Array:
    """
    Return the excess of strong cations over strong anions that gives a mixture its pH [1]_.

    Parameters
    ----------
    buffers : sequence of Buffer
        What can take or give protons, at the temperature. [mol/L]
    ph : ndarray, shape (n_draws,)
        pH as set. [1]
    temperature : ndarray, shape (n_draws,)
        Absolute temperature. [K]
    ionic_strength : ndarray, shape (n_draws,)
        Ionic strength. [mol/L]

    Returns
    -------
    excess : ndarray, shape (n_draws,)
        Such as sodium minus chloride; negative for Tris set with acid. [mol/L]

    References
    ----------
    .. [1] Charge balance.
    """
    term = davies_term(ionic_strength, temperature)
    ph, term = np.broadcast_arrays(np.asarray(ph, dtype=float), term)
    excess: Array = -_charge(buffers, ph, term, ionisation_pk(temperature))
    return excess


def _charge(buffers: Sequence[Buffer], ph: Array, term: Array, pkw: Array) -> Array:
    """Charge of all but the strong ions."""
    charge = 10 ** (term - ph) - 10 ** (ph - pkw + term)
    for buffer in buffers:
        charge = charge + buffer.total * buffer.charges(ph, term)[0]
    return charge


def _strength(
    buffers: Sequence[Buffer], ph: Array, term: Array, pkw: Array, strong: Array
) -> Array:
    """Ionic strength, the strong ions as one kind of singly charged ones."""
    doubled = 10 ** (term - ph) + 10 ** (ph - pkw + term) + np.abs(strong)
    for buffer in buffers:
        doubled = doubled + buffer.total * buffer.charges(ph, term)[1]
    half: Array = doubled / 2
    return half


def solve_ph(
    buffers: Sequence[Buffer],
    strong: Values,
    temperature: Values,
    ionic_strength: Values | None = None,
    background: Values = 0.0,
) -> Array:
    """
    Return the pH of a mixture from its charge balance [1]_.

    Parameters
    ----------
    buffers : sequence of Buffer
        What can take or give protons, at the temperature. [mol/L]
    strong : ndarray, shape (n_draws,)
        Strong cations less strong anions, each times its charge; acid carried over counts as
        minus its concentration. See `strong_ions`. [mol/L]
    temperature : ndarray, shape (n_draws,)
        Absolute temperature. [K]
    ionic_strength : ndarray, shape (n_draws,), or None
        Ionic strength; None to find it from the mixture. [mol/L]
    background : ndarray, shape (n_draws,)
        Ionic strength of salts that take no part, where it is to be found. [mol/L]

    Returns
    -------
    ph : ndarray, shape (n_draws,)
        −log10 of the activity of H⁺. [1]

    Notes
    -----
    The charge falls with the pH, so that there is one root; ionic strength and pH are found in
    turns until they settle.

    References
    ----------
    .. [1] Charge balance; activities after C. W. Davies, Ion Association, 1962 (from memory).
    """
    totals = [v for b in buffers for v in (b.total, *b.pks)]
    given = 0.0 if ionic_strength is None else ionic_strength
    shapes = (np.shape(v) for v in (strong, temperature, given, background, *totals))
    shape = np.broadcast_shapes(*shapes)
    strong = np.broadcast_to(np.asarray(strong, dtype=float), shape)
    pkw = np.broadcast_to(ionisation_pk(temperature), shape)
    strength = np.broadcast_to(np.asarray(given, dtype=float), shape)
    if ionic_strength is None:
        strength = strength + background + np.abs(strong) / 2
    for _ in range(_ROUNDS):
        term = np.broadcast_to(davies_term(strength, temperature), shape)
        ph = _balanced(buffers, strong, term, pkw)
        if ionic_strength is not None:
            return ph
        before = strength
        strength = background + _strength(buffers, ph, term, pkw, strong)
        if np.max(np.abs(strength - before), initial=0.0) < _SETTLED:
            break
    return ph


def _balanced(buffers: Sequence[Buffer], strong: Array, term: Array, pkw: Array) -> Array:
    def lacking(ph: Array) -> Array:
        return -_charge(buffers, ph, term, pkw) - strong

    low, high = (np.full(strong.shape, ph) for ph in (_LOWEST, _HIGHEST))
    return rising_root(lacking, low, high, tolerance=1e-13)
