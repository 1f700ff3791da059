"""The clock of one bath: time to an extent while the bath is being spent, in closed form.

What the mineral takes is missing in the bath, so that within one bath the reagent depends on the
extent alone: C = C₀(1 − N(X − X₀)), N the reagent that the whole mineral needs over the reagent
that the fresh bath holds. With the radius of the core ρ (ρ^d = 1 − X, d = 1, 2, 3) the time is
∫ (τ_layer g'_layer + τ_reaction g'_reaction + τ_film X') dρ/(1 − N(X − X₀)): a rational function,
and one logarithm for the cylinder. It grows without limit where the bath is exhausted.
"""

from collections.abc import Callable, Sequence

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.roots import rising_root
from digestplan.kinetics.shrinking_core import dimension

Array = NDArray[np.float64]
Values = Array | float
Three = tuple[Array, Array, Array]

EXHAUSTED = 40.0  # e-folds of the reagent after which nothing is left in double precision
_FRESH = 1e-14  # a bath so large that it is never spent; keeps 1/N finite
_NEAR = 0.1  # ratio of core and pole below which their quotient is a series
_TERMS = 17
_TINY = 1e-18


def bath_clock(extent: Array, folds: Array, start: Array, demand: Array, shape: str) -> Three:
    """
    Return the time in one bath to an extent, for each resistance alone [1]_.

    Parameters
    ----------
    extent : ndarray, shape (n_draws,)
        Share of the mineral that is gone. [1]
    folds : ndarray, shape (n_draws,)
        −ln of the share of the reagent that is left at that extent; see `folds_spent`. [1]
    start : ndarray, shape (n_draws,)
        Extent at which the bath was fresh. [1]
    demand : ndarray, shape (n_draws,)
        Reagent that the whole mineral needs over the usable reagent of the fresh bath. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    layer : ndarray, shape (n_draws,)
        Time under layer control, in units of its whole time in a bath that stays fresh. [1]
    reaction : ndarray, shape (n_draws,)
        The same under reaction control. [1]
    film : ndarray, shape (n_draws,)
        The same under film control. [1]

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory), with
       a bath that is being spent; elementary integration, and the dilogarithm for the cylinder.
    """
    n = np.maximum(demand, _FRESH)
    d = dimension(shape)
    film = folds / n
    if d == 1:
        return 2 * (start * film + _above_linear(folds) / n**2), film, film
    before, after = (1 - start) ** (1 / d), (1 - extent) ** (1 / d)
    if d == 2:
        reaction = _cylinder_reaction(before, after, folds, n)
        return _cylinder_layer(before, after, folds, n), reaction, film
    reaction, first = _sphere(before, after, folds, n)
    return 6 * first - 2 * film, reaction, film


def folds_spent(extent: Array, start: Array, demand: Array) -> Array:
    """
    Return −ln of the share of the usable reagent that is left at an extent [1]_.

    Parameters
    ----------
    extent : ndarray, shape (n_draws,)
        Share of the mineral that is gone. [1]
    start : ndarray, shape (n_draws,)
        Extent at which the bath was fresh. [1]
    demand : ndarray, shape (n_draws,)
        Reagent that the whole mineral needs over the usable reagent of the fresh bath. [1]

    Returns
    -------
    folds : ndarray, shape (n_draws,)
        0 in a fresh bath, infinite where the bath cannot reach the extent. [1]

    References
    ----------
    .. [1] Mass balance.
    """
    spent = np.maximum(demand, _FRESH) * (extent - start)
    with np.errstate(divide="ignore"):
        folds: Array = -np.log1p(-np.clip(spent, 0.0, 1.0))
    return folds


