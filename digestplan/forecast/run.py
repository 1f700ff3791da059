"""From a plan to its forecast: draws, steps in their order, window, visits, cautions."""

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.amounts import weighed_mass
from digestplan.forecast.cautions import cautions_of
from digestplan.forecast.conditions import EnzymeDraws, draw_enzyme
from digestplan.forecast.draws import Draws
from digestplan.forecast.known_run import Parameters, susceptibility_of
from digestplan.forecast.limits import limits_of
from digestplan.forecast.memory import keep_memory
from digestplan.forecast.response import Response
from digestplan.forecast.result import DigestForecast, Forecast, StepForecast
from digestplan.forecast.steps import run_step
from digestplan.forecast.steps.base import Job, untouched
from digestplan.forecast.steps.digest import concentration_per_ratio
from digestplan.forecast.window import visit_chances, window
from digestplan.kinetics.depth import Geometry, geometry
from digestplan.kinetics.extent import LAWS
from digestplan.plan.model import Digest, Plan

Array = NDArray[np.float64]

DRAWS, SEED = 2000, 1


def forecast(plan: Plan, n_draws: int = DRAWS, seed: int = SEED) -> Forecast:
    """
    Forecast a plan.

    Parameters
    ----------
    plan
        The plan, read and checked.
    n_draws
        How many draws; a plan without any spread needs, and gets, one. [1]
    seed
        The same plan and seed give the same numbers. [1]

    Returns
    -------
    forecast
        The finished forecast.
    """
    draws = Draws(plan, n_draws, seed)
    job = prepare(plan, draws)
    steps = _run_steps(job)
    ready, too_far = _on_one_clock(steps, draws.n_draws)
    whole = window(ready, too_far, plan.confidence, plan.start)
    visits = visit_chances(plan.visits, plan.start, ready, too_far)
    return Forecast(
        plan=plan,
        n_draws=draws.n_draws,
        seed=seed,
        steps=tuple(steps),
        ready_h=ready,
        too_far_h=too_far,
        never_ready=float(np.isinf(ready).mean()),
        window=whole,
        visits=visits,
        limits=limits_of(job, steps),
        cautions=cautions_of(job, steps, whole, visits),
        weighed=_weighed(plan, draws),
    )


def prepare(plan: Plan, draws: Draws) -> Job:
    """Draw what holds for the whole plan: the enzyme, the sample's answer, the heat damage."""
    keep_memory()
    enzyme = draw_enzyme(plan, draws)
    return Job(
        plan,
        draws,
        enzyme,
        _response(plan, draws, enzyme),
        {name: draws.of(value) for name, value in plan.sample.damage.items()},
    )


def _response(plan: Plan, draws: Draws, enzyme: EnzymeDraws) -> Response:
    sample, law = plan.sample, LAWS[plan.sample.law]
    depth = _geometry(plan, enzyme)
    parameters = _law_parameters(plan, draws)
    first = next((step for step in plan.steps if isinstance(step, Digest)), None)
    volume = None if first is None or first.volume is None else draws.of(first.volume)
    per_ratio = concentration_per_ratio(plan, draws, volume)
    s = susceptibility_of(plan, draws, enzyme, law, parameters, depth, per_ratio)
    keep = np.zeros(draws.n_draws)
    if sample.keep_selectivity is not None:
        keep = s / draws.of(sample.keep_selectivity)
    return Response(law, parameters(s), s, keep, depth)


def _geometry(plan: Plan, enzyme: EnzymeDraws) -> Geometry | None:
    if not enzyme.has("diffusivity") or plan.sample.thickness is None:
        return None
    return geometry(plan.sample.shape)


def _law_parameters(plan: Plan, draws: Draws) -> Parameters:
    """What the law takes beside the scaled dose, for a susceptibility of shape (n_draws,)."""
    sample = plan.sample
    drawn = {name: draws.of(value) for name, value in sample.law_values.items()}
    if sample.law == "two_pool":
        fast, slow = drawn["fast_fraction"], drawn["slow_susceptibility"]
        return lambda susceptibility: (fast, slow / susceptibility)
    fixed: tuple[Array, ...] = ()
    if sample.law == "erosion":
        exponent = {"slab": 1.0, "cylinder": 2.0, "sphere": 3.0}[sample.shape]
        fixed = (np.full(draws.n_draws, exponent),)
    elif sample.law == "stretched":
        fixed = (drawn["exponent"],)
    elif sample.law == "michaelis_menten":
        fixed = (drawn["initial"] / drawn["half_saturation"],)
    return lambda _: fixed


def _run_steps(job: Job) -> list[StepForecast]:
    plan = job.plan
    carried = untouched(job)
    results = []
    for index, step in enumerate(plan.steps):
        open_ended = index == len(plan.steps) - 1
        result, carried = run_step(step, index, job, carried, open_ended=open_ended)
        results.append(result)
    return results


def _on_one_clock(steps: list[StepForecast], n_draws: int) -> tuple[Array, Array]:
    """Hours from the plan's start at which each draw is first ready, and first too far."""
    ready, too_far = np.full(n_draws, np.inf), np.full(n_draws, np.inf)
    for step in steps:
        if isinstance(step, DigestForecast):
            ready = np.minimum(ready, step.start_h + step.ready_h)
            too_far = np.minimum(too_far, step.start_h + step.too_far_h)
    return ready, too_far


def _weighed(plan: Plan, draws: Draws) -> dict[int, float]:
    masses = {
        index: weighed_mass(plan, draws, step)
        for index, step in enumerate(plan.steps)
        if isinstance(step, Digest)
    }
    return {index: mass for index, mass in masses.items() if mass is not None}
