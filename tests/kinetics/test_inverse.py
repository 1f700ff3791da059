"""Times at which dose, or dose and heat, reach a level."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.dose import Course
from digestplan.kinetics.inverse import time_for_integral, time_to_effect
from digestplan.kinetics.programme import FOR_EVER, Leg, compile_programme
from digestplan.kinetics.state import Rates, nothing
from digestplan.kinetics.temperature import arrhenius_factor

N = 64
LEGS = [Leg(0.5, ramp=False), Leg(0.25, ramp=True), Leg(5.0, ramp=False), Leg(0.5, ramp=True)]
NOMINAL = np.array([295.0, 295.0, 310.0, 310.0, 280.0])
KINDS = ("first_order", "autolysis", "two_stage")


def course(kind, heat=0.0, lag=0.05, saturation=None):
    """A course of many draws through a ramped programme that ends in the cold."""
    rng = np.random.default_rng(4)
    cells = compile_programme(LEGS, NOMINAL, lag, breaks=[2.0])
    temperature = cells.temperatures(NOMINAL[:, None] + 0.5 * rng.standard_normal(N))
    first = 0.05 * rng.lognormal(0, 0.5, N) * arrhenius_factor(temperature, 200e3, 310.0)
    second = 0.02 * arrhenius_factor(temperature, 150e3, 310.0) * np.ones(N)
    rates = Rates(
        arrhenius_factor(temperature, 50e3 + 5e3 * rng.standard_normal(N), 310.0),
        first,
        second if kind == "two_stage" else None,
        0.3 * second if kind == "autolysis" else None,
        heat * arrhenius_factor(temperature, 400e3, 310.0) * np.ones(N) if heat else None,
    )
    charges = {0: rng.lognormal(0, 0.2, N), cells.cell_at(2.0) + 1: 0.3 * np.ones(N)}
    return Course(cells, rates, nothing(N), charges, 0.4, saturation)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("saturation", [None, np.full(N, 3.0)])
@pytest.mark.parametrize("heat", [0.0, 1e-3])
def test_the_time_for_a_level_gives_the_level(kind, heat, saturation):
    """Dose and heat at the time found are the level that was asked for, in every cell."""
    c = course(kind, heat, saturation=saturation)
    weight = np.random.default_rng(5).lognormal(0, 0.4, N)
    for share in np.linspace(0.02, 0.999, 23):
        after = c.at(float(share) * 9.0)  # 6.25 h are the programme, the rest is its tail
        level = weight * after.dose + 0.7 * after.heat
        hours = time_to_effect(c, weight, 0.7, level)

        assert np.full(N, share * 9.0) == pytest.approx(hours, rel=1e-8)


@pytest.mark.parametrize("kind", KINDS)
def test_what_is_more_than_the_ceiling_is_never_reached(kind):
    """A level just above what the enzyme gives for ever is never reached, one below it is."""
    c = course(kind)
    ceiling = c.at(c.cells.end + FOR_EVER).dose

    assert np.isinf(time_to_effect(c, 1.0, 0.0, ceiling * (1 + 1e-6))).all()
    assert np.isfinite(time_to_effect(c, 1.0, 0.0, ceiling * (1 - 1e-6))).all()


def test_heat_alone_is_enough():
    """Where the enzyme leaves what must be kept alone, heat brings it to its limit."""
    c = course("first_order", heat=1e-3)
    after = c.at(3.0)

    assert time_to_effect(c, 0.0, 1.0, after.heat) == pytest.approx(np.full(N, 3.0), rel=1e-9)


def test_nothing_missing_is_reached_at_once():
    """A level of nothing is reached at the start."""
    assert (time_to_effect(course("first_order"), 1.0, 0.0, np.zeros(N)) == 0).all()


@settings(deadline=None, derandomize=True)
@given(st.floats(1e-3, 1e3), st.one_of(st.just(0.0), st.floats(1e-12, 10.0)), st.floats(1e-3, 1e3))
def test_the_integral_of_dying_enzyme_is_inverted(amount, rate, hours):
    """The time for the integral that a time gives is that time, short of the enzyme's end."""
    k = np.array([rate])
    spent = min(rate * hours, 12.0)  # later there is hardly anything left to tell times apart
    t = spent / rate if rate * hours > 12 else hours
    integral = amount * t * (-np.expm1(-k * t) / (k * t) if rate * t > 0 else 1.0)

    assert t == pytest.approx(time_for_integral(np.array([amount]), k, integral)[0], rel=1e-8)
