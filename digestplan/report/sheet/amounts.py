"""What is weighed and pipetted, step by step, in words for the bench."""

from collections.abc import Iterator

import numpy as np

from digestplan import library
from digestplan.forecast.environment import ROOM, Liquid, ph_in
from digestplan.forecast.result import DigestForecast, Forecast
from digestplan.kinetics.stoichiometry import molar_mass
from digestplan.plan.model import Demineralise, Digest, Environment, Plan, Rinse, Stop, Value
from digestplan.report.sheet.model import Amount
from digestplan.report.sheet.portions import FIRST, CarriedOut, Portion
from digestplan.report.sheet.rounding import (
    activity_text,
    mass_text,
    practical_volume,
    significant,
    volume_text,
)
from digestplan.report.sheet.typed import celsius, short, value_text

COLD_ROOM, WARM_ROOM = 293.15, 298.15  # [K] between which a laboratory is kept
_WORTH_TELLING = 0.02  # of a pH unit
_STOCKS_OF_STOPS = {"chelate": (0.5,), "acidify": (1.0, 5.0), "alkalise": (1.0, 5.0)}  # [mol/L]
_WEAKER = 3.0  # times that a liquid is weaker than the stock it is brought to from


def amounts(carried: CarriedOut, forecast: Forecast) -> tuple[Amount, ...]:
    """
    Return everything that is weighed or pipetted.

    Parameters
    ----------
    carried
        The plan in rounded amounts.
    forecast
        Its forecast.

    Returns
    -------
    amounts
        In the order of the plan; the piece first.
    """
    return tuple(_amounts(carried, forecast))


def _amounts(carried: CarriedOut, forecast: Forecast) -> Iterator[Amount]:
    plan = carried.plan
    yield _piece(plan)
    for index, step in enumerate(plan.steps):
        if isinstance(step, Digest):
            yield from _digest(carried, forecast, index, step)
        elif isinstance(step, Demineralise):
            yield from _bath(step, index, _n_baths(forecast, index, step))
        elif isinstance(step, Rinse):
            total = volume_text(step.exchanges * step.volume.quantity.value)
            how = f"{short(step.fluid)}; {total} for {step.exchanges} exchanges"
            yield Amount(index, "each rinse", volume_text(step.volume.quantity.value), how)
        elif isinstance(step, Stop) and step.concentration is not None:
            yield _stopped(plan, index, step, step.concentration)


def _piece(plan: Plan) -> Amount:
    mass = plan.sample.wet_mass
    if mass.origin == "default":
        return Amount(None, "piece, blotted", "weigh it", "the plan gives no mass", "g")
    again = "if it is far from this, change the plan and print a new sheet"
    return Amount(None, "piece, blotted", mass_text(mass.quantity.value), again, "mg")


# -- digest --------------------------------------------------------------------------------------


def _digest(carried: CarriedOut, forecast: Forecast, index: int, step: Digest) -> Iterator[Amount]:
    plan, name = carried.plan, enzyme_name(carried.plan)
    first = carried.portions.get((index, FIRST))
    told = forecast.steps[index]
    in_use = told.ph_at_temperature if isinstance(told, DigestForecast) else None
    yield _liquid(step, index, first, in_use)
    yield from _portion(plan, index, name, step.charge, step.charge_as, first)
    for place, addition in enumerate(step.additions):
        portion = carried.portions.get((index, place))
        what = f"{name}, addition {place + 1}"
        yield from _portion(plan, index, what, addition.charge, "charge", portion)


def enzyme_name(plan: Plan) -> str:
    """Return the enzyme with its lot."""
    lot = f", lot {short(plan.lot.id, 40)}" if plan.lot.id else ""
    return short(plan.enzyme.name) + lot


