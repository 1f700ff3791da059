"""The steps of a treatment; `run_step` finds the one that a plan asks for."""

from collections.abc import Callable
from typing import Any

from digestplan.forecast.result import StepForecast
from digestplan.forecast.steps import demineralise, digest, rinse, stop
from digestplan.forecast.steps.base import Carried, Job
from digestplan.plan.model import Step

_RUNNERS: dict[str, Callable[..., tuple[Any, Carried]]] = {
    "demineralise": demineralise.run,
    "rinse": rinse.run,
    "digest": digest.run,
    "stop": stop.run,
    "hold": digest.run,
}


def run_step(
    step: Step, index: int, job: Job, carried: Carried, *, open_ended: bool
) -> tuple[StepForecast, Carried]:
    """Forecast one step from what the step before left; return its forecast and what it leaves."""
    return _RUNNERS[step.do](step, index, job, carried, open_ended=open_ended)
