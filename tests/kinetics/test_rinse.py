"""Rinses in baths of limited volume, against Crank's solutions and a general solver."""

import csv
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.linalg import expm

from digestplan.kinetics.rinse import (
    exchanges_for,
    left_at_equilibrium,
    rinse,
    uptake_finite_bath,
)
from digestplan.kinetics.washout import SHORTEST, left_in_tissue, local_uptake, theta_for_uptake

approx = pytest.approx
COMPUTED = Path(__file__).parents[1] / "reference" / "computed"
SHAPES = ("slab", "cylinder", "sphere")
CRANK = "Crank, The Mathematics of Diffusion, 2nd ed. 1975"


@pytest.mark.source("C", f"{CRANK}, eqs 4.37, 5.33, 6.30 (from memory); inverse Laplace agrees")
@pytest.mark.parametrize("shape", SHAPES)
def test_finite_bath_follows_the_table(shape):
    """Uptake from baths of 1, 3, 10 and 50 times the tissue's volume matches to 1e-12."""
    with (COMPUTED / "crank_finite_bath.csv").open(encoding="utf-8") as lines:
        rows = list(csv.DictReader(lines))
    theta, ratio, expected = (
        np.array([float(row[key]) for row in rows])
        for key in ("Dt_over_L2", "alpha_bath_over_body", shape)
    )
    assert uptake_finite_bath(theta, ratio, shape) == approx(expected, abs=1e-12)


def test_very_short_times_join_on():
    """At the shortest times the boundary layer joins on to the modes."""
    for shape in SHAPES:
        for ratio in (0.1, 1.0, 20.0, np.inf):
            theta = SHORTEST * (1 + np.array([-1e-9, 1e-9]))
            assert np.ptp(uptake_finite_bath(theta, ratio, shape)) < 1e-5


@pytest.mark.parametrize("shape", SHAPES)
def test_endless_bath_is_the_limit(shape):
    """With an infinite ratio, exchanges are nothing but time, in the mean and at the centre."""
    course = rinse(np.full((3, 1), 0.04), np.inf, shape)
    theta = np.array([0.04, 0.08, 0.12])
    assert course.left[1:, 0] == approx(left_in_tissue(theta, shape), abs=1e-13)
    assert course.centre[1:, 0] == approx(1 - local_uptake(theta, 0.0, shape), abs=1e-12)
    assert (course.bath == 0).all()
    assert rinse(np.full((3, 1), 0.04), 1e12, shape).left == approx(course.left, abs=1e-11)


@pytest.mark.source("C", "Mass balance: 1/21 a time")
def test_three_exchanges_at_equilibrium():
    """Three long exchanges of twenty volumes leave 1.08e-4, by diffusion and by the balance."""
    assert left_at_equilibrium(20.0, 3) == approx(1.08e-4, rel=1e-3)
    for shape in SHAPES:
        course = rinse(np.full((3, 1), 30.0), 20.0, shape)
        assert course.left[:, 0] == approx(left_at_equilibrium(20.0, np.arange(4)), rel=1e-6)


