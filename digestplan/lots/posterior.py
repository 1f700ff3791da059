"""How much of the label is left, from a lot's history and its assays together."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import date, datetime, timedelta

import numpy as np
from numpy.typing import NDArray

from digestplan.lots.branches import branches
from digestplan.lots.grid import AssayedFraction, Grid, Remaining, grid
from digestplan.lots.history import History, Stretch

Array = NDArray[np.float64]

CONTRADICTS = 0.01  # two-sided tail below which history and assay do not fit together
_HORIZON = 10 * 365.25 * 24  # how far ahead a use-by date is looked for [h]


@dataclass(frozen=True, slots=True)
class AssayWorth:
    """What one more assay would do.

    Attributes
    ----------
    narrowing
        Expected share by which the 90 % interval of the remaining fraction would shrink.
    chance_decides
        Chance that afterwards the lot is clearly enough or clearly not; None where no needed
        fraction was given.
    decided_now
        Whether that is clear already; None likewise.
    worth_it
        Undecided now, and more likely than not decided afterwards; without a needed fraction,
        an interval expected to shrink by a third or more.
    """

    narrowing: float
    chance_decides: float | None
    decided_now: bool | None
    worth_it: bool


@dataclass(frozen=True, slots=True, eq=False)
class LotPosterior:
    """What is known of a lot now.

    Attributes
    ----------
    now
        Counted from receipt. [h]
    remaining
        History and assays together.
    from_history, from_assays
        Either alone; the assays are carried on to now by the storage since. None without assays.
    history_share, assay_share
        Share of the information, as precision of ln(remaining), that each contributed.
    surprise
        For each assay in the order of time, the probability that history and earlier assays
        gave to an outcome so far off or farther.
    contradicted
        Whether any of them lies below 1 %: then the two do not fit together, and the joint
        result is not to be relied on before the reason is known.
    below_freezing
        Whether the lot was stored below 0 °C, where an Arrhenius line bends.
    exact
        Whether the other uncertain values were integrated by a product rule; else by draws.
    """

    now: float
    remaining: Remaining
    from_history: Remaining
    from_assays: Remaining | None
    history_share: float
    assay_share: float
    surprise: tuple[float, ...]
    contradicted: bool
    below_freezing: bool
    exact: bool
    _grid: Grid
    _horizon: float

    def chance_enough(self, needed_fraction: float, at: float | None = None) -> float:
        """Probability that at least the needed fraction remains, now or at a later time [h]."""
        if at is None or at == self.now:
            return self.remaining.chance_above(needed_fraction)
        return self._grid.chance_above(needed_fraction, at)

    def use_by(self, needed_fraction: float, confidence: float = 0.9) -> float:
        """
        Return until when the lot is enough with the asked confidence.

        Parameters
        ----------
        needed_fraction
            Fraction of the label that the plan needs. [1]
        confidence
            One-sided. [1]

        Returns
        -------
        hours
            Counted from receipt; now where it is not enough already, infinite where it still is
            after ten years of the planned storage. [h]
        """
        low, high = self.now, self._horizon
        if self.chance_enough(needed_fraction) < confidence:
            return self.now
        if self.chance_enough(needed_fraction, high) >= confidence:
            return np.inf
        while high - low > max(1e-4 * (high - self.now), 0.05):
            middle = (low + high) / 2
            if self.chance_enough(needed_fraction, middle) >= confidence:
                low = middle
            else:
                high = middle
        return low

    def use_by_date(
        self, needed_fraction: float, received: datetime, confidence: float = 0.9
    ) -> date | None:
        """Last whole day of `use_by`; None where it is not enough now or lasts for ten years."""
        hours = self.use_by(needed_fraction, confidence)
        if not self.now < hours < np.inf:
            return None
        return (received + timedelta(hours=hours)).date()

    def charge_factor(self, needed_fraction: float = 1.0, confidence: float | None = None) -> float:
        """
        Return how many times the planned mass to weigh in.

        Parameters
        ----------
        needed_fraction
            Fraction of the label that the planned mass counts on. [1]
        confidence
            How sure the activity must be there; by the median if None. [1]

        Returns
        -------
        factor
            Never less than 1; infinite where nothing is left. [1]
        """
        left = float(self.remaining.at(0.5 if confidence is None else 1 - confidence))
        return max(needed_fraction / left, 1.0) if left > 1e-5 else np.inf

    def another_assay(
        self,
        relative_uncertainty: float = 0.05,
        needed_fraction: float | None = None,
        confidence: float = 0.9,
    ) -> AssayWorth:
        """
        Return what one more assay now may be expected to do.

        Parameters
        ----------
        relative_uncertainty
            Standard uncertainty of the assay over its result. [1]
        needed_fraction
            Fraction of the label that the plan needs, if known. [1]
        confidence
            When "enough" or "not enough" counts as decided. [1]

        Returns
        -------
        worth
            Expected narrowing, chance of a decision, and whether it is worth it.
        """
        after, outcomes = _after_assay(self.remaining, relative_uncertainty)
        edges = np.exp(self.remaining.log_edges)
        widths = [np.ptp(np.interp([0.05, 0.95], below, edges)) for below in after]
        width = self.remaining.percentile(95) - self.remaining.percentile(5)
        narrowing = 1 - float(outcomes @ widths) / width
        if needed_fraction is None:
            return AssayWorth(narrowing, None, None, narrowing >= 1 / 3)
        need = np.log(needed_fraction)
        chances = np.array([1 - np.interp(need, self.remaining.log_edges, b) for b in after])
        decides = float(outcomes @ (np.abs(chances - 0.5) >= confidence - 0.5))
        now = abs(self.chance_enough(needed_fraction) - 0.5) >= confidence - 0.5
        return AssayWorth(narrowing, decides, now, not now and decides > 0.5)


def posterior(
    history: History,
    assays: Sequence[AssayedFraction],
    now: float,
    *,
    planned: Stretch | None = None,
    n_draws: int = 2048,
    seed: int = 0,
) -> LotPosterior:
    """
    Bring history and assays together.

    Parameters
    ----------
    history
        What the lot has been through until now.
    assays
        What has been measured; errors of different assays count as independent.
    now
        Counted from receipt. [h]
    planned
        Storage from now on, its start and hours aside; that of the last stretch if None.
    n_draws, seed
        For histories with more uncertain values than a product rule can hold.

    Returns
    -------
    posterior
        Distributions, shares, contradictions and answers.
    """
    assays = sorted(assays, key=lambda a: a.at)
    if assays and assays[-1].at > now:
        raise ValueError("An assay lies in the future.")
    horizon = now + _HORIZON
    whole = _with_plan(history, now, planned)
    times = (now, horizon, *(a.at for a in assays))
    nodes = branches(
        whole,
        (assays[-1].at, now) if assays else (now,),
        times,
        widths=_widths(assays),
        n_draws=n_draws,
        seed=seed,
    )
    before = grid(nodes)
    joint = grid(nodes, assays) if assays else before
    from_history = before.remaining(now)
    if nodes.anchor != now:
        from_history = grid(branches(whole, (now,), n_draws=n_draws, seed=seed)).remaining(now)
    from_assays = _assays_alone(whole, assays, now, n_draws, seed) if assays else None
    surprise = _surprises(before, assays)
    shares = _shares(from_history, from_assays)
    return LotPosterior(
        now,
        joint.remaining(now),
        from_history,
        from_assays,
        *shares,
        surprise,
        any(p < CONTRADICTS for p in surprise),
        history.frozen(now),
        nodes.exact,
        joint,
        horizon,
    )


# -- the parts ----------------------------------------------------------------------------


def _with_plan(history: History, now: float, planned: Stretch | None) -> History:
    """The history until now, and ten years of the planned storage."""
    past = tuple(
        replace(s, hours=min(s.hours, now - s.start)) for s in history.stretches if s.start < now
    )
    last = max(past, key=lambda s: s.start + s.hours, default=None)
    if last is not None and last.start + last.hours < now:  # it is still where it was
        past += (replace(last, start=last.start + last.hours, hours=now - last.start - last.hours),)
    ahead = planned or last
    past_only = replace(
        history,
        stretches=past,
        thaws=tuple(t for t in history.thaws if t.at <= now),
        openings=tuple(o for o in history.openings if o.at <= now),
    )
    if ahead is None:
        return past_only
    return past_only.and_then(replace(ahead, start=now, hours=_HORIZON))


def _assays_alone(
    history: History, assays: Sequence[AssayedFraction], now: float, n_draws: int, seed: int
) -> Remaining:
    """All fractions equally likely beforehand; only what was stored since an assay counts."""
    nodes = branches(
        history,
        (assays[-1].at,),
        (now, *(a.at for a in assays)),
        widths=_widths(assays),
        flat=True,
        n_draws=n_draws,
        seed=seed,
    )
    return grid(nodes, assays, flat=True).remaining(now)


def _widths(assays: Sequence[AssayedFraction]) -> dict[float, float]:
    """How sharply each assay tells ln(remaining), by its time."""
    return {a.at: a.uncertainty / max(abs(a.fraction), a.uncertainty) for a in assays}


def _surprises(before: Grid, assays: Sequence[AssayedFraction]) -> tuple[float, ...]:
    """Two-sided tail of each assay under history and earlier assays."""
    tails = []
    for assay in assays:
        lower = before.predictive(assay)
        tails.append(2 * min(lower, 1 - lower))
        before = before.given(assay)
    return tuple(tails)


def _shares(from_history: Remaining, from_assays: Remaining | None) -> tuple[float, float]:
    if from_assays is None:
        return 1.0, 0.0
    history, assays = from_history.log_width**-2, from_assays.log_width**-2
    return history / (history + assays), assays / (history + assays)


def _after_assay(remaining: Remaining, relative: float) -> tuple[Array, Array]:
    """Cumulative distributions after each possible outcome, and the outcomes' probabilities."""
    true = remaining.at((np.arange(24) + 0.5) / 24)
    errors, chances = np.polynomial.hermite_e.hermegauss(9)
    outcomes = (true[:, None] * (1 + relative * errors)).ravel()
    weights = np.tile(chances / chances.sum() / 24, 24)
    r = np.exp(remaining.log_middles)
    spread = relative * np.maximum(r, 1e-6)
    deviates = (outcomes[:, None] - r) / spread
    log_likelihood = -(deviates**2) / 2 - np.log(spread)
    likelihood = np.exp(log_likelihood - log_likelihood.max(axis=1, keepdims=True))
    below = np.cumsum(remaining.masses * likelihood, axis=1)
    below = np.concatenate([np.zeros((len(below), 1)), below / below[:, -1:]], axis=1)
    return below, weights
