"""Demineralise: a front of acid or chelator moves into the piece, bath after bath."""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from digestplan import library
from digestplan.forecast.conditions import heat_damage_rate
from digestplan.forecast.draws import Draws
from digestplan.forecast.library_values import GENERAL, library_value
from digestplan.forecast.mixture import OF_ACID, buffer_pk
from digestplan.forecast.result import DemineraliseForecast
from digestplan.forecast.steps.base import Carried, Job
from digestplan.forecast.tissue import half_thickness, tissue_volume
from digestplan.forecast.window import bands, on_clock, spread
from digestplan.kinetics.bath import (
    Bath,
    BathCourse,
    BathStretch,
    change_times,
    cut_at_changes,
    run_baths,
)
from digestplan.kinetics.damage import acid_loss_rate, keep_loss
from digestplan.kinetics.shrinking_core import (
    film_progress,
    film_time,
    layer_progress,
    layer_time,
    reaction_progress,
    reaction_time,
)
from digestplan.kinetics.stoichiometry import (
    gas_volume,
    mineral_by_share,
    molar_mass,
)
from digestplan.kinetics.temperature import arrhenius_factor
from digestplan.kinetics.water import stokes_einstein_factor
from digestplan.library import ReagentEntry
from digestplan.plan.model import Demineralise, Plan, Stretch, Value

Array = NDArray[np.float64]

END_POINT = 0.95  # of the mineral: common practice, about what radiography calls done
_ROOM = 298.15  # [K] of the reagents' diffusivities
_SURFACE_AT = 285.15  # [K] EDTA's surface rate was measured from 4 to 20 °C
_STILL = 0.3  # what an unstirred film lets through of a stirred one
_SALT_PER_CALCIUM = 1.4  # acid that the mineral has turned into salt
_RAMP_PIECES = 4
_CURVE = 25
_DRAWS_OF_CURVE = 400  # enough for a picture


@dataclass(frozen=True, slots=True, eq=False)
class _Reagent:
    """A bath's reagent, drawn."""

    entry: ReagentEntry
    values: dict[str, Array]
    concentration: Array
    volume: Array


def run(
    step: Demineralise, index: int, job: Job, carried: Carried, *, open_ended: bool
) -> tuple[DemineraliseForecast, Carried]:
    """
    Forecast a demineralisation.

    Parameters
    ----------
    step
        The step.
    index
        Its place in the plan.
    job
        What holds for the whole plan.
    carried
        What the step before left.
    open_ended
        Nothing follows; the times then still count within the step, for a bath ends with it.

    Returns
    -------
    forecast, carried
        The step's forecast, and what it leaves to the next.
    """
    del open_ended
    plan, draws = job.plan, job.draws
    reagent = _drawn(step.reagent, step.concentration, step.volume, draws)
    calcium, carbonate, density = _mineral(plan, draws)
    speed = _known_speed(step, plan, draws, density)
    pieces = _pieces(step, draws)
    stretches = [
        _stretch(hours, temperature, step, reagent, plan, draws, density, speed)
        for hours, temperature in pieces
    ]
    start = carried.demineralised if carried.demineralised is not None else 0.0
    bath = Bath(
        reagent.concentration,
        reagent.volume,
        reagent.values["per_calcium"],
        np.minimum(reagent.values["usable"], 1.0),
    )
    shape = plan.sample.shape
    changes = _changes(step, bath, stretches, calcium, shape, start)
    per_bath = cut_at_changes(stretches, changes)
    course = run_baths([bath] * len(per_bath), per_bath, calcium, carbonate, shape, start)
    state = replace(
        carried.state, heat=carried.state.heat + _harm(step, reagent, course, pieces, job)
    )
    forecast = _told(step, index, job, carried, course, changes, reagent, calcium, state.heat)
    return forecast, replace(
        carried,
        clock=carried.clock + forecast.hours,
        temperature=pieces[-1][1],
        state=state,
        residues=_residues(reagent, course, plan, draws),
        demineralised=course.extents[-1],
    )


def _drawn(key: str, concentration: Value, volume: Value | None, draws: Draws) -> _Reagent:
    entry = library.reagent(key)
    values = {
        name: draws.of(value)
        for name in entry.values
        if (value := library_value("reagent", key, name)) is not None
    }
    amount = draws.of(concentration)
    if concentration.quantity.activity == "w/v":
        amount = amount * 1000 / molar_mass(entry.formula)
    litres = np.full(draws.n_draws, np.inf) if volume is None else draws.of(volume)
    return _Reagent(entry, values, amount, litres)


