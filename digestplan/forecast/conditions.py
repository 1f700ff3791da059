"""From a plan's values to the rates at the nodes of a programme."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.draws import Draws
from digestplan.forecast.environment import Liquid, activity_factor
from digestplan.kinetics import temperature as laws
from digestplan.kinetics.damage import melting_rate_arrhenius, melting_rate_eyring
from digestplan.kinetics.state import Rates
from digestplan.kinetics.water import stokes_einstein_factor
from digestplan.plan.model import Enzyme, Plan

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class EnzymeDraws:
    """An enzyme's kinetics, drawn: what `rates_at` needs for any temperature."""

    enzyme: Enzyme
    values: dict[str, Array]

    def __getitem__(self, name: str) -> Array:
        return self.values[name]

    def has(self, name: str) -> bool:
        """Whether the enzyme has a value."""
        return name in self.values


def draw_enzyme(plan: Plan, draws: Draws) -> EnzymeDraws:
    """Draw every kinetic value of the plan's enzyme, each of shape (n_draws,)."""
    values = {name: draws.of(value) for name, value in plan.enzyme.values.items()}
    return EnzymeDraws(plan.enzyme, values)


def rate_factor(enzyme: EnzymeDraws, temperature: Array) -> Array:
    """
    Return the enzyme's rate at temperatures, relative to its reference temperature.

    Parameters
    ----------
    enzyme
        The drawn kinetics.
    temperature
        Shape (n_nodes, n_draws). [K]

    Returns
    -------
    factor
        Shape (n_nodes, n_draws). [1]
    """
    law, reference = enzyme.enzyme.rate_law, enzyme["reference_temperature"]
    if law == "q10":
        return laws.q10_factor(temperature, enzyme["q10"], reference)
    energy = enzyme["activation_energy"]
    if law == "arrhenius":
        return laws.arrhenius_factor(temperature, energy, reference)
    if law == "eyring":
        return laws.eyring_factor(temperature, energy, reference)
    if law == "mmrt":
        return laws.mmrt_factor(temperature, energy, enzyme["heat_capacity_change"], reference)
    return laws.equilibrium_factor(
        temperature,
        energy,
        enzyme["equilibrium_temperature"],
        enzyme["equilibrium_enthalpy"],
        reference,
    )


def inactivation_rate(enzyme: EnzymeDraws, temperature: Array) -> Array:
    """
    Return the first-order inactivation rate at temperatures.

    Parameters
    ----------
    enzyme
        The drawn kinetics.
    temperature
        Shape (n_nodes, n_draws). [K]

    Returns
    -------
    rate
        Shape (n_nodes, n_draws). [1/h]
    """
    if not enzyme.has("inactivation_rate"):
        return np.zeros(temperature.shape)
    rate = _at(enzyme, "inactivation_rate", "inactivation_energy", temperature)
    if enzyme.enzyme.rate_law != "equilibrium":
        return rate
    return rate * laws.inactive_share_factor(
        temperature,
        enzyme["equilibrium_temperature"],
        enzyme["equilibrium_enthalpy"],
        enzyme["reference_temperature"],
    )


def second_rate(enzyme: EnzymeDraws, temperature: Array) -> Array | None:
    """Return the rate at which an intermediate form dies, shape (n_nodes, n_draws), or None."""
    if enzyme.enzyme.inactivation != "two_stage":
        return None
    return _at(enzyme, "second_inactivation_rate", "second_inactivation_energy", temperature)


def _at(enzyme: EnzymeDraws, rate: str, energy: str, temperature: Array) -> Array:
    if not enzyme.has(energy):
        return enzyme[rate] * np.ones(temperature.shape)
    reference = enzyme["reference_temperature"]
    factor = laws.arrhenius_factor(temperature, enzyme[energy], reference)
    return np.multiply(factor, enzyme[rate], out=factor)


def rates_at(
    enzyme: EnzymeDraws,
    temperature: Array,
    liquid: Liquid,
    half_thickness: Array | None,
    concentration_per_ratio: Array | None,
    damage: dict[str, Array],
) -> Rates:
    """
    Return all the rates that a course needs, at its nodes.

    Parameters
    ----------
    enzyme
        The drawn kinetics.
    temperature
        Shape (n_nodes, n_draws). [K]
    liquid
        What the enzyme works in.
    half_thickness
        L: half the thickness of a slab, or the radius; None where penetration does not count.
        Shape (n_draws,). [m]
    concentration_per_ratio
        Active enzyme in the bath for a ratio of 1, for autolysis; None without a bath volume.
        Shape (n_draws,). [g/mL per unit/g]
    damage
        Drawn heat damage of what must be kept; empty for none.

    Returns
    -------
    rates
        Each of shape (n_nodes, n_draws).
    """
    law = enzyme.enzyme.inactivation
    shape = np.broadcast_shapes(temperature.shape, enzyme["reference_temperature"].shape)
    activity, factor = (
        rate_factor(enzyme, temperature),
        activity_factor(enzyme, liquid, temperature),
    )
    if not isinstance(factor, float):
        activity = activity * factor
    autolysis = penetration = None
    second = second_rate(enzyme, temperature)
    if law == "autolysis" and concentration_per_ratio is not None:
        per_concentration = _at(enzyme, "autolysis_rate", "autolysis_energy", temperature)
        autolysis = per_concentration * concentration_per_ratio
    if half_thickness is not None:
        scale = stokes_einstein_factor(temperature, enzyme["reference_temperature"])
        penetration = enzyme["diffusivity"] * scale / half_thickness**2

    def full(rate: Array | None) -> Array | None:
        return None if rate is None else np.broadcast_to(rate, shape)

    return Rates(
        np.broadcast_to(activity, shape),
        np.broadcast_to(inactivation_rate(enzyme, temperature), shape),
        full(second),
        full(autolysis),
        full(heat_damage_rate(damage, temperature)),
        full(penetration),
    )


def heat_damage_rate(damage: dict[str, Array], temperature: Array) -> Array | None:
    """
    Return how fast heat destroys what must be kept.

    Parameters
    ----------
    damage
        Drawn values: ``melting_enthalpy`` and ``melting_entropy`` (Eyring), or
        ``melting_rate``, ``melting_energy`` and ``melting_temperature`` (Arrhenius).
    temperature
        Shape (n_nodes, n_draws). [K]

    Returns
    -------
    rate
        Shape (n_nodes, n_draws), or None where the plan knows no heat damage. [1/h]
    """
    if "melting_enthalpy" in damage:
        return melting_rate_eyring(
            temperature, damage["melting_enthalpy"], damage["melting_entropy"]
        )
    if "melting_rate" in damage:
        return melting_rate_arrhenius(
            temperature,
            damage["melting_rate"],
            damage["melting_energy"],
            damage["melting_temperature"],
        )
    return None
