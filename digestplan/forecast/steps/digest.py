"""Digest: fresh enzyme in its liquid, through a temperature programme."""

from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.amounts import (
    active_ratio,
    label_activity,
    substrate_mass,
    weighed_ratio,
)
from digestplan.forecast.conditions import (
    EnzymeDraws,
    inactivation_rate,
    rates_at,
    second_rate,
)
from digestplan.forecast.draws import Draws
from digestplan.forecast.environment import CarriedOver, Liquid, free_calcium, liquid_of, ph_at
from digestplan.forecast.known_run import susceptibility_for
from digestplan.forecast.result import Curve, DigestForecast
from digestplan.forecast.steps.base import Carried, Job
from digestplan.forecast.timeline import Timeline
from digestplan.forecast.tissue import half_thickness, tissue_volume
from digestplan.forecast.window import bands, on_clock, spread, window
from digestplan.kinetics.damage import keep_loss
from digestplan.kinetics.dose import Course
from digestplan.kinetics.programme import Cells, Leg, compile_programme
from digestplan.kinetics.state import Rates, State, nothing
from digestplan.plan.model import Digest, Hold, Plan

Array = NDArray[np.float64]

_LAG_OF_ONE_ML = 2.5 / 60  # [h] common practice: a tube of 1 mL follows its bath in minutes
_MOST_DEATH = 4.0  # e-folds of inactivation that a moving cell may hold where enzyme is fresh
_DEAD = 35.0  # e-folds after which nothing of it is left that would count
_USUAL_VOLUMES = 10.0  # of liquid to one of tissue, where the plan does not say


def run(
    step: Digest | Hold, index: int, job: Job, carried: Carried, *, open_ended: bool
) -> tuple[DigestForecast, Carried]:
    """
    Forecast a digest step, or a hold in which its enzyme goes on.

    Parameters
    ----------
    step
        The step.
    index
        Its place in the plan.
    job
        What holds for the whole plan.
    carried
        What the step before left.
    open_ended
        Nothing follows: the tube stays at its last temperature until somebody comes.

    Returns
    -------
    forecast, carried
        The step's forecast, and what it leaves to the next.
    """
    course, set_points, after = advance(step, job, carried)
    brought = after.residues if isinstance(step, Digest) else {}
    timeline = Timeline(course, job.response, open_ended=open_ended)
    forecast = _told(step, index, job, carried.clock, timeline, after.liquid, set_points, brought)
    return forecast, after


def advance(step: Digest | Hold, job: Job, carried: Carried) -> tuple[Course, Array, Carried]:
    """
    Take the enzyme through a step without telling anything of it.

    Parameters
    ----------
    step, job, carried
        As for `run`.

    Returns
    -------
    course, set_points, carried
        The course, the temperatures of its programme, and what the step leaves to the next.
    """
    volume = _volume(step, job, carried)
    brought = carried.residues if isinstance(step, Hold) else _diluted(job, carried, volume)
    liquid = _liquid(step, job, carried, brought)
    set_points = _set_points(step, job.draws, carried)
    course = _course(step, job, carried, liquid, volume, set_points)
    at_end = course.cells.end_weights @ set_points
    after = replace(
        carried,
        clock=carried.clock + course.cells.end,
        temperature=np.broadcast_to(at_end, (job.draws.n_draws,)),
        state=course.at_end(),
        liquid=liquid,
        volume=volume,
        residues=brought,
    )
    return course, set_points, after


def _course(
    step: Digest | Hold,
    job: Job,
    carried: Carried,
    liquid: Liquid,
    volume: Array | None,
    set_points: Array,
) -> Course:
    """The enzyme's course through a step's programme, from what the step before left."""
    charges, start = _charges(step, job, carried)
    cells, rates = _cells_and_rates(step, job, liquid, volume, set_points, list(charges))
    by_cell = {0 if after == 0 else cells.cell_at(after) + 1: c for after, c in charges.items()}
    return Course(
        cells,
        rates,
        start,
        by_cell,
        job.enzyme.values.get("intermediate_activity", 0.0),
        job.enzyme.values.get("saturation_ratio"),
        job.response.geometry,
    )


def _volume(step: Digest | Hold, job: Job, carried: Carried) -> Array | None:
    """Volume of a step's liquid, where it is known; a hold keeps that of the step before. [mL]"""
    if isinstance(step, Hold):
        return carried.volume
    return None if step.volume is None else job.draws.of(step.volume)