def _portion(
    plan: Plan, index: int, what: str, charge: Value, charge_as: str, portion: Portion | None
) -> Iterator[Amount]:
    if portion is None:
        how = _why_unknown(charge, charge_as)
        yield Amount(index, what, value_text(charge), how, "mg")
        return
    if portion.stock is None:
        yield Amount(index, what, mass_text(portion.mass), _activity(plan, portion), "mg")
        return
    stock = portion.stock
    strength = f"{stock.concentration * 1e3:g} mg/mL"
    made = (
        f"made up to {volume_text(stock.volume)} with the liquid: {strength}, fresh, kept on"
        f" ice. Weighed another mass? Make up to (mg ÷ {stock.concentration * 1e3:g}) mL"
    )
    yield Amount(index, f"stock of {what}", mass_text(stock.mass), made, "mg")
    diluted = f", diluted 1:{stock.dilution} once more" if stock.dilution > 1 else ""
    how = f"of the stock{diluted} holds {mass_text(portion.mass)}; {_activity(plan, portion)}"
    yield Amount(index, f"{what} from the stock", volume_text(stock.pipetted), how)


def _why_unknown(charge: Value, charge_as: str) -> str:
    if charge_as == "ratio":
        return "active enzyme per substrate: weigh the piece first, then work out the mass"
    if charge.quantity.activity is not None:
        return "by the label: the plan gives no label activity, so work out the mass from the label"
    return "as the plan has it"


def _activity(plan: Plan, portion: Portion) -> str:
    """How a mass comes about: the label, what is left of it, and what the plan asked for."""
    asked = ""
    if abs(portion.mass / portion.wanted - 1) > 0.001:
        asked = f" (asked for: {significant(portion.wanted * 1e3, 3):g} mg)"
    remaining, label = plan.lot.remaining.quantity.value, plan.lot.label_activity
    left = f"{100 * remaining:.0f} % of it active"
    if label is None:
        return f"{left}{asked}"
    active = portion.mass * label.quantity.value * remaining
    counted = activity_text(active, label.quantity.activity or plan.activity_unit)
    return f"label {value_text(label)}, {100 * remaining:.0f} % of it left: {counted} active{asked}"


def _liquid(step: Digest, index: int, first: Portion | None, in_use: float | None) -> Amount:
    parts = [
        made_of(step.environment),
        ph_to_set(step.environment, in_use, working_temperature(step)),
    ]
    how = "; ".join(part for part in parts if part)
    if step.volume is None:
        return Amount(index, "liquid", "cover it", how or "the plan gives no volume", "mL")
    volume = step.volume.quantity.value
    if first is None or first.stock is None:
        return Amount(index, "liquid", volume_text(volume), how, _found_ph(step))
    rest = volume - first.stock.pipetted
    make = _to_make(rest + first.stock.volume)
    how = f"with the stock {volume_text(volume)} in all; make {make} or more; {how}".rstrip("; ")
    return Amount(index, "liquid", volume_text(rest), how, _found_ph(step))


def _to_make(needed: float) -> str:
    """A volume that is made up in a common flask, with something to spare."""
    size, at_least = 1.0, 1.2 * needed
    while at_least > 5 * size:
        size *= 10
    return volume_text(next(size * n for n in (1, 2, 5) if size * n >= at_least))


def _found_ph(step: Digest) -> str:
    return "" if step.environment.ph is None else "pH"


def made_of(environment: Environment) -> str:
    """Return what a liquid holds, as it is written on its bottle."""
    parts = []
    if environment.buffer is not None:
        strength = environment.buffer_concentration
        name = buffer_name(environment.buffer)
        parts.append(name if strength is None else f"{value_text(strength)} {name}")
    if environment.calcium is not None:
        parts.append(f"{value_text(environment.calcium)} calcium")
    for name, value in environment.solutes.items():
        parts.append(f"{value_text(value)} {short(name)}")
    return ", ".join(parts)


def buffer_name(key: str) -> str:
    """Return a buffer as bottles call it."""
    name = library.buffer(key).name
    return key if "(" in name else name


