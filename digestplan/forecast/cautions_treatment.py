"""Cautions of the steps before the enzyme: demineralise and rinse."""

from collections.abc import Iterator

from digestplan import library
from digestplan.forecast.result import Caution, DemineraliseForecast, RinseForecast
from digestplan.forecast.steps.base import Job
from digestplan.forecast.told import celsius, millimolar, percent, told
from digestplan.plan.model import Demineralise, Digest

_HOT = 273.15 + 40  # [K]
_ENOUGH = 0.95
_GAS_WORTH_TELLING = 0.2  # [mL]


def of_demineralise(job: Job, result: DemineraliseForecast) -> Iterator[Caution]:
    """Yield what a demineralisation asks for."""
    step, index = job.plan.steps[result.index], result.index
    assert isinstance(step, Demineralise)
    reagent = library.reagent(step.reagent)
    gas = f"{result.carbon_dioxide:.2g}"
    if not reagent.chelator:
        yield told("acid-handling", index, reagent=reagent.name)
        yield told("old-collection-piece", index)
        hottest = max(s.temperature.quantity.value for s in step.programme)
        if hottest > _HOT:
            yield told("hot-acid", index, temperature=celsius(hottest))
        if step.closed_vessel:
            yield told("closed-vessel-with-acid", index, gas=gas)
        elif result.carbon_dioxide > _GAS_WORTH_TELLING:
            yield told("gas-given-off", index, gas=gas)
    if result.reagent_held < result.reagent_needed:
        held, needed = 1e3 * result.reagent_held, 1e3 * result.reagent_needed
        yield told("bath-cannot-hold", index, held=f"{held:.2g}", needed=f"{needed:.2g}")
    extent = result.extent_at_end.p50
    if extent is not None and extent < _ENOUGH:
        yield told("mineral-left", index, extent=percent(extent))
    loss = result.keep_loss_at_end.p50
    if loss is not None and loss > 0.01:
        yield told("acid-harms", index, loss=percent(loss))
    yield told("end-point", index)
    following = job.plan.steps[index + 1] if index + 1 < len(job.plan.steps) else None
    if isinstance(following, Digest):
        yield from _unrinsed(job, index + 1, reagent.name)


def _unrinsed(job: Job, index: int, substance: str) -> Iterator[Caution]:
    step = job.plan.steps[index - 1]
    assert isinstance(step, Demineralise)
    concentration = step.concentration.quantity
    amount = (
        f"some {100 * concentration.value:.2g} % before it is diluted"
        if concentration.activity == "w/v"
        else f"{millimolar(concentration.value)} in the piece before it is diluted"
    )
    yield told("no-rinse", index, substance=substance, amount=amount)


def of_rinse(result: RinseForecast) -> Iterator[Caution]:
    """Yield what a rinse leaves to be desired."""
    for substance, more in result.more_exchanges.items():
        name = _name(substance)
        if more is None:
            remedy = "No number of exchanges like these would do: make each longer, or larger."
        else:
            exchanges = "exchange" if more == 1 else "exchanges"
            remedy = f"{more} more {exchanges} like these would do; so would longer ones."
        yield told(
            "rinse-too-short",
            result.index,
            amount=millimolar(result.carry_over_at_most[substance]),
            substance=name,
            remedy=remedy,
        )


def _name(substance: str) -> str:
    if substance in library.keys("reagent"):
        return library.reagent(substance).name
    return library.solute(substance).name
