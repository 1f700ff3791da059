"""Inactivation: closed forms against general integration, and their edges."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from mpmath import mp, mpf, quad

from digestplan.kinetics import inactivation

positive = st.floats(1e-10, 100.0)


def exact_two_stage(k1, k2, t):
    """Intermediate form and its integral in 40 digits, from fresh enzyme alone."""
    mp.dps = 40
    k1, k2, t = mpf(k1), mpf(k2), mpf(t)
    if abs(k1 - k2) < mpf(10) ** -30:
        return k1 * t * mp.exp(-k1 * t), (1 - mp.exp(-k1 * t) * (1 + k1 * t)) / k1
    left = k1 / (k2 - k1) * (mp.exp(-k1 * t) - mp.exp(-k2 * t))
    passed = k1 / (k2 - k1) * ((1 - mp.exp(-k1 * t)) / k1 - (1 - mp.exp(-k2 * t)) / k2)
    return left, passed


@pytest.mark.source("C", "Henley & Sadana 1985, the series scheme, in 40 digits by mpmath")
@settings(deadline=None, derandomize=True, max_examples=150)
@given(positive, st.one_of(positive, st.just(None)), st.floats(1e-6, 1000.0))
def test_two_stage_is_right_for_any_rates(k1, k2, hours):
    """Both populations and their integrals agree with 40-digit arithmetic, equal rates too."""
    k2 = k1 * (1 + 1e-9) if k2 is None else k2
    ones, zero = np.ones(1), np.zeros(1)
    _, left, _, integral = inactivation.two_stage(ones, zero, np.array([k1]), np.array([k2]), hours)
    expected_left, expected_integral = exact_two_stage(k1, k2, hours)

    assert float(expected_left) == pytest.approx(left[0], rel=1e-9, abs=1e-15)
    assert float(expected_integral) == pytest.approx(integral[0], rel=1e-9, abs=1e-15)


@pytest.mark.source("C", "autolysis beside first-order death, integrated by mpmath quadrature")
@pytest.mark.parametrize(("k", "ka", "t"), [(0.3, 2.0, 5.0), (1e-9, 0.5, 10.0), (0.5, 1e-12, 4.0)])
def test_autolysis_integral(k, ka, t):
    """The closed integral of the activity is that of the closed activity."""
    mp.dps = 30

    def active(s):
        return mp.exp(-k * s) / (1 + mpf(ka) * (1 - mp.exp(-k * s)) / k)

    left, integral = inactivation.autolysis(np.ones(1), np.array([k]), np.array([ka]), t)

    assert float(active(mpf(t))) == pytest.approx(left[0], rel=1e-9)
    assert float(quad(active, [0, t])) == pytest.approx(integral[0], rel=1e-9)


def test_autolysis_without_any_death_keeps_all():
    """With both rates at zero nothing is lost."""
    zero = np.zeros(1)
    left, integral = inactivation.autolysis(np.ones(1), zero, zero, 7.0)

    assert (left[0], integral[0]) == (1.0, 7.0)


def test_second_order_alone():
    """Autolysis alone leaves a hyperbola, 1/(1 + kt)."""
    left, integral = inactivation.autolysis(np.ones(1), np.zeros(1), np.ones(1), 3.0)

    assert left[0] == pytest.approx(0.25, rel=1e-12)
    assert integral[0] == pytest.approx(np.log(4.0), rel=1e-12)


def test_nothing_overflows():
    """Huge rates and times leave zeros, not errors."""
    huge = np.array([1e300])
    with np.errstate(all="raise", under="ignore"):
        left, integral = inactivation.first_order(np.ones(1), np.array([1e5]), 1e3)
    assert left[0] == 0.0
    assert integral[0] == pytest.approx(1e-5)
    assert inactivation.mean_of_decay(huge)[0] < 1e-299