def extent_at_folds(folds: Array, start: Array, demand: Array) -> Array:
    """
    Return the extent at which so much of the reagent is left, the inverse of `folds_spent` [1]_.

    Parameters
    ----------
    folds : ndarray, shape (n_draws,)
        −ln of the share of the usable reagent that is left. [1]
    start : ndarray, shape (n_draws,)
        Extent at which the bath was fresh. [1]
    demand : ndarray, shape (n_draws,)
        Reagent that the whole mineral needs over the usable reagent of the fresh bath. [1]

    Returns
    -------
    extent : ndarray, shape (n_draws,)
        Share of the mineral that is gone, at most 1. [1]

    References
    ----------
    .. [1] Mass balance.
    """
    extent: Array = np.minimum(start - np.expm1(-folds) / np.maximum(demand, _FRESH), 1.0)
    return extent


def bath_limit(start: Values, demand: Values) -> Array:
    """
    Return the extent at which a bath ends, however long one waits [1]_.

    Parameters
    ----------
    start : ndarray, shape (n_draws,)
        Extent at which the bath was fresh. [1]
    demand : ndarray, shape (n_draws,)
        Reagent that the whole mineral needs over the usable reagent of the fresh bath. [1]

    Returns
    -------
    limit : ndarray, shape (n_draws,)
        Extent when the bath is exhausted, or 1 if the mineral goes first. [1]

    References
    ----------
    .. [1] Mass balance.
    """
    start, demand = np.asarray(start, dtype=float), np.asarray(demand, dtype=float)
    enough = demand * (1 - start) <= 1
    limit: Array = np.where(enough, 1.0, start + 1 / np.where(enough, 1.0, demand))
    return limit


