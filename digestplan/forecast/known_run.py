"""The susceptibility that makes a proven protocol end where it is known to end.

The known run goes through the same engine as the plan (same enzyme draws, depth, pH), so that
absolute constants cancel and only what differs between the two is extrapolated.
"""

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.amounts import ratio_in_plan_units
from digestplan.forecast.conditions import EnzymeDraws, rates_at
from digestplan.forecast.draws import Draws
from digestplan.forecast.environment import liquid_of
from digestplan.kinetics.depth import Geometry
from digestplan.kinetics.dose import Course
from digestplan.kinetics.extent import Law
from digestplan.kinetics.programme import Leg, compile_programme
from digestplan.kinetics.roots import rising_root
from digestplan.kinetics.state import State, nothing
from digestplan.plan.model import KnownRun, Plan

Array = NDArray[np.float64]
Parameters = Callable[[Array], tuple[Array, ...]]

_LEAST = 1e-300  # a dose below which a run did nothing
_SURE = 1e-6  # an extent is never drawn nearer than this to 0 or 1


def susceptibility_of(
    plan: Plan,
    draws: Draws,
    enzyme: EnzymeDraws,
    law: Law,
    parameters: Parameters,
    geometry: Geometry | None,
    concentration_per_ratio: Array | None,
) -> Array:
    """
    Return the sample's susceptibility, as stated or from its known run.

    Parameters
    ----------
    plan
        The plan.
    draws
        Its draws.
    enzyme
        The drawn kinetics.
    law, parameters
        The extent law and what it takes beside the scaled dose, for a susceptibility.
    geometry
        Depth points, where the enzyme must penetrate.
    concentration_per_ratio
        For autolysis: the known run is taken to be as concentrated as the plan.

    Returns
    -------
    susceptibility
        Shape (n_draws,). [g/(unit h)]
    """
    sample = plan.sample
    if sample.susceptibility is not None:
        return draws.of(sample.susceptibility)
    assert sample.known_run is not None
    run = sample.known_run
    extent = np.clip(draws.of(run.extent), _SURE, 1 - _SURE)
    after = _end_of(run, plan, draws, enzyme, geometry, concentration_per_ratio)
    s = susceptibility_for(extent, after, law, parameters, geometry)
    return s * _thickness_ratio(run, plan, draws)


def _thickness_ratio(run: KnownRun, plan: Plan, draws: Draws) -> Array | float:
    """What is eaten from its surface at a steady pace takes as long as it is thick."""
    sample = plan.sample
    if sample.law != "erosion" or run.thickness is None or sample.thickness is None:
        return 1.0
    ratio: Array = draws.of(run.thickness) / draws.of(sample.thickness)
    return ratio


def susceptibility_for(
    extent: Array,
    after: State,
    law: Law,
    parameters: Parameters,
    geometry: Geometry | None,
) -> Array:
    """
    Return the susceptibility that gives an extent after what a run has given.

    Parameters
    ----------
    extent
        Shape (n_draws,). [1]
    after
        State at the end of the run.
    law, parameters
        The extent law and what it takes beside the scaled dose, for a susceptibility.
    geometry
        Depth points, where the enzyme must penetrate.

    Returns
    -------
    susceptibility
        Shape (n_draws,). [g/(unit h)]
    """
    dose = np.maximum(after.dose, _LEAST)
    at_surface = after.local is None or geometry is None
    if at_surface and law.name != "two_pool":
        return law.scaled_dose(extent, *parameters(dose)) / dose

    def above(log_scaled: Array) -> Array:
        s = np.exp(log_scaled) / dose
        if after.local is None or geometry is None:
            return law.extent(s * after.dose, *parameters(s)) - extent
        return geometry.mean(law.extent(s * after.local, *parameters(s))) - extent

    low, high = np.full(len(dose), np.log(1e-12)), np.full(len(dose), np.log(1e12))
    susceptibility: Array = np.exp(rising_root(above, low, high)) / dose
    return susceptibility


def _end_of(
    run: KnownRun,
    plan: Plan,
    draws: Draws,
    enzyme: EnzymeDraws,
    geometry: Geometry | None,
    concentration_per_ratio: Array | None,
) -> State:
    temperature = draws.of(run.temperature)
    duration = draws.of(run.duration)
    nominal = np.full(2, run.temperature.quantity.value)
    graded = geometry is not None and enzyme.enzyme.inactivation == "autolysis"
    legs = [Leg(float(duration.max()), ramp=False)]
    cells = compile_programme(legs, nominal, graded=graded)
    half = None
    if geometry is not None:
        thickness = run.thickness or plan.sample.thickness
        assert thickness is not None
        half = draws.of(thickness) / 2
    rates = rates_at(
        enzyme,
        cells.temperatures(np.stack([temperature, temperature])),
        liquid_of(run.environment, draws),
        half,
        concentration_per_ratio,
        {},
    )
    course = Course(
        cells,
        rates,
        nothing(draws.n_draws, geometry),
        {0: ratio_in_plan_units(plan, draws, run.ratio)},
        enzyme.values.get("intermediate_activity", 0.0),
        enzyme.values.get("saturation_ratio"),
        geometry,
    )
    return course.at_each(duration)
