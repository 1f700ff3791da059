"""The same plan at each of several temperatures, on the same draws."""

from collections.abc import Callable, Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.amounts import weighed_mass
from digestplan.forecast.base_case import BaseCase, base_case
from digestplan.forecast.enough import factor_for, is_simple
from digestplan.forecast.environment import ph_at
from digestplan.forecast.passage import Passage
from digestplan.forecast.run import DRAWS, SEED
from digestplan.forecast.steps.base import Job
from digestplan.forecast.variants import Main, at_temperature
from digestplan.forecast.visits import first_after, in_time, visit_hours
from digestplan.forecast.window import Spread, Window, on_clock, quantile, spread, window
from digestplan.kinetics.programme import FOR_EVER
from digestplan.plan.model import Plan

Array = NDArray[np.float64]

DEFAULT = (4.0, 20.0, 30.0, 37.0, 45.0, 56.0)  # [°C] what labs have
COLDEST, WARMEST = 4.0, 65.0  # [°C] of the fine grid
FINE = 0.5  # [K] its step
_DRAWS_OF_CURVE, _DRAWS_IN_DEPTH = 512, 128  # enough for a picture
_DRAWS_OF_ROOT = 256  # where the enzyme for the visit takes many courses
_AS_GOOD = 0.5  # chance in time from which harm decides
_CELSIUS = 273.15
_SPENT = 0.2  # share of the enzyme left from which on it counts as dead

Progress = Callable[[int, int], None]


@dataclass(frozen=True, slots=True)
class Missed:
    """Shares of draws that are not in time, by what keeps them from it.

    Attributes
    ----------
    dies
        The enzyme is spent before the target is reached.
    slow
        It would get there, but not while somebody is still there.
    melts
        Heat has destroyed too much of what must be kept.
    too_soon
        The enzyme has taken too much of it before somebody comes: the window is shorter than
        the wait.
    """

    dies: float
    slow: float
    melts: float
    too_soon: float


@dataclass(frozen=True, slots=True, eq=False)
class Option:
    """The plan at one temperature. Times count from the start of its digest.

    Attributes
    ----------
    temperature
        Of the main stretch. [K]
    hours_to_target, never_reaches_target
        Over the digest and all that follows it.
    residual_activity_at_target, keep_loss_at_target
        Among the draws that reach it.
    keep_loss_at_visit
        When somebody can first stop it; None without a visit.
    ceiling
        The extent that this charge would reach at the digest's last temperature for ever.
    window
        From ready to too far.
    ph
        Of the digest's liquid at this temperature, median; None where the plan states none.
    charge_for_visit
        Mass of the lot to weigh in so that it is ready, with the plan's confidence, when the
        first visit begins; None without such a visit or amount. [g]
    chance_in_time
        That somebody is there, at one of the visits, between ready and too far; None without
        visits.
    missed
        What keeps the other draws from it.
    measured
        Whether the temperature lies in the enzyme's measured range; None where that is unknown.
    ready_h, too_far_h
        Draws of both times, shape (n_draws,).
    """

    temperature: float
    hours_to_target: Spread
    never_reaches_target: float
    residual_activity_at_target: Spread
    keep_loss_at_target: Spread
    keep_loss_at_visit: Spread | None
    ceiling: Spread
    window: Window
    ph: float | None
    charge_for_visit: float | None
    chance_in_time: float | None
    missed: Missed
    measured: bool | None
    ready_h: Array
    too_far_h: Array


@dataclass(frozen=True, slots=True, eq=False)
class FineCurve:
    """Results over a fine grid of temperatures, each of shape (n_temperatures,).

    Where a value does not exist (never ready, no visits) it is not a number.
    """

    temperature: Array
    hours_p50: Array
    chance_in_time: Array
    harm: Array
    ever_ready: Array


@dataclass(frozen=True, slots=True, eq=False)
class Comparison:
    """A plan at several temperatures.

    Attributes
    ----------
    plan, n_draws, seed
        What was asked.
    main
        The stretch that was set to each temperature.
    options
        One a temperature, in the order that was asked for.
    curve
        The fine grid, or None where it was not asked for.
    best_by_chance, best_by_harm
        Temperatures of the grid: with the best chance in time; with the least keep loss of those
        with at least an even chance (without visits: those that more than half reach the target
        at). None where there is none. [K]
    """

    plan: Plan
    n_draws: int
    seed: int
    main: Main
    options: tuple[Option, ...]
    curve: FineCurve | None
    best_by_chance: float | None
    best_by_harm: float | None


