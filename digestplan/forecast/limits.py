"""What limits a plan, in words: what holds the digest up, and what makes its window wide."""

from collections.abc import Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.result import DigestForecast, StepForecast
from digestplan.forecast.steps.base import Job
from digestplan.forecast.told import percent

Array = NDArray[np.float64]

_WORTH_TELLING = 0.1
_CHILLED = 10.0  # [K] below the warmest


def limits_of(job: Job, steps: Sequence[StepForecast]) -> tuple[str, ...]:
    """
    Say what limits a plan, the most important first.

    Parameters
    ----------
    job
        The plan, drawn.
    steps
        The forecasts of its steps.

    Returns
    -------
    limits
        Sentences.
    """
    digests = [step for step in steps if isinstance(step, DigestForecast)]
    if not digests:
        return ()
    return (*_holds_up(job, digests), *_makes_uncertain(job, digests))


def _holds_up(job: Job, digests: Sequence[DigestForecast]) -> list[str]:
    target = job.plan.sample.target_extent.quantity.value
    working = [d for d in digests if d.do == "digest"] or digests
    step = next((d for d in working if d.hours_to_target.p50 is not None), working[-1])
    ceiling, residual = step.ceiling.p50 or 0.0, step.residual_activity_at_end.p50 or 0.0
    mean, centre = step.extent_at_end.p50 or 0.0, step.extent_at_centre.p50 or 0.0
    before_chill = _ready_before_chill(step)
    found = []
    if ceiling < target:
        found.append(f"The enzyme dies before it is done: the ceiling is {percent(ceiling)}.")
    elif before_chill < job.plan.confidence:
        found.append(
            f"The chill: only {percent(before_chill)} of futures are ready before it. A later one, "
            "or more enzyme, would help."
        )
    if job.response.geometry is not None and mean - centre > 0.05:
        found.append("The way in: enzyme reaches the centre later than the rim.")
    if residual < 0.2 and not found:
        found.append(
            f"The enzyme's life: {percent(residual)} of it is left at the end of the step."
        )
    if step.hours_to_target.p50 is None and not found:
        found.append("Time: the target would be reached, but not before the step ends.")
    return found or ["Nothing holds it up: more enzyme or more warmth would simply be faster."]


def _ready_before_chill(step: DigestForecast) -> float:
    """Share of draws that are ready before the bath is cooled for good; 1 where it never is."""
    warm = step.curve.temperature_c > step.curve.temperature_c.max() - _CHILLED
    if warm[-1]:
        return 1.0
    last_warm = step.curve.hours[np.flatnonzero(warm)[-1]]
    return float((step.ready_h <= last_warm).mean())


def _makes_uncertain(job: Job, digests: Sequence[DigestForecast]) -> Iterator[str]:
    shares = uncertainty_shares(job, np.minimum.reduce([d.start_h + d.ready_h for d in digests]))
    telling = [(name, share) for name, share in shares if share >= _WORTH_TELLING][:3]
    if telling:
        names = ", ".join(f"{_spoken(name)} ({percent(share)})" for name, share in telling)
        yield f"Most of the uncertainty about when comes from {names}."


def _spoken(key: str) -> str:
    """Say an input's key as people do: ``sample.known_run.duration`` is one of the known run."""
    words = [word.replace("_", " ") for word in key.split(".")]
    if len(words) == 1:
        return words[0]
    of, name = words[-2:]
    return name if of in {"sample", "enzyme", "lot"} else f"{name} of the {of}"


def uncertainty_shares(job: Job, hours: Array) -> list[tuple[str, float]]:
    """
    Return how much of the spread of a time each input explains, largest first.

    Parameters
    ----------
    job
        The plan, drawn.
    hours
        Draws of a time, infinite for never; shape (n_draws,). [h]

    Returns
    -------
    shares
        Input and share, from a linear regression of the ranks of the time on the inputs'
        deviates. [1]

    References
    ----------
    A. Saltelli and J. Marivoet, Reliab. Eng. Syst. Saf. 28, 229, 1990 (standardised rank
    regression; from memory).
    """
    names = list(job.draws.inputs)
    if not names or len(hours) < 4 * len(names) or np.ptp(np.nan_to_num(hours, posinf=1e9)) == 0:
        return []
    ranks = np.argsort(np.argsort(hours, kind="stable"), kind="stable").astype(float)
    response = (ranks - ranks.mean()) / ranks.std()
    deviates = np.stack([np.asarray(job.draws.deviate(name)) for name in names])
    deviates = deviates - deviates.mean(axis=1, keepdims=True)
    coefficients = np.linalg.solve(deviates @ deviates.T, deviates @ response)
    shares = (coefficients * deviates.std(axis=1)) ** 2
    return sorted(zip(names, map(float, shares), strict=True), key=lambda pair: -pair[1])
