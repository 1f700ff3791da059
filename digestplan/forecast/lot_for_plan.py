"""Is a lot still good enough for a plan: what the plan needs of it, and what that asks for."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from datetime import date, datetime, timedelta
from functools import cache

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.draws import Draws
from digestplan.forecast.passage import Passage
from digestplan.forecast.run import DRAWS, SEED, prepare
from digestplan.forecast.steps.base import Job
from digestplan.forecast.window import quantile
from digestplan.kinetics.roots import rising_root
from digestplan.lots.check import began, check_lot
from digestplan.lots.from_library import kinetics_of, label_log_sd
from digestplan.lots.posterior import AssayWorth, LotPosterior
from digestplan.lots.register.stock import LotRecord
from digestplan.lots.storage import Form, StorageKinetics
from digestplan.plan.model import Digest, Plan
from digestplan.quantities import Quantity

Array = NDArray[np.float64]

CONFIDENCE = 0.9  # where no plan says how sure "enough" must be
_FARTHEST = 7.0  # how far from the label, as a logarithm, a needed fraction is looked for
_TOLERANCE = 1e-4  # of the needed fraction, relative
_FEW, _APART = 250, 0.02  # draws that tell roughly where it is, and how far off that may be


@dataclass(frozen=True, slots=True, eq=False)
class LotCheck:
    """What is left of a lot, and whether that is enough.

    Attributes
    ----------
    record
        The lot, as the register had it at ``at``.
    at
        The time that is asked about (local wall clock).
    posterior
        What is left of the label, from history, assays and both.
    plan
        The plan that it is to serve, with this lot's label; None where none was named.
    confidence
        How sure "enough" must be. [1]
    needed_fraction
        Fraction of the label that must be left: None where no plan asks for one or it counts in
        active enzyme, infinite where none would do. [1]
    chance_enough
        Chance that so much is left; None without a needed fraction. [1]
    use_by
        Last day on which that chance is at least the confidence; None without a needed fraction,
        where it is not met now, or where it lasts for ten years.
    lasts
        Whether it lasts for ten years.
    charge_factor
        How many times the planned mass to weigh in; infinite where nothing helps. [1]
    worth
        What one more assay would do.
    """

    record: LotRecord
    at: datetime
    posterior: LotPosterior
    plan: Plan | None
    confidence: float
    needed_fraction: float | None
    chance_enough: float | None
    use_by: date | None
    lasts: bool
    charge_factor: float
    worth: AssayWorth


def check_for_plan(
    record: LotRecord,
    at: datetime,
    plan: Plan | None = None,
    *,
    needed_fraction: float | None = None,
    kinetics: Mapping[Form, StorageKinetics] | None = None,
    n_draws: int = DRAWS,
    seed: int = SEED,
) -> LotCheck:
    """
    Check a lot, for a plan or by itself.

    Parameters
    ----------
    record
        The lot, from the register.
    at
        The time that is asked about (local wall clock).
    plan
        The plan that it is to serve, if any.
    needed_fraction
        What must be left of the label, where no plan is to say it. [1]
    kinetics
        How each form of the enzyme dies, where the lot's own data say it; the library's if None.
    n_draws, seed
        Of the plan's forecasts.

    Returns
    -------
    check
        What is left and what follows from it.
    """
    posterior = check_lot(
        record,
        kinetics or kinetics_of(record.received.enzyme),
        at,
        log_label_sd=label_log_sd(record.summary.label_activity),
    )
    confidence = CONFIDENCE if plan is None else plan.confidence
    needed = needed_fraction
    if plan is not None and needed is None:
        needed = fraction_needed(plan, n_draws, seed)
    possible = None if needed is None or np.isinf(needed) else needed
    until = np.nan if possible is None else posterior.use_by(possible, confidence)
    return LotCheck(
        record,
        at,
        posterior,
        plan,
        confidence,
        needed,
        None if needed is None else _chance(posterior, needed),
        _last_day(record, posterior, until),
        bool(np.isinf(until)),
        _charge_factor(posterior, needed, confidence),
        posterior.another_assay(needed_fraction=possible, confidence=confidence),
    )


def fraction_needed(plan: Plan, n_draws: int = DRAWS, seed: int = SEED) -> float | None:
    """
    Return the smallest remaining fraction with which a plan still reaches its target in time.

    Parameters
    ----------
    plan
        The plan, with the label activity of the lot; what it says of ``remaining`` is set aside.
    n_draws, seed
        Of the forecasts behind it: the same for all fractions, so that more is never worse.

    Returns
    -------
    fraction
        Of the label, to 1 in 10,000; above 1 where not even a fresh lot would do. Infinite where
        no fraction does; None where the plan does not count on the label. [1]

    Notes
    -----
    In time means: with the plan's confidence the target is reached before the last visit ends, or
    without visits before the last step does.
    """
    if not counts_on_label(plan):
        return None
    by = deadline(plan)
    few = min(n_draws, _FEW)
    tolerance = _TOLERANCE if few == n_draws else _APART / 4
    near = _smallest(_spare_hours(plan, by, few, seed), 0.0, np.log(2.0), tolerance)
    if few < n_draws and np.isfinite(near):
        near = _smallest(_spare_hours(plan, by, n_draws, seed), near, _APART, _TOLERANCE)
    return float(np.exp(near))


def counts_on_label(plan: Plan) -> bool:
    """Whether a plan charges by mass or by the label's units, so that what is left of it counts."""
    steps = [step for step in plan.steps if isinstance(step, Digest)]
    return any(step.charge_as != "ratio" or step.additions for step in steps)


