"""Baths of acid or chelator, one after the other: what each dissolves, and when it is spent.

A bath is fresh when it is poured on and holds the reagent for a certain amount of calcium. It is
cut into stretches of one temperature. Between stretches and baths the sample hands on one number,
its extent, so that nothing is stepped through: each stretch is one root of `bath_clock`.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.bath_clock import bath_extent, bath_time

Array = NDArray[np.float64]
Values = Array | float
_ALL = slice(None)
_NO_DEMAND = 1e-14  # of a sample without mineral


@dataclass(frozen=True, slots=True, eq=False)
class Bath:
    """One filling of the vessel. Shapes (n_draws,) or scalars.

    Attributes
    ----------
    concentration
        Reagent in the fresh bath. [mol/L]
    volume
        Volume of the bath. [mL]
    per_calcium
        Reagent spent per calcium that dissolves. [1]
    usable
        Share of the reagent that can be spent before the bath is saturated. [1]
    """

    concentration: Values
    volume: Values
    per_calcium: Values
    usable: Values = 1.0

    @property
    def strength(self) -> Array:
        """Usable concentration of the fresh bath [mol/L]."""
        return np.asarray(self.usable, dtype=float) * self.concentration

    @property
    def held(self) -> Array:
        """Amount of reagent in the fresh bath, the unusable share included [mol]."""
        return np.asarray(self.concentration, dtype=float) * self.volume / 1000

    def demand(self, calcium: Values) -> Array:
        """Reagent that so much calcium [mol] needs, over the usable reagent that is held [1]."""
        return np.asarray(self.per_calcium, dtype=float) * calcium / (self.held * self.usable)


@dataclass(frozen=True, slots=True, eq=False)
class BathStretch:
    """A stretch of one temperature within one bath. Shapes (n_draws,) or scalars.

    Attributes
    ----------
    hours
        How long it lasts; infinite for "however long one waits". [h]
    layer, reaction, film
        Dose (usable concentration integrated over time) that each resistance alone would need
        for the whole sample, at the temperature of the stretch. [h mol/L]
    """

    hours: float
    layer: Values
    reaction: Values = 0.0
    film: Values = 0.0


@dataclass(frozen=True, slots=True, eq=False)
class BathCourse:
    """What a sequence of baths does, stretch by stretch and bath by bath.

    Attributes
    ----------
    edges
        Times at which stretches begin and end. Shape (n_stretches + 1,). [h]
    extents
        Extents at those times. Shape (n_stretches + 1, n_draws). [1]
    bounds
        Index into ``edges`` at which each bath begins, and the last. Length n_baths + 1.
    stretches, baths, shape
        As given to `run_baths`, the stretches in one row.
    calcium, carbonate
        What the sample held when the extent was 0. Shape (n_draws,). [mol]
    """

    edges: Array
    extents: Array
    bounds: tuple[int, ...]
    stretches: tuple[BathStretch, ...]
    baths: tuple[Bath, ...]
    shape: str
    calcium: Array
    carbonate: Array

    @property
    def released(self) -> Array:
        """Share of the mineral that each bath takes, shape (n_baths, n_draws) [1]."""
        released: Array = np.diff(self.extents[list(self.bounds)], axis=0)
        return released

    @property
    def calcium_released(self) -> Array:
        """Calcium in each used bath, shape (n_baths, n_draws) [mol]."""
        return self.released * self.calcium

    @property
    def carbonate_released(self) -> Array:
        """Carbonate that each bath sets free, in acid as gas, shape (n_baths, n_draws) [mol]."""
        return self.released * self.carbonate

    @property
    def spent(self) -> Array:
        """Share of the usable reagent of each bath that is spent, shape (n_baths, n_draws) [1]."""
        demands = [bath.demand(self.calcium) for bath in self.baths]
        return self.released * np.array(demands)

    @property
    def reagent_left(self) -> Array:
        """Reagent in each used bath, unusable share included, (n_baths, n_draws) [mol/L]."""
        rows = zip(self.baths, self.spent, strict=True)
        return np.array([bath.concentration - bath.strength * spent for bath, spent in rows])

    def at(self, time: float, draws: slice = _ALL) -> Array:
        """Extents at one time [h]; before the start and after the end they stand still."""
        extents: Array = self.curve([time], draws)[0]
        return extents

    def curve(self, times: Sequence[float] | Array, draws: slice = _ALL) -> Array:
        """Extents at many times [h], shape (n_times, n_draws); some draws do for a picture."""
        hours = np.clip(np.asarray(times, dtype=float), 0.0, self.edges[-1])
        numbers = np.searchsorted(self.edges[1:-1], hours, side="right")
        curve = np.empty((len(hours), *self.extents[0, draws].shape))
        for number in np.unique(numbers):
            here = numbers == number
            curve[here] = _extents(self, int(number), hours[here] - self.edges[number], draws)
        return curve

    def time_for_extent(self, target: Values) -> Array:
        """
        Return when an extent is reached, infinite where these baths never reach it.

        Parameters
        ----------
        target : ndarray, shape (n_draws,)
            Extent to be reached. [1]

        Returns
        -------
        time : ndarray, shape (n_draws,)
            From the start of the first bath. [h]
        """
        target = np.broadcast_to(np.asarray(target, dtype=float), self.extents[0].shape)
        time = np.where(self.extents[0] >= target, 0.0, np.inf)
        for number in range(len(self.stretches)):
            here = (self.extents[number] < target) & (self.extents[number + 1] >= target)
            if not here.any():
                continue
            start, demand, wholes = _conditions(self, number)
            since = bath_time(target, self.extents[number], start, demand, wholes, self.shape)
            since = np.minimum(since, self.stretches[number].hours)
            time = np.where(here, self.edges[number] + since, time)
        return time


def _conditions(course: BathCourse, number: int) -> tuple[Array, Array, tuple[Array, ...]]:
    """Start and demand of a stretch's bath, and its three whole times while the bath is fresh."""
    which = int(np.searchsorted(course.bounds, number, side="right")) - 1
    bath, stretch = course.baths[which], course.stretches[number]
    doses = (stretch.layer, stretch.reaction, stretch.film)
    wholes = tuple(np.asarray(dose, dtype=float) / bath.strength for dose in doses)
    return course.extents[course.bounds[which]], bath.demand(course.calcium), wholes


