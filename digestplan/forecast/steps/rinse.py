"""Rinse: exchange by exchange, what a fluid carries out of the piece."""

from collections.abc import Callable, Mapping
from dataclasses import replace
from functools import partial

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.environment import USUAL_BUFFER
from digestplan.forecast.result import RinseForecast
from digestplan.forecast.steps.base import Carried, Job
from digestplan.forecast.tags import ACIDIC
from digestplan.forecast.tissue import solute_clock, tissue_volume
from digestplan.forecast.window import on_clock, quantile
from digestplan.kinetics.rinse import left_at_equilibrium, rinse
from digestplan.plan.model import Digest, Environment, Rinse

Array = NDArray[np.float64]

_MOST = 60  # more exchanges than anybody would do
_DRAWS_OF_GUESS, _MARGIN = 128, 4  # a first look at how many exchanges, and what it may miss
CHELATORS = ("edta", "citric-acid")
_FALLBACK = 1e-3  # [mol/L] that a liquid of which nothing is stated bears
_SHARE_OF_CALCIUM = 0.2  # of the calcium that a chelator may take
_SHARE_OF_BUFFER = 0.04  # of the buffer that an acid may use up: about 0.1 of a pH unit


def run(
    step: Rinse, index: int, job: Job, carried: Carried, *, open_ended: bool
) -> tuple[RinseForecast, Carried]:
    """
    Forecast a rinse.

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
        Nothing follows; a rinse ends all the same.

    Returns
    -------
    forecast, carried
        The step's forecast, and what it leaves to the next.
    """
    del open_ended
    draws = job.draws
    temperature = draws.temperature(step.temperature)
    ratio = draws.of(step.volume) / tissue_volume(job.plan, draws)
    left = {
        name: _left_after_each(step, job, name, temperature, ratio, step.exchanges)[-1]
        for name in carried.residues
    }
    after = {name: carried.residues[name] * left[name] for name in left}
    hours = step.exchanges * step.each
    begin = on_clock(job.plan.start, carried.clock)
    forecast = RinseForecast(
        do=step.do,
        index=index,
        start_h=carried.clock,
        hours=hours,
        start=begin,
        end=on_clock(begin, hours),
        carry_over={name: float(np.median(amount)) for name, amount in after.items()},
        carry_over_at_most={
            name: quantile(amount, job.plan.confidence) or 0.0 for name, amount in after.items()
        },
        left_share={name: float(np.median(share)) for name, share in left.items()},
        more_exchanges=_more(step, index, job, carried, after, temperature, ratio),
    )
    return forecast, replace(
        carried, clock=carried.clock + hours, temperature=temperature, residues=after
    )


def _left_after_each(
    step: Rinse,
    job: Job,
    substance: str,
    temperature: Array,
    ratio: Array,
    exchanges: int,
    some: slice = slice(None),
) -> Array:
    """Share that is left before the first and after each of so many exchanges, in some draws."""
    pace, ratio = solute_clock(job.plan, job.draws, substance, temperature), ratio[some]
    if pace is None:
        return left_at_equilibrium(ratio, np.arange(exchanges + 1.0)[:, np.newaxis])
    thetas = np.broadcast_to(pace[some] * step.each, (exchanges, len(ratio)))
    return rinse(thetas, ratio, job.plan.sample.shape).left


def _more(
    step: Rinse,
    index: int,
    job: Job,
    carried: Carried,
    after: Mapping[str, Array],
    temperature: Array,
    ratio: Array,
) -> dict[str, int | None]:
    """More exchanges like these that the next digest asks for, by substance."""
    wanted: dict[str, int | None] = {}
    following = (s for s in job.plan.steps[index + 1 :] if isinstance(s, Digest))
    digest = next(following, None)
    if digest is None:
        return wanted
    for name, amount in after.items():
        bears = bearable(name, digest, job)
        if bears is None or _surely(amount <= bears, job):
            continue
        before = carried.residues[name]
        enough = partial(_enough, step, job, name, before, bears, temperature, ratio)
        wanted[name] = _first_enough(step, job, enough)
    return wanted


def _enough(
    step: Rinse,
    job: Job,
    substance: str,
    before: Array,
    bears: float,
    temperature: Array,
    ratio: Array,
    exchanges: int,
    some: slice,
) -> NDArray[np.bool_]:
    """Whether no exchange, one, two … are enough for what a digest bears."""
    left = _left_after_each(step, job, substance, temperature, ratio, exchanges, some)
    return _surely(before[some] * left <= bears, job)


def _first_enough(
    step: Rinse, job: Job, enough: Callable[[int, slice], NDArray[np.bool_]]
) -> int | None:
    """How many more exchanges are the first to be enough; some draws say how far to look."""
    limit = step.exchanges + _MOST
    guess = enough(limit, slice(min(_DRAWS_OF_GUESS, job.draws.n_draws)))
    near = int(guess.argmax()) + _MARGIN if guess.any() else limit
    for most in dict.fromkeys((min(near, limit), limit)):
        found = enough(most, slice(None))
        if found.any():
            return int(found.argmax()) - step.exchanges
    return None


def _surely(met: NDArray[np.bool_], job: Job) -> NDArray[np.bool_]:
    """Whether something is met in as many draws as the plan wants to be sure of."""
    return np.asarray(met.mean(axis=-1) >= job.plan.confidence)


def bearable(substance: str, digest: Digest, job: Job) -> float | None:
    """
    Return how much of a substance may be left in the piece for a digest.

    Parameters
    ----------
    substance
        A reagent or a solute.
    digest
        The digest that follows.
    job
        What holds for the whole plan.

    Returns
    -------
    concentration
        In the piece [mol/L]; None where it does not matter.
    """
    tissue = float(np.median(tissue_volume(job.plan, job.draws)))
    volume = 10 * tissue if digest.volume is None else digest.volume.quantity.value
    dilution = (tissue + volume) / tissue
    limits = []
    if substance in CHELATORS and job.enzyme.enzyme.cofactor and job.enzyme.enzyme.cofactor_needed:
        calcium = digest.environment.calcium
        stated = _FALLBACK if calcium is None else calcium.quantity.value
        limits.append(_SHARE_OF_CALCIUM * stated)
    if substance.endswith("-acid"):
        limits += _acid_limit(digest.environment)
    return min(limits) * dilution if limits else None


def _acid_limit(liquid: Environment) -> list[float]:
    """What a liquid bears of an acid, in the liquid; an acid one bears any. [mol/L]."""
    if liquid.ph is not None and liquid.ph.quantity.value < ACIDIC:
        return []
    if liquid.buffer is None:
        return [_FALLBACK / 10]
    buffer = liquid.buffer_concentration
    return [_SHARE_OF_BUFFER * (USUAL_BUFFER if buffer is None else buffer.quantity.value)]
