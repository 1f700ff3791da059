"""What the liquid does to the enzyme: pH at the digest's temperature, cofactor, inhibitor."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.draws import Draws
from digestplan.kinetics.solution import pk_at
from digestplan.library import buffer as library_buffer
from digestplan.plan.model import Environment

if TYPE_CHECKING:
    from digestplan.forecast.conditions import EnzymeDraws

Array = NDArray[np.float64]

ROOM = 298.15  # [K] at which a buffer's pH is set where the plan does not say


@dataclass(frozen=True, slots=True, eq=False)
class Liquid:
    """What the sample lies in, drawn. A value at None is not stated and counts as 1.

    Attributes
    ----------
    ph
        pH as made up, shape (n_draws,).
    ph_at
        Temperature at which it was set, shape (n_draws,). [K]
    buffer
        Key of the buffer.
    calcium
        Total calcium, shape (n_draws,). [mol/L]
    """

    ph: Array | None = None
    ph_at: Array | None = None
    buffer: str | None = None
    calcium: Array | None = None


def nothing_stated() -> Liquid:
    """Return a liquid of which nothing is known."""
    return Liquid()


def liquid_of(environment: Environment, draws: Draws, _before: Liquid | None = None) -> Liquid:
    """Draw a step's liquid as made up, with what the step before left in the piece."""
    ph, calcium = environment.ph, environment.calcium
    return Liquid(
        None if ph is None else draws.of(ph),
        draws.optional(environment.ph_at, ROOM),
        environment.buffer,
        None if calcium is None else draws.of(calcium),
    )


def ph_in(liquid: Liquid, temperature: Array) -> Array | None:
    """
    Return the pH of a liquid at temperatures other than that at which it was set.

    Parameters
    ----------
    liquid
        The liquid.
    temperature
        Shape (..., n_draws). [K]

    Returns
    -------
    ph
        Of the same shape; None where the plan states no pH.
    """
    if liquid.ph is None:
        return None
    if liquid.buffer is None:
        return np.broadcast_to(liquid.ph, np.broadcast_shapes(temperature.shape, liquid.ph.shape))
    pk = library_buffer(liquid.buffer).pk_near(float(np.median(liquid.ph)))
    assert liquid.ph_at is not None
    here = pk_at(temperature, pk.pk, pk.enthalpy, pk.heat_capacity)
    there = pk_at(liquid.ph_at, pk.pk, pk.enthalpy, pk.heat_capacity)
    moved: Array = liquid.ph + here - there
    return moved


def ph_at(liquid: Liquid, temperature: float) -> float | None:
    """Return the median pH of a liquid at one temperature [K]."""
    if liquid.ph is None:
        return None
    ph = ph_in(liquid, np.full(liquid.ph.shape, temperature))
    return None if ph is None else float(np.median(ph))


def ph_factor(enzyme: "EnzymeDraws", liquid: Liquid, temperature: Array) -> Array | float:
    """Activity at the liquid's pH, 1 at the optimum; 1 where pH or pK are not stated."""
    if not (enzyme.has("ph_low_pka") and enzyme.has("ph_high_pka")):
        return 1.0
    ph = ph_in(liquid, temperature)
    if ph is None:
        return 1.0
    low, high = enzyme["ph_low_pka"], enzyme["ph_high_pka"]
    at_optimum = 1 + 2 * 10 ** ((low - high) / 2)
    with np.errstate(over="ignore"):
        factor: Array = at_optimum / (1 + 10.0 ** (low - ph) + 10.0 ** (ph - high))
    return factor


def free_calcium(liquid: Liquid, _temperature: Array) -> float | None:
    """Return the median free calcium [mol/L]; None where the plan states no calcium."""
    return None if liquid.calcium is None else float(np.median(liquid.calcium))


def calcium_factor(enzyme: "EnzymeDraws", liquid: Liquid, _temperature: Array) -> Array | float:
    """Activity at the liquid's free calcium, 1 when saturated; 1 where it is not stated."""
    if liquid.calcium is None or not enzyme.has("cofactor_half_saturation"):
        return 1.0
    if enzyme.enzyme.cofactor != "calcium":
        return 1.0
    factor: Array = liquid.calcium / (enzyme["cofactor_half_saturation"] + liquid.calcium)
    return factor


def activity_factor(enzyme: "EnzymeDraws", liquid: Liquid, temperature: Array) -> Array | float:
    """Product of all that the liquid does to the enzyme's rate, shape as the temperature's."""
    return ph_factor(enzyme, liquid, temperature) * calcium_factor(enzyme, liquid, temperature)
