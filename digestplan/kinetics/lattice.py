"""Evenly spread draws: few serve where chance would need many.

The points are those of a rank-1 lattice taken in the order of the van der Corput sequence and
shifted at random by the seed, so that any number of draws covers each input, and each pair of
inputs, more evenly than chance would.
"""

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

# Made by tests/reference/make_lattice.py, which says how.
_VECTOR = (
    *(1, 13893, 62113, 83671, 78005, 139, 88745, 67689, 96033, 95495, 65823, 29805, 55651),
    *(3239, 75029, 54195, 84625, 79483, 45075, 47857, 22655, 63905, 50851, 63741, 16143),
    *(97929, 44687, 23707, 9927, 66309, 60089, 65191, 2341, 11073, 105409, 120183, 72431),
    *(12545, 8039, 116877, 86603, 95405, 14457, 53285, 36225, 117943, 23853, 67795, 91673),
    *(41895, 583, 39979, 92927, 56017, 76741, 9295, 81205, 45351, 33971, 81579, 78609),
    *(24537, 124369, 50025, 44051, 82663, 85855, 116913, 78391, 34433, 1879, 80371, 43721),
    *(116591, 13925, 60033, 29609, 5973, 74107, 4781, 28699, 116683, 64835, 128491, 72529),
    *(126965, 65553, 93759, 127759, 34019, 107551, 57249, 87053, 12613, 111621, 32507),
)
_FARTHEST = 6.0  # standard deviations at which a deviate is cut


def lattice_points(n_draws: int, n_inputs: int, seed: int) -> Array:
    """
    Return evenly spread points in the unit cube: shifted, and folded in the middle [1]_ [2]_ [3]_.

    Parameters
    ----------
    n_draws : int
        Number of points. [1]
    n_inputs : int
        Number of dimensions; beyond the length of the vector, plain random numbers. [1]
    seed : int
        Chooses the random shift. [1]

    Returns
    -------
    points : ndarray, shape (n_inputs, n_draws)
        Between 0 and 1. [1]

    References
    ----------
    .. [1] I. H. Sloan and A. V. Reztsov, Math. Comput. 71, 263, 2002 (from memory).
    .. [2] R. Cranley and T. N. L. Patterson, SIAM J. Numer. Anal. 13, 904, 1976 (from memory).
    .. [3] F. J. Hickernell, in Monte Carlo and Quasi-Monte Carlo Methods 2000, 2002 (from memory).
    """
    rng = np.random.default_rng(seed)
    shift = rng.random((n_inputs, 1))
    known = min(n_inputs, len(_VECTOR))
    points = np.outer(np.array(_VECTOR[:known], dtype=float), _van_der_corput(n_draws))
    points = 1 - np.abs(2 * ((points + shift[:known]) % 1.0) - 1)
    if n_inputs > known:
        points = np.vstack([points, rng.random((n_inputs - known, n_draws))])
    return points


def _van_der_corput(n_draws: int) -> Array:
    index = np.arange(n_draws)
    result, place = np.zeros(n_draws), 0.5
    while index.any():
        result += place * (index & 1)
        index >>= 1
        place /= 2
    return result


def even_deviates(n_draws: int, n_inputs: int, seed: int) -> Array:
    """
    Return standard normal deviates that cover all inputs evenly [1]_.

    Parameters
    ----------
    n_draws : int
        Number of draws. [1]
    n_inputs : int
        Number of inputs. [1]
    seed : int
        The same seed gives the same deviates. [1]

    Returns
    -------
    deviates : ndarray, shape (n_inputs, n_draws)
        Lattice points through the inverse normal distribution. [1]

    References
    ----------
    .. [1] I. H. Sloan and A. V. Reztsov, Math. Comput. 71, 263, 2002 (from memory).
    """
    from scipy.special import ndtri

    deviates: Array = np.clip(ndtri(lattice_points(n_draws, n_inputs, seed)), -_FARTHEST, _FARTHEST)
    return deviates
