"""Rinse: exchange by exchange, what a fluid carries out of the piece."""

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.result import RinseForecast
from digestplan.forecast.steps.base import Carried, Job
from digestplan.forecast.tissue import solute_clock, tissue_volume
from digestplan.forecast.window import on_clock
from digestplan.kinetics.rinse import exchanges_for, left_at_equilibrium, rinse
from digestplan.plan.model import Digest, Rinse

Array = NDArray[np.float64]

_MOST = 60  # exchanges that anybody would do
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
    left = {name: _left(step, job, name, temperature, ratio) for name in carried.residues}
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
        left_share={name: float(np.median(share)) for name, share in left.items()},
        more_exchanges=_more(step, index, job, carried, after, temperature, ratio),
    )
    return forecast, replace(
        carried, clock=carried.clock + hours, temperature=temperature, residues=after
    )


def _left(step: Rinse, job: Job, substance: str, temperature: Array, ratio: Array) -> Array:
    pace = solute_clock(job.plan, job.draws, substance, temperature)
    if pace is None:
        return left_at_equilibrium(ratio, step.exchanges)
    thetas = np.broadcast_to(pace * step.each, (step.exchanges, job.draws.n_draws))
    left: Array = rinse(thetas, ratio, job.plan.sample.shape).left[-1]
    return left


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
        if bears is None or float(np.median(amount)) <= bears:
            continue
        target = bears / float(np.median(carried.residues[name]))
        pace = solute_clock(job.plan, job.draws, name, temperature)
        theta = np.inf if pace is None else float(np.median(pace)) * step.each
        middle = float(np.median(ratio))
        needed = exchanges_for(target, min(theta, 50.0), middle, job.plan.sample.shape, most=_MOST)[
            0
        ]
        wanted[name] = int(needed) - step.exchanges if np.isfinite(needed) else None
    return wanted


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
    liquid = digest.environment
    if substance in {"edta", "citric-acid"}:
        if job.enzyme.enzyme.cofactor is None or not job.enzyme.enzyme.cofactor_needed:
            return None
        calcium = liquid.calcium
        stated = _FALLBACK if calcium is None else calcium.quantity.value
        return _SHARE_OF_CALCIUM * stated * dilution
    if substance.endswith("-acid"):
        buffer = liquid.buffer_concentration
        stated = 0.05 if buffer is None else buffer.quantity.value
        if liquid.ph is not None and liquid.ph.quantity.value < 4:
            return None
        return (_SHARE_OF_BUFFER * stated if liquid.buffer else _FALLBACK / 10) * dilution
    return None
