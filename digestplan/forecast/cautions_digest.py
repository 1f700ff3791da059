"""Cautions of the steps in which the enzyme is at work."""

from collections.abc import Iterator

import numpy as np

from digestplan import library
from digestplan.forecast.amounts import active_ratio
from digestplan.forecast.conditions import inactivation_rate, rate_factor
from digestplan.forecast.environment import calcium_factor, ph_factor
from digestplan.forecast.result import Caution, DigestForecast
from digestplan.forecast.steps.base import Job
from digestplan.forecast.steps.rinse import CHELATORS
from digestplan.forecast.steps.stop import stops
from digestplan.forecast.told import celsius, listed, millimolar, percent, told
from digestplan.forecast.window import quantile
from digestplan.plan.model import Digest, Hold, Stop

_FREEZING = 273.15
_WARM = 273.15 + 45  # [K] a closed tube dries out overnight
_SAID = {
    "chelate": "A chelator",
    "acidify": "Acid",
    "alkalise": "Alkali",
    "inhibit": "This inhibitor",
    "heat": "Heat",
    "chill": "Chilling",
}
_PH_WORTH_TELLING = 0.15
_STOPPED = 0.05  # of the enzyme that heat may leave
_TRACES = 1e-5  # [mol/L] of a chelator that no calcium misses
_SLOW = 0.7  # of the best rate, below which it is worth telling


def of_digest(job: Job, result: DigestForecast) -> Iterator[Caution]:
    """Yield what a digest, a stop or a hold asks for."""
    step = job.plan.steps[result.index]
    name = job.enzyme.enzyme.name
    if isinstance(step, Stop):
        yield from _of_stop(job, step, result)
        return
    assert isinstance(step, Digest | Hold)
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
                temperatures=listed(outside),
                enzyme=job.enzyme.enzyme.name,
                range=f"{celsius(measured[0])} to {celsius(measured[1])}",
            )
    frozen = [t for t in points if t < _FREEZING]
    if frozen:
        yield told("below-freezing", result.index, temperatures=listed(frozen))
    warm = [s for s in step.programme if s.temperature.quantity.value >= _WARM and s.hours >= 4]
    if warm:
        yield told(
            "warm-tube",
            result.index,
            temperature=celsius(warm[0].temperature.quantity.value),
            hours=f"{sum(s.hours for s in warm):.3g}",
        )


def _of_liquid(job: Job, step: Digest, result: DigestForecast) -> Iterator[Caution]:
    enzyme = job.enzyme.enzyme
    working = max(stretch.temperature.quantity.value for stretch in step.programme)
    at = np.full((1, job.draws.n_draws), working)
    liquid = result.liquid
    shift = float(np.median(liquid.ph_shift))
    if shift < -_PH_WORTH_TELLING and result.ph_at_temperature is not None:
        yield told("acid-spoils-buffer", result.index, ph=f"{result.ph_at_temperature:.2f}")
    if result.ph_at_temperature is not None:
        ph = result.ph_at_temperature
        share = float(np.median(ph_factor(job.enzyme, liquid, at)))
        filling = {"ph": f"{ph:.2f}", "temperature": celsius(working), "enzyme": enzyme.name}
        if enzyme.ph_range is not None and not enzyme.ph_range[0] <= ph <= enzyme.ph_range[1]:
            low, high = enzyme.ph_range
            yield told("ph-outside-range", result.index, range=f"{low:g} to {high:g}", **filling)
        elif share < _SLOW:
            yield told("ph-slows", result.index, share=percent(share), **filling)
    yield from _of_calcium(job, result)
    if enzyme.key is not None and library.enzyme(enzyme.key).thiol:
        cysteine = step.environment.solutes.get("cysteine")
        if cysteine is None or cysteine.quantity.value == 0:
            yield told("thiol-missing", result.index, enzyme=enzyme.name)


def _of_calcium(job: Job, result: DigestForecast) -> Iterator[Caution]:
    enzyme = job.enzyme.enzyme
    if result.free_calcium is None:
        if enzyme.cofactor == "calcium" and enzyme.cofactor_needed:
            yield told("calcium-missing", result.index, enzyme=enzyme.name)
        return
    share = float(np.median(calcium_factor(job.enzyme, result.liquid)))
    if share >= _SLOW:
        return
    filling = {"calcium": millimolar(result.free_calcium), "share": percent(share)}
    if any(float(np.median(result.brought.get(name, 0.0))) > _TRACES for name in CHELATORS):
        yield told("chelator-into-calcium-enzyme", result.index, **filling)
    else:
        yield told("calcium-low", result.index, enzyme=enzyme.name, **filling)


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
    last = result.index == max(i for i, s in enumerate(plan.steps) if isinstance(s, Digest))
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


def _of_stop(job: Job, step: Stop, result: DigestForecast) -> Iterator[Caution]:
    enzyme, how = job.enzyme.enzyme, _SAID[step.how]
    if step.how == "chill":
        cold = np.full(
            (1, job.draws.n_draws), step.temperature.quantity.value if step.temperature else 277.15
        )
        share = float(np.median(rate_factor(job.enzyme, cold)))
        yield told("chilling-only-slows", result.index, enzyme=enzyme.name, share=percent(share))
        return
    residual = result.residual_activity_at_end.p50 or 0.0
    if step.how == "heat":
        works: bool | None = residual <= _STOPPED
    else:
        works = stops(step, enzyme)
    if works is None:
        yield told("stop-not-known", result.index, how=how, enzyme=enzyme.name)
    elif not works:
        by = library.enzyme(enzyme.key).stopped_by if enzyme.key else ()
        means = ", ".join(_SAID[name].lower() for name in by) or "not known here"
        filling = {"how": how, "enzyme": enzyme.name, "residual": percent(residual)}
        yield told("stop-does-not-stop", result.index, stops=means, **filling)
    elif enzyme.key and step.how in library.enzyme(enzyme.key).reversible:
        filling = {"how": how, "enzyme": enzyme.name, "residual": percent(residual)}
        yield told("stop-is-reversible", result.index, **filling)
