"""Temperature programmes: what the sample feels, with ramps and the vessel's lag."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.programme import (
    NODE_PLACES,
    NODE_WEIGHTS,
    RUNNING_WEIGHTS,
    Leg,
    compile_programme,
    node_interpolation,
    partial_weights,
)


def test_nodes_integrate_polynomials():
    """Weights integrate powers exactly, over the whole cell and over a part of it."""
    for power in range(8):
        values = NODE_PLACES**power
        assert NODE_WEIGHTS @ values == pytest.approx(1 / (power + 1), rel=1e-12)
        assert RUNNING_WEIGHTS @ values == pytest.approx(
            NODE_PLACES ** (power + 1) / (power + 1), abs=1e-10
        )
        share = np.array([0.3])
        assert partial_weights(share)[:, 0] @ values == pytest.approx(
            0.3 ** (power + 1) / (power + 1), abs=1e-10
        )
        assert node_interpolation(share)[:, 0] @ values == pytest.approx(0.3**power, abs=1e-9)


@settings(deadline=None, derandomize=True, max_examples=40)
@given(st.floats(0.0, 0.5), st.floats(277.0, 340.0), st.floats(277.0, 340.0), st.floats(0.02, 2))
def test_lag_follows_its_differential_equation(lag, first, second, hours):
    """The sample's temperature is that of dT/dt = (T_bath − T)/lag, step and ramp alike."""
    from scipy.integrate import solve_ivp

    legs = [Leg(0.5, ramp=False), Leg(hours, ramp=True), Leg(1.0, ramp=False)]
    points = np.array([293.15, first, second, second])
    cells = compile_programme(legs, points, lag)

    def bath(t):
        if t < 0.5:
            return first
        return first + (second - first) * min((t - 0.5) / hours, 1.0)

    times = np.linspace(0, 1.5 + hours, 12)[1:]
    found = [cells.temperature_at(float(t), points) for t in times]
    if lag < 1e-3:
        expected = [bath(t) for t in times] if lag == 0 else None
    else:
        solution = solve_ivp(
            lambda t, y: (bath(t) - y) / lag,
            (0, times[-1]),
            [293.15],
            t_eval=times,
            rtol=1e-9,
            atol=1e-9,
            max_step=0.01,
        )
        expected = solution.y[0]
    if expected is not None:
        assert found == pytest.approx(list(expected), abs=2e-4)


def test_equal_temperatures_share_a_node():
    """Stretches at one temperature share a node, so that its exponentials are taken once."""
    legs = [Leg(1.0, ramp=False), Leg(0.5, ramp=False), Leg(1.0, ramp=False)]
    cells = compile_programme(legs, np.full(4, 310.0), breaks=[0.25, 2.0])

    assert cells.n_cells == 6
    assert len(cells.weights) == 3


def test_a_steady_sample_has_no_lag():
    """A sample that starts at its bath's temperature stays there whatever the lag."""
    cells = compile_programme([Leg(5.0, ramp=False)], np.full(2, 310.0), lag=0.2)

    assert [len(nodes) for nodes in cells.nodes] == [1, 1]
