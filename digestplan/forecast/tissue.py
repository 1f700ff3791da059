"""The piece as a vessel: how much liquid it holds and how fast solutes move through it."""

import numpy as np
from numpy.typing import NDArray

from digestplan import library
from digestplan.forecast.draws import Draws
from digestplan.forecast.library_values import GENERAL, library_value
from digestplan.kinetics.water import stokes_einstein_factor
from digestplan.plan.model import Plan

Array = NDArray[np.float64]

_ROOM = 298.15  # [K] of the free diffusivities
_SOFT = 1.05  # [g/mL] where nobody says


def tissue_volume(plan: Plan, draws: Draws) -> Array:
    """Volume of the piece, shape (n_draws,). [mL]"""
    return draws.of(plan.sample.wet_mass) / draws.optional(plan.sample.density, _SOFT)


def half_thickness(plan: Plan, draws: Draws) -> Array | None:
    """L: half the thickness of a slab, or the radius; None where the plan does not say. [m]"""
    thickness = plan.sample.thickness
    return None if thickness is None else draws.of(thickness) / 2


def solute_clock(plan: Plan, draws: Draws, substance: str, temperature: Array) -> Array | None:
    """
    Return the pace D/L² at which a small solute leaves or enters the piece.

    Parameters
    ----------
    plan, draws
        The plan and its draws.
    substance
        A reagent or a solute by its key in the library.
    temperature
        Shape (n_draws,). [K]

    Returns
    -------
    pace
        Shape (n_draws,); None where the plan states no thickness. [1/h]
    """
    half = half_thickness(plan, draws)
    if half is None:
        return None
    section = "reagent" if substance in library.keys("reagent") else "solute"
    free = library_value(section, substance, "free_diffusivity")
    share = library_value("solute", GENERAL, "tissue_share")
    assert free is not None
    assert share is not None
    moving = draws.of(free) * draws.of(share) * stokes_einstein_factor(temperature, _ROOM)
    pace: Array = moving / half**2
    return pace
