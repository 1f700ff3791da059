"""When calcium phosphate comes out of solution, and how much of it a weak acid can hold."""

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.chelation import (
    DIHYDROGEN_PHOSPHATE_CALCIUM,
    HYDROGEN_PHOSPHATE_CALCIUM,
    form_share,
    phosphate_pks,
)
from digestplan.kinetics.roots import rising_root
from digestplan.kinetics.solution import STANDARD, apparent_pk, davies_term, protonated_share
from digestplan.kinetics.water import ionisation_pk

Array = NDArray[np.float64]
Values = Array | float

BRUSHITE = -6.59  # log10 of the solubility product of CaHPO4·2H2O at 25 °C; from memory
STRONG = -9.0  # pK of an acid that is always dissociated
NO_PAIR = -9.0  # log10 of the constant of an ion pair that is not formed
_ROUNDS = 40


def brushite_index(
    calcium: Values,
    phosphate: Values,
    ph: Values,
    ionic_strength: Values,
    temperature: Values = STANDARD,
) -> Array:
    """
    Return the saturation index of brushite, CaHPO4·2H2O [1]_.

    Parameters
    ----------
    calcium : ndarray
        Free calcium. [mol/L]
    phosphate : ndarray
        Phosphate that is not bound to calcium. [mol/L]
    ph : ndarray
        pH. [1]
    ionic_strength : ndarray
        Ionic strength. [mol/L]
    temperature : ndarray
        Absolute temperature; the solubility is that of 25 °C. [K]

    Returns
    -------
    index : ndarray
        log10 of the ion product over that at saturation; above 0 a cloud is to be expected. [1]

    References
    ----------
    .. [1] T. M. Gregory, E. C. Moreno and W. E. Brown, J. Res. NBS 74A, 461, 1970 (from memory).
    """
    hydrogen = form_share(ph, phosphate_pks(ionic_strength, temperature), 2) * phosphate
    activity = -8 * davies_term(ionic_strength, temperature)
    with np.errstate(divide="ignore"):
        product = np.log10(np.asarray(calcium, dtype=float)) + np.log10(hydrogen)
    return np.asarray(product + activity - BRUSHITE)


def calcium_at_saturation(
    acid: float, pk: float, pair: float = NO_PAIR, per_phosphate: float = 1.5
) -> tuple[float, float]:
    """
    Return the calcium in a bath of acid that has dissolved all the phosphate it can hold [1]_.

    Parameters
    ----------
    acid : float
        Concentration of an acid with one proton. [mol/L]
    pk : float
        Its pK at 25 °C and infinite dilution; `STRONG` for a mineral acid. [1]
    pair : float
        log10 of the constant of calcium with its anion at infinite dilution. [1]
    per_phosphate : float
        Calcium per phosphate that dissolves; 1.5 for Ca3(PO4)2, 1.7 for bone. [1]

    Returns
    -------
    calcium : float
        Total dissolved calcium at 25 °C when brushite begins to come out. [mol/L]
    ph : float
        pH at that point. [1]

    Notes
    -----
    Davies activities at 0.2 to 1 mol/L: a factor of 1.5 for formic acid, more for acetic acid.

    References
    ----------
    .. [1] T. M. Gregory, E. C. Moreno and W. E. Brown, J. Res. NBS 74A, 461, 1970 (from memory).
    """
    strength = 0.3
    for _ in range(_ROUNDS):
        term = float(davies_term(strength, STANDARD))
        pks = phosphate_pks(strength)
        bath = _SaturatedBath(acid, float(apparent_pk(pk, 0, strength, STANDARD)), pair, term, pks)
        ph = bath.ph(per_phosphate)
        _, calcium, new = (float(v[0]) for v in bath.at(ph, per_phosphate))
        if abs(new - strength) < 1e-8:
            break
        strength = (strength + new) / 2
    return calcium, float(ph[0])


class _SaturatedBath:
    """Species in equilibrium with brushite at a pH and a `davies_term`."""

    def __init__(self, acid: float, pk: float, pair: float, term: float, pks: list[Array]) -> None:
        self.acid, self.pk, self.pks, self.term = acid, pk, pks, term
        self.product = 10 ** (BRUSHITE + 8 * term)
        self.with_two = 10 ** (HYDROGEN_PHOSPHATE_CALCIUM - 8 * term)
        self.with_one = 10 ** (DIHYDROGEN_PHOSPHATE_CALCIUM - 4 * term)
        self.pair = 10 ** (pair - 4 * term)

    def ph(self, per_phosphate: float) -> Array:
        """Where the charges balance: their surplus falls with the pH."""
        return rising_root(
            lambda ph: -self.at(ph, per_phosphate)[0], np.array([0.0]), np.array([9.0])
        )

    def at(self, ph: Array, per_phosphate: float) -> tuple[Array, Array, Array]:
        """Charge that is not balanced, total calcium, ionic strength."""
        shares = [form_share(ph, self.pks, lost) for lost in range(4)]
        hydrogen_pair = self.with_two * self.product + 0 * ph
        dihydrogen_pair = self.with_one * self.product * shares[1] / shares[2]
        anion = 1 - protonated_share(ph, self.pk)

        def species(free: Array) -> tuple[Array, Array, Array]:
            phosphate = self.product / (free * shares[2])
            paired = self.acid * self.pair * free * anion / (1 + self.pair * free * anion)
            calcium = free + hydrogen_pair + dihydrogen_pair + paired
            return calcium, phosphate, paired

        def surplus(log_free: Array) -> Array:
            calcium, phosphate, _ = species(10**log_free)
            return calcium - per_phosphate * (phosphate + hydrogen_pair + dihydrogen_pair)

        free = 10 ** rising_root(surplus, np.full_like(ph, -9.0), np.full_like(ph, 2.0))
        calcium, phosphate, paired = species(free)
        acid_anion = (self.acid - paired) * anion
        proton, hydroxide = 10 ** (self.term - ph), 10 ** (ph - ionisation_pk(STANDARD) + self.term)
        charges = sum(lost * share for lost, share in enumerate(shares))
        squares = sum(lost**2 * share for lost, share in enumerate(shares))
        charge = 2 * free + dihydrogen_pair + paired + proton - hydroxide
        charge = charge - acid_anion - phosphate * charges
        strength = 4 * free + dihydrogen_pair + paired + proton + hydroxide
        strength = (strength + acid_anion + phosphate * squares) / 2
        return charge, calcium, strength