def compare(
    plan: Plan,
    celsius: Iterable[float] = DEFAULT,
    n_draws: int = DRAWS,
    seed: int = SEED,
    *,
    curve: bool = True,
    progress: Progress | None = None,
) -> Comparison:
    """
    Compare a plan at several temperatures.

    Parameters
    ----------
    plan
        The plan, read and checked; it needs a digest step.
    celsius
        Temperatures that its main stretch is set to. [°C]
    n_draws, seed
        As for a forecast, whose draws these are.
    curve
        Whether to go through the fine grid as well.
    progress
        Called with how many temperatures are done, and of how many.

    Returns
    -------
    comparison
        What a forecast of each variant would say, draw by draw.
    """
    base = base_case(plan, n_draws, seed)
    wanted = [t + _CELSIUS for t in celsius]
    fine = np.arange(COLDEST, WARMEST + FINE / 2, FINE) + _CELSIUS if curve else np.zeros(0)
    options = []
    for temperature in wanted:
        options.append(option_at(base, temperature))
        if progress is not None:
            progress(len(options), len(wanted) + len(fine))
    found = None
    if curve:
        in_depth = base.job.response.geometry is not None
        few = base.fewer(_DRAWS_IN_DEPTH if in_depth else _DRAWS_OF_CURVE)
        found = _fine_curve(few, fine, len(wanted), progress)
    return Comparison(
        plan,
        base.job.draws.n_draws,
        seed,
        base.main,
        tuple(options),
        found,
        _best_by_chance(found),
        _best_by_harm(found),
    )


def option_at(base: BaseCase, temperature: float) -> Option:
    """
    Return what a plan does at one temperature.

    Parameters
    ----------
    base
        The plan.
    temperature
        What its main stretch is set to. [K]

    Returns
    -------
    option
        Percentiles, window, chance, and what keeps draws from being in time.
    """
    plan, main = base.job.plan, base.main
    passage = base.passage(at_temperature(plan, main, temperature))
    part = passage.part(main.index)
    ready, too_far = passage.ready - part.start, passage.too_far - part.start
    seen = passage.seen_at_each(passage.ready)
    there = np.isfinite(passage.ready)
    visit = first_after(plan, part.start)
    at_visit = None
    if visit is not None:
        at_visit = spread(base.job.response.keep_loss(passage.state_at(visit)))
    met = in_time(plan, passage.ready, passage.too_far)
    forever = part.course.at(part.course.cells.end + FOR_EVER)
    return Option(
        temperature=temperature,
        hours_to_target=spread(ready),
        never_reaches_target=float(np.isinf(ready).mean()),
        residual_activity_at_target=_among(seen.residual, there),
        keep_loss_at_target=_among(seen.keep_loss, there),
        keep_loss_at_visit=at_visit,
        ceiling=spread(base.job.response.extent(forever)),
        window=window(ready, too_far, plan.confidence, on_clock(plan.start, part.start)),
        ph=ph_at(part.liquid, temperature),
        charge_for_visit=None if visit is None else _charge_for(base, passage, visit),
        chance_in_time=float(met.mean()) if visit_hours(plan) else None,
        missed=missed(passage, main),
        measured=_measured(base.job, temperature),
        ready_h=ready,
        too_far_h=too_far,
    )


def _among(values: Array, some: NDArray[np.bool_]) -> Spread:
    return spread(values[some]) if some.any() else Spread(None, None, None)


def _measured(job: Job, temperature: float) -> bool | None:
    known = job.enzyme.enzyme.measured_temperature
    return None if known is None else known[0] - 0.5 <= temperature <= known[1] + 0.5