def _mineral(plan: Plan, draws: Draws) -> tuple[Array, Array, Array]:
    """Calcium [mol] and carbonate [mol] of the piece, and calcium per volume [mol/L]."""
    sample = plan.sample
    known = share = None
    if sample.material is not None:
        known = library_value("material", sample.material, "calcium")
        share = library_value("material", sample.material, "carbonate_fraction")
    carbonate = 0.065 if share is None else draws.of(share)
    assert sample.mineral_fraction is not None
    mineral = mineral_by_share(draws.of(sample.mineral_fraction), carbonate)
    volume = tissue_volume(plan, draws)
    if known is not None and sample.mineral_fraction.origin == "library":
        density = draws.of(known)
    else:
        density = mineral.calcium * draws.of(sample.wet_mass) / volume * 1000
    calcium = density * volume / 1000
    return calcium, calcium * mineral.carbonate / mineral.calcium, density


def _pieces(step: Demineralise, draws: Draws) -> list[tuple[float, Array]]:
    """Stretches of one temperature each; a ramp is cut into a few."""
    pieces: list[tuple[float, Array]] = []
    before = draws.temperature(step.programme[0].temperature)
    for stretch in step.programme:
        at = draws.temperature(stretch.temperature)
        if stretch.ramp:
            for i in range(_RAMP_PIECES):
                share = (i + 0.5) / _RAMP_PIECES
                pieces.append((stretch.hours / _RAMP_PIECES, before + share * (at - before)))
        else:
            pieces.append((stretch.hours, at))
        before = at
    return pieces


def _stretch(
    hours: float,
    temperature: Array,
    step: Demineralise,
    reagent: _Reagent,
    plan: Plan,
    draws: Draws,
    density: Array,
    speed: Array | float,
) -> BathStretch:
    length = half_thickness(plan, draws)
    assert length is not None
    layer, reaction, film = _resistances(
        reagent, temperature, length, density, plan.sample.shape, step.ph, draws
    )
    return BathStretch(hours, layer / speed, reaction / speed, film / _film_share(step) / speed)


def _film_share(step: Demineralise) -> float:
    return 1.0 if step.stirred else _STILL


def _resistances(
    reagent: _Reagent,
    temperature: Array,
    length: Array,
    density: Array,
    shape: str,
    ph: Value | None,
    draws: Draws,
) -> tuple[Array, Array, Array]:
    """Doses [h mol/L] that layer, surface and film would each need alone."""
    values, per = reagent.values, reagent.values["per_calcium"]
    surface = np.full(draws.n_draws, np.inf)
    if "surface_velocity" in values:
        pace = stokes_einstein_factor(temperature, _ROOM)
        warm = arrhenius_factor(temperature, values["energy"], _SURFACE_AT)
        surface = values["surface_velocity"] * warm * _ph_factor(ph, draws)
    else:
        pace = arrhenius_factor(temperature, values["energy"], _ROOM)
    return (
        layer_time(density, per, values["layer_diffusivity"] * pace, length, 1.0, shape),
        reaction_time(density, per, surface, length, 1.0, shape),
        film_time(density, per, values["film_velocity"], length, 1.0, shape),
    )


def _ph_factor(ph: Value | None, draws: Draws) -> Array | float:
    """EDTA works a little faster below and above pH 7.4 (Kiviranta 1980, seen)."""
    if ph is None:
        return 1.0
    factor: Array = np.interp(draws.of(ph), (5.0, 7.4, 8.5), (1.2, 1.0, 1.2))
    return factor


def _known_speed(step: Demineralise, plan: Plan, draws: Draws, density: Array) -> Array | float:
    """How much faster than the library's constants the lab's own run with this reagent went.

    It is taken to have been stirred, or left still, as the plan's step is.
    """
    known = plan.sample.known_demineralisation
    if known is None or known["reagent"] != step.reagent:
        return 1.0
    given = {name: value for name, value in known.items() if isinstance(value, Value)}
    reagent = _drawn(str(known["reagent"]), given["concentration"], None, draws)
    layer, reaction, film = _resistances(
        reagent,
        draws.of(given["temperature"]),
        draws.of(given["thickness"]) / 2,
        density,
        plan.sample.shape,
        given.get("ph"),
        draws,
    )
    extent, shape = draws.of(given["extent"]), plan.sample.shape
    needed = (
        layer * layer_progress(extent, shape)
        + reaction * reaction_progress(extent, shape)
        + film / _film_share(step) * film_progress(extent, shape)
    )
    strength = reagent.concentration * np.minimum(reagent.values["usable"], 1.0)
    speed: Array = needed / strength / draws.of(given["duration"])
    return speed


