"""The lattice: seeded, and more even than chance."""

import numpy as np
import pytest
from scipy.stats import qmc

from digestplan.kinetics.lattice import lattice_points


@pytest.mark.source("L", "discrepancy by scipy.stats.qmc, against its own Sobol' points")
@pytest.mark.parametrize("n_draws", [500, 2000])
def test_points_are_as_even_as_sobols(n_draws):
    """Over pairs of inputs the lattice is about as even as Sobol' points, and chance is not."""
    n_inputs = 8
    ours = lattice_points(n_draws, n_inputs, 7).T
    sobol = qmc.Sobol(n_inputs, seed=7).random(4096)[:n_draws]
    chance = np.random.default_rng(7).random((n_draws, n_inputs))

    def unevenness(points):
        pairs = [(i, j) for i in range(n_inputs) for j in range(i)]
        return np.mean([qmc.discrepancy(points[:, pair], method="CD") for pair in pairs])

    assert unevenness(ours) < 5 * unevenness(sobol)  # squared: about twofold in discrepancy
    assert unevenness(ours) < 0.05 * unevenness(chance)


def test_points_fill_every_input_evenly():
    """Each input alone is covered to within two steps of a perfect grid."""
    points = np.sort(lattice_points(2048, 90, 3), axis=1)
    grid = (np.arange(2048) + 0.5) / 2048

    assert np.abs(points - grid).max() < 2 / 2048


def test_same_seed_same_points_and_another_seed_others():
    """A seed fixes the points; another gives others."""
    assert np.array_equal(lattice_points(100, 5, 1), lattice_points(100, 5, 1))
    assert not np.array_equal(lattice_points(100, 5, 1), lattice_points(100, 5, 2))


def test_more_inputs_than_the_vector_is_long():
    """Beyond the lattice's vector the inputs are plain random numbers."""
    points = lattice_points(64, 150, 1)

    assert points.shape == (150, 64)
    assert (points >= 0).all()
    assert (points < 1).all()


def test_the_mean_of_a_smooth_function_is_nearer_than_chance():
    """A smooth function of ten inputs is integrated ten times better than by chance."""
    function = lambda x: np.prod(1 + (x - 0.5) / 3, axis=0)  # noqa: E731 - its mean is 1
    ours = [abs(function(lattice_points(2000, 10, seed)).mean() - 1) for seed in range(20)]
    rngs = [np.random.default_rng(seed) for seed in range(20)]
    chance = [abs(function(rng.random((10, 2000))).mean() - 1) for rng in rngs]

    assert np.mean(ours) < 0.1 * np.mean(chance)
