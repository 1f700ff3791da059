"""Everything that is done, and when: the plan as a list of actions on the clock."""

from collections.abc import Iterator
from dataclasses import replace
from datetime import datetime, timedelta

from digestplan import library
from digestplan.forecast.result import Forecast, StepForecast
from digestplan.forecast.window import VisitChance, on_clock
from digestplan.plan.model import Demineralise, Digest, Hold, Plan, Rinse, Step, Stop, Stretch
from digestplan.report import words
from digestplan.report.sheet.amounts import agent_name, amounts, enzyme_name
from digestplan.report.sheet.model import Action, Amount, Doing
from digestplan.report.sheet.portions import CarriedOut
from digestplan.report.sheet.rounding import volume_text
from digestplan.report.sheet.seen import chances_seen, mineral_seen, seen_at
from digestplan.report.sheet.typed import celsius, short, value_text

LEAD = 0.5  # [h] common practice: to weigh, make up and bring a bath to its temperature
_FIRST_LOOK = 0.5  # [h] after which the tube is looked at for the first time
_AROUND_THE_START = 1.0  # [h] during which whoever starts the plan is taken to be there
_FAR = 24.0 * 366  # [h] beyond which a moment is no use on a sheet


def actions(carried: CarriedOut, forecast: Forecast) -> tuple[Action, ...]:
    """
    Return all actions of a plan, in their order.

    Parameters
    ----------
    carried
        The plan in rounded amounts.
    forecast
        Its forecast.

    Returns
    -------
    actions
        With clock times where the plan has a start.
    """
    plan = forecast.plan
    to_do = amounts(carried, forecast)
    found: list[Action] = []
    for index, step in enumerate(plan.steps):
        told = forecast.steps[index]
        found += _prepare(index, step, told, to_do)
        found += _step(forecast, index, step, told, to_do)
    found += [*_moments(forecast), *_visits(forecast), _end(forecast)]
    placed = [_placed(plan, action) for action in found]
    return tuple(sorted(placed, key=lambda action: action.hours))


def _placed(plan: Plan, action: Action) -> Action:
    at = on_clock(plan.start, action.hours)
    return replace(action, at=at, attended=_attended(plan, action))


def _attended(plan: Plan, action: Action) -> bool:
    if plan.start is None or not plan.visits or action.by_itself:
        return True
    if action.do in {"window", "end"} or action.hours <= _AROUND_THE_START:
        return True
    at = plan.start + timedelta(hours=action.hours)
    spare = timedelta(minutes=1)
    return any(visit.start - spare <= at <= visit.end + spare for visit in plan.visits)


def _action(
    index: int | None, what: str, do: Doing, hours: float, text: str, see: str = ""
) -> Action:
    key = what if index is None else f"step-{index + 1}-{what}"
    return Action(key, do, hours, None, text, see, index)


# -- what comes before a step --------------------------------------------------------------------


def _prepare(
    index: int, step: Step, told: StepForecast, to_do: tuple[Amount, ...]
) -> Iterator[Action]:
    if index > 0 and isinstance(step, Stop | Rinse | Hold):
        return
    if index > 0 and not any(amount.step == index for amount in to_do):
        return
    first = _first_temperature(step)
    bath = f" Bath to {first}." if first else ""
    text = f"Get ready: weigh and pipette for step {index + 1}, see above.{bath}"
    see = "Cautions read; bottles are those of this sheet."
    yield _action(index, "prepare", "prepare", told.start_h - LEAD, text, see)


def _first_temperature(step: Step) -> str:
    if isinstance(step, Digest | Hold | Demineralise):
        first = step.programme[0]
        if not first.ramp:
            return celsius(first.temperature.quantity.value)
        start = getattr(step, "start_temperature", None)
        return celsius(start.quantity.value) if start is not None else ""
    temperature = step.temperature
    return "" if temperature is None else celsius(temperature.quantity.value)


# -- the steps -----------------------------------------------------------------------------------


