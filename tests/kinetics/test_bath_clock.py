"""Time and extent within one bath that is being spent, against quadrature and a table."""

import csv
from pathlib import Path

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.bath_clock import (
    bath_clock,
    bath_extent,
    bath_limit,
    bath_time,
    extent_at_folds,
    folds_spent,
)
from digestplan.kinetics.shrinking_core import dimension, extent_after

approx = pytest.approx
COMPUTED = Path(__file__).parents[1] / "reference" / "computed"
SHAPES = ("slab", "cylinder", "sphere")
BALANCE = "shrinking core (Yagi & Kunii 1955) in a bath that is being spent: quadrature, 30 digits"


def spent_bath(shape):
    with (COMPUTED / "shrinking_core_spent_bath.csv").open(encoding="utf-8") as lines:
        rows = [row for row in csv.DictReader(lines) if row["shape"] == shape]
    keys = ("b_reagent_needed_over_held", "tau_layer_h", "tau_reaction_h", "tau_film_h", "X", "t_h")
    return (np.array([float(row[key]) for row in rows]) for key in keys)


@pytest.mark.source("C", BALANCE)
@pytest.mark.parametrize("shape", SHAPES)
def test_spent_bath_follows_the_table(shape):
    """Times and extents in baths that hold ∞, 2, 1.1 and 0.8 times what is needed match to 1e-9."""
    demand, layer, reaction, film, extent, hours = spent_bath(shape)
    assert len(hours) >= 40
    wholes = (layer, reaction, film)
    assert bath_time(extent, 0.0, 0.0, demand, wholes, shape) == approx(hours, rel=1e-9)
    assert bath_extent(hours, 0.0, 0.0, demand, wholes, shape) == approx(extent, rel=1e-9)


def quadrature(shape, extent, start, demand):
    """Three integrals over the core's radius with 30 digits; a handful of panels at each end."""
    d = dimension(shape)
    top, end = (1 - start) ** (mpmath.mpf(1) / d), (1 - extent) ** (mpmath.mpf(1) / d)
    slopes = {
        1: lambda r: 2 * (1 - r),
        2: lambda r: -4 * r * mpmath.log(r) if r else mpmath.mpf(0),
        3: lambda r: 6 * (1 - r) * r,
    }
    rates = (slopes[d], lambda _: mpmath.mpf(1), lambda r: d * r ** (d - 1))
    places = [end, *(end + (top - end) / mpmath.mpf(20) ** k for k in range(9, 0, -1)), top]
    return [
        float(mpmath.quad(lambda r, f=f: f(r) / (1 - demand * (1 - start - r**d)), places))
        for f in rates
    ]


@pytest.mark.source("C", BALANCE)
@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("start", [0.0, 0.3])
@pytest.mark.parametrize("demand", [1e-6, 0.01, 0.085, 0.5, 0.999, 1.0, 1.000001, 1.25, 30.0])
def test_closed_forms_at_every_strength(shape, start, demand):
    """From a bath that is never spent to one that is spent at once, also at the edges between."""
    mpmath.mp.dps = 30
    for share in (0.01, 0.999):
        folds = folds_spent(bath_limit(start, demand), np.array([start]), np.array([demand]))
        folds = np.minimum(folds, 15.0) * share
        exact = start - mpmath.expm1(-mpmath.mpf(float(folds[0]))) / mpmath.mpf(demand)
        expected = quadrature(shape, exact, mpmath.mpf(start), mpmath.mpf(demand))
        extent = extent_at_folds(folds, np.array([start]), np.array([demand]))
        parts = bath_clock(extent, folds, np.array([start]), np.array([demand]), shape)
        assert [float(part[0]) for part in parts] == approx(expected, rel=1e-9, abs=1e-12)


def test_a_bath_that_holds_too_little_stops():
    """With needed over held 1.25 a bath from fresh stops at 0.8, and 0.81 is never reached."""
    wholes = (10.0, 1.0, 1.0)
    for shape in SHAPES:
        assert bath_limit(0.0, 1.25) == approx(0.8)
        assert bath_extent(np.inf, 0.0, 0.0, 1.25, wholes, shape) == approx(0.8, rel=1e-15)
        assert bath_extent(1e6, 0.0, 0.0, 1.25, wholes, shape) == approx(0.8, rel=1e-12)
        targets = np.array([0.79999, 0.81, 1.0, 1.1])
        hours = bath_time(targets, 0.0, 0.0, 1.25, wholes, shape)
        assert np.isfinite(hours[0])
        assert (hours[1:] == np.inf).all()


def test_reached_already_takes_no_time():
    """A target that lies behind takes no time, and no time moves nothing."""
    for shape in SHAPES:
        assert bath_time(0.2, 0.3, 0.1, 0.5, (10.0, 0.0, 1.0), shape) == 0
        assert bath_extent(0.0, 0.3, 0.1, 0.5, (10.0, 0.0, 1.0), shape) == approx(0.3, rel=1e-14)
        assert bath_extent(5.0, 1.0, 0.1, 0.5, (10.0, 0.0, 1.0), shape) == 1


shapes = st.sampled_from(SHAPES)
shares = st.floats(0, 1)
demands = st.floats(0, 3)
wholes = st.tuples(*(st.floats(0.01, 50) for _ in range(3)))


@settings(deadline=None, derandomize=True)
@given(shapes, shares, shares, demands, wholes)
def test_time_is_the_inverse_of_extent(shape, start, share, demand, wholes):
    """The time to an extent leads to that extent, wherever the bath started."""
    start *= 0.95
    extent = float(start + share * 0.999 * (bath_limit(start, demand) - start))
    hours = bath_time(extent, start, start, demand, wholes, shape)
    assert bath_extent(hours, start, start, demand, wholes, shape) == approx(extent, abs=1e-11)


@settings(deadline=None, derandomize=True)
@given(shapes, shares, shares, st.floats(0, 500), demands, wholes)
def test_split_of_a_stretch_changes_nothing(shape, start, share, hours, demand, wholes):
    """A stretch in two parts ends where it ends in one."""
    start *= 0.95
    whole = bath_extent(hours, start, start, demand, wholes, shape)
    middle = bath_extent(share * hours, start, start, demand, wholes, shape)
    end = bath_extent((1 - share) * hours, middle, start, demand, wholes, shape)
    assert start - 1e-14 <= middle <= end + 1e-12
    assert end == approx(whole, abs=1e-11)


@settings(deadline=None, derandomize=True)
@given(shapes, st.floats(0, 100), wholes)
def test_endless_bath_is_a_dose(shape, hours, wholes):
    """In a bath that is never spent the extent is that of the dose."""
    extent = bath_extent(hours, 0.0, 0.0, 0.0, wholes, shape)
    assert float(extent[0]) == approx(float(extent_after(hours, *wholes, shape)), abs=1e-11)


@settings(deadline=None, derandomize=True)
@given(shapes, st.floats(0, 500), demands, demands, wholes)
def test_a_stronger_bath_is_never_slower(shape, hours, one, other, wholes):
    """The less of its reagent a bath loses, the further it gets in the same time."""
    weak, strong = max(one, other), min(one, other)
    slow = bath_extent(hours, 0.0, 0.0, weak, wholes, shape)
    assert slow <= bath_extent(hours, 0.0, 0.0, strong, wholes, shape) + 1e-12
