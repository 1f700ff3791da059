"""What a mineral needs and gives off: formula masses, acid or chelator, carbon dioxide."""

import re
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.constants import GAS_CONSTANT

Array = NDArray[np.float64]
Values = Array | float

ATMOSPHERE = 101_325.0  # [Pa] exact

# Standard atomic weights, conventional where IUPAC gives a range: Prohaska et al., Pure Appl.
# Chem. 94, 573, 2022 (from memory).
ATOMIC_WEIGHTS = {
    "H": 1.008,
    "C": 12.011,
    "N": 14.007,
    "O": 15.999,
    "F": 18.998403162,
    "Na": 22.98976928,
    "Mg": 24.305,
    "P": 30.973761998,
    "S": 32.06,
    "Cl": 35.45,
    "K": 39.0983,
    "Ca": 40.078,
    "Fe": 55.845,
    "Cu": 63.546,
    "Zn": 65.38,
}
_TOKEN = re.compile(r"([A-Z][a-z]?)|(\()|(\))|(\d+)|(.)")

PHOSPHATE_PKS = (2.15, 7.20, 12.35)  # 25 °C, infinite dilution; handbook values


def molar_mass(formula: str) -> float:
    """
    Return the molar mass of a formula such as ``C10H14N2Na2O8·2H2O`` [1]_.

    Parameters
    ----------
    formula : str
        Elements, numbers and brackets; water of crystallisation after a raised dot. [name]

    Returns
    -------
    mass : float
        Molar mass. [g/mol]

    References
    ----------
    .. [1] T. Prohaska et al., Pure Appl. Chem. 94, 573, 2022: standard atomic weights (from
       memory).
    """
    mass = 0.0
    for part in formula.split("·"):
        group = part.lstrip("0123456789")
        times = int(part[: len(part) - len(group)] or 1)
        mass += times * _group_mass(group, formula)
    return mass


def _group_mass(group: str, formula: str) -> float:
    open_groups, last = [0.0], 0.0  # the last atom or bracket waits for its number
    for element, opens, closes, number, other in _TOKEN.findall(group):
        if number:
            open_groups[-1] += (int(number) - 1) * last
            last = 0.0
        elif element in ATOMIC_WEIGHTS:
            last = ATOMIC_WEIGHTS[element]
            open_groups[-1] += last
        elif opens:
            open_groups.append(0.0)
        elif closes and len(open_groups) > 1:
            last = open_groups.pop()
            open_groups[-1] += last
        else:
            raise ValueError(f"{element or closes or other!r} in formula {formula!r} is not known")
    if len(open_groups) > 1 or not open_groups[0]:
        raise ValueError(f"formula {formula!r} is not complete")
    return open_groups[0]


def molarity(percent: Values, mass: float) -> Array:
    """
    Return the molar concentration of a percentage, mass per volume [1]_.

    Parameters
    ----------
    percent : ndarray
        Grams in 100 mL. [percent]
    mass : float
        Molar mass. [g/mol]

    Returns
    -------
    concentration : ndarray
        Molar concentration. [mol/L]

    References
    ----------
    .. [1] By definition.
    """
    concentration: Array = 10 * np.asarray(percent, dtype=float) / mass
    return concentration


@dataclass(frozen=True, slots=True, eq=False)
class Mineral:
    """Composition of bone or the like per gram, as it is weighed. Shapes (n_draws,) or scalars.

    Attributes
    ----------
    calcium, phosphate, carbonate
        Amounts, their charges balanced: carbonated apatite without hydroxide. [mol/g]
    """

    calcium: Array
    phosphate: Array
    carbonate: Array

    @property
    def mass(self) -> Array:
        """Share of the mass that is mineral [1]."""
        carbonate, phosphate = molar_mass("CO3"), molar_mass("PO4")
        calcium = ATOMIC_WEIGHTS["Ca"] * self.calcium
        return calcium + phosphate * self.phosphate + carbonate * self.carbonate


