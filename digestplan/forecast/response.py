"""How the sample answers a dose: extent of what must go, and loss of what must stay."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.damage import keep_loss
from digestplan.kinetics.depth import Geometry
from digestplan.kinetics.extent import Law
from digestplan.kinetics.state import ALL, Draws, State

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Response:
    """One sample's answer, drawn. Arrays have shape (n_draws,).

    Attributes
    ----------
    law, parameters
        The extent law and what it takes beside the scaled dose.
    susceptibility
        How fast the substrate gives way per dose. [g/(unit h)]
    keep_susceptibility
        The same for what must be kept; 0 where the enzyme leaves it alone. [g/(unit h)]
    geometry
        Depth points, where the enzyme must penetrate; else None.
    """

    law: Law
    parameters: tuple[Array, ...]
    susceptibility: Array
    keep_susceptibility: Array
    geometry: Geometry | None

    def _law(self, scaled: Array, draws: Draws) -> Array:
        return self.law.extent(scaled, *(p[draws] for p in self.parameters))

    def extent(self, state: State, draws: Draws = ALL) -> Array:
        """Extent, as the mean over the volume. [1]."""
        s = self.susceptibility[draws]
        if self.geometry is None or state.local is None:
            return self._law(s * state.dose, draws)
        return self.geometry.mean(self._law(s * _not_negative(state.local), draws))

    def extent_at_centre(self, state: State, draws: Draws = ALL) -> Array:
        """Extent at the centre: what is eaten from its surface keeps a raw core to the end. [1]."""
        s = self.susceptibility[draws]
        if self.law.name == "erosion":
            return np.where(self._law(s * state.dose, draws) >= 1.0, 1.0, 0.0)
        dose = state.dose if self.geometry is None or state.local is None else state.local[0]
        return self._law(s * _not_negative(dose), draws)

    def keep_loss(self, state: State, draws: Draws = ALL) -> Array:
        """Fraction lost of what must be kept, by the enzyme, heat and acid. [1]."""
        s = self.keep_susceptibility[draws]
        if self.geometry is None or state.local is None:
            return keep_loss(s * state.dose + state.heat)
        return self.geometry.mean(keep_loss(s * _not_negative(state.local) + state.heat))


def _not_negative(dose: Array) -> Array:
    """A dose at depths that nothing has reached may be below zero by the last digits."""
    return np.maximum(dose, 0.0)
