"""How far enzyme has got into a piece: diffusion modes, depth points and what they miss.

If enzyme dies at the same rate in the bath and in the tissue, its concentration at depth x is
a(t)·φ(x, θ), φ the pure diffusion solution in the clock θ = ∫D dt/L². Each mode of φ then decays
by its own factor, so that every integral over a stretch of constant temperature is closed-form.
"""

from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

N_MODES = 20
_HALF = 6  # points in each of the two parts of the depth


@dataclass(frozen=True, slots=True, eq=False)
class Geometry:
    """Modes of diffusion and depth points of one shape.

    Attributes
    ----------
    squares
        λ_n², so that mode n decays as e^(−λ_n² θ), θ = Dt/L²; the last stands for all the faster
        modes that are left out. Shape (n_modes + 1,). [1]
    lack
        c_n(x): φ = 1 − Σ c_n(x) e^(−λ_n² θ); the last is so large that the sum of c_n/λ_n² over
        all modes, and with it the dose, is right. Shape (n_points, n_modes + 1). [1]
    points
        Distance from the centre over L; the first point is the centre. Shape (n_points,). [1]
    shares
        Share of the volume that each point stands for; 0 for the centre. Shape (n_points,). [1]
    """

    squares: Array
    lack: Array
    points: Array
    shares: Array

    def mean(self, values: Array) -> Array:
        """Mean over the volume of values at the points, shape (n_points, n_draws)."""
        result: Array = self.shares @ values
        return result


@cache
def geometry(shape: str, n_modes: int = N_MODES, half: int = _HALF) -> Geometry:
    """
    Return modes and depth points of a slab, a cylinder or a sphere [1]_ [2]_.

    Parameters
    ----------
    shape : str
        ``slab`` (L is half the thickness, both faces open), ``cylinder`` or ``sphere`` (L is the
        radius). [name]
    n_modes : int
        How many modes to carry. [1]
    half : int
        Gauss-Legendre points in the inner and in the outer part of the depth. [1]

    Returns
    -------
    geometry : Geometry
        Modes and points. [1]

    References
    ----------
    .. [1] J. Crank, The Mathematics of Diffusion, 2nd ed., 1975, chapters 4 to 6 (from memory).
    .. [2] P. V. Danckwerts, Trans. Faraday Soc. 47, 1014, 1951 (from memory).
    """
    x, w = _depth_points(half)
    if shape == "slab":
        n = np.arange(n_modes + 1)
        roots = (n + 0.5) * np.pi
        lack = 2 * (-1.0) ** n / roots * np.cos(np.outer(x, roots))
        volume, whole = np.ones_like(x), (1 - x**2) / 2
    elif shape == "cylinder":
        from scipy.special import j0, j1, jn_zeros

        roots = jn_zeros(0, n_modes + 1)
        lack = 2 / (roots * j1(roots)) * j0(np.outer(x, roots))
        volume, whole = 2 * x, (1 - x**2) / 4
    else:
        n = np.arange(1, n_modes + 2)
        roots = n * np.pi
        lack = -2 * (-1.0) ** n * np.sinc(np.outer(x, n))
        volume, whole = 3 * x**2, (1 - x**2) / 6
    squares = np.asarray(roots**2, dtype=np.float64)
    left_out = whole - lack[:, :-1] @ (1 / squares[:-1])
    lack[:, -1] = left_out * squares[-1]
    return Geometry(squares, lack, x, w * volume)


def _depth_points(half: int) -> tuple[Array, Array]:
    """Centre first, then points that crowd towards the surface, where fronts are steep."""
    s, w = np.polynomial.legendre.leggauss(2 * half)
    s, w = (s + 1) / 2, w / 2
    x = 1 - (1 - s) ** 2  # x = 0 at the centre, 1 at the surface
    return np.concatenate([[0.0], x]), np.concatenate([[0.0], w * 2 * (1 - s)])
