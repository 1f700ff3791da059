"""The plan as it is carried out: every amount brought to what balance and pipette can give."""

from collections.abc import Mapping
from dataclasses import dataclass, replace

from digestplan.forecast.amounts import weighed_mass
from digestplan.forecast.draws import Draws
from digestplan.plan.model import Addition, Demineralise, Digest, Plan, Rinse, Step, Value
from digestplan.quantities.model import Quantity
from digestplan.report.sheet.rounding import (
    SMALLEST_WEIGHED,
    Stock,
    practical_mass,
    practical_volume,
    stock_for,
)

FIRST = -1  # the place of a step's own charge among its additions


@dataclass(frozen=True, slots=True)
class Portion:
    """Enzyme that goes in at once.

    Attributes
    ----------
    wanted
        What the plan asks for, by best estimates. [g]
    mass
        What is given. [g]
    stock
        Whence it is pipetted, where it is too little to weigh.
    """

    wanted: float
    mass: float
    stock: Stock | None


@dataclass(frozen=True, slots=True)
class CarriedOut:
    """A plan in amounts that can be carried out, and the enzyme portions that were made of it.

    ``portions`` is keyed by step and addition, `FIRST` for what goes in at the start; one that is
    counted in activity alone, or by a piece that is not weighed yet, has none.
    """

    plan: Plan
    portions: Mapping[tuple[int, int], Portion]


def carried_out(plan: Plan) -> CarriedOut:
    """
    Round the amounts of a plan.

    Parameters
    ----------
    plan
        As written.

    Returns
    -------
    carried
        The plan with its volumes and charges rounded; all else is as it was. The activity of the
        lot is taken in.
    """
    portions: dict[tuple[int, int], Portion] = {}
    steps = [_volume_rounded(step) for step in plan.steps]
    for index, step in enumerate(steps):
        if isinstance(step, Digest):
            steps[index] = _digest(plan, step, index, portions)
    return CarriedOut(replace(plan, steps=tuple(steps)), portions)


def _volume_rounded(step: Step) -> Step:
    if isinstance(step, Digest | Demineralise | Rinse) and step.volume is not None:
        volume = step.volume.quantity.value
        return replace(step, volume=_scaled(step.volume, practical_volume(volume) / volume))
    return step


def _digest(
    plan: Plan, step: Digest, index: int, portions: dict[tuple[int, int], Portion]
) -> Digest:
    bath = None if step.volume is None else step.volume.quantity.value
    portion = _portion(plan, step, bath)
    if portion is not None:
        portions[index, FIRST] = portion
        step = replace(step, charge=_scaled(step.charge, portion.mass / portion.wanted))
    additions = []
    for place, addition in enumerate(step.additions):
        alone = replace(step, charge=addition.charge, charge_as="charge")
        portion = _portion(plan, alone, bath)
        if portion is not None:
            portions[index, place] = portion
            factor = portion.mass / portion.wanted
            addition = Addition(addition.after, _scaled(addition.charge, factor))  # noqa: PLW2901
        additions.append(addition)
    return replace(step, additions=tuple(additions))


def _portion(plan: Plan, step: Digest, bath: float | None) -> Portion | None:
    wanted = best_mass(plan, step)
    if wanted is None or wanted <= 0:
        return None
    if wanted < SMALLEST_WEIGHED:
        stock = stock_for(wanted, bath)
        return Portion(wanted, stock.amount, stock)
    return Portion(wanted, practical_mass(wanted), None)


def best_mass(plan: Plan, step: Digest) -> float | None:
    """Return the mass of the lot [g] that a step asks for by best estimates; None for unknown."""
    sample, lot = plan.sample, plan.lot
    weighed = (sample.wet_mass, sample.substrate_fraction)
    if step.charge_as == "ratio" and any(value.origin == "default" for value in weighed):
        return None
    label = None if lot.label_activity is None else _exact(lot.label_activity)
    certain = replace(
        plan,
        sample=replace(
            sample,
            wet_mass=_exact(sample.wet_mass),
            substrate_fraction=_exact(sample.substrate_fraction),
        ),
        lot=replace(lot, label_activity=label, remaining=_exact(lot.remaining)),
        steps=(),
    )
    charge = replace(step, charge=_exact(step.charge))
    return weighed_mass(certain, Draws(certain, 1, 0), charge)


def _exact(value: Value) -> Value:
    quantity = value.quantity
    return replace(value, quantity=Quantity(quantity.value, activity=quantity.activity))


def _scaled(value: Value, factor: float) -> Value:
    """Return a value and its spread times a factor near 1; untouched where it is 1."""
    if abs(factor - 1) < 1e-9:
        return value
    q = value.quantity
    spread = q.spread * factor if q.distribution == "normal" else q.spread
    return replace(value, quantity=replace(q, value=q.value * factor, spread=spread))
