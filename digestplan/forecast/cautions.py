"""Which cautions a plan brings. What each says stands in one table, `library/cautions.toml`."""

from collections.abc import Iterator, Sequence

from digestplan.forecast.cautions_between import of_meetings
from digestplan.forecast.cautions_digest import of_digest
from digestplan.forecast.cautions_treatment import of_demineralise, of_rinse
from digestplan.forecast.result import (
    Caution,
    DemineraliseForecast,
    DigestForecast,
    RinseForecast,
    StepForecast,
)
from digestplan.forecast.steps.base import Job
from digestplan.forecast.told import percent, told
from digestplan.forecast.window import VisitChance, Window

_ORDER = {"stop": 0, "care": 1, "note": 2}


def cautions_of(
    job: Job, steps: Sequence[StepForecast], whole: Window, visits: Sequence[VisitChance]
) -> tuple[Caution, ...]:
    """
    Return the cautions of a plan, the most serious first.

    Parameters
    ----------
    job
        The plan, drawn.
    steps
        The forecasts of its steps.
    whole
        The window over the whole plan.
    visits
        The chances at its visits.

    Returns
    -------
    cautions
        Each once a step.
    """
    found: list[Caution] = []
    for step in steps:
        if isinstance(step, DigestForecast):
            found += of_digest(job, step)
        elif isinstance(step, DemineraliseForecast):
            found += of_demineralise(job, step)
        elif isinstance(step, RinseForecast):
            found += of_rinse(step)
    found += of_meetings(job.plan)
    found += _of_plan(job, whole, visits)
    return tuple(sorted(found, key=lambda c: _ORDER[c.level]))


def _of_plan(job: Job, whole: Window, visits: Sequence[VisitChance]) -> Iterator[Caution]:
    plan = job.plan
    if whole.opens_h is not None and not whole.exists:
        yield told("no-safe-window", None, confidence=percent(plan.confidence))
    if visits:
        best = max(visit.in_time for visit in visits)
        if best < 0.5:
            yield told("nobody-in-time", None, chance=percent(best))
    run = plan.sample.known_run
    if run is not None and run.ratio.origin == "library":
        yield told("default-run", None, material=plan.sample.material or "this material")