def _extents(course: BathCourse, number: int, hours: Array, draws: slice = _ALL) -> Array:
    """Extents after some hours in a stretch, shape (n_hours, n_draws)."""
    start, demand, wholes = _conditions(course, number)
    begun = course.extents[number]
    given = [np.broadcast_to(a, begun.shape)[draws] for a in (begun, start, demand, *wholes)]
    many, each = [np.tile(a, len(hours)) for a in given], np.repeat(hours, len(given[0]))
    extents = bath_extent(each, many[0], many[1], many[2], many[3:], course.shape)
    return extents.reshape(len(hours), -1)


def run_baths(
    baths: Sequence[Bath],
    stretches: Sequence[Sequence[BathStretch]],
    calcium: Values,
    carbonate: Values,
    shape: str,
    start: Values = 0.0,
) -> BathCourse:
    """
    Return what a sequence of baths does to a sample [1]_.

    Parameters
    ----------
    baths : sequence of Bath
        The fillings in their order, each fresh when it is poured on. [mol/L]
    stretches : sequence of sequence of BathStretch
        For each bath its stretches. [h]
    calcium : ndarray, shape (n_draws,)
        Calcium that the sample holds when nothing is dissolved. [mol]
    carbonate : ndarray, shape (n_draws,)
        Carbonate, likewise. [mol]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]
    start : ndarray, shape (n_draws,)
        Extent at the start, from a step before. [1]

    Returns
    -------
    course : BathCourse
        Extents at the ends of all stretches, and what each bath took. [1]

    Notes
    -----
    A bath is changed completely: the little that clings to the sample is left out.

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    row = [stretch for of_one in stretches for stretch in of_one]
    given = [value for s in row for value in (s.layer, s.reaction, s.film)]
    given += [v for b in baths for v in (b.concentration, b.volume, b.per_calcium, b.usable)]
    shapes = [np.shape(value) for value in (calcium, carbonate, start, *given)]
    n_draws = int(np.prod(np.broadcast_shapes(*shapes)))
    extents = np.empty((len(row) + 1, n_draws))
    extents[0] = start
    bounds = tuple(int(n) for n in np.cumsum([0, *(len(of_one) for of_one in stretches)]))
    edges = np.cumsum([0.0, *(stretch.hours for stretch in row)])
    amounts = [np.broadcast_to(np.asarray(a, dtype=float), n_draws) for a in (calcium, carbonate)]
    course = BathCourse(edges, extents, bounds, tuple(row), tuple(baths), shape, *amounts)
    for number, stretch in enumerate(row):
        extents[number + 1] = _extents(course, number, np.array([stretch.hours]))[0]
    return course


def cut_at_changes(
    stretches: Sequence[BathStretch], changes: Sequence[float]
) -> list[list[BathStretch]]:
    """
    Cut a programme at the times at which the bath is changed [1]_.

    Parameters
    ----------
    stretches : sequence of BathStretch
        Stretches of the whole programme. [h]
    changes : sequence of float
        Times at which a fresh bath is poured on, rising. [h]

    Returns
    -------
    cut : list of list of BathStretch
        The stretches of each bath; changes at or after the end add none. [h]

    References
    ----------
    .. [1] By definition.
    """
    cut: list[list[BathStretch]] = [[]]
    waiting, clock = list(changes), 0.0
    for stretch in stretches:
        left = stretch.hours
        while waiting and waiting[0] < clock + left:
            before = max(waiting.pop(0) - clock, 0.0)
            if before > 0:
                cut[-1].append(replace(stretch, hours=before))
            clock, left = clock + before, left - before
            if cut[-1]:
                cut.append([])
        cut[-1].append(replace(stretch, hours=left))
        clock += left
    return cut


def change_times(
    bath: Bath,
    stretches: Sequence[BathStretch],
    calcium: Values,
    shape: str,
    share: float = 0.5,
    start: Values = 0.0,
    most: int = 50,
) -> tuple[float, ...]:
    """
    Return the clock times at which to change the bath so that it is never spent too far [1]_.

    Parameters
    ----------
    bath : Bath
        The filling, the same each time. [mol/L]
    stretches : sequence of BathStretch
        Stretches of the whole programme. [h]
    calcium : ndarray, shape (n_draws,)
        Calcium that the sample holds when nothing is dissolved. [mol]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]
    share : float
        Share of the usable reagent at which to change. [1]
    start : ndarray, shape (n_draws,)
        Extent at the start. [1]
    most : int
        How many changes at most. [1]

    Returns
    -------
    times : tuple of float
        From the start of the first bath. [h]

    Notes
    -----
    Nobody at the bench knows which draw is theirs, so there is one clock for all: a bath is
    changed when it has spent that share in half of the draws. Draws in which the mineral goes
    first count as never, so that no bath is changed for a sample that is probably finished.

    References
    ----------
    .. [1] Own rule.
    """
    times: list[float] = []
    rest, extent = list(stretches), np.atleast_1d(np.asarray(start, dtype=float))
    while len(times) < most:
        course = run_baths([bath], [rest], calcium, 0.0, shape, extent)
        target = course.extents[0] + share / np.maximum(bath.demand(course.calcium), _NO_DEMAND)
        spent = np.sort(np.where(target <= 1, course.time_for_extent(target), np.inf))
        middle = float(spent[(len(spent) - 1) // 2])
        if not middle < course.edges[-1]:
            break
        times.append(middle + (times[-1] if times else 0.0))
        extent, rest = course.at(middle), cut_at_changes(rest, [middle])[-1]
    return tuple(times)
