"""What is carried over does to a liquid: its pH by charge balance, its calcium by binding."""

from collections.abc import Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.mixture import OF_ACID, acid
from digestplan.kinetics.chelation import (
    citrate_constant,
    edta_constant,
    free_with_ligands,
    phosphate_constant,
)
from digestplan.kinetics.solution import Buffer, solve_ph, strong_ions

Array = NDArray[np.float64]
Amounts = Mapping[str, Array]

_STRENGTH = 0.1  # [mol/L] ionic strength of a digest
_PHOSPHATE_PER_CALCIUM = 0.6  # apatite
_BASE_PER_CALCIUM = 0.6  # strong cations left over by dissolved mineral and its 1.4 H+
_TRACES = 1e-5  # [mol/L] of a chelator: no more than the metals of any water
_STRONG = ("hydrochloric-acid", "nitric-acid")
_ROOM = 298.15


def shifted_ph(acids: Sequence[Buffer], ph: Array | None, brought: Amounts) -> Array | float:
    """
    Return by how much what is carried over moves a liquid's pH.

    Parameters
    ----------
    acids
        What the liquid as made up holds against acid, at its temperature.
    ph
        pH of the liquid as made up, at that temperature, shape (n_draws,).
    brought
        Concentrations of what is carried over. [mol/L]

    Returns
    -------
    shift
        Shape (n_draws,); 0 where nothing acid comes along.
    """
    strong = sum((brought[key] for key in _STRONG if key in brought), start=np.zeros(1))
    weak = [acid(buffer, brought[key], _ROOM) for key, buffer in OF_ACID.items() if key in brought]
    mineral = brought.get("calcium")
    if ph is None or not (weak or strong.any() or mineral is not None):
        return 0.0
    if mineral is not None and "edta" not in brought:
        weak.append(acid("phosphate", _PHOSPHATE_PER_CALCIUM * mineral, _ROOM))
        strong = strong - _BASE_PER_CALCIUM * mineral
    before = strong_ions(acids, ph, _ROOM, _STRENGTH)
    after = solve_ph([*acids, *weak], before - strong, _ROOM, _STRENGTH)
    return np.asarray(after - ph)


def calcium_left(
    stated: Array | None,
    solutes: Amounts,
    brought: Amounts,
    ph: Array | float,
    temperature: float,
) -> Array | None:
    """
    Return the free calcium of a liquid, beside everything that binds it.

    Parameters
    ----------
    stated
        Total calcium that the plan states, or None. [mol/L]
    solutes
        What else the plan states. [mol/L]
    brought
        What is carried over. [mol/L]
    ph
        pH, shape (n_draws,) or one for all.
    temperature
        Working temperature. [K]

    Returns
    -------
    free
        Shape (n_draws,); None where the plan says nothing of calcium and no more than traces of a
        chelator come along. [mol/L]
    """
    ligands = {name: solutes[name] for name in ("edta", "citrate", "phosphate") if name in solutes}
    for name, key in (("edta", "edta"), ("citrate", "citric-acid")):
        if key in brought:
            ligands[name] = ligands.get(name, 0.0) + brought[key]
    chelators = [ligands[name] for name in ("edta", "citrate") if name in ligands]
    if stated is None and all(float(np.median(amount)) < _TRACES for amount in chelators):
        return None
    total = (0.0 if stated is None else stated) + brought.get("calcium", np.zeros(1))
    if not ligands:
        return np.asarray(total)
    constants = {
        "edta": lambda: edta_constant(ph, temperature),
        "citrate": lambda: citrate_constant(ph, temperature),
        "phosphate": lambda: phosphate_constant(ph, _STRENGTH, temperature),
    }
    return free_with_ligands(
        np.atleast_1d(total),
        [np.atleast_1d(amount) for amount in ligands.values()],
        [np.atleast_1d(constants[name]()) for name in ligands],
    )
