"""The dose that a temperature programme gives, over all draws at once and without time stepping.

A `Course` carries enzyme, dose, heat damage and penetration from cell to cell of a programme, and
answers for any time within a cell. Arrays have the draws along their last axis.
"""

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics import inactivation
from digestplan.kinetics.depth import Geometry
from digestplan.kinetics.programme import (
    NODE_WEIGHTS,
    RUNNING_WEIGHTS,
    Cells,
    node_interpolation,
    partial_weights,
)
from digestplan.kinetics.state import ALL, Draws, Rates, State

Array = NDArray[np.float64]
_GONE = 1e-14  # a mode below this share of the enzyme charged no longer matters
_LEAST = 1e-300


@dataclass(frozen=True, slots=True, eq=False)
class Moving:
    """Values at the nodes of a cell in which the temperature changes, each (n_nodes, n_draws).

    ``active``: enzyme; ``effect``: dose an hour; ``heat``: keep loss by heat an hour, or None;
    ``local``: dose an hour at the depth points, (n_points, n_nodes, n_draws), or None.
    """

    active: Array
    effect: Array
    heat: Array | None
    local: Array | None


class Course:
    """The enzyme's course through a programme.

    Parameters
    ----------
    cells
        The programme.
    rates
        Rates at its nodes.
    start
        State at its beginning, before the enzyme of this step is added.
    charges
        Enzyme added at the start of cells, by cell index, each of shape (n_draws,). [unit/g]
    intermediate_activity
        Activity of the intermediate form relative to the fresh one, shape (n_draws,). [1]
    saturation
        Ratio at which the surface is half saturated, shape (n_draws,), or None. [unit/g]
    geometry
        Depth points and modes, or None without penetration.
    """

    def __init__(
        self,
        cells: Cells,
        rates: Rates,
        start: State,
        charges: Mapping[int, Array],
        intermediate_activity: Array | float = 0.0,
        saturation: Array | None = None,
        geometry: Geometry | None = None,
    ) -> None:
        self.cells, self.rates, self.geometry = cells, rates, geometry
        self.saturation = saturation
        n_draws = len(start.fresh)
        self.intermediate_activity = np.broadcast_to(
            np.asarray(intermediate_activity, dtype=float), (n_draws,)
        )
        self._moving: dict[int, Moving] = {}
        self._live: dict[int, int] = {}
        self._passed: dict[int, tuple[tuple[Array, ...], tuple[Array, ...]]] = {}
        self.starts: list[State] = []
        state = start
        for cell in range(cells.n_cells):
            if cell in charges:
                state = self._add(state, charges[cell])
            self.starts.append(state)
            if cell < cells.n_cells - 1:
                state = self._advance(cell)

    def at(self, time: float) -> State:
        """State at one time for all draws; modes are not carried inside a cell. [h]."""
        cell = self.cells.cell_at(time)
        if cell + 1 < self.cells.n_cells and time == self.cells.edges[cell + 1]:
            return self.starts[cell + 1]
        return self.within(cell, time - float(self.cells.edges[cell]))

    def at_each(self, times: Array, draws: NDArray[np.intp] | None = None) -> State:
        """State at a time of its own for each draw, or each of some, without modes. [h]."""
        cells = self.cells.cells_at(times)
        whole = self.starts[0]
        parts = [np.flatnonzero(cells == cell) for cell in np.unique(cells)]
        order = np.argsort(np.concatenate(parts))
        numbers = np.arange(len(times)) if draws is None else draws
        states = [
            self.within(int(cells[p[0]]), times[p] - self.cells.edges[cells[p[0]]], numbers[p])
            for p in parts
        ]
        joined = {
            name: np.concatenate([getattr(state, name) for state in states], axis=-1)[..., order]
            for name in State.__slots__
            if not name.startswith("modal") and getattr(whole, name) is not None
        }
        return State(**joined)

    def at_end(self) -> State:
        """State at the end of the programme as written, with its modes."""
        cell = self.cells.cell_at(self.cells.end)
        length = self.cells.end - float(self.cells.edges[cell])
        if len(self.cells.nodes[cell]) == 1:
            return self._constant(cell, length, ALL, modes=True)
        return self._advance(cell)

    def active(self, state: State, draws: Draws = ALL) -> Array:
        """Active enzyme of a state; an intermediate counts with its activity. [unit/g]."""
        return state.fresh + self.intermediate_activity[draws] * state.intermediate

    def within(self, cell: int, elapsed: Array | float, draws: Draws = ALL) -> State:
        """State so many hours after the start of a cell, for all draws or some of them."""
        if len(self.cells.nodes[cell]) == 1:
            return self._constant(cell, elapsed, draws, modes=False)
        return self._inside_moving(cell, elapsed, draws)

    # -- one cell -------------------------------------------------------------------------

    def _add(self, state: State, amount: Array) -> State:
        state = replace(state, fresh=state.fresh + amount, charged=state.charged + amount)
        if state.modal_fresh is None:
            return state
        return replace(state, modal_fresh=state.modal_fresh + amount)

    def _length(self, cell: int) -> float:
        return float(self.cells.edges[cell + 1] - self.cells.edges[cell])

    def _advance(self, cell: int) -> State:
        if len(self.cells.nodes[cell]) == 1:
            return self._constant(cell, self._length(cell), ALL, modes=True)
        return self._end_of_moving(cell)

    def _coverage(self, state: State, draws: Draws) -> Array | float:
        """Langmuir: the share by which a crowded surface slows each molecule."""
        if self.saturation is None:
            return 1.0
        coverage: Array = 1 / (1 + state.charged / self.saturation[draws])
        return coverage

    def effect_at(self, cell: int, draws: Draws = ALL) -> Array:
        """Dose that active enzyme gives in an hour of a cell of constant temperature. [1]."""
        activity: Array = self.rates.activity[self.cells.nodes[cell][0], draws]
        if self.saturation is None:
            return activity
        return activity * self._coverage(self.starts[cell].of(draws), draws)

    def _constant(self, cell: int, elapsed: Array | float, draws: Draws, *, modes: bool) -> State:
        start, rates = self.starts[cell].of(draws), self.rates
        node = self.cells.nodes[cell][0]
        first = rates.first[node, draws]
        second = None if rates.second is None else rates.second[node, draws]
        other = self.intermediate_activity[draws]
        intermediate = start.intermediate
        if second is not None:
            fresh, intermediate, integral, passed = inactivation.two_stage(
                start.fresh, intermediate, first, second, elapsed
            )
            integral = integral + other * passed
        elif rates.autolysis is not None:
            fresh, integral = inactivation.autolysis(
                start.fresh, first, rates.autolysis[node, draws], elapsed
            )
        else:
            fresh, integral = inactivation.first_order(start.fresh, first, elapsed)
        effect = self._coverage(start, draws) * rates.activity[node, draws]
        heat = start.heat
        if rates.heat is not None:
            heat = heat + rates.heat[node, draws] * elapsed
        after = State(fresh, intermediate, start.charged, start.dose + effect * integral, heat)
        if self.geometry is None:
            return after
        return self._penetrate(cell, start, after, elapsed, draws, effect * integral, modes=modes)

    def _penetrate(
        self,
        cell: int,
        start: State,
        after: State,
        elapsed: Array | float,
        draws: Draws,
        given: Array,
        *,
        modes: bool,
    ) -> State:
        geometry, rates, node = self.geometry, self.rates, self.cells.nodes[cell][0]
        assert geometry is not None
        assert rates.penetration is not None
        assert start.modal_fresh is not None
        assert start.local is not None
        pace = rates.penetration[node, draws]
        live = self._live_modes(cell)
        extra = geometry.squares[:live, None] * pace
        first = rates.first[node, draws]
        if rates.second is None:
            modal_fresh, lacking = inactivation.first_order(
                start.modal_fresh[:live], first + extra, elapsed
            )
            modal_intermediate = start.modal_intermediate
        else:
            assert start.modal_intermediate is not None
            modal_fresh, modal_intermediate, lacking, passed = inactivation.two_stage(
                start.modal_fresh[:live],
                start.modal_intermediate[:live],
                first,
                rates.second[node, draws],
                elapsed,
                extra,
            )
            lacking = lacking + self.intermediate_activity[draws] * passed
        effect = self._coverage(start, draws) * rates.activity[node, draws]
        local = start.local + given - effect * (geometry.lack[:, :live] @ lacking)
        if not modes:
            return replace(after, local=np.maximum(local, 0.0))
        assert modal_intermediate is not None
        return replace(
            after,
            local=local,
            modal_fresh=self._all_modes(modal_fresh),
            modal_intermediate=self._all_modes(modal_intermediate),
        )

    def _live_modes(self, cell: int) -> int:
        """How many of the slowest modes still matter at the start of a cell."""
        if cell not in self._live:
            start = self.starts[cell]
            assert start.modal_fresh is not None
            assert start.modal_intermediate is not None
            size = np.maximum(np.abs(start.modal_fresh), np.abs(start.modal_intermediate))
            alive = np.flatnonzero((size > _GONE * np.maximum(start.charged, _LEAST)).any(axis=1))
            self._live[cell] = int(alive[-1]) + 1 if len(alive) else 1
        return self._live[cell]

    def _all_modes(self, modes: Array) -> Array:
        """Modes with those that no longer matter at zero."""
        assert self.geometry is not None
        missing = len(self.geometry.squares) - len(modes)
        return modes if missing == 0 else np.pad(modes, ((0, missing), (0, 0)))

    # -- a cell in which the temperature changes ------------------------------------------

    def _transfers(self, cell: int) -> tuple[tuple[Array, ...], tuple[Array, ...]]:
        if cell not in self._passed:
            self._passed[cell] = self._transfers_of(cell)
        return self._passed[cell]

    def _transfers_of(self, cell: int) -> tuple[tuple[Array, ...], tuple[Array, ...]]:
        nodes, hours = list(self.cells.nodes[cell]), self._length(cell)
        first = self.rates.first[nodes]
        if self.rates.second is not None:
            return inactivation.two_stage_at_nodes(first, self.rates.second[nodes], hours)
        if self.rates.autolysis is not None:
            at_nodes, at_end = inactivation.autolysis_at_nodes(
                self.starts[cell].fresh, first, self.rates.autolysis[nodes], hours
            )
        else:
            at_nodes, at_end = inactivation.survival_at_nodes(first, hours)
        return (at_nodes,), (at_end,)

    def _carry(
        self, transfers: tuple[Array, ...], fresh: Array, intermediate: Array
    ) -> tuple[Array, Array]:
        if len(transfers) == 1:
            return transfers[0] * fresh, intermediate
        kept, passed, other = transfers
        return kept * fresh, passed * fresh + other * intermediate

    def moving_values(self, cell: int) -> Moving:
        """Values at the nodes of a cell in which the temperature changes."""
        if cell in self._moving:
            return self._moving[cell]
        start, nodes = self.starts[cell], list(self.cells.nodes[cell])
        transfers, _ = self._transfers(cell)
        fresh, intermediate = self._carry(transfers, start.fresh, start.intermediate)
        active = fresh + self.intermediate_activity * intermediate
        weight = self._coverage(start, ALL) * self.rates.activity[nodes]
        local = self._local_rates(cell, transfers, weight, active)
        heat = None if self.rates.heat is None else self.rates.heat[nodes]
        self._moving[cell] = Moving(active, weight * active, heat, local)
        return self._moving[cell]

    def _clock(self, cell: int) -> tuple[Array, Array]:
        """Diffusion clock θ within a cell at its nodes and at its end."""
        assert self.rates.penetration is not None
        pace, hours = self.rates.penetration[list(self.cells.nodes[cell])], self._length(cell)
        return hours * (RUNNING_WEIGHTS @ pace), hours * (NODE_WEIGHTS @ pace)

    def _local_rates(
        self, cell: int, transfers: tuple[Array, ...], weight: Array, active: Array
    ) -> Array | None:
        start, geometry = self.starts[cell], self.geometry
        if geometry is None:
            return None
        assert start.modal_fresh is not None
        assert start.modal_intermediate is not None
        at_nodes, _ = self._clock(cell)
        live = self._live_modes(cell)
        modal = (start.modal_fresh[:live], start.modal_intermediate[:live])
        rows = []
        for i, theta in enumerate(at_nodes):
            decay = np.exp(-geometry.squares[:live, None] * np.maximum(theta, 0.0))
            fresh, intermediate = self._carry(tuple(t[i] for t in transfers), *modal)
            lacking = np.multiply(fresh, decay)
            if self.rates.second is not None:
                lacking = lacking + self.intermediate_activity * intermediate * decay
            rows.append(weight[i] * (active[i] - geometry.lack[:, :live] @ lacking))
        return np.stack(rows, axis=1)

    def _end_of_moving(self, cell: int) -> State:
        start, hours = self.starts[cell], self._length(cell)
        values = self.moving_values(cell)
        _, at_end = self._transfers(cell)
        fresh, intermediate = self._carry(at_end, start.fresh, start.intermediate)
        heat = start.heat
        if values.heat is not None:
            heat = heat + hours * (NODE_WEIGHTS @ values.heat)
        dose = start.dose + hours * (NODE_WEIGHTS @ values.effect)
        after = State(fresh, intermediate, start.charged, dose, heat)
        if values.local is None:
            return after
        assert start.local is not None
        assert self.geometry is not None
        assert start.modal_fresh is not None
        assert start.modal_intermediate is not None
        _, theta = self._clock(cell)
        live = self._live_modes(cell)
        decay = np.exp(-self.geometry.squares[:live, None] * theta)
        modal = self._carry(at_end, start.modal_fresh[:live], start.modal_intermediate[:live])
        local = start.local + hours * np.einsum("j,pjn->pn", NODE_WEIGHTS, values.local)
        return replace(
            after,
            local=local,
            modal_fresh=self._all_modes(modal[0] * decay),
            modal_intermediate=self._all_modes(modal[1] * decay),
        )

    def _inside_moving(self, cell: int, elapsed: Array | float, draws: Draws) -> State:
        start, hours = self.starts[cell].of(draws), self._length(cell)
        values = self.moving_values(cell)
        share = np.broadcast_to(np.asarray(elapsed, dtype=float) / hours, start.fresh.shape)
        weights, here = hours * partial_weights(share), node_interpolation(share)
        heat = start.heat
        if values.heat is not None:
            heat = heat + (weights * values.heat[:, draws]).sum(axis=0)
        after = State(
            (here * values.active[:, draws]).sum(axis=0),
            np.zeros_like(start.fresh),
            start.charged,
            start.dose + (weights * values.effect[:, draws]).sum(axis=0),
            heat,
        )
        if values.local is None:
            return after
        assert start.local is not None
        local = start.local + np.einsum("jn,pjn->pn", weights, values.local[:, :, draws])
        return replace(after, local=np.maximum(local, 0.0))