def _liquid(
    step: Digest | Hold, job: Job, carried: Carried, brought: Mapping[str, Array]
) -> Liquid:
    """The liquid of a step; a hold keeps that of the step before."""
    if isinstance(step, Hold):
        return carried.liquid
    with_it = CarriedOver(brought, _working_temperature(step))
    return liquid_of(step.environment, job.draws, with_it)


def _diluted(job: Job, carried: Carried, volume: Array | None) -> dict[str, Array]:
    """What the piece brings along, spread over itself and its new liquid. [mol/L]"""
    tissue = tissue_volume(job.plan, job.draws)
    liquid = _USUAL_VOLUMES * tissue if volume is None else volume
    return {name: amount * tissue / (tissue + liquid) for name, amount in carried.residues.items()}


def _charges(step: Digest | Hold, job: Job, carried: Carried) -> tuple[dict[float, Array], State]:
    """Enzyme added by time, and the state of the sample in its new, still empty, liquid."""
    if isinstance(step, Hold):
        return {}, carried.state
    plan, draws, before = job.plan, job.draws, carried.state
    charges = {0.0: active_ratio(plan, draws, step)}
    for addition in step.additions:
        amount = weighed_ratio(plan, draws, addition.charge, None)
        charges[addition.after] = charges.get(addition.after, 0.0) + amount
    empty = nothing(draws.n_draws, job.response.geometry)
    return charges, replace(empty, dose=before.dose, heat=before.heat, local=before.local)


def _set_points(step: Digest | Hold, draws: Draws, carried: Carried) -> Array:
    """Temperatures of the programme, the sample's first, shape (n_legs + 1, n_draws).

    Where no temperature has an error, one column stands for all draws: rates are then taken once.
    """
    points = [draws.temperature(stretch.temperature) for stretch in step.programme]
    if step.start_temperature is not None:
        first = draws.of(step.start_temperature)
    elif carried.temperature is not None:
        first = carried.temperature
    else:
        first = points[0]
    rows = np.stack([first, *points])
    return rows[:, :1] if np.ptp(rows, axis=1).max() == 0 else rows


def lag_of(step: Digest | Hold, volume: Array | None) -> float:
    """Time constant with which the sample follows its bath: as stated, or by the volume. [h]."""
    if step.lag is not None:
        return step.lag.quantity.value
    if volume is None:
        return 0.0
    return _LAG_OF_ONE_ML * float(np.sqrt(np.median(volume)))


def concentration_per_ratio(plan: Plan, draws: Draws, volume: Array | None) -> Array | None:
    """Active enzyme in a bath for a ratio of 1, shape (n_draws,). [g/mL per unit/g]."""
    if volume is None:
        return None
    return substrate_mass(plan, draws) / (label_activity(plan, draws) * volume)


def _cells_and_rates(
    step: Digest | Hold,
    job: Job,
    liquid: Liquid,
    volume: Array | None,
    set_points: Array,
    breaks: Sequence[float],
) -> tuple[Cells, Rates]:
    """Cut the programme so finely that its moving cells hold little death each."""
    legs = [Leg(stretch.hours, stretch.ramp) for stretch in step.programme]
    nominal = np.median(set_points, axis=1)
    depth = job.response.geometry is not None
    graded = depth and job.enzyme.enzyme.inactivation == "autolysis"
    half = half_thickness(job.plan, job.draws) if depth else None
    lag, per_ratio = lag_of(step, volume), concentration_per_ratio(job.plan, job.draws, volume)

    cells = compile_programme(legs, nominal, lag, breaks, graded)
    cuts = _cuts(cells, job.enzyme, set_points, breaks)
    if cuts:
        cells = compile_programme(legs, nominal, lag, breaks, graded, cuts)
    temperatures = cells.temperatures(set_points)
    return cells, rates_at(job.enzyme, temperatures, liquid, half, per_ratio, job.damage)


def _cuts(
    cells: Cells, enzyme: EnzymeDraws, set_points: Array, breaks: Sequence[float]
) -> list[float]:
    """Times that cut the moving cells in which much of some draw's living enzyme would die."""
    nominal = cells.weights @ np.median(set_points, axis=1)
    warmest = [max(nodes, key=lambda n: nominal[n]) for nodes in cells.nodes]
    coldest = [min(nodes, key=lambda n: nominal[n]) for nodes in cells.nodes]
    fastest, _ = _deaths(enzyme, cells.weights[warmest] @ set_points)
    _, slowest = _deaths(enzyme, cells.weights[coldest] @ set_points)
    gone = np.zeros(fastest.shape[1])  # e-folds of the slower death so far
    cuts: list[float] = []
    for cell in range(cells.n_cells - 1):
        begin, end = float(cells.edges[cell]), float(cells.edges[cell + 1])
        if begin in breaks:
            gone = np.zeros_like(gone)
        if len(cells.nodes[cell]) > 1 and begin < cells.end:
            worst = fastest[cell][gone < _DEAD].max(initial=0.0) * (end - begin)
            share = _MOST_DEATH / max(worst, _MOST_DEATH)
            while share < 1:  # each piece as long as all before: what it kills there matters less
                cuts.append(begin + share * (end - begin))
                share *= 2
        gone = gone + slowest[cell] * (end - begin)
    return cuts


