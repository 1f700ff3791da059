"""The scalar grid: ln(remaining) over bins, for every branch of what else is uncertain.

A branch fixes all uncertain values of a history but one, the *kernel*, which is the one that
matters most. Along a branch ln(remaining) rises or falls with the kernel alone, so that its
probability in a bin is a difference of two normal probabilities: no sampling noise. Branches are
the nodes of a product rule, or evenly spread draws where there are too many dimensions.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.lattice import even_deviates
from digestplan.lots.history import (
    LABEL,
    Dimension,
    History,
    dimensions,
    log_remaining,
    losses,
)

Array = NDArray[np.float64]

DEAD = -14.0  # ln(remaining) below which nothing is told apart
_FLOOR = 1e-3  # narrowest kernel, on its logarithmic scale
_FAR = 5.0  # standard deviations that a product rule reaches
_MOST = 3000  # branches of a product rule before draws take over
_NEGLIGIBLE = 1e-4  # effect relative to the kernel's that needs no branch of its own
_LIGHT = 1e-9  # branches lighter than this, relative to the heaviest, are left out


@dataclass(frozen=True, slots=True, eq=False)
class Branches:
    """All but one of the uncertain values of a history, at nodes.

    Attributes
    ----------
    history
        The history.
    anchor
        The time at which ln(remaining) is laid out in bins. [h]
    kernel
        The dimension along which each branch is followed.
    scale
        Standard deviation of the kernel on its own (logarithmic) scale.
    deviates
        Deviates of the other dimensions, each of shape (n_branches,).
    weights
        Shape (n_branches,), summing to 1.
    exact
        Whether the nodes are a product rule rather than draws.
    """

    history: History
    anchor: float
    kernel: Dimension
    scale: float
    deviates: Mapping[Dimension, Array]
    weights: Array
    exact: bool
    _terms: dict[float, tuple[Array, Array]] = field(default_factory=dict, repr=False)

    def terms(self, time: float) -> tuple[Array, Array]:
        """
        Return what does not depend on the kernel at a time, and the factor of what does.

        ln(remaining) is ``offset + kernel`` where the label is the kernel, else
        ``offset - factor * exp(kernel)``. Both have shape (n_branches, 1).
        """
        if time not in self._terms:
            taken = losses(self.history, self.deviates, time, len(self.weights))
            factor = np.zeros(len(self.weights))
            if self.kernel != LABEL:
                factor = taken.pop(self.kernel, factor)
            offset = -np.sum(list(taken.values()), axis=0)
            self._terms[time] = offset[:, None], factor[:, None]
        return self._terms[time]

    def below(self, x: Array, time: float) -> Array:
        """Probability along each branch that ln(remaining) lies below x at a time."""
        from scipy.special import ndtr

        offset, factor = self.terms(time)
        if self.kernel == LABEL:
            probability: Array = ndtr((x - offset) / self.scale)
            return probability
        left = offset - x
        with np.errstate(divide="ignore", invalid="ignore"):
            deviate = -np.log(np.maximum(left, 0.0) / factor) / self.scale
        return np.where(left > 0, ndtr(np.where(left > 0, deviate, 0.0)), 1.0)

    def carried(self, x: Array, from_time: float, to_time: float) -> Array:
        """
        Carry ln(remaining) from one time to another along each branch.

        Shape (n_branches, n_x); (1, n_x) where the times are the same and so are all branches.
        """
        if from_time == to_time:
            return x[None, :]
        offset, factor = self.terms(from_time)
        later, later_factor = self.terms(to_time)
        if self.kernel == LABEL:
            return x - offset + later
        with np.errstate(divide="ignore", invalid="ignore"):
            moved: Array = later - (offset - x) * (later_factor / factor)
        return np.where(factor > 0, moved, np.where(x < offset, -np.inf, np.inf))


def branches(
    history: History,
    anchors: Sequence[float],
    times: Sequence[float] = (),
    *,
    widths: Mapping[float, float] | None = None,
    flat: bool = False,
    n_draws: int = 2048,
    seed: int = 0,
) -> Branches:
    """
    Choose the time of the grid, the kernel and the nodes for a history.

    Parameters
    ----------
    history
        The history, with the planned storage if later times are asked for.
    anchors
        Times whose ln(remaining) the grid may be in: the first by which a loss has grown enough
        to be followed; else the first, following the label. [h]
    times
        Other times at which it will be asked for. [h]
    widths
        How sharply ln(remaining) was measured, by time of the assay: nodes must resolve that.
    flat
        Follow the label, with nothing known of it beforehand.
    n_draws, seed
        For the draws that take over where a product rule would be too big.

    Returns
    -------
    branches
        Anchor, kernel, nodes and weights.
    """
    spreads, widths = dimensions(history), widths or {}
    anchor, kernel, scale = anchors[0], LABEL, max(spreads.get(LABEL, 0.0), _FLOOR)
    for candidate in () if flat else anchors:
        followed = _followed(history, spreads, candidate)
        if followed is not None:
            anchor, (kernel, scale) = candidate, followed
            break
    rules = {}
    for d in spreads:
        if d == kernel:
            continue
        if kernel == LABEL:
            along, across = _label_ratio(history, d, anchor, times, widths, flat=flat), 0.0
        else:
            ratios = [_ratios(history, kernel, scale, d, t) for t in (anchor, *times)]
            along, across = (max(ratio) for ratio in zip(*ratios, strict=True))
            along = max([along, *(_effect(history, d, t) / w for t, w in widths.items())])
        if max(along, across) > _NEGLIGIBLE:
            rules[d] = _rule(along, across)
    nodes, weights, exact = _nodes(list(rules.values()), n_draws, seed)
    deviates = dict(zip(rules, nodes, strict=True))
    return Branches(history, anchor, kernel, scale, deviates, weights, exact)


def _followed(
    history: History, spreads: Mapping[Dimension, float], anchor: float
) -> tuple[Dimension, float] | None:
    """The loss that reaches furthest by a time, if that is not far less than the label does."""
    scales = _loss_scales(history, spreads, anchor)
    if not scales:
        return None
    kernel = max(scales, key=lambda k: _reach(history, k, scales[k], anchor))
    least = max(spreads.get(LABEL, 0.0) / 4, _FLOOR)
    if _reach(history, kernel, scales[kernel], anchor) < least:
        return None
    return kernel, scales[kernel]


def _label_ratio(
    history: History,
    dimension: Dimension,
    anchor: float,
    times: Sequence[float],
    widths: Mapping[float, float],
    *,
    flat: bool,
) -> float:
    """Effect of a dimension beside the label's, which does the same at all times."""
    since = [_effect(history, dimension, t, since=anchor) for t in times]
    own = max(history.log_label_sd, _FLOOR)
    if flat:
        return max(since, default=0.0) / min(widths.values())
    return max([_effect(history, dimension, anchor), *since]) / own


