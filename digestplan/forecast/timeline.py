"""One step on the clock: curves over its time, and when levels are reached, draw by draw."""

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.response import Response
from digestplan.kinetics.dose import Course
from digestplan.kinetics.programme import FOR_EVER
from digestplan.kinetics.roots import rising_root
from digestplan.kinetics.state import Draws, State

Array = NDArray[np.float64]
Measure = Callable[[State, Draws], Array]

CURVE_POINTS = 49  # evenly spaced times of a curve, beside the corners of the programme
_TAIL_POINTS = 24
_FEW_TAIL_POINTS = 8


class Timeline:
    """A step's course, seen at the times of its curve and, where nothing follows, beyond.

    Parameters
    ----------
    course
        The enzyme's course through the step.
    response
        The sample's answer.
    open_ended
        Nothing follows this step: the tube stays as it is until somebody comes.
    points
        Evenly spaced times of its curve; 0 where only the times of levels are wanted.
    """

    def __init__(
        self, course: Course, response: Response, *, open_ended: bool, points: int = CURVE_POINTS
    ) -> None:
        self.course, self.response = course, response
        self.end = course.cells.end
        edges = course.cells.edges[course.cells.edges < self.end]
        evenly = np.linspace(0, self.end, points) if points else np.array([self.end])
        self.hours = np.unique(np.concatenate([evenly, edges]))
        self._tail_points = _TAIL_POINTS if points else _FEW_TAIL_POINTS
        self.states = [course.at(float(hour)) for hour in self.hours]
        self.open_ended = open_ended
        self._tail: tuple[Array, list[State]] | None = None

    def over_time(self, measure: Measure) -> Array:
        """Values of a measure at the times of the curve, shape (n_times, n_draws)."""
        return np.stack([measure(state, slice(None)) for state in self.states])

    def tail(self) -> tuple[Array, list[State]]:
        """Times and states after the step's end, at its last temperature, up to for ever."""
        if self._tail is None:
            later = np.geomspace(0.25, FOR_EVER, self._tail_points)
            edges = self.course.cells.edges
            hours = np.unique(np.concatenate([self.end + later, edges[edges > self.end]]))
            hours = hours[hours <= self.end + FOR_EVER]
            self._tail = (hours, [self.course.at(float(hour)) for hour in hours])
        return self._tail

    def for_ever(self) -> State:
        """State at the last temperature, given for ever."""
        return self.course.at(self.end + FOR_EVER)

    def time_to(self, measure: Measure, level: Array) -> Array:
        """
        Return when a rising measure reaches a level, draw by draw.

        Parameters
        ----------
        measure
            Maps a state, and which draws it holds, to values of shape (n_draws,).
        level
            Shape (n_draws,). [as the measure]

        Returns
        -------
        hours
            From the step's start; infinite where it is not reached before the step ends (or,
            where nothing follows, ever). [h]
        """
        hours, values = self.hours, self.over_time(measure)
        if self.open_ended and (values[-1] < level).any():
            later, states = self.tail()
            hours = np.concatenate([hours, later])
            values = np.vstack([values, [measure(state, slice(None)) for state in states]])
        reached = values >= level
        first = np.argmax(reached, axis=0)
        result = np.where(reached[first, np.arange(len(level))], hours[first], np.inf)
        between = np.flatnonzero(np.isfinite(result) & (first > 0))
        cells = self.course.cells.cells_at(hours[first[between]])
        for cell in np.unique(cells):
            draws = between[cells == cell]
            result[draws] = self._within(measure, level, int(cell), draws, hours, first[draws])
        return result

    def _within(
        self,
        measure: Measure,
        level: Array,
        cell: int,
        draws: NDArray[np.intp],
        hours: Array,
        first: NDArray[np.intp],
    ) -> Array:
        start = float(self.course.cells.edges[cell])

        def above(elapsed: Array) -> Array:
            state = self.course.within(cell, elapsed, draws)
            return measure(state, draws) - level[draws]

        low = np.maximum(hours[first - 1] - start, 0.0)
        return start + rising_root(above, low, hours[first] - start, 1e-10)
