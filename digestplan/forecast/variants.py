"""The same plan with another temperature, charge, duration or chill: what comparisons vary.

Every variant is a plan as a user could have written it: values stay where they were, with their
spreads, so that its draws are those of the plan as far as the two agree.
"""

from dataclasses import dataclass, replace

import numpy as np

from digestplan.forecast.draws import Draws
from digestplan.forecast.passage import Passage
from digestplan.forecast.run import prepare
from digestplan.forecast.steps.base import Job
from digestplan.plan.model import Digest, Plan, Stretch, Value
from digestplan.quantities import format_quantity
from digestplan.quantities.model import Quantity

_ENOUGH_DRAWS = 64  # to see at which of its temperatures a plan does most of its work
_SAME = 1e-6  # [K]
_CHILLED = 10.0  # [K] below the main temperature
_CELSIUS = 273.15

CHILL_OVER = 0.5  # [h] common practice: a bath cools to the fridge's temperature in half an hour
CHILLED_FOR = 9.0  # [h] written where a chill is added at the end of a plan; it goes on anyway


@dataclass(frozen=True, slots=True)
class Main:
    """Where a plan does most of its digesting.

    Attributes
    ----------
    index
        The digest step.
    temperature
        Nominal set point at which most of its dose is given. [K]
    stretches
        The stretches of its programme that stay at it or go to it.
    longest
        The longest of those that stay.
    chill
        The first stretch after them that goes to, or stays at, much less; None without one.
    """

    index: int
    temperature: float
    stretches: tuple[int, ...]
    longest: int
    chill: int | None

    def step(self, plan: Plan) -> Digest:
        """The digest step in a plan."""
        step = plan.steps[self.index]
        assert isinstance(step, Digest)
        return step

    def hours(self, plan: Plan) -> float:
        """How long the longest of its stretches lasts in a plan. [h]."""
        return self.step(plan).programme[self.longest].hours


def main_of(plan: Plan, seed: int = 1) -> Main | None:
    """
    Find where a plan does most of its digesting.

    Parameters
    ----------
    plan
        The plan.
    seed
        Of the draws that tell.

    Returns
    -------
    main
        The digest step, and its set point, at which most of the dose is given: a short heating
        that kills the enzyme is not it, however warm. None for a plan without a digest step.
    """
    digests = [i for i, step in enumerate(plan.steps) if isinstance(step, Digest)]
    if not digests:
        return None
    passage = Passage(prepare(plan, Draws(plan, _ENOUGH_DRAWS, seed)))
    given = {
        (index, nominal): dose
        for index in digests
        for nominal, dose in _dose_by_set_point(plan, passage, index).items()
    }
    index, nominal = max(given, key=lambda key: given[key])
    step = plan.steps[index]
    assert isinstance(step, Digest)
    programme = step.programme
    own = tuple(i for i, stretch in enumerate(programme) if _is_at(stretch, nominal))
    staying = [i for i in own if not programme[i].ramp] or list(own)
    longest = max(staying, key=lambda i: programme[i].hours)
    after = [
        i
        for i in range(own[-1] + 1, len(programme))
        if programme[i].temperature.quantity.value < nominal - _CHILLED
    ]
    return Main(index, nominal, own, longest, after[0] if after else None)


def _dose_by_set_point(plan: Plan, passage: Passage, index: int) -> dict[float, float]:
    """Median dose given at each nominal temperature of a step, ramps counted where they lead."""
    step, course = plan.steps[index], passage.part(index).course
    assert isinstance(step, Digest)
    ends = np.cumsum([stretch.hours for stretch in step.programme])
    doses = [0.0, *(float(np.median(course.at(float(end)).dose)) for end in ends)]
    given: dict[float, float] = {}
    for stretch, gained in zip(step.programme, np.diff(doses), strict=True):
        nominal = stretch.temperature.quantity.value
        given[nominal] = given.get(nominal, 0.0) + float(gained)
    return given


def _is_at(stretch: Stretch, nominal: float) -> bool:
    return abs(stretch.temperature.quantity.value - nominal) < _SAME


def at_temperature(plan: Plan, main: Main, temperature: float) -> Plan:
    """
    Return the same plan at another temperature.

    Parameters
    ----------
    plan
        The plan.
    main
        Where it does most of its digesting.
    temperature
        What its main stretches, and the ramps to them, are set to; a chill, a warming-up and all
        other steps stay as they are. [K]

    Returns
    -------
    plan
        The variant; a spread of the temperature stays.
    """
    programme = tuple(
        replace(stretch, temperature=moved(stretch.temperature, temperature))
        if number in main.stretches
        else stretch
        for number, stretch in enumerate(main.step(plan).programme)
    )
    return _with_step(plan, main.index, replace(main.step(plan), programme=programme))