def _loss_scales(
    history: History, spreads: Mapping[Dimension, float], anchor: float
) -> dict[Dimension, float]:
    """Every loss that can be followed, with its spread on the logarithmic scale.

    A rate that is known far better than its activation energy is widened to a thirty-second of
    what the energy does to it (0.05 % of the whole spread), so that the nodes overlap.
    """
    scales = {}
    for cause, taken in losses(history, {}, anchor).items():
        if cause != LABEL and taken[0] > 0:
            scale = spreads.get(cause, 0.0)
            for d in spreads:
                if d not in (LABEL, cause):
                    pair = losses(history, {d: np.array([-1.0, 1.0])}, anchor, 2)[cause]
                    scale = max(scale, abs(float(np.log(pair[1] / pair[0]))) / 64)
            scales[cause] = max(scale, _FLOOR)
    return scales


def _reach(history: History, kernel: Dimension, scale: float, time: float) -> float:
    """How far one standard deviation of the kernel moves ln(remaining) at a time."""
    taken = losses(history, {}, time).get(kernel, np.zeros(1))
    return float(taken[0] * np.sinh(scale))


def _effect(
    history: History, dimension: Dimension, time: float, since: float | None = None
) -> float:
    """How far the second standard deviation of a dimension moves ln(remaining), or its change.

    The second, because a log-normal loss spreads its nodes the farther the more is lost.
    """
    ends = {dimension: np.array([-2.0, -1.0, 1.0, 2.0])}
    x = log_remaining(history, ends, time, 4)
    if since is not None:
        x = x - log_remaining(history, ends, since, 4)
    return float(max(abs(x[1] - x[0]), abs(x[3] - x[2])))


def _ratios(
    history: History, kernel: Dimension, scale: float, dimension: Dimension, time: float
) -> tuple[float, float]:
    """Effect of a dimension on what the kernel multiplies, and on what it is added to.

    Both are in units of the kernel's own width, which is narrow where little is lost: there, a
    standard deviation and a half below the median, what is added matters most.
    """
    taken = losses(history, {dimension: np.array([-1.0, 1.0])}, time, 2)
    factor = taken.pop(kernel, np.zeros(2))
    if not np.all(factor > 0):
        return 0.0, 0.0
    rest = np.sum(list(taken.values()), axis=0)
    along = abs(np.log(factor[1] / factor[0])) / 2 / scale
    narrow = np.sqrt(factor[0] * factor[1]) * scale * np.exp(-1.5 * scale)
    return float(along), float(abs(rest[1] - rest[0]) / 2 / narrow)


def _nodes(
    rules: list[tuple[Array, Array]], n_draws: int, seed: int
) -> tuple[list[Array], Array, bool]:
    size = int(np.prod([len(z) for z, _ in rules]))
    if size > _MOST:
        deviates = even_deviates(n_draws, len(rules), seed)
        return list(deviates), np.full(n_draws, 1 / n_draws), False
    grids = np.meshgrid(*(z for z, _ in rules), indexing="ij") if rules else []
    weights = np.ones(1)
    for _, w in rules:
        weights = np.multiply.outer(weights, w)
    weights = weights.ravel()
    heavy = weights > _LIGHT * weights.max()
    weights = weights[heavy] / weights[heavy].sum()
    return [g.ravel()[heavy] for g in grids], weights, True


def _rule(along: float, across: float) -> tuple[Array, Array]:
    """Nodes for one dimension: the wider its effect beside the kernel's, the more of them."""
    for limit, n in ((0.1, 3), (0.4, 7), (0.8, 13)):
        if max(along, across) < limit:
            z, w = np.polynomial.hermite_e.hermegauss(n)
            return z, w / w.sum()
    n = max(np.clip(np.ceil(13 * along), 17, 401), min(np.ceil(26 * across), 129))
    z = np.linspace(-_FAR, _FAR, int(n))
    w = np.exp(-(z**2) / 2)
    return z, w / w.sum()
