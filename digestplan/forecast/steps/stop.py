"""Stop: what a chelator, acid, alkali, inhibitor, heat or cold leaves of the enzyme."""

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from digestplan import library
from digestplan.forecast.environment import ROOM
from digestplan.forecast.result import DigestForecast
from digestplan.forecast.steps import digest
from digestplan.forecast.steps.base import Carried, Job
from digestplan.plan.model import Enzyme, Hold, Stop, Stretch, Value
from digestplan.quantities.model import Quantity

Array = NDArray[np.float64]

_BRIEF = 1 / 60  # [h] that mixing takes where the plan gives no time
_LEFT = 1e-3  # of the activity that a stop leaves of what it stops
_BY_TEMPERATURE = ("heat", "chill")


def run(
    step: Stop, index: int, job: Job, carried: Carried, *, open_ended: bool
) -> tuple[DigestForecast, Carried]:
    """
    Forecast a stop, and what the enzyme still does while it lasts.

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
        Nothing follows: what is stopped for good stays so.

    Returns
    -------
    forecast, carried
        The step's forecast, and what it leaves to the next.
    """
    del open_ended  # a tube is not left at 95 °C until somebody comes
    waiting, stopped = as_hold(step, index, job, carried)
    forecast, after = digest.run(waiting, index, job, stopped, open_ended=False)
    return replace(forecast, do="stop"), after


def as_hold(step: Stop, index: int, job: Job, carried: Carried) -> tuple[Hold, Carried]:
    """Return the wait that a stop is, and the bath in which it begins."""
    waiting = Hold("hold", (_stretch(step, index, carried),), None, None)
    return waiting, _stopped(step, job.enzyme.enzyme, carried)


def stops(step: Stop, enzyme: Enzyme) -> bool | None:
    """
    Say whether a stop stops an enzyme.

    Parameters
    ----------
    step
        The stop.
    enzyme
        The plan's enzyme.

    Returns
    -------
    stops
        True: for good, or as long as it lasts; False: it does not; None: nothing is known of the
        enzyme, so that nothing is assumed.
    """
    if enzyme.key is None:
        return None
    entry = library.enzyme(enzyme.key)
    if step.how != "inhibit":
        return step.how in entry.stopped_by
    agent = (step.agent or "").strip().lower().rstrip("s")
    known = [name.lower().rstrip("s") for name in entry.inhibitors]
    return any(name in agent or (len(agent) > 3 and agent in name) for name in known)


def _stopped(step: Stop, enzyme: Enzyme, carried: Carried) -> Carried:
    """The bath just after the stop: heat and cold act by their temperature alone."""
    if step.how in _BY_TEMPERATURE or not stops(step, enzyme):
        return carried
    entry = library.enzyme(enzyme.key or "")
    if step.how in entry.reversible:
        return replace(carried, liquid=replace(carried.liquid, stopped=_LEFT))
    state = carried.state
    fewer = {
        name: getattr(state, name) * _LEFT
        for name in ("fresh", "intermediate", "modal_fresh", "modal_intermediate")
        if getattr(state, name) is not None
    }
    return replace(carried, state=replace(state, **fewer))


def _stretch(step: Stop, index: int, carried: Carried) -> Stretch:
    if step.temperature is not None:
        temperature = step.temperature
    else:
        now = ROOM if carried.temperature is None else float(np.median(carried.temperature))
        quantity = Quantity(now, text=f"{now - 273.15:.4g} degC")
        temperature = Value(quantity, f"steps[{index}].temperature", "default", "as it was")
    return Stretch(temperature, step.hours or _BRIEF, ramp=False)
