"""When a course has given a dose, or dose and heat together: the inverse of `dose`.

Where enzyme dies at a constant temperature the dose has a closed inverse; what heat adds to it is
met by Newton's steps, which on a rising concave function never pass the root from the left.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.dose import Course
from digestplan.kinetics.programme import NODES, running_integral
from digestplan.kinetics.roots import rising_root
from digestplan.kinetics.state import State

Array = NDArray[np.float64]
Picked = NDArray[np.intp]

_TOLERANCE = 1e-11
_ENOUGH = 30
_LEAST = 1e-300


def time_for_integral(amount: Array, rate: Array, integral: Array) -> Array:
    """
    Return when dying enzyme has given an integral of its activity over time [1]_.

    Parameters
    ----------
    amount : ndarray
        Active enzyme at the start. [any]
    rate : ndarray
        First-order inactivation rate. [1/h]
    integral : ndarray
        Integral of the active enzyme over the time. [any h]

    Returns
    -------
    hours : ndarray
        Infinite where all the enzyme there is never gives it. [h]

    References
    ----------
    .. [1] The inverse of first-order death, -ln(1 - kI/a0)/k; elementary.
    """
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        plain = integral / amount
        share = rate * plain
        slowed = np.where(share < 1, -np.log1p(-np.minimum(share, 1.0)) / rate, np.inf)
    hours = np.where(share > 1e-14, slowed, plain)
    result: Array = np.where(integral <= 0, 0.0, np.where(np.isnan(hours), np.inf, hours))
    return result


def time_to_effect(
    course: Course, dose_weight: Array | float, heat_weight: float, level: Array
) -> Array:
    """
    Return when a weighted sum of dose and heat reaches a level, draw by draw [1]_.

    Parameters
    ----------
    course : Course
        The enzyme's course, without penetration. [any]
    dose_weight : ndarray or float
        Weight of the dose at the surface, shape (n_draws,). [g/(unit h)]
    heat_weight : float
        Weight of the exponent of the keep loss by heat. [1]
    level : ndarray, shape (n_draws,)
        The level. [1]

    Returns
    -------
    hours : ndarray, shape (n_draws,)
        From the start of the course, its last temperature going on for ever; infinite where the
        level is never reached. [h]

    References
    ----------
    .. [1] Newton's method on a rising concave function; elementary.
    """
    weights = np.broadcast_to(np.asarray(dose_weight, dtype=float), level.shape)

    def effect(state: State, draws: Picked | slice) -> Array:
        return weights[draws] * state.dose + heat_weight * state.heat

    at_starts = np.stack([effect(state, slice(None)) for state in course.starts])
    cells = (at_starts < level).sum(axis=0) - 1  # the last cell that begins below the level
    hours = np.where(cells < 0, 0.0, np.inf)
    below = np.flatnonzero(cells >= 0)
    missing = level - at_starts[np.maximum(cells, 0), np.arange(len(level))]
    ask = _Asked(course, missing, weights, heat_weight)
    moving = np.array([len(nodes) > 1 for nodes in course.cells.nodes])
    moving[-1] = False  # that cell has no end to speak of
    in_moving = below[moving[cells[below]]]
    if len(in_moving):
        hours[in_moving] = ask.in_moving(cells[in_moving], in_moving)
    for cell in np.unique(cells[below]):
        if not moving[cell]:
            draws = below[cells[below] == cell]
            within = ask.in_one(int(cell), draws)
            hours[draws] = float(course.cells.edges[cell]) + within
    return np.where(hours > course.cells.edges[-1], np.inf, hours)


@dataclass(frozen=True, slots=True, eq=False)
class _Asked:
    """What is asked of a course: when each draw has got what it is missing at a cell's start."""

    course: Course
    missing: Array
    weights: Array
    heat_weight: float

    def in_moving(self, cells: Picked, draws: Picked) -> Array:
        """Hours on the step's clock within cells of changing temperature, all at once."""
        rows = np.empty((NODES, len(draws)))
        edges = self.course.cells.edges
        for cell in np.unique(cells):
            here = cells == cell
            values = self.course.moving_values(int(cell))
            rows[:, here] = self.weights[draws[here]] * values.effect[:, draws[here]]
            if values.heat is not None and self.heat_weight:
                rows[:, here] += self.heat_weight * values.heat[:, draws[here]]
        begin, length = edges[cells], edges[cells + 1] - edges[cells]
        powers = running_integral(rows * length)
        missing = self.missing[draws]

        def above(share: Array) -> Array:
            given: Array = powers[-1]
            for row in powers[-2::-1]:
                given = given * share + row
            return given * share - missing

        ones = np.ones(len(draws))
        result: Array = begin + length * rising_root(above, np.zeros_like(ones), ones, _TOLERANCE)
        return result

    def in_one(self, cell: int, draws: Picked) -> Array:
        """Hours from the start of a cell of constant temperature, or of the last one."""
        course, rates, node = self.course, self.course.rates, self.course.cells.nodes[cell][0]
        if len(course.cells.nodes[cell]) > 1 or rates.second is not None:
            return self._bracketed(cell, draws)
        missing = self.missing[draws]
        per_hour = np.maximum(self.weights[draws] * course.effect_at(cell, draws), _LEAST)
        integral = missing / per_hour
        if rates.autolysis is not None:
            own = rates.autolysis[node, draws]
            with np.errstate(over="ignore"):
                grown = np.expm1(own * integral) / np.where(own > 0, own, 1.0)
            integral = np.where(own * integral > 1e-12, grown, integral)
        amount = course.starts[cell].fresh[draws]
        hours = time_for_integral(amount, rates.first[node, draws], integral)
        if self.heat_weight == 0 or rates.heat is None:
            return hours
        heat = self.heat_weight * rates.heat[node, draws]
        with np.errstate(divide="ignore"):
            alone = np.where(heat > 0, missing / heat, np.inf)
        return self._newton(cell, draws, per_hour, heat, np.minimum(hours, alone))

    def _newton(
        self, cell: int, draws: Picked, per_hour: Array, heat: Array, upper: Array
    ) -> Array:
        """Meet a sum of dose and heat, from a time at which one of them alone is enough."""
        course, start = self.course, self.course.starts[cell]
        hours, left = upper.copy(), np.flatnonzero(np.isfinite(upper) & (upper > 0))
        for _ in range(_ENOUGH):
            some = draws[left]
            state = course.within(cell, hours[left], some)
            given = self.weights[some] * (state.dose - start.dose[some]) + heat[left] * hours[left]
            slope = per_hour[left] * course.active(state, some) + heat[left]
            step = (given - self.missing[some]) / np.maximum(slope, _LEAST)
            hours[left] = np.clip(hours[left] - step, 0.0, upper[left])
            left = left[np.abs(step) > _TOLERANCE * hours[left]]
            if not len(left):
                break
        return hours

    def _bracketed(self, cell: int, draws: Picked) -> Array:
        """Meet it by bracketing, where nothing closed is known."""
        course, start = self.course, self.course.starts[cell]
        length = float(course.cells.edges[cell + 1] - course.cells.edges[cell])

        def above(elapsed: Array, some: Picked) -> Array:
            state = course.within(cell, elapsed, some)
            given = self.weights[some] * (state.dose - start.dose[some])
            return given + self.heat_weight * (state.heat - start.heat[some]) - self.missing[some]

        hours = np.full(len(draws), np.inf)
        reached = np.flatnonzero(above(np.full(len(draws), length), draws) >= 0)
        if len(reached):
            some = draws[reached]
            low, high = np.zeros(len(some)), np.full(len(some), length)
            hours[reached] = rising_root(lambda hour: above(hour, some), low, high, _TOLERANCE)
        return hours
