"""Which cautions a plan brings. What each says stands in one table, `library/cautions.toml`."""

from collections.abc import Iterator, Sequence

import numpy as np

from digestplan.forecast.amounts import active_ratio
from digestplan.forecast.conditions import inactivation_rate
from digestplan.forecast.environment import calcium_factor, ph_factor
from digestplan.forecast.result import Caution, DigestForecast, StepForecast
from digestplan.forecast.steps.base import Job
from digestplan.forecast.window import VisitChance, Window, quantile
from digestplan.library.cautions import caution
from digestplan.plan.model import Digest, Hold

_ORDER = {"stop": 0, "care": 1, "note": 2}
_FREEZING = 273.15
_WARM = 273.15 + 45  # [K] a closed tube dries out overnight


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
            found += _of_digest(job, step)
    found += _of_plan(job, whole, visits)
    return tuple(sorted(found, key=lambda c: _ORDER[c.level]))


def told(code: str, step: int | None, **filling: object) -> Caution:
    """One row of the table, filled in for a step."""
    entry = caution(code)
    return Caution(entry.level, step, code, entry.words(**filling))


def percent(share: float) -> str:
    """A share as people say it."""
    if 0 < share < 0.01:
        return "under 1 %"
    if 0.99 < share < 1:
        return "over 99 %"
    return f"{100 * share:.0f} %"


def celsius(temperature: float) -> str:
    """A temperature as it is written at the bench."""
    return f"{temperature - 273.15:.4g} °C"


def _of_digest(job: Job, result: DigestForecast) -> Iterator[Caution]:
    step = job.plan.steps[result.index]
    assert isinstance(step, Digest | Hold)
    name = job.enzyme.enzyme.name
    if isinstance(step, Digest):
        yield told("protease-powder", result.index, enzyme=name)
        yield from _of_liquid(job, step, result)
        yield from _of_amount(job, step, result)
    yield from _of_temperature(job, step, result)
    yield from _of_depth(job, result)
    yield from _of_outcome(job, result)


def _of_temperature(job: Job, step: Digest | Hold, result: DigestForecast) -> Iterator[Caution]:
    points = [stretch.temperature.quantity.value for stretch in step.programme]
    measured = job.enzyme.enzyme.measured_temperature
    if measured is not None:
        outside = [t for t in points if not measured[0] - 0.5 <= t <= measured[1] + 0.5]
        if outside:
            yield told(
                "temperature-outside-measured",
                result.index,
                temperatures=_listed(outside),
                enzyme=job.enzyme.enzyme.name,
                range=f"{celsius(measured[0])} to {celsius(measured[1])}",
            )
    frozen = [t for t in points if t < _FREEZING]
    if frozen:
        yield told("below-freezing", result.index, temperatures=_listed(frozen))
    warm = [s for s in step.programme if s.temperature.quantity.value >= _WARM and s.hours >= 4]
    if warm:
        yield told(
            "warm-tube",
            result.index,
            temperature=celsius(warm[0].temperature.quantity.value),
            hours=f"{sum(s.hours for s in warm):.3g}",
        )


def _listed(temperatures: Sequence[float]) -> str:
    return ", ".join(celsius(t) for t in sorted(set(temperatures)))


def _of_liquid(job: Job, step: Digest, result: DigestForecast) -> Iterator[Caution]:
    enzyme = job.enzyme.enzyme
    working = max(stretch.temperature.quantity.value for stretch in step.programme)
    at = np.full((1, job.draws.n_draws), working)
    liquid = result.liquid
    if result.ph_at_temperature is not None:
        ph = result.ph_at_temperature
        share = float(np.median(ph_factor(job.enzyme, liquid, at)))
        filling = {"ph": f"{ph:.2f}", "temperature": celsius(working), "enzyme": enzyme.name}
        if enzyme.ph_range is not None and not enzyme.ph_range[0] <= ph <= enzyme.ph_range[1]:
            low, high = enzyme.ph_range
            yield told("ph-outside-range", result.index, range=f"{low:g} to {high:g}", **filling)
        elif share < 0.7:
            yield told("ph-slows", result.index, share=percent(share), **filling)
    if enzyme.cofactor == "calcium" and step.environment.calcium is None:
        if enzyme.cofactor_needed:
            yield told("calcium-missing", result.index, enzyme=enzyme.name)
    elif result.free_calcium is not None:
        share = float(np.median(calcium_factor(job.enzyme, liquid)))
        if share < 0.7:
            yield told(
                "calcium-low",
                result.index,
                calcium=f"{1e3 * result.free_calcium:.2g} mM",
                enzyme=enzyme.name,
                share=percent(share),
            )


def _of_amount(job: Job, step: Digest, result: DigestForecast) -> Iterator[Caution]:
    if job.enzyme.has("saturation_ratio"):
        crowding = float(
            np.median(active_ratio(job.plan, job.draws, step) / job.enzyme["saturation_ratio"])
        )
        if crowding > 0.25:
            gain = 1 - 0.5 * (1 + 2 * crowding) / (1 + crowding)
            yield told(
                "enzyme-saturates", result.index, share=percent(crowding), gain=percent(gain)
            )


def _of_depth(job: Job, result: DigestForecast) -> Iterator[Caution]:
    if job.response.law.name == "erosion":
        if job.response.geometry is None and job.plan.steps[result.index].do == "digest":
            yield told("eaten-from-surface", result.index, enzyme=job.enzyme.enzyme.name)
        return
    mean, centre = result.extent_at_end.p50, result.extent_at_centre.p50
    target = job.plan.sample.target_extent.quantity.value
    if mean is None or centre is None or job.response.geometry is None:
        return
    if mean - centre > 0.05 and centre < target:
        yield told("raw-core", result.index, mean=percent(mean), centre=percent(centre))


def _of_outcome(job: Job, result: DigestForecast) -> Iterator[Caution]:
    plan, target = job.plan, job.plan.sample.target_extent.quantity.value
    ceiling = result.ceiling.p50
    last = result.index == len(plan.steps) - 1
    if last and ceiling is not None and ceiling < target:
        yield told(
            "ceiling-below-target",
            result.index,
            ceiling=percent(ceiling),
            target=percent(target),
            remedy=remedy(job, result),
        )
    elif last and result.never_reaches_target > 0.1:
        yield told(
            "not-ready-in-time",
            result.index,
            target=percent(target),
            share=percent(result.never_reaches_target),
        )
    residual = result.residual_activity_at_end.p50
    if residual is not None and residual < 0.05:
        yield told("enzyme-spent", result.index, residual=percent(residual))
    if result.harm_by_heat > 0.01:
        yield told("heat-harms", result.index, loss=percent(result.harm_by_heat))


def remedy(job: Job, result: DigestForecast) -> str:
    """Say what would bring the ceiling to the target: more enzyme, or gentler warmth."""
    step = job.plan.steps[result.index]
    factor = quantile(result.enzyme_factor, job.plan.confidence)
    if factor is None or not isinstance(step, Digest) or factor > 1e4:
        return "Fresh enzyme during the digest, or a temperature at which it lives longer, would."
    warm = np.array([[max(s.temperature.quantity.value for s in step.programme)]])
    rate = float(np.median(inactivation_rate(job.enzyme, warm)))
    half_life = f"; half of it is dead after {np.log(2) / rate:.2g} h" if rate > 0 else ""
    return (
        f"About {factor:.2g} times the enzyme would, or fresh enzyme during the digest, "
        f"or a cooler one that it survives longer{half_life}."
    )


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