def deadline(plan: Plan) -> float:
    """Hours from a plan's start until the end of its last visit, or else of its last step."""
    if plan.start is not None and plan.visits:
        return (max(visit.end for visit in plan.visits) - plan.start) / timedelta(hours=1)
    last = Passage(_job(plan, 1.0, 1, SEED)).parts[-1]
    return last.start + last.hours


# -- the parts ------------------------------------------------------------------------------


def _spare_hours(plan: Plan, by: float, n_draws: int, seed: int) -> Callable[[float], float]:
    """Hours to spare before the deadline, against the logarithm of the remaining fraction."""
    job = _job(plan, 1.0, n_draws, seed)

    @cache
    def spare(log_fraction: float) -> float:
        changed = _with_remaining(plan, float(np.exp(log_fraction)))
        opens = quantile(Passage(replace(job, plan=changed)).ready, plan.confidence)
        return -np.inf if opens is None else by - opens

    return spare


def _job(plan: Plan, fraction: float, n_draws: int, seed: int) -> Job:
    plan = _with_remaining(plan, fraction)
    return prepare(plan, Draws(plan, n_draws, seed))


def _with_remaining(plan: Plan, fraction: float) -> Plan:
    remaining = replace(plan.lot.remaining, quantity=Quantity(fraction))
    return replace(plan, lot=replace(plan.lot, remaining=remaining))


def _smallest(
    spare: Callable[[float], float], start: float, step: float, tolerance: float
) -> float:
    """Smallest logarithm of a fraction with hours to spare, looked for from a start in steps."""
    low = high = start
    if spare(start) >= 0:
        while spare(low) >= 0 and low > -_FARTHEST:
            high, low = low, low - step
            step *= 2
    else:
        while spare(high) < 0:
            if high > _FARTHEST:
                return np.inf
            low, high = high, high + step
            step *= 2
    if spare(low) >= 0:
        return low

    def rising(share: Array) -> Array:
        return np.array([spare(float(low + (s - 1) * (high - low))) for s in share])

    share = rising_root(rising, np.array([1.0]), np.array([2.0]), tolerance / (2 * (high - low)))
    return float(low + (share[0] - 1) * (high - low))


def _chance(posterior: LotPosterior, needed: float) -> float:
    return 0.0 if np.isinf(needed) else posterior.chance_enough(needed)


def _last_day(record: LotRecord, posterior: LotPosterior, until: float) -> date | None:
    if not posterior.now < until < np.inf:
        return None
    return (began(record) + timedelta(hours=until)).date()


def _charge_factor(posterior: LotPosterior, needed: float | None, confidence: float) -> float:
    if needed is None:
        return posterior.charge_factor()
    if np.isinf(needed):
        return np.inf
    return posterior.charge_factor(needed, confidence)