def _deaths(enzyme: EnzymeDraws, temperature: Array) -> tuple[Array, Array]:
    """The faster and the slower of an enzyme's deaths, shape (n_nodes, n_draws). [1/h]."""
    first, second = inactivation_rate(enzyme, temperature), second_rate(enzyme, temperature)
    if second is None:
        return first, first
    return np.maximum(first, second), np.minimum(first, second)


def _told(
    step: Digest | Hold,
    index: int,
    job: Job,
    clock: float,
    timeline: Timeline,
    liquid: Liquid,
    set_points: Array,
    brought: Mapping[str, Array],
) -> DigestForecast:
    plan, course, response = job.plan, timeline.course, job.response
    begin = on_clock(plan.start, clock)
    ready, too_far = _times(job, timeline)
    end, forever = timeline.states[-1], timeline.for_ever()
    residual = _residual(course, end)
    return DigestForecast(
        do=step.do,
        index=index,
        start_h=clock,
        hours=timeline.end,
        start=begin,
        end=on_clock(begin, timeline.end),
        extent_at_end=spread(response.extent(end)),
        extent_at_centre=spread(response.extent_at_centre(end)),
        residual_activity_at_end=spread(residual),
        keep_loss_at_end=spread(response.keep_loss(end)),
        ceiling=spread(response.extent(forever)),
        dose_at_end=spread(end.dose),
        dose_unit=f"{plan.activity_unit} h/g",
        hours_to_target=spread(ready),
        never_reaches_target=float(np.isinf(ready).mean()),
        hours_to_keep_limit=spread(too_far),
        window=window(ready, too_far, plan.confidence, begin),
        curve=_curve(timeline, set_points),
        ph_at_temperature=ph_at(liquid, _working_temperature(step)),
        free_calcium=free_calcium(liquid),
        ready_h=ready,
        too_far_h=too_far,
        liquid=liquid,
        brought=brought,
        harm_by_heat=float(np.median(keep_loss(end.heat))),
        enzyme_factor=_enzyme_factor(job, forever),
    )


def _enzyme_factor(job: Job, forever: State) -> Array:
    """How many times the enzyme would bring each draw to the target in the end."""
    target = np.minimum(job.draws.of(job.plan.sample.target_extent), 1 - 1e-9)
    needed = susceptibility_for(
        target, forever, job.response.law, lambda _: job.response.parameters, job.response.geometry
    )
    return needed / job.response.susceptibility


def _working_temperature(step: Digest | Hold) -> float:
    """Temperature at which the step spends most of its enzyme: its warmest set point. [K]."""
    return max(stretch.temperature.quantity.value for stretch in step.programme)


def _times(job: Job, timeline: Timeline) -> tuple[Array, Array]:
    """Hours to the target and to the keep-loss limit, infinite for never."""
    sample, response, draws = job.plan.sample, job.response, job.draws
    target = draws.of(sample.target_extent)
    ready = timeline.time_to(response.extent, target)
    if sample.keep_loss_limit is None:
        return ready, np.full(draws.n_draws, np.inf)
    return ready, timeline.time_to(response.keep_loss, draws.of(sample.keep_loss_limit))


def _residual(course: Course, state: State) -> Array:
    charged = np.where(state.charged > 0, state.charged, 1.0)
    return course.active(state) / charged


def _curve(timeline: Timeline, set_points: Array) -> Curve:
    course, response = timeline.course, timeline.response
    low, middle, high = bands(timeline.over_time(response.extent))
    activity = timeline.over_time(lambda state, _: _residual(course, state))
    nominal = np.median(set_points, axis=1)
    temperature = [course.cells.temperature_at(float(h), nominal) for h in timeline.hours]
    return Curve(
        timeline.hours,
        low,
        middle,
        high,
        np.median(activity, axis=1),
        np.array(temperature) - 273.15,
    )
