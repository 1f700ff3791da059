"""What a course needs and carries: rates at the nodes, and the state from moment to moment."""

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.depth import Geometry

Array = NDArray[np.float64]
Draws = slice | NDArray[np.intp]
ALL = slice(None)


@dataclass(frozen=True, slots=True, eq=False)
class Rates:
    """Rates at the nodes of a programme, each of shape (n_nodes, n_draws).

    Attributes
    ----------
    activity
        Rate of an active enzyme molecule relative to the reference conditions. [1]
    first
        First-order inactivation. [1/h]
    second
        From the intermediate to the dead form (two-stage), or None. [1/h]
    autolysis
        Second-order inactivation per ratio of active enzyme, or None. [g/(unit h)]
    heat
        Rate at which heat destroys what must be kept, or None. [1/h]
    penetration
        D/L², the speed of the diffusion clock, or None where nothing holds enzyme up. [1/h]
    """

    activity: Array
    first: Array
    second: Array | None = None
    autolysis: Array | None = None
    heat: Array | None = None
    penetration: Array | None = None


@dataclass(frozen=True, slots=True, eq=False)
class State:
    """What one moment hands to the next. Shapes (n_draws,) unless said.

    Attributes
    ----------
    fresh, intermediate
        Enzyme in the bath per substrate, in its fresh and its intermediate form. [unit/g]
    charged
        Enzyme charged so far per substrate, active at the time it was added. [unit/g]
    dose
        Dose at the surface of the sample. [unit h/g]
    heat
        Exponent of the keep loss by heat. [1]
    local
        Dose at the depth points, shape (n_points, n_draws), or None without penetration. [unit h/g]
    modal_fresh, modal_intermediate
        How much of the enzyme each diffusion mode still lacks, shape (n_modes, n_draws), or
        None. [unit/g]
    """

    fresh: Array
    intermediate: Array
    charged: Array
    dose: Array
    heat: Array
    local: Array | None = None
    modal_fresh: Array | None = None
    modal_intermediate: Array | None = None

    def of(self, draws: Draws) -> "State":
        """The same moment for some of the draws."""

        def pick(a: Any) -> Any:
            return None if a is None else a[..., draws]

        return State(*(pick(getattr(self, name)) for name in self.__slots__))


def nothing(n_draws: int, geometry: Geometry | None = None) -> State:
    """
    Return the state before any enzyme was added [1]_.

    Parameters
    ----------
    n_draws : int
        Number of draws. [1]
    geometry : Geometry or None
        Depth points and modes, where penetration counts. [1]

    Returns
    -------
    state : State
        All zero. [1]

    References
    ----------
    .. [1] By definition.
    """
    zero = np.zeros(n_draws)
    if geometry is None:
        return State(zero, zero, zero, zero, zero)
    modes = np.zeros((len(geometry.squares), n_draws))
    local = np.zeros((len(geometry.points), n_draws))
    return State(zero, zero, zero, zero, zero, local, modes, modes)
