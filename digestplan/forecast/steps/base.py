"""What a step gets and what it hands on. One kind of step is one file beside this one."""

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.conditions import EnzymeDraws
from digestplan.forecast.draws import Draws
from digestplan.forecast.environment import Liquid, nothing_stated
from digestplan.forecast.response import Response
from digestplan.kinetics.state import State, nothing
from digestplan.plan.model import Plan

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Job:
    """What holds for the whole plan: the plan, its draws, the enzyme and the sample's answer.

    ``damage`` holds the drawn heat damage of what must be kept.
    """

    plan: Plan
    draws: Draws
    enzyme: EnzymeDraws
    response: Response
    damage: dict[str, Array]


@dataclass(frozen=True, slots=True, eq=False)
class Carried:
    """What one step leaves to the next.

    Attributes
    ----------
    clock
        Hours since the plan's start. [h]
    temperature
        Sample temperature at the end of the step, shape (n_draws,); None before the first. [K]
    state
        Enzyme, dose and damage so far.
    liquid
        What the sample lies in.
    volume
        Volume of that liquid, shape (n_draws,); None where the plan does not say. [mL]
    residues
        What is dissolved in the piece, by reagent or solute, each of shape (n_draws,). [mol/L]
    demineralised
        Fraction of the mineral that is gone, shape (n_draws,); None where no step dissolved any.
    """

    clock: float
    temperature: Array | None
    state: State
    liquid: Liquid
    volume: Array | None
    residues: Mapping[str, Array] = field(default_factory=dict)
    demineralised: Array | None = None


def untouched(job: Job) -> Carried:
    """Return what there is before the first step of a plan."""
    start = nothing(job.draws.n_draws, job.response.geometry)
    return Carried(0.0, None, start, nothing_stated(), None)
