"""How much more enzyme would do: the factor by which every charge has to be multiplied."""

from collections.abc import Callable
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.base_case import BaseCase
from digestplan.forecast.known_run import susceptibility_for
from digestplan.forecast.passage import Passage
from digestplan.forecast.steps.base import Job
from digestplan.forecast.variants import with_enzyme
from digestplan.forecast.window import quantile
from digestplan.kinetics.state import State
from digestplan.plan.model import Digest

Array = NDArray[np.float64]

_MOST, _LEAST = 1e4, 1e-4  # factors between which one is looked for
_NEAR = 1e-3  # relative: amounts are weighed to two or three digits
_ROUNDS = 30
_SURE = 1 - 1e-9  # an extent nearer to everything than this is not asked for


def is_proportional(job: Job) -> bool:
    """Whether twice the enzyme gives twice the dose, but for a crowded surface."""
    return job.enzyme.enzyme.inactivation != "autolysis" or not job.enzyme.has("autolysis_rate")


def is_simple(job: Job) -> bool:
    """Whether the factor follows from one course: no autolysis, one charge on a crowded surface."""
    if not is_proportional(job):
        return False
    digests = [step for step in job.plan.steps if isinstance(step, Digest)]
    once = len(digests) == 1 and not digests[0].additions
    return once or not job.enzyme.has("saturation_ratio")


def dose_factor(job: Job, state: State, target: Array) -> Array:
    """
    Return how many times the dose would just bring each draw to an extent.

    Parameters
    ----------
    job
        The plan, drawn.
    state
        What it has been given.
    target
        Shape (n_draws,). [1]

    Returns
    -------
    factor
        Shape (n_draws,); at most 1 where the draw is there.
    """
    response = job.response
    if state.local is not None:  # at depths that nothing has reached, below 0 by the last digits
        state = replace(state, local=np.maximum(state.local, 0.0))
    needed = susceptibility_for(
        np.minimum(target, _SURE),
        state,
        response.law,
        lambda _: response.parameters,
        response.geometry,
    )
    factor: Array = needed / response.susceptibility
    return factor


def enzyme_factor(job: Job, state: State, dose: Array) -> Array:
    """
    Return how many times the enzyme gives so many times the dose.

    Parameters
    ----------
    job
        A plan of one charge, drawn.
    state
        The state in which the dose has been given, for what was charged.
    dose
        Factor of the dose, shape (n_draws,). [1]

    Returns
    -------
    factor
        Factor of the enzyme, shape (n_draws,): the same, but on a crowded surface more; infinite
        where no amount would do.
    """
    if not job.enzyme.has("saturation_ratio"):
        return dose
    crowding = state.charged / job.enzyme["saturation_ratio"]
    wanted = dose * crowding / (1 + crowding)
    with np.errstate(divide="ignore", invalid="ignore"):
        factor = wanted / (1 - wanted) / crowding
    factor = np.where(crowding > 0, factor, dose)
    result: Array = np.where(wanted < 1, factor, np.inf)
    return result


def factor_for(base: BaseCase, passage: Passage, hour: float, share: float) -> float | None:
    """
    Return how many times the enzyme makes so large a share of draws ready at an hour.

    Parameters
    ----------
    base
        The plan from which the passage comes.
    passage
        The way of a variant of it.
    hour
        On the plan's clock. [h]
    share
        Of the draws. [1]

    Returns
    -------
    factor
        None where no amount would do.
    """
    job, state = passage.job, passage.state_at(hour)
    dose = dose_factor(job, state, passage.target)
    if is_simple(job):
        return _within_reason(quantile(enzyme_factor(job, state, dose), share))

    def missing(log_factor: float) -> float:
        """Logarithm of the factor by which the dose of that share is too small."""
        variant = with_enzyme(job.plan, float(np.exp(log_factor)))
        after = base.passage(variant, hour).state_at(hour)
        factor = quantile(dose_factor(job, after, passage.target), share)
        return np.log(_MOST) if factor is None else float(np.log(np.clip(factor, _LEAST, _MOST)))

    first = quantile(dose, share)
    start = np.log(_MOST) if first is None else float(np.log(np.clip(first, _LEAST, _MOST)))
    log_factor = _falling_root(missing, start)
    return None if log_factor is None else float(np.exp(log_factor))


def _within_reason(factor: float | None) -> float | None:
    return factor if factor is not None and factor < _MOST else None


def _falling_root(missing: Callable[[float], float], start: float) -> float | None:
    """Root of a falling function of a logarithm, from its value at 0 (Illinois' rule)."""
    if abs(start) < _NEAR:
        return 0.0
    low, at_low = 0.0, start
    high, at_high = start, missing(start)
    while at_low * at_high > 0:  # one side of the root still: go on, at most to what is reasonable
        low, at_low = high, at_high
        if abs(high) >= np.log(_MOST):
            return None if at_high > 0 else high
        high = float(np.clip(2 * high, np.log(_LEAST), np.log(_MOST)))
        at_high = missing(high)
    for _ in range(_ROUNDS):
        middle = high - at_high * (high - low) / (at_high - at_low)
        at_middle = missing(middle)
        if abs(at_middle) < _NEAR or abs(high - low) < _NEAR:
            return middle
        if at_middle * at_high < 0:
            low, at_low = high, at_high
        else:
            at_low /= 2
        high, at_high = middle, at_middle
    return high
