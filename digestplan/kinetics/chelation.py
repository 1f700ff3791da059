"""How much calcium is free beside a chelator, citrate or phosphate."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.roots import rising_root
from digestplan.kinetics.solution import STANDARD, apparent_pk, davies_term, pk_at

Array = NDArray[np.float64]
Values = Array | float

# At 25 °C and an ionic strength of 0.1: of one set, not to be mixed with another's. The printed
# table was seen; enthalpies [J/mol] are from memory.
EDTA_PKS = (1.99, 2.67, 6.16, 10.26)
EDTA_ENTHALPIES = (0.0, 0.0, 18_000.0, 24_000.0)
EDTA_CALCIUM = 10.65  # log10 K, 25 °C, ionic strength 0.1; from memory, books give 10.6 to 10.7
EDTA_CALCIUM_ENTHALPY = -27_000.0  # [J/mol] of binding, from memory
SPREAD_LOG_K = 0.1  # between sets of constants

# At 25 °C and infinite dilution: handbook pK; enthalpies and ion pairs from memory.
PHOSPHATE_PKS = (2.148, 7.198, 12.35)
PHOSPHATE_ENTHALPIES = (-8_000.0, 3_600.0, 15_000.0)
CITRATE_PKS = (3.13, 4.76, 6.40)
CITRATE_ENTHALPIES = (4_100.0, 2_200.0, -3_400.0)
CITRATE_CALCIUM = 3.5  # log10 K at an ionic strength of 0.1
HYDROGEN_PHOSPHATE_CALCIUM = 2.7
DIHYDROGEN_PHOSPHATE_CALCIUM = 1.4


def form_share(ph: Values, pks: Sequence[Values], lost: int) -> Array:
    """
    Return the share of an acid that has lost so many protons [1]_.

    Parameters
    ----------
    ph : ndarray
        pH. [1]
    pks : sequence of ndarray
        pK that go with pH and molar concentrations, the first proton to leave first. [1]
    lost : int
        Protons lost; all of them for the form that binds best. [1]

    Returns
    -------
    share : ndarray
        α of that form. [1]

    References
    ----------
    .. [1] G. Schwarzenbach and H. Flaschka, Complexometric Titrations, 1969 (from memory).
    """
    ph = np.asarray(ph, dtype=float)
    exponents = [np.zeros_like(ph)]
    for pk in pks:
        exponents.append(exponents[-1] + ph - pk)
    relative = np.stack(np.broadcast_arrays(*(e - exponents[lost] for e in exponents)))
    with np.errstate(over="ignore"):
        share: Array = 1 / np.sum(10**relative, axis=0)
    return share


def edta_share(ph: Values, temperature: Values = STANDARD) -> Array:
    """
    Return the share of free EDTA that has lost all four protons, α(Y⁴⁻) [1]_.

    Parameters
    ----------
    ph : ndarray
        pH. [1]
    temperature : ndarray
        Absolute temperature. [K]

    Returns
    -------
    share : ndarray
        α(Y⁴⁻); another set of constants gives 20 to 30 % less. [1]

    References
    ----------
    .. [1] G. Schwarzenbach and H. Flaschka, Complexometric Titrations, 1969 (from memory).
    """
    pairs = zip(EDTA_PKS, EDTA_ENTHALPIES, strict=True)
    return form_share(ph, [pk_at(temperature, pk, heat) for pk, heat in pairs], 4)


def edta_constant(ph: Values, temperature: Values = STANDARD) -> Array:
    """
    Return the conditional constant of calcium with EDTA at a pH [1]_.

    Parameters
    ----------
    ph : ndarray
        pH. [1]
    temperature : ndarray
        Absolute temperature. [K]

    Returns
    -------
    constant : ndarray
        K' = α(Y⁴⁻) K; 0.1 in its logarithm is uncertain. [L/mol]

    References
    ----------
    .. [1] G. Schwarzenbach and H. Flaschka, Complexometric Titrations, 1969 (from memory).
    """
    # an association is a dissociation read backwards
    log_k = -pk_at(temperature, -EDTA_CALCIUM, EDTA_CALCIUM_ENTHALPY)
    return np.asarray(edta_share(ph, temperature) * 10**log_k)


def citrate_constant(ph: Values, temperature: Values = STANDARD) -> Array:
    """
    Return the conditional constant of calcium with citrate at a pH [1]_.

    Parameters
    ----------
    ph : ndarray
        pH. [1]
    temperature : ndarray
        Absolute temperature; the constant itself is that of 25 °C. [K]

    Returns
    -------
    constant : ndarray
        K' at an ionic strength of 0.1. [L/mol]

    References
    ----------
    .. [1] A. E. Martell and R. M. Smith, Critical Stability Constants, vol. 3, 1977 (from memory).
    """
    pks = [
        apparent_pk(pk_at(temperature, pk, heat), -lost, 0.1, temperature)
        for lost, (pk, heat) in enumerate(zip(CITRATE_PKS, CITRATE_ENTHALPIES, strict=True))
    ]
    return form_share(ph, pks, 3) * 10**CITRATE_CALCIUM


def phosphate_pks(ionic_strength: Values, temperature: Values = STANDARD) -> list[Array]:
    """
    Return the three pK of phosphate that go with pH and molar concentrations [1]_.

    Parameters
    ----------
    ionic_strength : ndarray
        Ionic strength. [mol/L]
    temperature : ndarray
        Absolute temperature. [K]

    Returns
    -------
    pks : list of ndarray
        The first proton to leave first. [1]

    References
    ----------
    .. [1] R. N. Goldberg, N. Kishore and R. M. Lennen, J. Phys. Chem. Ref. Data 31, 231, 2002,
       for the second (as quoted elsewhere); handbook values.
    """
    return [
        apparent_pk(pk_at(temperature, pk, heat), -lost, ionic_strength, temperature)
        for lost, (pk, heat) in enumerate(zip(PHOSPHATE_PKS, PHOSPHATE_ENTHALPIES, strict=True))
    ]


def phosphate_constant(
    ph: Values, ionic_strength: Values = 0.1, temperature: Values = STANDARD
) -> Array:
    """
    Return the conditional constant of calcium with dissolved phosphate at a pH [1]_.

    Parameters
    ----------
    ph : ndarray
        pH. [1]
    ionic_strength : ndarray
        Ionic strength. [mol/L]
    temperature : ndarray
        Absolute temperature; the ion pairs are those of 25 °C. [K]

    Returns
    -------
    constant : ndarray
        K' of both ion pairs together; what precipitates is another matter. [L/mol]

    References
    ----------
    .. [1] T. M. Gregory, E. C. Moreno and W. E. Brown, J. Res. NBS 74A, 461, 1970 (from memory).
    """
    pks, term = phosphate_pks(ionic_strength, temperature), davies_term(ionic_strength, temperature)
    once = form_share(ph, pks, 1) * 10 ** (DIHYDROGEN_PHOSPHATE_CALCIUM - 4 * term)
    twice = form_share(ph, pks, 2) * 10 ** (HYDROGEN_PHOSPHATE_CALCIUM - 8 * term)
    return np.asarray(once + twice)


def free_metal(metal: Values, ligand: Values, constant: Values) -> Array:
    """
    Return the free metal beside one ligand that binds it one to one [1]_.

    Parameters
    ----------
    metal : ndarray
        Total metal. [mol/L]
    ligand : ndarray
        Total ligand. [mol/L]
    constant : ndarray
        Conditional constant. [L/mol]

    Returns
    -------
    free : ndarray
        Accurate on both sides of the cliff at one to one. [mol/L]

    References
    ----------
    .. [1] Mass action; the root of the quadratic without cancellation.
    """
    total, ligand = np.asarray(metal, dtype=float), np.asarray(ligand, dtype=float)
    spare = 1 / np.asarray(constant, dtype=float)
    lean = ligand - total + spare
    root = np.sqrt(lean * lean + 4 * total * spare)
    in_excess = np.where(lean > 0, lean + root, 1.0)
    free: Array = np.where(lean > 0, 2 * total * spare / in_excess, (root - lean) / 2)
    return free


def free_with_ligands(
    metal: Values, ligands: Sequence[Values], constants: Sequence[Values]
) -> Array:
    """
    Return the free metal beside several ligands that bind it one to one [1]_.

    Parameters
    ----------
    metal : ndarray, shape (n_draws,)
        Total metal. [mol/L]
    ligands : sequence of ndarray, shape (n_draws,)
        Total of each ligand: EDTA, citrate, phosphate. [mol/L]
    constants : sequence of ndarray, shape (n_draws,)
        Their conditional constants. [L/mol]

    Returns
    -------
    free : ndarray, shape (n_draws,)
        Free metal. [mol/L]

    References
    ----------
    .. [1] Mass action: what is bound rises with what is free, so that there is one root.
    """
    total, *both = np.broadcast_arrays(
        *(np.asarray(v, dtype=float) for v in (metal, *ligands, *constants))
    )
    pairs = list(zip(both[: len(ligands)], both[len(ligands) :], strict=True))
    least = total / (1 + sum((k * c for c, k in pairs), np.zeros_like(total)))

    def surplus(free: Array) -> Array:
        bound = sum((c * k * free / (1 + k * free) for c, k in pairs), np.zeros_like(total))
        return np.asarray(free + bound - total)

    return rising_root(surplus, least, total, tolerance=1e-13)