def _charge_for(base: BaseCase, passage: Passage, visit: float) -> float | None:
    """Mass to weigh in so that the plan's confidence is ready when a visit begins. [g]."""
    job, main = passage.job, base.main
    mass = weighed_mass(job.plan, job.draws, main.step(job.plan))
    if mass is None:
        return None
    if not is_simple(job):
        base = base.fewer(_DRAWS_OF_ROOT)
        passage = base.passage(job.plan, visit)
    factor = factor_for(base, passage, visit, job.plan.confidence)
    return None if factor is None else mass * factor


def missed(passage: Passage, main: Main) -> Missed:
    """
    Return what keeps draws from being in time.

    Parameters
    ----------
    passage
        The way of a plan; without visits, draws count as in time that are ready before too far.
    main
        Where it does most of its digesting.

    Returns
    -------
    missed
        Shares of the draws, that sum to those that are not in time.
    """
    plan, ready, too_far = passage.job.plan, passage.ready, passage.too_far
    visits = visit_hours(plan)
    last = max((end for _, end in visits), default=np.inf)
    late = np.isinf(ready) | (ready > last)
    met = in_time(plan, ready, too_far) if visits else ~late & (ready <= too_far)
    spent = _residual(passage, main, last) < _SPENT
    gone = np.where(~met & ~late, too_far, np.inf)
    seen = passage.seen_at_each(gone)
    melts = _exponent(seen.by_heat) > 0.5 * _exponent(seen.keep_loss)
    return Missed(
        dies=float((late & spent).mean()),
        slow=float((late & ~spent).mean()),
        melts=float((~met & ~late & melts).mean()),
        too_soon=float((~met & ~late & ~melts).mean()),
    )


def _residual(passage: Passage, main: Main, last: float) -> Array:
    """What is left of the enzyme when the main stretch ends, or somebody was there last."""
    part, programme = passage.part(main.index), main.step(passage.job.plan).programme
    end = sum(stretch.hours for stretch in programme[: main.stretches[-1] + 1])
    state = part.course.at(float(np.clip(last - part.start, 0.0, end)))
    return part.course.active(state) / np.where(state.charged > 0, state.charged, 1.0)


def _exponent(loss: Array) -> Array:
    with np.errstate(divide="ignore", invalid="ignore"):
        exponent: Array = -np.log1p(-loss)
    return exponent


def _fine_curve(
    base: BaseCase, temperatures: Array, done: int, progress: Progress | None
) -> FineCurve:
    rows = []
    for temperature in temperatures:
        rows.append(_brief(base, float(temperature)))
        if progress is not None:
            progress(done + len(rows), done + len(temperatures))
    hours, chance, harm, sure = np.array(rows, dtype=float).T
    return FineCurve(temperatures, hours, chance, harm, sure)


def _brief(base: BaseCase, temperature: float) -> tuple[float | None, ...]:
    """Median hours, chance in time, median keep loss and share ever ready at a temperature."""
    plan = base.job.plan
    passage = base.passage(at_temperature(plan, base.main, temperature))
    start = passage.part(base.main.index).start
    chance = None
    if visit_hours(plan):
        chance = float(in_time(plan, passage.ready, passage.too_far).mean())
    visit = first_after(plan, start)
    if visit is not None:
        harm = float(np.median(base.job.response.keep_loss(passage.state_at(visit))))
    else:
        seen = passage.seen_at_each(passage.ready)
        harm = float(np.median(np.where(np.isnan(seen.keep_loss), 1.0, seen.keep_loss)))
    return (
        quantile(passage.ready - start, 0.5),
        chance,
        harm,
        float(np.isfinite(passage.ready).mean()),
    )


def _best_by_chance(curve: FineCurve | None) -> float | None:
    if curve is None or np.isnan(curve.chance_in_time).all():
        return None
    best = np.nanmax(curve.chance_in_time)
    return None if best == 0 else float(curve.temperature[np.nanargmax(curve.chance_in_time)])


def _best_by_harm(curve: FineCurve | None) -> float | None:
    if curve is None:
        return None
    chance = np.where(np.isnan(curve.chance_in_time), curve.ever_ready, curve.chance_in_time)
    good = np.flatnonzero(chance >= _AS_GOOD)
    return float(curve.temperature[good[np.argmin(curve.harm[good])]]) if len(good) else None
