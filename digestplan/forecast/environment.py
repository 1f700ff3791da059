"""What the liquid does to the enzyme: pH at the digest's temperature, cofactor, inhibitor."""

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.chemistry import calcium_left, shifted_ph
from digestplan.forecast.draws import Draws
from digestplan.forecast.mixture import acids_of, buffer_pk
from digestplan.plan.model import Environment

if TYPE_CHECKING:
    from digestplan.forecast.conditions import EnzymeDraws

Array = NDArray[np.float64]

ROOM = 298.15  # [K] at which a buffer's pH is set where the plan does not say
USUAL_BUFFER = 0.05  # [mol/L] where a plan names a buffer and no concentration


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
    ph_shift
        By how much what was carried over moves the pH, shape (n_draws,).
    calcium
        Free calcium, shape (n_draws,). [mol/L]
    inhibitor
        Shape (n_draws,). [mol/L]
    stopped
        Factor that a stop leaves of every rate, shape (n_draws,).
    """

    ph: Array | None = None
    ph_at: Array | None = None
    buffer: str | None = None
    ph_shift: Array | float = 0.0
    calcium: Array | None = None
    inhibitor: Array | None = None
    stopped: Array | float = 1.0


@dataclass(frozen=True, slots=True, eq=False)
class CarriedOver:
    """What a piece brings into its next liquid, as concentrations [mol/L] in that liquid."""

    amounts: Mapping[str, Array] = field(default_factory=dict)
    temperature: float = ROOM


def nothing_stated() -> Liquid:
    """Return a liquid of which nothing is known."""
    return Liquid()


def liquid_of(environment: Environment, draws: Draws, brought: CarriedOver | None = None) -> Liquid:
    """
    Draw a step's liquid as made up, with what the piece brings along from the step before.

    Parameters
    ----------
    environment
        The liquid as the plan states it.
    draws
        The plan's draws.
    brought
        What the piece brings along; None for a clean one.

    Returns
    -------
    liquid
        Its pH as made up and by how much it moves, its free calcium.
    """
    ph = None if environment.ph is None else draws.of(environment.ph)
    ph_at = draws.optional(environment.ph_at, ROOM)
    concentration = draws.optional(environment.buffer_concentration, USUAL_BUFFER)
    solutes = {name: draws.of(value) for name, value in environment.solutes.items()}
    amounts = brought.amounts if brought is not None else {}
    temperature = brought.temperature if brought is not None else ROOM
    shift: Array | float = 0.0
    if ph is not None and amounts:
        acids = acids_of(environment.buffer, concentration, temperature)
        shift = shifted_ph(
            acids, ph_in(Liquid(ph, ph_at, environment.buffer), temperature), amounts
        )
    stated = None if environment.calcium is None else draws.of(environment.calcium)
    if environment.buffer == "phosphate":
        solutes["phosphate"] = solutes.get("phosphate", 0.0) + concentration
    at = 7.4 if ph is None else ph + shift
    return Liquid(
        ph,
        ph_at,
        environment.buffer,
        shift,
        calcium_left(stated, solutes, amounts, at, temperature),
        solutes.get("inhibitor"),
    )


def ph_in(liquid: Liquid, temperature: Array | float) -> Array | None:
    """
    Return the pH of a liquid at temperatures other than that at which it was set.

    Parameters
    ----------
    liquid
        The liquid.
    temperature
        Shape (..., n_draws), or one for all. [K]

    Returns
    -------
    ph
        Of the same shape, at least (n_draws,); None where the plan states no pH.
    """
    if liquid.ph is None:
        return None
    shape = np.broadcast_shapes(np.shape(temperature), liquid.ph.shape)
    moved = liquid.ph + liquid.ph_shift
    if liquid.buffer is None or liquid.ph_at is None:
        return np.broadcast_to(moved, shape)
    near = float(np.median(liquid.ph))
    pk_change = buffer_pk(liquid.buffer, near, temperature) - buffer_pk(
        liquid.buffer, near, liquid.ph_at
    )
    result: Array = moved + pk_change
    return result


def ph_at(liquid: Liquid, temperature: float) -> float | None:
    """Return the median pH of a liquid at one temperature [K]."""
    ph = ph_in(liquid, temperature)
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
    with np.errstate(over="ignore", divide="ignore"):  # far off the optimum nothing is left
        above_high = np.exp(np.log(10) * (ph - high))
        factor: Array = at_optimum / (1 + 10.0 ** (low - high) / above_high + above_high)
    return factor


def free_calcium(liquid: Liquid) -> float | None:
    """Return the median free calcium [mol/L]; None where nothing says anything about calcium."""
    return None if liquid.calcium is None else float(np.median(liquid.calcium))


def calcium_factor(enzyme: "EnzymeDraws", liquid: Liquid) -> Array | float:
    """Activity at the liquid's free calcium, 1 when saturated; 1 where it is not stated."""
    if liquid.calcium is None or not enzyme.has("cofactor_half_saturation"):
        return 1.0
    if enzyme.enzyme.cofactor != "calcium":
        return 1.0
    factor: Array = liquid.calcium / (enzyme["cofactor_half_saturation"] + liquid.calcium)
    return factor


def inhibitor_factor(enzyme: "EnzymeDraws", liquid: Liquid) -> Array | float:
    """Activity beside an inhibitor, 1/(1 + I/Ki); 1 where either is not stated."""
    if liquid.inhibitor is None or not enzyme.has("inhibition_constant"):
        return 1.0
    factor: Array = 1 / (1 + liquid.inhibitor / enzyme["inhibition_constant"])
    return factor


def activity_factor(enzyme: "EnzymeDraws", liquid: Liquid, temperature: Array) -> Array | float:
    """Product of all that the liquid does to the enzyme's rate, shape as the temperature's."""
    return (
        ph_factor(enzyme, liquid, temperature)
        * calcium_factor(enzyme, liquid)
        * inhibitor_factor(enzyme, liquid)
        * liquid.stopped
    )
