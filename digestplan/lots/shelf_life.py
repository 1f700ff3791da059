"""How long a lot keeps, from stability data: the time at which the mean may meet the limit.

The rule is that of ICH Q1E: the shelf life is the earliest time at which the one-sided 95 %
confidence limit of the mean meets the acceptance limit (90 % of the label), and batches are
pooled only where slopes and intercepts do not differ at a level of 0.25. Times come out in the
unit in which they went in.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.kinetics.linear import Fit, fit_line, fit_linear, student_quantile

Array = NDArray[np.float64]
Scale = Literal["linear", "log"]
Decision = Literal["one line", "common slope", "separate lines"]


@dataclass(frozen=True, slots=True, eq=False)
class ShelfLife:
    """The shelf life that one line gives.

    Attributes
    ----------
    time
        When the lower confidence limit of the mean meets the limit; infinite if it never does.
    mean_time
        When the mean itself meets it.
    intercept, slope
        The line; on the log scale, of ln(percent/100).
    covariance
        Of intercept and slope, shape (2, 2).
    degrees_of_freedom
        Those of the residuals.
    extrapolated
        Whether the shelf life lies beyond the last measurement.
    """

    time: float
    mean_time: float
    intercept: float
    slope: float
    covariance: Array
    degrees_of_freedom: int
    extrapolated: bool


@dataclass(frozen=True, slots=True)
class Poolability:
    """Whether batches may share a line, by analysis of covariance.

    Attributes
    ----------
    slopes_f, slopes_p
        Test of equal slopes.
    intercepts_f, intercepts_p
        Test of equal intercepts given a common slope, against the error of that model.
    decision
        ``one line``, ``common slope`` or ``separate lines``.
    """

    slopes_f: float
    slopes_p: float
    intercepts_f: float
    intercepts_p: float
    decision: Decision


@dataclass(frozen=True, slots=True)
class BatchShelfLife:
    """The shelf life of several batches: that of the shortest, or of all pooled.

    Attributes
    ----------
    time
        The shelf life.
    deciding
        The batch that sets it, or None where one line stands for all.
    batches
        Each batch's own shelf life under the decision taken.
    poolability
        The tests behind that decision.
    """

    time: float
    deciding: str | None
    batches: dict[str, ShelfLife]
    poolability: Poolability


def shelf_life(
    time: ArrayLike,
    percent: ArrayLike,
    *,
    limit: float = 90.0,
    scale: Scale = "linear",
    confidence: float = 0.95,
) -> ShelfLife:
    """
    Shelf life from the measurements of one batch, or of batches that are pooled [1]_.

    Parameters
    ----------
    time : array_like, shape (n_points,)
        Age at each measurement. [h, or any unit of time]
    percent : array_like, shape (n_points,)
        Activity as a percentage of the label. [%]
    limit : float
        The acceptance limit. [%]
    scale : {"linear", "log"}
        A straight line in the percentage (zero order) or in its logarithm (first order). [name]
    confidence : float
        One-sided confidence of the limit of the mean. [1]

    Returns
    -------
    shelf_life : ShelfLife
        The time and the line behind it. [as time]

    References
    ----------
    .. [1] ICH Q1E, Evaluation for Stability Data, 2003 (from memory).
    """
    time = np.asarray(time, dtype=float)
    line = fit_line(time, _scaled(np.asarray(percent, dtype=float), scale))
    return _life(line, (0, 1), time, _scaled(np.array(limit), scale), confidence)


def poolability(
    batch: Sequence[str],
    time: ArrayLike,
    percent: ArrayLike,
    *,
    scale: Scale = "linear",
    level: float = 0.25,
) -> Poolability:
    """
    Test whether batches may share a slope, and then an intercept [1]_.

    Parameters
    ----------
    batch : sequence of str, shape (n_points,)
        The batch of each measurement. [name]
    time : array_like, shape (n_points,)
        Age at each measurement. [h, or any unit of time]
    percent : array_like, shape (n_points,)
        Activity as a percentage of the label. [%]
    scale : {"linear", "log"}
        As for `shelf_life`. [name]
    level : float
        Batches differ where the p-value falls below it. [1]

    Returns
    -------
    poolability : Poolability
        Both tests and the decision. [1]

    References
    ----------
    .. [1] ICH Q1E, Evaluation for Stability Data, 2003, appendix B.2 (from memory).
    """
    x, y = np.asarray(time, dtype=float), _scaled(np.asarray(percent, dtype=float), scale)
    own = _indicators(batch)
    apart = fit_linear(np.hstack([own, own * x[:, None]]), y)
    parallel = fit_linear(np.column_stack([own, x]), y)
    slopes_f, slopes_p = _f_test(parallel, apart)
    intercepts_f, intercepts_p = _f_test(fit_line(x, y), parallel)
    decision: Decision = "one line"
    if slopes_p < level:
        decision = "separate lines"
    elif intercepts_p < level:
        decision = "common slope"
    return Poolability(slopes_f, slopes_p, intercepts_f, intercepts_p, decision)


def shelf_life_of_batches(
    batch: Sequence[str],
    time: ArrayLike,
    percent: ArrayLike,
    *,
    limit: float = 90.0,
    scale: Scale = "linear",
    confidence: float = 0.95,
) -> BatchShelfLife:
    """
    Shelf life of several batches: pooled where they may be, else that of the shortest [1]_.

    Parameters
    ----------
    batch : sequence of str, shape (n_points,)
        The batch of each measurement. [name]
    time : array_like, shape (n_points,)
        Age at each measurement. [h, or any unit of time]
    percent : array_like, shape (n_points,)
        Activity as a percentage of the label. [%]
    limit : float
        The acceptance limit. [%]
    scale : {"linear", "log"}
        As for `shelf_life`. [name]
    confidence : float
        One-sided confidence of the limit of the mean. [1]

    Returns
    -------
    shelf_life : BatchShelfLife
        The time, the batch that decides, and every batch's own. [as time]

    References
    ----------
    .. [1] ICH Q1E, Evaluation for Stability Data, 2003 (from memory).
    """
    x, y = np.asarray(time, dtype=float), np.asarray(percent, dtype=float)
    names = np.asarray(batch)
    tests = poolability(batch, x, y, scale=scale)
    if tests.decision == "common slope":
        own = _indicators(batch)
        fit = fit_linear(np.column_stack([own, x]), _scaled(y, scale))
        goal = _scaled(np.array(limit), scale)
        lives = {
            str(name): _life(fit, (k, own.shape[1]), x[names == name], goal, confidence)
            for k, name in enumerate(np.unique(names))
        }
    else:
        pooled = tests.decision == "one line"
        lives = {
            str(name): shelf_life(
                x[pooled | (names == name)],
                y[pooled | (names == name)],
                limit=limit,
                scale=scale,
                confidence=confidence,
            )
            for name in np.unique(names)
        }
    shortest = min(lives, key=lambda name: lives[name].time)
    deciding = None if tests.decision == "one line" else shortest
    return BatchShelfLife(lives[shortest].time, deciding, lives, tests)


# -- the parts ----------------------------------------------------------------------------


def _scaled(percent: Array, scale: Scale) -> Array:
    if scale == "linear":
        return percent
    if np.any(percent <= 0):
        raise ValueError("The log scale needs percentages above zero.")
    return np.log(percent / 100)


def _indicators(batch: Sequence[str]) -> Array:
    names = np.asarray(batch)
    columns: Array = (names[:, None] == np.unique(names)).astype(float)
    return columns


def _f_test(simple: Fit, rich: Fit) -> tuple[float, float]:
    """F and its p-value for what the richer of two nested models explains more."""
    from scipy.special import fdtrc

    rest = rich.residual_sd**2 * rich.degrees_of_freedom
    extra = simple.degrees_of_freedom - rich.degrees_of_freedom
    if extra == 0:
        return 0.0, 1.0
    gained = simple.residual_sd**2 * simple.degrees_of_freedom - rest
    f = gained / extra / rich.residual_sd**2
    return float(f), float(fdtrc(extra, rich.degrees_of_freedom, f))


def _life(
    fit: Fit, where: tuple[int, int], time: Array, goal: Array, confidence: float
) -> ShelfLife:
    """Shelf life of the line whose intercept and slope stand at two places of a fit."""
    estimates, covariance = fit.estimates[list(where)], fit.covariance[np.ix_(where, where)]
    quantile = student_quantile(confidence, fit.degrees_of_freedom)
    above = float(estimates[0] - goal)
    meets = _first_meeting(above, float(estimates[1]), covariance * quantile**2)
    return ShelfLife(
        meets,
        0.0 if above <= 0 else float(-above / estimates[1]) if estimates[1] < 0 else np.inf,
        float(estimates[0]),
        float(estimates[1]),
        covariance,
        fit.degrees_of_freedom,
        bool(meets > np.max(time)),
    )


def _first_meeting(above: float, slope: float, v: Array) -> float:
    """First x ≥ 0 at which above + slope·x − √(v00 + 2 v01 x + v11 x²) is no longer positive."""
    if above <= np.sqrt(v[0, 0]):
        return 0.0
    a = slope**2 - v[1, 1]
    b = above * slope - v[0, 1]
    c = above**2 - v[0, 0]  # positive here
    root = np.sqrt(max(b * b - a * c, 0.0))
    # Both roots without cancellation; the squared equation also meets the upper limit's branch.
    q = -(b + np.copysign(root, b))
    candidates = [x for x in (q / a if a else np.inf, c / q if q else np.inf) if x > 0]
    on_branch = [x for x in candidates if np.isfinite(x) and above + slope * x >= 0]
    return float(min(on_branch, default=np.inf))