def mineral_by_analysis(calcium: Values, phosphorus: Values) -> Mineral:
    """
    Return the mineral of a tissue from its calcium and phosphorus [1]_.

    Parameters
    ----------
    calcium : ndarray
        Mass of calcium per mass of tissue. [1]
    phosphorus : ndarray
        Mass of phosphorus per mass of tissue. [1]

    Returns
    -------
    mineral : Mineral
        Carbonate closes the charge; it is 0 where there is more phosphate than calcium. [mol/g]

    References
    ----------
    .. [1] Charge balance of carbonated apatite; composition of cortical bone: ICRU Report 44,
       1989 (from memory).
    """
    ca = np.asarray(calcium, dtype=float) / ATOMIC_WEIGHTS["Ca"]
    po4 = np.asarray(phosphorus, dtype=float) / ATOMIC_WEIGHTS["P"]
    return Mineral(ca, po4, np.maximum(ca - 1.5 * po4, 0.0))


def mineral_by_share(share: Values, carbonate: Values = 0.065) -> Mineral:
    """
    Return the mineral of a tissue from the share of its mass that is mineral [1]_.

    Parameters
    ----------
    share : ndarray
        Mass of mineral per mass of tissue. [1]
    carbonate : ndarray
        Mass of carbonate per mass of mineral. [1]

    Returns
    -------
    mineral : Mineral
        Carbonated apatite without hydroxide. [mol/g]

    References
    ----------
    .. [1] Charge balance; carbonate of cortical bone from ICRU Report 44, 1989 (from memory).
    """
    co3 = np.asarray(carbonate, dtype=float) / molar_mass("CO3")
    weight = ATOMIC_WEIGHTS["Ca"]
    rest = 1 - np.asarray(carbonate, dtype=float) - weight * co3
    po4 = rest / (1.5 * weight + molar_mass("PO4"))
    share = np.asarray(share, dtype=float)
    return Mineral(share * (1.5 * po4 + co3), share * po4, share * co3)


def protons_taken(ph: Values, pks: tuple[float, ...] = PHOSPHATE_PKS) -> Array:
    """
    Return how many protons an anion has taken up at a pH, on average [1]_.

    Parameters
    ----------
    ph : ndarray
        pH. [1]
    pks : tuple of float
        pK of the acid, the first proton to leave first. [1]

    Returns
    -------
    protons : ndarray
        3 for a phosphate in strong acid, 2 near pH 4.7. [1]

    References
    ----------
    .. [1] Mass action; pK of phosphoric acid at 25 °C: handbook values.
    """
    ph = np.asarray(ph, dtype=float)
    bound, total, weighted = np.zeros_like(ph), np.ones_like(ph), np.zeros_like(ph)
    for count, pk in enumerate(reversed(pks), start=1):
        bound = bound + (pk - ph)
        total = total + 10**bound
        weighted = weighted + count * 10**bound
    protons: Array = weighted / total
    return protons


def acid_needed(mineral: Mineral, ph: Values) -> Array:
    """
    Return the acid that dissolves a gram of tissue and leaves the bath at a pH [1]_.

    Parameters
    ----------
    mineral : Mineral
        Composition. [mol/g]
    ph : ndarray
        pH at the end; 1 for a bath that stays strong, 3.5 for one that is dead. [1]

    Returns
    -------
    acid : ndarray
        Protons taken up by phosphate, and two by each carbonate; the free acid comes on top.
        [mol/g]

    References
    ----------
    .. [1] Mass action; handbook pK at 25 °C, without activity coefficients.
    """
    return np.asarray(protons_taken(ph) * mineral.phosphate + 2 * mineral.carbonate)


def chelator_needed(mineral: Mineral, magnesium: Values = 0.025) -> Array:
    """
    Return the chelator that binds the metal in a gram of tissue, one to one [1]_.

    Parameters
    ----------
    mineral : Mineral
        Composition. [mol/g]
    magnesium : ndarray
        Magnesium that is bound as well, per calcium. [1]

    Returns
    -------
    chelator : ndarray
        Of EDTA or another that binds one to one. [mol/g]

    References
    ----------
    .. [1] Mass balance; common practice for the magnesium of bone.
    """
    return np.asarray(mineral.calcium * (1 + np.asarray(magnesium, dtype=float)))