def ph_to_set(environment: Environment, in_use: float | None, warmest: str) -> str:
    """
    Return the pH to set at room temperature.

    Parameters
    ----------
    environment
        The liquid, with its pH as made up and the temperature of that.
    in_use, warmest
        The pH that it will have in the digest, or None; and at which temperature.

    Returns
    -------
    words
        For a room at 20 and at 25 °C where that differs; empty where the plan states no pH.
    """
    if environment.ph is None:
        return ""
    cold, warm = (room_ph(environment, room) for room in (COLD_ROOM, WARM_ROOM))
    told = f"set to pH {warm:.2f} (room at 20 to 25 °C)"
    if abs(cold - warm) >= _WORTH_TELLING:
        told = f"set to pH {warm:.2f} in a room at 25 °C, {cold:.2f} at 20 °C"
    if in_use is not None and abs(in_use - warm) >= _WORTH_TELLING:
        told += f"; it is {in_use:.2f} at {warmest}"
    return told


def room_ph(environment: Environment, room: float) -> float:
    """Return the pH of a liquid as made up, at the temperature of a room [K]."""
    assert environment.ph is not None
    at = ROOM if environment.ph_at is None else environment.ph_at.quantity.value
    liquid = Liquid(np.array([environment.ph.quantity.value]), np.array([at]), environment.buffer)
    ph = ph_in(liquid, room)
    assert ph is not None
    return float(ph[0])


# -- demineralise and stop -----------------------------------------------------------------------


def _n_baths(forecast: Forecast, index: int, step: Demineralise) -> int:
    changes = getattr(forecast.steps[index], "change_times", step.changes)
    return len(changes) + 1


def _bath(step: Demineralise, index: int, n_baths: int) -> Iterator[Amount]:
    volume, reagent = step.volume.quantity.value, library.reagent(step.reagent)
    how = f"{value_text(step.concentration)} {reagent.name}"
    if step.ph is not None:
        how += f", set to pH {step.ph.quantity.value:.2f}"
    if n_baths > 1:
        how += f"; {volume_text(n_baths * volume)} for {n_baths} baths"
    name = "bath" if n_baths == 1 else "each bath"
    yield Amount(index, name, volume_text(volume), how)
    solid = _solid(step, n_baths * volume)
    if solid is not None:
        how = f"for {volume_text(n_baths * volume)} ({reagent.formula})"
        yield Amount(index, reagent.name, mass_text(solid), how, "g")


def _solid(step: Demineralise, volume: float) -> float | None:
    """Mass of a reagent that is sold dry [g], in so many millilitres."""
    reagent, concentration = library.reagent(step.reagent), step.concentration.quantity
    if concentration.activity is not None:
        return significant(concentration.value * volume, 3)
    if not reagent.chelator:
        return None
    return significant(concentration.value * volume / 1000 * molar_mass(reagent.formula), 3)


def _stopped(plan: Plan, index: int, step: Stop, concentration: Value) -> Amount:
    agent = short(agent_name(step))
    wanted, bath = concentration.quantity, bath_before(plan, index)
    what = f"{agent}, to stop"
    if bath is None or wanted.activity is not None:
        return Amount(index, what, value_text(concentration), "in the liquid at the end")
    reached = f"which brings {volume_text(bath)} to {value_text(concentration)}"
    for strength in _STOCKS_OF_STOPS.get(step.how, ()):
        if wanted.value * _WEAKER <= strength:
            pipetted = practical_volume(bath * wanted.value / (strength - wanted.value))
            return Amount(index, what, volume_text(pipetted), f"of {strength:g} M, {reached}")
    how = f"in the liquid at the end, which is {volume_text(bath)} before"
    return Amount(index, what, value_text(concentration), how)


def agent_name(step: Stop) -> str:
    """Return what a stop adds."""
    return (step.agent or step.how).replace("edta", "EDTA")


def bath_before(plan: Plan, index: int) -> float | None:
    """Return the volume of liquid that the step before has left on the piece. [mL]"""
    for step in reversed(plan.steps[:index]):
        if isinstance(step, Digest | Demineralise | Rinse):
            return None if step.volume is None else step.volume.quantity.value
    return None


def working_temperature(step: Digest) -> str:
    """Return the warmest temperature of a digest."""
    return celsius(max(stretch.temperature.quantity.value for stretch in step.programme))