def _changes(
    step: Demineralise,
    bath: Bath,
    stretches: Sequence[BathStretch],
    calcium: Array,
    shape: str,
    start: Array | float,
) -> tuple[float, ...]:
    if step.when_spent is None:
        return step.changes
    share = step.when_spent.quantity.value
    times = change_times(bath, stretches, calcium, shape, share, start)
    return tuple(float(time) for time in times)


def _harm(
    step: Demineralise,
    reagent: _Reagent,
    course: BathCourse,
    pieces: Sequence[tuple[float, Array]],
    job: Job,
) -> Array:
    """What acid and heat do to the matrix that must be kept, as an exponent."""
    draws = job.draws
    rate = library_value("solute", GENERAL, "acid_loss")
    energy = library_value("solute", GENERAL, "acid_energy")
    assert rate is not None
    assert energy is not None
    ions = _hydrogen_ions(step, reagent, course, draws)
    total = np.zeros(draws.n_draws)
    for hours, temperature in pieces:
        total = total + hours * acid_loss_rate(temperature, ions, draws.of(rate), draws.of(energy))
        heat = heat_damage_rate(job.damage, temperature)
        if heat is not None:
            total = total + hours * heat
    return total


def _hydrogen_ions(
    step: Demineralise, reagent: _Reagent, course: BathCourse, draws: Draws
) -> Array:
    """Mean concentration [mol/L] of hydrogen ions over the baths."""
    if reagent.entry.chelator:
        ph = 7.4 if step.ph is None else draws.of(step.ph)
        return np.asarray(10.0 ** -np.broadcast_to(ph, (draws.n_draws,)))
    fresh: Array = reagent.concentration * (1 - np.mean(course.spent, axis=0) / 2)
    if reagent.entry.strong:
        return fresh
    constant = 10.0 ** -buffer_pk(OF_ACID[reagent.entry.key], 0.0, _ROOM)
    ions: Array = (-constant + np.sqrt(constant**2 + 4 * constant * fresh)) / 2
    return ions


def _residues(reagent: _Reagent, course: BathCourse, plan: Plan, draws: Draws) -> dict[str, Array]:
    """What the last bath leaves in the piece: its reagent, and the calcium it holds. [mol/L]"""
    litres = (reagent.volume + tissue_volume(plan, draws)) / 1000
    calcium = course.calcium_released[-1] / litres
    left = reagent.concentration
    if not reagent.entry.chelator:
        left = np.maximum(left - _SALT_PER_CALCIUM * calcium, 0.0)
    return {reagent.entry.key: left, "calcium": calcium}


def _told(
    step: Demineralise,
    index: int,
    job: Job,
    carried: Carried,
    course: BathCourse,
    changes: Sequence[float],
    reagent: _Reagent,
    calcium: Array,
    harm: Array,
) -> DemineraliseForecast:
    hours = sum(stretch.hours for stretch in step.programme)
    still_there = 1.0 - course.extents[0]
    begin = on_clock(job.plan.start, carried.clock)
    ready = course.time_for_extent(END_POINT)
    times = np.linspace(0.0, hours, _CURVE)
    warm = max(_temperatures(step.programme))
    usable = np.minimum(reagent.values["usable"], 1.0)
    held = (len(changes) + 1) * reagent.concentration * reagent.volume / 1000 * usable
    return DemineraliseForecast(
        do=step.do,
        index=index,
        start_h=carried.clock,
        hours=hours,
        start=begin,
        end=on_clock(begin, hours),
        extent_at_end=spread(course.extents[-1]),
        hours_to_target=spread(ready),
        never_reaches_target=float(np.isinf(ready).mean()),
        bath_spent=tuple(float(np.median(spent)) for spent in course.spent),
        change_times=tuple(changes),
        reagent_needed=float(np.median(reagent.values["per_calcium"] * calcium * still_there)),
        reagent_held=float(np.median(held)),
        carbon_dioxide=float(
            np.median(gas_volume(course.carbonate_released.sum(axis=0), warm))
            if not reagent.entry.chelator
            else 0.0
        ),
        keep_loss_at_end=spread(keep_loss(harm)),
        curve_hours=times,
        curve_extent=bands(course.curve(times, slice(0, _DRAWS_OF_CURVE))),
    )


def _temperatures(programme: Sequence[Stretch]) -> list[float]:
    return [stretch.temperature.quantity.value for stretch in programme]