def _step(
    forecast: Forecast, index: int, step: Step, told: StepForecast, to_do: tuple[Amount, ...]
) -> Iterator[Action]:
    own = tuple(amount for amount in to_do if amount.step == index)
    if isinstance(step, Digest):
        yield from _digest(forecast, index, step, told, own)
    elif isinstance(step, Demineralise):
        yield from _demineralise(index, step, told)
    elif isinstance(step, Rinse):
        yield from _rinse(index, step, told)
    elif isinstance(step, Stop):
        yield from _stop(index, step, told, own)
    else:
        text = f"Keep at {_stay(step.programme[0])}"
        yield _action(index, "start", "hold", told.start_h, f"{text} for {_span(told.hours)}.")
        yield from _programme(index, step.programme, told)


def _digest(
    forecast: Forecast, index: int, step: Digest, told: StepForecast, own: tuple[Amount, ...]
) -> Iterator[Action]:
    start = told.start_h
    given = [a for a in own if "addition" not in a.what and not a.what.startswith("stock")]
    into = ", ".join(f"{a.amount} {a.what}" for a in given)
    text = f"Start the digest: the piece into {into}. "
    yield _action(index, "start", "add", start, text + _setting(step), "Piece wholly covered.")
    if told.hours > 2 * _FIRST_LOOK:
        at = start + _FIRST_LOOK
        see = "Tube tight, piece covered, bath reads what it should."
        yield _action(index, "look", "check", at, "Look at tube and bath.", see)
    yield from _programme(index, step.programme, told)
    added = [a for a in own if "addition" in a.what and not a.what.startswith("stock")]
    for place, (addition, amount) in enumerate(zip(step.additions, added, strict=True)):
        at = start + addition.after
        text = f"Add enzyme: {amount.amount} ({enzyme_name(forecast.plan)}), weighed fresh; mix."
        yield _action(index, f"addition-{place + 1}", "add", at, text, seen_at(forecast, at))


def _setting(step: Digest) -> str:
    if any(stretch.ramp for stretch in step.programme):
        return f"Run the programme: {_listed(step.programme)}."
    return f"Bath at {_stay(step.programme[0])}."


def _listed(programme: tuple[Stretch, ...]) -> str:
    return " → ".join(
        f"to {_stay(s)} in {_span(s.hours)}" if s.ramp else f"{_stay(s)} for {_span(s.hours)}"
        for s in programme
    )


def _stay(stretch: Stretch) -> str:
    return celsius(stretch.temperature.quantity.value)


