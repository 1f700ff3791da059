"""The bracketing root."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.roots import rising_root


@settings(deadline=None, derandomize=True, max_examples=100)
@given(st.floats(0.001, 50.0), st.floats(0.01, 30.0))
def test_root_of_any_rising_curve(place, steepness):
    """A root anywhere in the bracket of a steep or flat curve is found to 1e-9."""

    def curve(x):
        return np.tanh(steepness * (x - place) / 50)

    root = rising_root(curve, np.zeros(1), np.full(1, 60.0))

    assert root[0] == pytest.approx(place, rel=1e-9)


def test_roots_at_the_ends():
    """A root that sits on either end of the bracket is that end."""
    low, high = np.zeros(2), np.ones(2)

    assert rising_root(lambda x: x - np.array([0.0, 1.0]), low, high) == pytest.approx([0.0, 1.0])