def bath_time(
    target: Values,
    begun: Values,
    start: Values,
    demand: Values,
    wholes: Sequence[Values],
    shape: str,
) -> Array:
    """
    Return the time from one extent to another within one bath [1]_.

    Parameters
    ----------
    target : ndarray, shape (n_draws,)
        Extent to be reached. [1]
    begun : ndarray, shape (n_draws,)
        Extent at which the time starts. [1]
    start : ndarray, shape (n_draws,)
        Extent at which the bath was fresh. [1]
    demand : ndarray, shape (n_draws,)
        Reagent that the whole mineral needs over the usable reagent of the fresh bath. [1]
    wholes : three ndarray, shape (n_draws,)
        Whole time in a bath that stays fresh under layer, reaction and film control. [h]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    time : ndarray, shape (n_draws,)
        0 if it is reached already, infinite where the bath is exhausted before. [h]

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    target, begun, start, demand, *three = _together(target, begun, start, demand, *wholes)
    folds = folds_spent(target, start, demand)
    lost = (target > begun) & ((folds > EXHAUSTED) | (target > 1))
    first = np.minimum(folds_spent(begun, start, demand), EXHAUSTED)
    before = bath_clock(begun, first, start, demand, shape)
    place = np.clip(target, start, bath_limit(start, demand))
    after = bath_clock(place, np.minimum(folds, EXHAUSTED), start, demand, shape)
    time = sum(t * (b - a) for t, a, b in zip(three, before, after, strict=True))
    return np.where(target <= begun, 0.0, np.where(lost, np.inf, np.maximum(time, 0.0)))


def bath_extent(
    hours: Values,
    begun: Values,
    start: Values,
    demand: Values,
    wholes: Sequence[Values],
    shape: str,
) -> Array:
    """
    Return the extent after a time within one bath, the inverse of `bath_time` [1]_.

    Parameters
    ----------
    hours : ndarray, shape (n_draws,)
        How long; may be infinite. [h]
    begun : ndarray, shape (n_draws,)
        Extent at which the time starts. [1]
    start : ndarray, shape (n_draws,)
        Extent at which the bath was fresh. [1]
    demand : ndarray, shape (n_draws,)
        Reagent that the whole mineral needs over the usable reagent of the fresh bath. [1]
    wholes : three ndarray, shape (n_draws,)
        Whole time in a bath that stays fresh under layer, reaction and film control. [h]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    extent : ndarray, shape (n_draws,)
        At most `bath_limit`. [1]

    References
    ----------
    .. [1] O. Levenspiel, Chemical Reaction Engineering, 3rd ed., 1999, ch. 25 (from memory).
    """
    hours, begun, start, demand, *three = _together(hours, begun, start, demand, *wholes)
    limit = bath_limit(start, demand)
    first = np.minimum(folds_spent(begun, start, demand), EXHAUSTED)
    last = np.minimum(folds_spent(limit, start, demand), EXHAUSTED)
    span = np.maximum(last - first, 0.0)

    def clock(folds: Array) -> Array:
        extent = extent_at_folds(folds, start, demand)
        parts = bath_clock(extent, folds, start, demand, shape)
        return three[0] * parts[0] + three[1] * parts[1] + three[2] * parts[2]

    origin = clock(first)
    over = (span == 0) | (hours >= clock(last) - origin)
    wanted = np.where(over, 0.0, hours)

    def surplus(share: Array) -> Array:
        since_fresh = np.maximum(clock(first + share * span), 0.0)
        return np.sqrt(since_fresh) - np.sqrt(origin + wanted)  # nearly a straight line

    share = rising_root(surplus, np.zeros_like(span), np.ones_like(span), tolerance=1e-13)
    extent = np.clip(extent_at_folds(first + share * span, start, demand), begun, limit)
    return np.where(over, np.maximum(limit, begun), extent)


def _together(*values: Values) -> list[Array]:
    """All values as arrays of one shape (n_draws,)."""
    return [np.array(a, dtype=float) for a in np.broadcast_arrays(*np.atleast_1d(*values))]


def _above_linear(y: Array) -> Array:
    """Evaluate y − (1 − e^(−y)) without cancellation."""
    small = np.minimum(y, 0.5)
    series = np.zeros_like(small)
    for n in range(_TERMS, 1, -1):
        series = (1 - series) * small / n
    # series = y/2 − y²/6 + …
    return np.where(y < 0.5, small * series, y + np.expm1(-y))


def _by_case(cases: list[tuple[Array, Callable[..., Array]]], *arguments: Array) -> Array:
    """Each draw by the formula that is accurate for it; the last case takes the rest."""
    result = None
    waiting = np.ones(arguments[0].shape, dtype=bool)
    for where, formula in cases:
        chosen = waiting & where
        if chosen.any():
            values = formula(*(a[chosen] for a in arguments))
            if result is None:
                result = np.zeros((*values.shape[:-1], len(waiting)))
            result[..., chosen] = values
        waiting &= ~chosen
    assert result is not None
    return result


def _off_zero(c: Array) -> Array:
    return np.where(np.abs(c) < _TINY, _TINY, c)


# -- cylinder: ∫ dρ/(N(ρ² + c)) and ∫ −4ρ ln ρ dρ/(N(ρ² + c)), c = 1/N − ρ₀² -----------------


def _cylinder_reaction(before: Array, after: Array, folds: Array, n: Array) -> Array:
    """Inverse tangent or its hyperbolic sister, written so that nothing cancels at the join."""
    room = 1 - n * before**2  # N c
    gap, bottom = before - after, room + n * before * after
    with np.errstate(all="ignore"):
        x = gap * np.sqrt(n * np.abs(room)) / bottom
        pole = np.sqrt(np.abs(room) / n)
        short = (before + pole) * np.exp(-folds) / ((after + pole) * bottom)  # 1 − x
        rounding = np.where(room > 0, np.arctan(x) / x, np.log1p(2 * x / short) / 2 / x)
    rounding = np.where(x > 1e-9, rounding, 1.0)
    result: Array = gap / np.maximum(bottom, _TINY) * rounding
    return result


def _cylinder_layer(before: Array, after: Array, folds: Array, n: Array) -> Array:
    c = _off_zero(1 / n - before**2)
    cases = [
        (before**2 < _NEAR * c, _cylinder_far),
        (c > 0, _cylinder_open),
        (np.ones_like(c, dtype=bool), _cylinder_closed),
    ]
    return _by_case(cases, before**2, after**2, c, folds, n)


def _cylinder_far(u0: Array, u1: Array, c: Array, _folds: Array, n: Array) -> Array:
    """Powers of u/c: a bath so large that it is hardly spent."""
    from scipy.special import xlogy

    def part(u: Array) -> Array:
        total = np.zeros_like(u)
        for j in range(_TERMS, 0, -1):
            total = xlogy(u, u) / j - u / j**2 - total * u / c
        return total

    return (part(u1) - part(u0)) / (n * c)


def _cylinder_open(u0: Array, u1: Array, c: Array, _folds: Array, n: Array) -> Array:
    """The bath outlasts the mineral."""
    from scipy.special import spence, xlogy

    def part(u: Array) -> Array:
        result: Array = xlogy(np.log1p(u / c), u) + spence(1 + u / c)
        return result

    return (part(u1) - part(u0)) / n


def _cylinder_closed(u0: Array, u1: Array, c: Array, folds: Array, n: Array) -> Array:
    """The bath is exhausted first: u ends at −c."""
    from scipy.special import spence

    pole = -c
    # ln((u₁ − pole)/(u₀ − pole)) is −folds
    time: Array = (-np.log(pole) * folds - spence(u1 / pole) + spence(u0 / pole)) / n
    return time


# -- sphere: ∫ dρ/(N(ρ³ + c)) and ∫ ρ dρ/(N(ρ³ + c)), c = 1/N − ρ₀³ ----------------------------


def _sphere(before: Array, after: Array, folds: Array, n: Array) -> tuple[Array, Array]:
    c = _off_zero(1 / n - before**3)
    cases = [
        (before**3 < _NEAR * c, _sphere_far),
        (np.abs(c) < _NEAR * after**3, _sphere_near),
        (np.ones_like(c, dtype=bool), _sphere_between),
    ]
    both = _by_case(cases, before, after, c, folds, n)
    return both[0], both[1]


def _sphere_far(r0: Array, r1: Array, c: Array, _folds: Array, n: Array) -> Array:
    """Powers of ρ³/c: a bath so large that it is hardly spent."""
    rows = [
        r0**m * _power_sum(-(r0**3) / c, m) - r1**m * _power_sum(-(r1**3) / c, m) for m in (1, 2)
    ]
    return np.stack(rows) / (n * c)


def _sphere_near(r0: Array, r1: Array, c: Array, _folds: Array, n: Array) -> Array:
    """Powers of c/ρ³: a bath that would be exhausted just when the mineral is gone."""
    rows = [_power_sum(-c / r1**3, m) / r1**m - _power_sum(-c / r0**3, m) / r0**m for m in (2, 1)]
    return np.stack(rows) / n


def _power_sum(ratio: Array, first: int) -> Array:
    """Σ ratio^j/(first + 3j)."""
    total = np.zeros_like(ratio)
    for j in range(_TERMS, -1, -1):
        total = 1 / (first + 3 * j) + ratio * total
    return total


def _sphere_between(r0: Array, r1: Array, c: Array, folds: Array, n: Array) -> Array:
    """Partial fractions; ln of the linear factor comes from the reagent that is left."""
    k = np.cbrt(c)
    gap, q1 = r0 - r1, r1 * r1 - k * r1 + k * k
    logarithm = 1.5 * np.log1p(gap * (r0 + r1 - k) / q1) - folds
    root3 = np.sqrt(3.0) * np.abs(k)
    angle = np.arctan2(2 * root3 * gap, 3 * k * k + (2 * r0 - k) * (2 * r1 - k))
    turned = np.sqrt(3.0) * np.sign(k) * angle
    return np.stack([(turned - logarithm) / (3 * k * k), (turned + logarithm) / (3 * k)]) / n