def _span(hours: float) -> str:
    minutes = round(60 * hours)
    days, rest = divmod(minutes, 24 * 60)
    parts = [(days, "d"), (rest // 60, "h"), (rest % 60, "min")]
    return " ".join(f"{count} {unit}" for count, unit in parts if count) or "0 min"


def _programme(index: int, programme: tuple[Stretch, ...], told: StepForecast) -> Iterator[Action]:
    """Changes of temperature within a step: a slope is a programmed bath's, a jump a hand's."""
    at, slopes = told.start_h, any(stretch.ramp for stretch in programme)
    for place, stretch in enumerate(programme):
        before = programme[place - 1] if place else None
        here = _stay(stretch)
        if stretch.ramp:
            text = f"Bath goes to {here}, there {{}}."
            action = _action(index, f"bath-{place + 1}", "move", at, text)
            until = on_clock(told.start, at + stretch.hours - told.start_h)
            when = f"in {_span(stretch.hours)}" if until is None else f"by {_clock(until)}"
            yield replace(action, text=text.format(when), by_itself=True)
        elif before is not None and _stay(before) != here:
            text = f"Bath goes to {here}." if slopes else f"Move the tube to {here}."
            yield replace(_action(index, f"bath-{place + 1}", "move", at, text), by_itself=slopes)
        at += stretch.hours


def _clock(time: datetime) -> str:
    return f"{words.to_the_minute(time):%H:%M}"


def _demineralise(index: int, step: Demineralise, told: StepForecast) -> Iterator[Action]:
    reagent = library.reagent(step.reagent)
    times = tuple(getattr(told, "change_times", step.changes))
    volume, n_baths = volume_text(step.volume.quantity.value), len(times) + 1
    bath = f"{volume} of {value_text(step.concentration)} {reagent.name}"
    vessel = "closed vessel: see the cautions" if step.closed_vessel else "vessel vented"
    moved = "stirred or shaken" if step.stirred else "not stirred"
    text = f"Piece into bath 1 of {n_baths}: {bath}, {_listed(step.programme)}; {vessel}, {moved}."
    yield _action(index, "start", "add", told.start_h, text, "Piece wholly covered.")
    for place, after in enumerate(times):
        at = told.start_h + after
        text = f"Change the bath: bath {place + 2} of {n_baths}, fresh {volume}."
        yield _action(
            index, f"change-{place + 2}", "change", at, text, mineral_seen(step, told, at)
        )
    yield from _programme(index, step.programme, told)
    end = told.start_h + told.hours
    text = "End-point: test the last bath for calcium before you go on."
    yield _action(index, "end-point", "check", end, text, mineral_seen(step, told, end))


def _rinse(index: int, step: Rinse, told: StepForecast) -> Iterator[Action]:
    volume, fluid = volume_text(step.volume.quantity.value), short(step.fluid)
    warm = celsius(step.temperature.quantity.value)
    for exchange in range(step.exchanges):
        at = told.start_h + exchange * step.each
        text = (
            f"Rinse {exchange + 1} of {step.exchanges}: pour off, {volume} {fluid}, {warm}, "
            f"{_span(step.each)}."
        )
        yield _action(index, f"exchange-{exchange + 1}", "rinse", at, text)


def _stop(index: int, step: Stop, told: StepForecast, own: tuple[Amount, ...]) -> Iterator[Action]:
    warm = "" if step.temperature is None else celsius(step.temperature.quantity.value)
    stay = f" for {_span(step.hours)}" if step.hours else ""
    if step.how in {"heat", "chill"}:
        text = f"Stop: {step.how} to {warm}{stay}."
    else:
        given = f"{own[0].amount} {own[0].how}" if own else ""
        at = f" at {warm}" if warm else ""
        text = f"Stop: add {short(agent_name(step))}, {given}; mix{at}{stay}."
    yield _action(index, "start", "stop", told.start_h, text)


# -- the whole plan ------------------------------------------------------------------------------


def _moments(forecast: Forecast) -> Iterator[Action]:
    window, plan = forecast.window, forecast.plan
    sure = "" if forecast.n_draws == 1 else f" ({words.percent(plan.confidence)} sure)"
    target = words.percent(plan.sample.target_extent.quantity.value)
    if window.opens_h is not None and window.opens_h < _FAR:
        text = f"Ready from here on: {target} gone{sure}."
        yield _action(None, "ready", "window", window.opens_h, text)
    if window.closes_h is not None and window.closes_h < _FAR:
        text = f"Safe until here; from here on it may be too far{sure}."
        yield _action(None, "too-far", "window", window.closes_h, text)


def _visits(forecast: Forecast) -> Iterator[Action]:
    start = forecast.plan.start
    for place, chance in enumerate(forecast.visits):
        assert start is not None
        hours = (chance.visit.start - start) / timedelta(hours=1)
        see = f"{seen_at(forecast, hours)} {chances_seen(forecast, hours)}"
        text = f"Come to the bench (until {_until(chance)}) and look. {_chances(forecast, chance)}"
        action = _action(None, f"visit-{place + 1}", "visit", hours, text, see)
        yield replace(action, until=chance.visit.end)


def _until(chance: VisitChance) -> str:
    visit = chance.visit
    same_day = visit.start.date() == visit.end.date()
    return _clock(visit.end) if same_day else words.day_and_time(visit.end)


def _chances(forecast: Forecast, chance: VisitChance) -> str:
    if forecast.n_draws == 1:
        return "In time." if chance.in_time else "Not in time."
    return f"In time with a chance of {words.percent(chance.in_time)}."


def _end(forecast: Forecast) -> Action:
    last, step = forecast.steps[-1], forecast.plan.steps[-1]
    text = "End of the plan as written."
    if isinstance(step, Digest | Hold):
        text += f" The piece stays at {_stay(step.programme[-1])} until somebody ends it."
    return _action(None, "end", "end", last.start_h + last.hours, text)
