"""Percentiles, windows and chances at visits."""

from datetime import datetime

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from digestplan.forecast.window import quantile, spread, visit_chances, window
from digestplan.plan.model import Visit

START = datetime(2026, 3, 12, 17, 30)
INF = np.inf


@pytest.mark.source("L", "numpy.quantile, linear interpolation")
@settings(deadline=None, derandomize=True)
@given(arrays(float, st.integers(1, 60), elements=st.floats(-1e6, 1e6)), st.floats(0, 1))
def test_quantiles_are_numpys(values, share):
    """A quantile of finite draws is the one that numpy interpolates."""
    assert quantile(values, share) == pytest.approx(np.quantile(values, share), rel=1e-6, abs=1e-4)


@pytest.mark.parametrize(
    ("finite", "expected"), [(1001, True), (1000, False), (999, False), (2000, True)]
)
def test_median_is_unknown_where_half_or_more_never_get_there(finite, expected):
    """The median is null where half the draws or more never reach the target."""
    values = np.full(2000, INF)
    values[:finite] = 5.0

    assert (quantile(values, 0.5) is not None) == expected


def test_permuting_draws_changes_nothing():
    """Percentiles do not depend on the order of the draws."""
    values = np.random.default_rng(1).lognormal(size=501)
    values[::7] = INF

    assert spread(values) == spread(np.random.default_rng(2).permutation(values))


def test_window_opens_and_closes_with_confidence():
    """It opens when 90 % are ready and closes when 10 % are too far."""
    ready, too_far = np.linspace(1, 2, 101), np.linspace(10, 20, 101)
    found = window(ready, too_far, 0.9, START)

    assert found.opens_h == pytest.approx(1.9)
    assert found.closes_h == pytest.approx(11.0)
    assert found.opens == datetime(2026, 3, 12, 19, 24)
    assert found.exists


def test_a_window_may_close_before_it_opens():
    """Where many are too far before all are ready there is no window."""
    assert not window(np.linspace(1, 9, 50), np.linspace(2, 10, 50), 0.9, START).exists
    assert not window(np.full(4, INF), np.ones(4), 0.9, None).exists


def test_chances_at_a_visit():
    """In time, not ready and too far are told apart draw by draw, and sum to 1."""
    visit = Visit(datetime(2026, 3, 13, 8, 30), datetime(2026, 3, 13, 17, 0))  # 15 h to 23.5 h
    ready = np.array([10.0, 24.0, 2.0, 18.0, INF, 20.0])
    too_far = np.array([INF, INF, 14.0, 19.0, INF, 16.0])
    (chance,) = visit_chances([visit], START, ready, too_far)

    assert chance.in_time == pytest.approx(2 / 6)  # the first and the fourth
    assert chance.not_ready == pytest.approx(2 / 6)  # the second and the fifth
    assert chance.too_far == pytest.approx(2 / 6)  # too early gone, and gone before it was ready


def test_visits_need_a_clock():
    """Without a start there is nothing to compare a visit with."""
    visit = Visit(datetime(2026, 3, 13, 8, 30), datetime(2026, 3, 13, 17, 0))

    assert visit_chances([visit], None, np.ones(3), np.ones(3)) == ()