def reagent_held(concentration: Values, volume: Values, usable: Values = 1.0) -> Array:
    """
    Return the reagent that a bath holds, as far as it can be used [1]_.

    Parameters
    ----------
    concentration : ndarray
        Of the fresh bath. [mol/L]
    volume : ndarray
        Of the bath. [mL]
    usable : ndarray
        Share that can be spent before the bath is saturated. [1]

    Returns
    -------
    held : ndarray
        Amount. [mol]

    References
    ----------
    .. [1] By definition.
    """
    held: Array = np.asarray(concentration, dtype=float) * volume * usable / 1000
    return held


def phosphate_capacity(normality: Values, protons: Values) -> Array:
    """
    Return how much calcium phosphate Ca3(PO4)2 an acid dissolves if all of it is used [1]_.

    Parameters
    ----------
    normality : ndarray
        Acid equivalents in the fresh bath. [mol/L]
    protons : ndarray
        Protons that each phosphate ends with: 3 in an excess, 2 when the bath is spent. [1]

    Returns
    -------
    capacity : ndarray
        Mass dissolved per volume. [g/L]

    References
    ----------
    .. [1] Mass balance.
    """
    per_mole = molar_mass("Ca3(PO4)2") / 2
    return np.asarray(np.asarray(normality, dtype=float) / protons * per_mole)


def gas_volume(amount: Values, temperature: Values, pressure: float = ATMOSPHERE) -> Array:
    """
    Return the volume of a gas, such as carbon dioxide from the carbonate of bone [1]_.

    Parameters
    ----------
    amount : ndarray
        Amount of gas. [mol]
    temperature : ndarray
        Absolute temperature. [K]
    pressure : float
        Pressure. [Pa]

    Returns
    -------
    volume : ndarray
        None of it dissolved. [mL]

    References
    ----------
    .. [1] Ideal gas law.
    """
    heat = GAS_CONSTANT * np.asarray(temperature, dtype=float)
    volume: Array = np.asarray(amount, dtype=float) * heat / pressure * 1e6
    return volume


def closed_vessel_pressure(
    amount: Values, headspace: Values, liquid: Values, temperature: Values
) -> Array:
    """
    Return the pressure above ambient that carbon dioxide builds up in a closed vessel [1]_.

    Parameters
    ----------
    amount : ndarray
        Carbon dioxide given off. [mol]
    headspace : ndarray
        Air in the vessel. [mL]
    liquid : ndarray
        Volume of liquid in which it may dissolve; 0 for the first moments. [mL]
    temperature : ndarray
        Absolute temperature. [K]

    Returns
    -------
    pressure : ndarray
        Above ambient: for a caution, not for a design; such a vessel is always vented. [Pa]

    References
    ----------
    .. [1] R. Sander, Atmos. Chem. Phys. 15, 4399, 2015: 0.034 mol/(L atm) at 25 °C, 2400 K (from
       memory).
    """
    kelvin = np.asarray(temperature, dtype=float)
    solubility = 0.034 / ATMOSPHERE * np.exp(2400 * (1 / kelvin - 1 / 298.15))
    in_gas = np.asarray(headspace, dtype=float) * 1e-6 / (GAS_CONSTANT * kelvin)
    in_liquid = np.asarray(liquid, dtype=float) / 1000 * solubility
    return np.asarray(np.asarray(amount, dtype=float) / (in_gas + in_liquid))


def extent_from_calcium(left: Values, fresh: Values, share: Values = 0.37) -> Array:
    """
    Return the extent of demineralisation from the calcium that is left in the tissue [1]_.

    Parameters
    ----------
    left : ndarray
        Mass of calcium per mass of treated tissue. [1]
    fresh : ndarray
        The same before the treatment. [1]
    share : ndarray
        Mass of calcium per mass of mineral. [1]

    Returns
    -------
    extent : ndarray
        Share of the mineral that is gone; the tissue has become lighter by it. [1]

    References
    ----------
    .. [1] Mass balance.
    """
    left, fresh = np.asarray(left, dtype=float), np.asarray(fresh, dtype=float)
    extent: Array = (fresh - left) / (fresh - left * fresh / share)
    return extent
