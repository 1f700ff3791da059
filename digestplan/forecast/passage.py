"""The enzyme's way through all steps of a plan on one clock, without a report on any of them.

What a forecast tells of ready and too far is found here without curves and percentiles, so that
many variants of a plan can be compared on the same draws.
"""

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.environment import Liquid
from digestplan.forecast.response import Response
from digestplan.forecast.steps import run_step
from digestplan.forecast.steps.base import Carried, Job, untouched
from digestplan.forecast.steps.digest import advance
from digestplan.forecast.steps.stop import as_hold
from digestplan.forecast.timeline import Timeline
from digestplan.kinetics.damage import keep_loss
from digestplan.kinetics.dose import Course
from digestplan.kinetics.inverse import time_to_effect
from digestplan.kinetics.programme import FOR_EVER
from digestplan.kinetics.state import State
from digestplan.plan.model import Digest, Hold, Stop

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Part:
    """One step in which enzyme is at work.

    Attributes
    ----------
    index
        Its place in the plan.
    start, hours
        When it starts on the plan's clock and how long it lasts. [h]
    course
        The enzyme's course through it.
    liquid
        What the enzyme works in.
    open_ended
        Nothing follows: the tube stays as it is until somebody comes.
    """

    index: int
    start: float
    hours: float
    course: Course
    liquid: Liquid
    open_ended: bool


@dataclass(frozen=True, slots=True, eq=False)
class Seen:
    """What each draw shows at a time of its own; arrays of shape (n_draws,).

    Attributes
    ----------
    residual
        Fraction of the enzyme charged that is still active.
    keep_loss
        Fraction lost of what must be kept.
    by_heat
        The same by heat alone.
    """

    residual: Array
    keep_loss: Array
    by_heat: Array


class Passage:
    """A plan's way, drawn: its parts in order, and when they bring the sample where.

    Parameters
    ----------
    job
        The plan, drawn.
    before
        What the steps before ``first`` left; None to start at the first step.
    first
        Index of the step to start at.
    until
        Steps that start later than this are left out. [h]
    """

    def __init__(
        self, job: Job, before: Carried | None = None, first: int = 0, until: float = np.inf
    ) -> None:
        self.job = job
        carried = untouched(job) if before is None else before
        self._begin = carried.state
        self.parts: list[Part] = []
        for index, step in enumerate(job.plan.steps[first:], first):
            last = index == len(job.plan.steps) - 1
            if carried.clock > until:
                break
            if not isinstance(step, Digest | Hold | Stop):
                _, carried = run_step(step, index, job, carried, open_ended=last)
                continue
            open_ended = last and not isinstance(step, Stop)
            start, working = carried.clock, step
            if isinstance(step, Stop):
                working, carried = as_hold(step, index, job, carried)
            course, _, carried = advance(working, job, carried)  # type: ignore[arg-type]
            hours = course.cells.end
            self.parts.append(Part(index, start, hours, course, carried.liquid, open_ended))

    def part(self, index: int) -> Part:
        """The part of one step."""
        return next(part for part in self.parts if part.index == index)

    @cached_property
    def target(self) -> Array:
        """Extent that each draw is to reach, shape (n_draws,)."""
        return self.job.draws.of(self.job.plan.sample.target_extent)

    @cached_property
    def ready(self) -> Array:
        """Hours on the plan's clock at which each draw is ready; infinite for never."""
        response, target = self.job.response, self.target
        if response.geometry is not None:
            return self._first(
                lambda part: _timeline(part, response).time_to(response.extent, target)
            )
        needed = response.law.scaled_dose(target, *response.parameters)
        needed = needed / response.susceptibility
        return self._first(lambda part: time_to_effect(part.course, 1.0, 0.0, needed))

    @cached_property
    def too_far(self) -> Array:
        """Hours on the plan's clock at which each draw is too far; infinite for never."""
        draws, limit = self.job.draws, self.job.plan.sample.keep_loss_limit
        response = self.job.response
        if limit is None:
            return np.full(draws.n_draws, np.inf)
        most = draws.of(limit)
        if response.geometry is not None:
            return self._first(
                lambda part: _timeline(part, response).time_to(response.keep_loss, most)
            )
        with np.errstate(divide="ignore"):
            level = -np.log1p(-np.minimum(most, 1.0))
        weight = response.keep_susceptibility
        return self._first(lambda part: time_to_effect(part.course, weight, 1.0, level))

    def _first(self, hours_in: Callable[[Part], Array]) -> Array:
        """Earliest time on the plan's clock, over the parts, of something that a part reaches."""
        found = np.full(self.job.draws.n_draws, np.inf)
        for part in self.parts:
            hours = hours_in(part)
            if not part.open_ended:
                hours = np.where(hours <= part.hours, hours, np.inf)
            found = np.minimum(found, part.start + hours)
            if np.isfinite(found).all():
                break
        return found

    def state_at(self, hour: float) -> State:
        """State at one time on the plan's clock for all draws; between parts nothing happens."""
        begun = [part for part in self.parts if part.start <= hour]
        if not begun:
            return self._begin
        part = begun[-1]
        elapsed = hour - part.start
        if not part.open_ended:
            elapsed = min(elapsed, part.hours)
        return part.course.at(min(elapsed, FOR_EVER))

    def seen_at_each(self, hours: Array) -> Seen:
        """
        Look at each draw at a time of its own.

        Parameters
        ----------
        hours
            On the plan's clock, shape (n_draws,); infinite where there is nothing to see.

        Returns
        -------
        seen
            Not a number where the time is infinite.
        """
        residual, lost, by_heat = np.full((3, len(hours)), np.nan)
        starts = np.array([part.start for part in self.parts])
        which = np.searchsorted(starts, hours, side="right") - 1
        for number, part in enumerate(self.parts):
            draws = np.flatnonzero((which == number) & np.isfinite(hours))
            if not len(draws):
                continue
            state = part.course.at_each(hours[draws] - part.start, draws)
            charged = np.where(state.charged > 0, state.charged, 1.0)
            residual[draws] = part.course.active(state, draws) / charged
            lost[draws] = self.job.response.keep_loss(state, draws)
            by_heat[draws] = keep_loss(state.heat)
        return Seen(residual, lost, by_heat)


def _timeline(part: Part, response: Response) -> Timeline:
    return Timeline(part.course, response, open_ended=part.open_ended, points=0)
