"""Probability of ln(remaining) in bins, branch by branch, and how assays reweight it."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.lots.branches import DEAD, Branches
from digestplan.lots.history import LABEL
from digestplan.lots.uncertainty import Result

Array = NDArray[np.float64]

_N_BINS = 400
_COARSE = 100  # bins while it is being found where the probability is
_TAIL = 1e-7  # probability beyond the ends of a grid
_PASSES = 8


@dataclass(frozen=True, slots=True)
class AssayedFraction:
    """What an assay says of a lot.

    Attributes
    ----------
    at
        When the sample was taken, counted from receipt. [h]
    fraction, uncertainty
        Active fraction of the label, and its standard uncertainty. [1]
    degrees_of_freedom
        Effective degrees of freedom of that uncertainty; infinite where it is well known.
    scale
        Whether the assay's error is normal in the fraction (``linear``) or in its logarithm.
    """

    at: float
    fraction: float
    uncertainty: float
    degrees_of_freedom: float = np.inf
    scale: Literal["linear", "log"] = "linear"

    @classmethod
    def of(cls, fraction: Result, at: float) -> "AssayedFraction":
        """The result of an assay, with the degrees of freedom of its uncertainty."""
        return cls(at, fraction.value, fraction.uncertainty, fraction.degrees_of_freedom)

    def __post_init__(self) -> None:
        if not (np.isfinite(self.fraction) and self.uncertainty > 0):
            raise ValueError("An assay needs a finite fraction and an uncertainty above zero.")
        if self.scale == "log" and self.fraction <= 0:
            raise ValueError("On the log scale an assay's fraction must lie above zero.")

    def deviate(self, log_remaining: Array) -> Array:
        """How many standard uncertainties the assay lies above what remained."""
        if self.scale == "log":
            relative = self.uncertainty / self.fraction
            deviate: Array = (np.log(self.fraction) - log_remaining) / relative
        else:
            above = self.fraction - np.exp(np.minimum(log_remaining, 50.0))
            deviate = above / self.uncertainty
        return deviate

    def log_likelihood(self, log_remaining: Array) -> Array:
        """Up to a constant."""
        squared, freedom = self.deviate(log_remaining) ** 2, self.degrees_of_freedom
        log_density: Array = -squared / 2
        if not np.isinf(freedom):
            log_density = -(freedom + 1) / 2 * np.log1p(squared / freedom)
        return log_density

    def chance_below(self, log_remaining: Array) -> Array:
        """Probability that such an assay had come out lower than it did."""
        from scipy.special import ndtr, stdtr

        deviate = self.deviate(log_remaining)
        if np.isinf(self.degrees_of_freedom):
            lower: Array = ndtr(deviate)
        else:
            lower = stdtr(self.degrees_of_freedom, deviate)
        return lower


@dataclass(frozen=True, slots=True, eq=False)
class Remaining:
    """The distribution of the remaining fraction.

    Attributes
    ----------
    log_edges
        Edges of the bins in ln(remaining), shape (n_bins + 1,). [1]
    cumulative
        Probability below each edge, shape (n_bins + 1,). [1]
    """

    log_edges: Array
    cumulative: Array

    def at(self, probability: ArrayLike) -> Array:
        """Remaining fractions at cumulative probabilities, of the same shape."""
        fractions: Array = np.exp(
            np.interp(np.asarray(probability), self.cumulative, self.log_edges)
        )
        return fractions

    def percentile(self, percent: float) -> float:
        """Remaining fraction at one percentile."""
        return float(self.at(percent / 100))

    def chance_above(self, fraction: float) -> float:
        """Probability that more than a fraction remains."""
        if fraction <= 0:
            return 1.0
        return 1 - float(np.interp(np.log(fraction), self.log_edges, self.cumulative))

    @property
    def masses(self) -> Array:
        """Probability of each bin, shape (n_bins,)."""
        return np.diff(self.cumulative)

    @property
    def log_middles(self) -> Array:
        """Middles of the bins in ln(remaining), shape (n_bins,)."""
        return (self.log_edges[1:] + self.log_edges[:-1]) / 2

    @property
    def density(self) -> Array:
        """Probability density of the remaining fraction at the middles, shape (n_bins,)."""
        return self.masses / np.diff(np.exp(self.log_edges))

    @property
    def log_width(self) -> float:
        """Standard deviation of ln(remaining), from the 5th to the 95th percentile."""
        low, high = np.interp([0.05, 0.95], self.cumulative, self.log_edges)
        return float((high - low) / (2 * 1.6448536269514722))


@dataclass(frozen=True, slots=True, eq=False)
class Grid:
    """Branches by bins at the anchor of the branches.

    Attributes
    ----------
    branches
        The branches.
    edges
        Edges of the bins, closer where the probability is, shape (n_bins + 1,).
    masses
        Probabilities, shape (n_branches, n_bins), summing to 1.
    """

    branches: Branches
    edges: Array
    masses: Array
    _below_bins: list[Array] = field(default_factory=list, repr=False)

    def chance_above(self, fraction: float, time: float) -> float:
        """Probability that more than a fraction remains at a time."""
        return 1 - float(self._below(np.array([np.log(fraction)]), time)[0])

    def remaining(self, time: float) -> Remaining:
        """Distribution at a time."""
        if time == self.branches.anchor:
            below = np.concatenate([[0.0], np.cumsum(self.masses.sum(axis=0))])
            return Remaining(self.edges, below / below[-1])
        low, high = (
            DEAD,
            float(np.max(self.branches.carried(self.edges[-1:], self.branches.anchor, time))),
        )
        high = max(high, low + 1.0)
        edges = _laid(low, high, lambda edges: self._below(edges, time))
        below = self._below(edges, time)
        below[0] = below[0] if edges[0] > DEAD else 0.0  # the first bin holds all that is dead
        below = below - below[0]
        return Remaining(edges, below / below[-1])

    def predictive(self, assay: AssayedFraction) -> float:
        """Probability that the assay had come out lower, given all that is in the grid."""
        lower = assay.chance_below(self._at(assay.at))
        return float(np.sum(self.masses * lower))

    def given(self, assay: AssayedFraction) -> "Grid":
        """The same bins, with one assay more."""
        weight = self.masses * _scaled(assay.log_likelihood(self._at(assay.at)), self.masses)
        return Grid(self.branches, self.edges, weight / weight.sum())

    def _at(self, time: float) -> Array:
        return self.branches.carried(_middles(self.edges), self.branches.anchor, time)

    def _below(self, x: Array, time: float) -> Array:
        at_anchor = self.branches.carried(x, time, self.branches.anchor)
        n = self.masses.shape[1]
        whole = np.clip(np.searchsorted(self.edges, at_anchor, side="right") - 1, 0, n - 1)
        share = (at_anchor - self.edges[whole]) / (self.edges[whole + 1] - self.edges[whole])
        rows = np.arange(len(self.masses))[:, None]
        if not self._below_bins:
            self._below_bins.append(np.cumsum(self.masses, axis=1) - self.masses)
        below = (
            self._below_bins[0][rows, whole] + np.clip(share, 0.0, 1.0) * self.masses[rows, whole]
        )
        total: Array = below.sum(axis=0)
        return total


def grid(
    branches: Branches,
    assays: Sequence[AssayedFraction] = (),
    *,
    flat: bool = False,
) -> Grid:
    """
    Lay bins where the probability is, and fill them.

    Parameters
    ----------
    branches
        The branches.
    assays
        What has been measured.
    flat
        Take every fraction at the anchor as equally likely beforehand, whatever the history.

    Returns
    -------
    grid
        Probabilities by branch and bin.
    """
    low, high = _range(branches, assays if flat else ())

    def below(edges: Array) -> Array:
        masses = _filled(branches, edges, assays, flat=flat)
        return np.concatenate([[0.0], np.cumsum(masses.sum(axis=0))])

    edges = _laid(low, high, below)
    masses = _filled(branches, edges, assays, flat=flat)
    return Grid(branches, edges, masses)


# -- the parts ----------------------------------------------------------------------------


def _middles(edges: Array) -> Array:
    middles: Array = (edges[1:] + edges[:-1]) / 2
    return middles


def _scaled(log_likelihood: Array, masses: Array) -> Array:
    """Likelihood over its greatest value where there is any probability."""
    per_branch = len(log_likelihood) > 1
    possible: NDArray[np.bool_] = (masses if per_branch else masses.sum(0, keepdims=True)) > 0
    return np.exp(np.minimum(log_likelihood - np.max(log_likelihood[possible]), 0.0))


def _filled(
    branches: Branches,
    edges: Array,
    assays: Sequence[AssayedFraction],
    *,
    flat: bool,
) -> Array:
    masses = _prior(branches, edges, flat=flat)
    if assays:
        x = _middles(edges)
        log_likelihood = np.zeros((1, 1))
        for assay in assays:
            log_likelihood = log_likelihood + assay.log_likelihood(
                branches.carried(x, branches.anchor, assay.at)
            )
        masses = masses * _scaled(log_likelihood, masses)
    whole: Array = masses / masses.sum()
    return whole


def _prior(branches: Branches, edges: Array, *, flat: bool) -> Array:
    if flat:
        return branches.weights[:, None] * np.diff(np.exp(edges))
    bounds = edges.copy()
    if bounds[0] <= DEAD:
        bounds[0] = -np.inf  # the first bin holds all that is as good as dead
    return branches.weights[:, None] * np.diff(branches.below(bounds, branches.anchor), axis=1)


def _range(branches: Branches, assays: Sequence[AssayedFraction]) -> tuple[float, float]:
    """Where the probability can be at all, from what is wide enough to be sure of it."""
    if assays:
        top = max(a.fraction + 10 * a.uncertainty for a in assays)
        return DEAD, max(float(np.log(max(top, 1e-6))) + 1.0, DEAD + 1.0)
    offset, factor = branches.terms(branches.anchor)
    reach = 7.0 * branches.scale
    if branches.kernel == LABEL:
        low, high = offset.min() - reach, offset.max() + reach
    else:
        low, high = np.min(offset - factor * np.exp(reach)), offset.max()
    return max(float(low), DEAD), max(float(high), DEAD + 1.0)


def _laid(low: float, high: float, below: Callable[[Array], Array]) -> Array:
    """Edges for bins: first over the range that holds the probability, then closer at its peak."""
    for _ in range(_PASSES):
        edges = np.linspace(low, high, _COARSE + 1)
        cumulative = below(edges)
        used = _used(edges, cumulative)
        if used[1] - used[0] > (high - low) / 2:
            break
        low, high = used
    for n_bins in (_COARSE, _N_BINS):
        share = (cumulative - cumulative[0]) / (cumulative[-1] - cumulative[0])
        evenly = (edges - low) / (high - low)
        edges = np.interp(np.linspace(0, 2, n_bins + 1), share + evenly, edges)
        if n_bins == _COARSE:
            cumulative = below(edges)
    return edges


def _used(edges: Array, below: Array) -> tuple[float, float]:
    """Ends of the part of a grid that holds the probability, a bin wider on either side."""
    total = below[-1]
    first = int(np.searchsorted(below, _TAIL * total, side="right")) - 2
    last = int(np.searchsorted(below, (1 - _TAIL) * total, side="left")) + 1
    return float(edges[max(first, 0)]), float(edges[min(last, len(edges) - 1)])
