"""A temperature programme as cells: constant ones and, on ramps and lags, ones with nodes.

The sample's temperature depends linearly on the set points of the programme (with the vessel's
lag as well), so a cell's node carries only its weights on the set points: thousands of draws of
an incubator's error then cost one matrix product.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

NODES = 8  # Gauss-Legendre nodes of a cell in which the temperature changes
FOR_EVER = 1e6  # [h] what stands for "however long one waits"
_WIDEST = 8.0  # [K] the most by which the temperature changes within one cell
_GROWTH = 2.5  # by which graded cells grow
_GRADES = 12  # how many of them follow fresh enzyme
_FEW_GRADES = 3  # and a change of temperature alone
# Time constants of a lag that one cell holds while more than so many K of it are left.
_SETTLING_SPANS = ((0.3, 2.5), (0.005, 4.0), (0.0, 8.0))
_SETTLED = 1e-6  # [K] a lag that is nearer than this to its bath has arrived


def _gauss_on_unit_interval(n_nodes: int) -> tuple[Array, Array, Array, Array]:
    x, w = np.polynomial.legendre.leggauss(n_nodes)
    x, w = (x + 1) / 2, w / 2
    powers = np.vander(x, n_nodes, increasing=True)
    coefficients = np.linalg.inv(powers)  # column j: the j-th Lagrange polynomial
    antiderivative = coefficients / np.arange(1, n_nodes + 1)[:, None]
    running = np.vander(x, n_nodes, increasing=True) * x[:, None] @ antiderivative
    return x, w, running, antiderivative


NODE_PLACES, NODE_WEIGHTS, RUNNING_WEIGHTS, _ANTIDERIVATIVE = _gauss_on_unit_interval(NODES)
_LAGRANGE = _ANTIDERIVATIVE * np.arange(1, NODES + 1)[:, None]


def partial_weights(share: Array) -> Array:
    """
    Return the weights that integrate a cell's node values over its first part [1]_.

    Parameters
    ----------
    share : ndarray, shape (n_draws,)
        How much of the cell is integrated over, 0 to 1. [1]

    Returns
    -------
    weights : ndarray, shape (n_nodes, n_draws)
        Weight of each node, for a cell of unit length. [1]

    References
    ----------
    .. [1] P. J. Davis and P. Rabinowitz, Methods of Numerical Integration, 1984 (from memory).
    """
    weights: Array = _ANTIDERIVATIVE.T @ _powers(share)
    return weights


def running_integral(node_values: Array) -> Array:
    """
    Return the integral over the first part of a cell as a polynomial of that part [1]_.

    Parameters
    ----------
    node_values : ndarray, shape (n_nodes, n_draws)
        Values at the nodes of a cell of unit length. [any]

    Returns
    -------
    coefficients : ndarray, shape (n_nodes, n_draws)
        Coefficients of the first to the eighth power of the share of the cell. [any]

    References
    ----------
    .. [1] P. J. Davis and P. Rabinowitz, Methods of Numerical Integration, 1984 (from memory).
    """
    coefficients: Array = np.asarray(_ANTIDERIVATIVE @ node_values)
    return coefficients


def _powers(share: Array) -> Array:
    """Powers 1 to NODES, by repeated multiplication."""
    return np.multiply.accumulate(np.broadcast_to(share, (NODES, *share.shape)), axis=0)


def node_interpolation(share: Array) -> Array:
    """
    Return the weights that interpolate a cell's node values at a place in the cell [1]_.

    Parameters
    ----------
    share : ndarray, shape (n_draws,)
        Place in the cell, 0 to 1. [1]

    Returns
    -------
    weights : ndarray, shape (n_nodes, n_draws)
        Weight of each node (Lagrange polynomials). [1]

    References
    ----------
    .. [1] P. J. Davis and P. Rabinowitz, Methods of Numerical Integration, 1984 (from memory).
    """
    powers = np.vstack([np.ones_like(share)[None], _powers(share)[:-1]])
    weights: Array = _LAGRANGE.T @ powers
    return weights


@dataclass(frozen=True, slots=True, eq=False)
class Cells:
    """A programme cut into cells.

    Attributes
    ----------
    edges
        Times at which cells begin and end, from the start of the step; the last is `FOR_EVER`
        after the end of the programme. Shape (n_cells + 1,). [h]
    nodes
        For each cell the rows of ``weights`` that hold its temperatures: one row for a constant
        cell, `NODES` rows for one in which the temperature changes.
    weights
        Sample temperature at the nodes as weights on the set points. Shape
        (n_nodes, n_set_points); set point 0 is the sample's temperature at the start. [1]
    end
        Time at which the programme as written ends. [h]
    start_weights, end_weights
        The sample's temperature at the start and at ``end``, as weights on the set points.
    """

    edges: Array
    nodes: tuple[tuple[int, ...], ...]
    weights: Array
    end: float
    start_weights: Array
    end_weights: Array

    @property
    def n_cells(self) -> int:
        """Number of cells, the one that lasts for ever included."""
        return len(self.nodes)

    def cell_at(self, time: float) -> int:
        """Index of the cell that holds a time; at an edge, of the cell that ends there."""
        return max(0, min(int(np.searchsorted(self.edges, time)) - 1, self.n_cells - 1))

    def cells_at(self, times: Array) -> NDArray[np.intp]:
        """Index of the cell that holds each of several times [h]."""
        found = np.searchsorted(self.edges, times) - 1
        cells: NDArray[np.intp] = np.clip(found, 0, self.n_cells - 1)
        return cells

    def temperatures(self, set_points: Array) -> Array:
        """Temperatures at the nodes, shape (n_nodes, n_draws), from set points [K]."""
        result: Array = self.weights @ set_points
        return result

    def temperature_at(self, time: float, set_points: Array) -> float:
        """Sample temperature at one time, from set points of shape (n_set_points,). [K]."""
        cell = self.cell_at(time)
        at_nodes = self.weights[list(self.nodes[cell])] @ set_points
        if len(at_nodes) == 1:
            return float(at_nodes[0])
        begin, end = self.edges[cell], self.edges[cell + 1]
        share = np.array([(time - begin) / (end - begin)])
        return float(at_nodes @ node_interpolation(share)[:, 0])


@dataclass(frozen=True, slots=True)
class Leg:
    """One stretch of a programme for the compiler: how long, and whether it is a ramp."""

    hours: float
    ramp: bool


class _Builder:
    """Collects cells and shares equal nodes between them."""

    def __init__(self, n_set_points: int) -> None:
        self.edges = [0.0]
        self.nodes: list[tuple[int, ...]] = []
        self.rows: dict[bytes, int] = {}
        self.weights: list[Array] = []
        self.n_set_points = n_set_points

    def row(self, weights: Array) -> int:
        key = (weights + 0.0).tobytes()
        if key not in self.rows:
            self.rows[key] = len(self.weights)
            self.weights.append(weights)
        return self.rows[key]

    def add(self, end: float, rows: Sequence[Array]) -> None:
        self.nodes.append(tuple(self.row(weights) for weights in rows))
        self.edges.append(end)


@dataclass(frozen=True, slots=True)
class _Motion:
    """Sample temperature within one leg: line + settling, as weights on the set points."""

    bath: Array
    slope: Array
    settling: Array
    lag: float

    def at(self, time: float) -> Array:
        line = self.bath + self.slope * (time - self.lag)
        if self.lag == 0:
            return line
        settled: Array = line + self.settling * np.exp(-time / self.lag)
        return settled


def compile_programme(
    legs: Sequence[Leg],
    nominal: Array,
    lag: float = 0.0,
    breaks: Sequence[float] = (),
    graded: bool = False,
    cuts: Sequence[float] = (),
) -> Cells:
    """
    Cut a temperature programme into cells [1]_.

    Parameters
    ----------
    legs : sequence of Leg
        The stretches in their order; leg i goes to, or stays at, set point i + 1. [h]
    nominal : ndarray, shape (n_legs + 1,)
        Set points without their error; the first is the sample's temperature at the start. [K]
    lag : float
        Time constant with which the sample follows its bath; 0 for none. [h]
    breaks : sequence of float
        Times at which a cell must end, such as additions of enzyme. [h]
    graded : bool
        Give every cell nodes, and cells that grow from the start of each leg and break: for
        what has no closed form at constant temperature either. [1]
    cuts : sequence of float
        Further times at which a cell ends, where much happens within one. [h]

    Returns
    -------
    cells : Cells
        The programme, followed by its last temperature for ever. [h]

    Notes
    -----
    A first-order lag behind a bath b0 + ρt gives T = b0 + ρ(t − τ) + (T0 − b0 + ρτ)e^(−t/τ).

    References
    ----------
    .. [1] Newton's law of cooling; common practice.
    """
    return _compiled(
        tuple(legs), tuple(float(t) for t in nominal), lag, tuple(breaks), graded, tuple(cuts)
    )


@lru_cache(maxsize=64)
def _compiled(
    legs: tuple[Leg, ...],
    set_points: tuple[float, ...],
    lag: float,
    breaks: tuple[float, ...],
    graded: bool,
    cuts: tuple[float, ...],
) -> Cells:
    """Cut a programme; the same one is asked for again and again while a plan is edited."""
    nominal = np.array(set_points)
    builder = _Builder(len(nominal))
    identity = np.eye(len(nominal))
    sample = start = identity[0]
    end_weights = start
    clock, end = 0.0, float(sum(leg.hours for leg in legs))
    waiting = Leg(FOR_EVER, ramp=False)
    for number, leg in enumerate([*legs, waiting]):
        target = identity[min(number + 1, len(legs))]
        before = identity[number]
        if leg.hours <= 0:
            continue
        slope = (target - before) / leg.hours if leg.ramp else np.zeros_like(target)
        bath = before if leg.ramp else target
        motion = _Motion(bath, slope, sample - bath + slope * lag, lag)
        inner = [b - clock for b in breaks if clock < b < clock + leg.hours]
        fresh = number == 0 or leg is waiting or clock in breaks
        ends = _cell_ends(motion, leg, nominal, inner, graded, fresh)
        within = {cut - clock for cut in cuts if clock < cut < clock + leg.hours}
        for cell_end in sorted(ends | within):
            _add_cell(builder, motion, clock, cell_end, nominal, graded)
        sample = motion.at(leg.hours) if (leg.ramp or lag) else target
        clock += leg.hours
        if leg is not waiting:
            end_weights = sample
    return Cells(
        np.array(builder.edges),
        tuple(builder.nodes),
        np.array(builder.weights),
        end,
        start,
        end_weights,
    )


def _add_cell(
    builder: _Builder,
    motion: _Motion,
    clock: float,
    cell_end: float,
    nominal: Array,
    graded: bool,
) -> None:
    begin = builder.edges[-1] - clock
    span = cell_end - begin
    swing = float(np.abs(motion.settling @ nominal)) if motion.lag else 0.0
    swing *= float(np.exp(-begin / motion.lag)) if motion.lag else 1.0
    still = not motion.slope.any() and swing < _SETTLED
    if still and not graded:
        builder.add(clock + cell_end, [motion.bath])
    else:
        builder.add(clock + cell_end, [motion.at(begin + span * x) for x in NODE_PLACES])


def _cell_ends(
    motion: _Motion,
    leg: Leg,
    nominal: Array,
    inner: Sequence[float],
    graded: bool,
    fresh: bool,
) -> set[float]:
    """Times within the leg at which cells end: narrow where the temperature moves."""
    ends = {leg.hours, *inner}
    change = abs(float(motion.slope @ nominal)) * leg.hours
    if leg.ramp:
        n_cells = max(1, int(np.ceil(change / _WIDEST)))
        ends.update(leg.hours * i / n_cells for i in range(1, n_cells))
    swing = abs(float(motion.settling @ nominal)) if motion.lag else 0.0
    if swing >= _SETTLED:
        settled = (-motion.lag * float(np.log(share)) for share in _settling_shares(swing))
        ends.update(end for end in settled if end < leg.hours)
    if graded:
        starts, stops = [0.0, *inner], [*inner, leg.hours]
        for begin, end in zip(starts, stops, strict=True):
            grades = _GRADES if begin or fresh else _FEW_GRADES
            ends.update(begin + (end - begin) * _GROWTH ** float(-n) for n in range(1, grades))
    return ends


def _settling_shares(swing: float) -> list[float]:
    """Shares of a settling swing that remain at the ends of its cells."""
    shares = [1.0]
    while shares[-1] * swing > _WIDEST:
        shares.append(max(shares[-1] - _WIDEST / swing, shares[-1] * np.exp(-1.5)))
    while shares[-1] * swing > _SETTLED:  # the less there is left, the longer a cell may be
        span = next(span for least, span in _SETTLING_SPANS if shares[-1] * swing > least)
        shares.append(max(shares[-1] * np.exp(-span), 0.99 * _SETTLED / swing))
    return shares[1:]