def by_cells(shape, n_cells, thetas, ratio, kept):
    """Finite volumes, exact in time: mean left after each exchange, and each bath."""
    d = SHAPES.index(shape) + 1
    edges = np.sin(np.linspace(0, np.pi / 2, n_cells + 1))  # crowded towards the surface
    centres, volumes = (edges[1:] + edges[:-1]) / 2, np.diff(edges**d)
    matrix = np.zeros((n_cells + 1, n_cells + 1))
    for i in range(n_cells):
        last = i == n_cells - 1
        gap = (1 - centres[i]) if last else centres[i + 1] - centres[i]
        flow = d * edges[i + 1] ** (d - 1) / gap
        outer = ratio if last else volumes[i + 1]
        for row, other, size in ((i, i + 1, volumes[i]), (i + 1, i, outer)):
            matrix[row, row] -= flow / size
            matrix[row, other] += flow / size
    state, left, baths = np.append(np.ones(n_cells), 0.0), [], []
    for theta in thetas:
        state = expm(matrix * theta) @ state
        left.append(volumes @ state[:-1])
        baths.append(state[-1])
        state[-1] *= kept
    return np.array([left, baths])


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize(("ratio", "kept"), [(4.0, 0.0), (1.5, 0.2)])
def test_profiles_are_carried_from_bath_to_bath(shape, ratio, kept):
    """Three unequal exchanges agree with a solution by cells (extrapolated) to 1e-6."""
    thetas = [0.05, 0.1, 0.07]
    coarse, fine = (by_cells(shape, n, thetas, ratio, kept) for n in (60, 120))
    expected = (4 * fine - coarse) / 3
    course = rinse(np.array(thetas)[:, None], ratio, shape, kept)
    assert course.left[1:, 0] == approx(expected[0], abs=1e-6)
    assert course.bath[:, 0] == approx(expected[1], abs=1e-6)


def test_time_empties_a_thick_piece_not_the_number():
    """Ten quick exchanges of a thick slab leave as much as the same time in running water."""
    quick = rinse(np.full((10, 1), 0.005), 20.0, "slab").left[-1, 0]
    assert quick == approx(float(left_in_tissue(0.05, "slab")), rel=0.02)
    assert quick > 0.7
    assert exchanges_for(0.01, 0.005, 20.0, "slab")[0] == np.inf
    assert theta_for_uptake(0.99, "slab") > 40 * 0.005


def test_exchanges_for_a_target():
    """The suggested number reaches the target, one fewer does not; equilibrium needs the least."""
    theta = np.array([0.1, 0.5, 50.0])
    needed = exchanges_for(1e-3, theta, 20.0, "cylinder")
    assert needed[2] == 3  # ln 1e-3 / ln(1/21) is 2.3
    for t, n in zip(theta, needed.astype(int), strict=True):
        left = rinse(np.full((n, 1), t), 20.0, "cylinder").left[:, 0]
        assert left[n] <= 1e-3 < left[n - 1]


shapes = st.sampled_from(SHAPES)
ratios = st.floats(0.05, 100)
clocks = st.lists(st.floats(1e-4, 3), min_size=1, max_size=5)


@settings(deadline=None, derandomize=True)
@given(shapes, ratios, clocks, st.floats(0, 0.9))
def test_nothing_is_lost_in_a_rinse(shape, ratio, thetas, kept):
    """What leaves the tissue is in the bath: balanced at every exchange, and left only falls."""
    course = rinse(np.array(thetas)[:, None], ratio, shape, kept)
    old = 0.0
    for before, after, bath in zip(course.left[:-1], course.left[1:], course.bath, strict=True):
        assert before + ratio * old == approx(after + ratio * bath, rel=1e-9)
        old = kept * bath
    assert (course.bath >= 0).all()
    if kept == 0:
        assert (np.diff(course.left, axis=0) <= 1e-12).all()


@settings(deadline=None, derandomize=True)
@given(shapes, ratios, st.floats(1e-3, 3))
def test_one_exchange_is_the_finite_bath(shape, ratio, theta):
    """After one exchange the share gone is that of the bath of limited volume."""
    left = rinse(np.array([[theta]]), ratio, shape).left[1]
    share = uptake_finite_bath(theta, ratio, shape)
    assert 1 - left == approx(share * ratio / (1 + ratio), abs=1e-11)


@settings(deadline=None, derandomize=True)
@given(shapes, ratios, clocks, st.floats(0.01, 0.99))
def test_bath_that_is_not_changed_is_one_bath(shape, ratio, thetas, share):
    """If all of the old bath stays, cutting the time in two changes nothing."""
    split = [part for t in thetas for part in (share * t, (1 - share) * t)]
    one = rinse(np.array([[sum(thetas)]]), ratio, shape, 1.0).left[-1]
    assert rinse(np.array(split)[:, None], ratio, shape, 1.0).left[-1] == approx(one, abs=1e-10)