def moved(value: Value, temperature: float) -> Value:
    """Return a temperature [K] with the spread of another."""
    quantity = replace(value.quantity, value=temperature)
    return replace(value, quantity=replace(quantity, text=temperature_text(quantity)))


def temperature_text(quantity: Quantity) -> str:
    """Return a temperature as a plan writes it."""
    number = f"{quantity.value - _CELSIUS:.6g}"
    if quantity.distribution == "normal":
        return f"{number} ± {quantity.spread:.6g} degC"
    return f"{number} degC"


def with_enzyme(plan: Plan, factor: float) -> Plan:
    """
    Return the same plan with more or less enzyme.

    Parameters
    ----------
    plan
        The plan.
    factor
        By which every charge and every addition is multiplied. [1]

    Returns
    -------
    plan
        The variant; relative spreads stay.
    """
    if factor == 1.0:
        return plan
    steps = tuple(
        replace(
            step,
            charge=scaled(step.charge, factor, step.charge_as),
            additions=tuple(
                replace(a, charge=scaled(a.charge, factor, "charge")) for a in step.additions
            ),
        )
        if isinstance(step, Digest)
        else step
        for step in plan.steps
    )
    return replace(plan, steps=steps)


_KINDS = {"charge": "charge", "ratio": "ratio", "concentration": "enzyme_concentration"}


def scaled(value: Value, factor: float, charge_as: str) -> Value:
    """Return an amount of enzyme multiplied by a factor."""
    old = value.quantity
    spread = old.spread * factor if old.distribution == "normal" else old.spread
    quantity = replace(old, value=old.value * factor, spread=spread, text="")
    text = format_quantity(quantity, _KINDS[charge_as], digits=12, activity=old.activity)
    return replace(value, quantity=replace(quantity, text=text.replace("×/", "x/")))


def with_main_hours(plan: Plan, main: Main, hours: float) -> Plan:
    """
    Return the same plan with a longer or shorter main stretch.

    Parameters
    ----------
    plan
        The plan.
    main
        Where it does most of its digesting.
    hours
        How long the longest of its main stretches is to last. [h]

    Returns
    -------
    plan
        The variant. What follows in the same step, such as a chill, starts so much earlier or
        later; additions that would fall after the end of the step are left out.
    """
    step = main.step(plan)
    programme = tuple(
        replace(stretch, hours=hours) if number == main.longest else stretch
        for number, stretch in enumerate(step.programme)
    )
    return _with_programme(plan, main, programme)


def with_chill(plan: Plan, main: Main, temperature: float) -> Plan:
    """
    Return the same plan with a programmed chill after the main stretch of its digest.

    Parameters
    ----------
    plan
        A plan whose digest has none.
    main
        Where it does most of its digesting.
    temperature
        What the bath is cooled to. [K]

    Returns
    -------
    plan
        The variant.
    """
    step = main.step(plan)
    quantity = Quantity(temperature, text=f"{temperature - _CELSIUS:.6g} degC")
    number = len(step.programme)
    source = step.programme[main.longest].temperature
    added = [
        Stretch(_placed(source, quantity, main.index, number, "to"), CHILL_OVER, ramp=True),
        Stretch(_placed(source, quantity, main.index, number + 1, "at"), CHILLED_FOR, ramp=False),
    ]
    return _with_programme(plan, main, (*step.programme, *added))


def _placed(value: Value, quantity: Quantity, step: int, number: int, key: str) -> Value:
    place = f"steps[{step}].temperature[{number}].{key}"
    return replace(value, quantity=quantity, place=place)


def without_chill(plan: Plan, main: Main) -> Plan:
    """Return the same plan whose digest ends with its main stretch."""
    if main.chill is None:
        return plan
    return _with_programme(plan, main, main.step(plan).programme[: main.chill])


def _with_programme(plan: Plan, main: Main, programme: tuple[Stretch, ...]) -> Plan:
    step = main.step(plan)
    end = sum(stretch.hours for stretch in programme)
    additions = tuple(a for a in step.additions if a.after < end)
    return _with_step(plan, main.index, replace(step, programme=programme, additions=additions))


def _with_step(plan: Plan, index: int, step: Digest) -> Plan:
    return replace(plan, steps=(*plan.steps[:index], step, *plan.steps[index + 1 :]))


def variant_job(job: Job, plan: Plan) -> Job:
    """
    Return a variant of a plan, drawn.

    Parameters
    ----------
    job
        The plan, drawn.
    plan
        The variant, which differs from it in its steps alone.

    Returns
    -------
    job
        With the same enzyme, answer and damage: they are drawn once.
    """
    return replace(job, plan=plan, draws=job.draws.of_variant(plan))
