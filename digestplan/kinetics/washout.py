"""How a solute leaves a piece of tissue, or enters it, by diffusion.

Time is the clock θ = ∫D dt/L², L half the thickness of a slab with both faces open, or the radius.
The bath is endless and well stirred, such as running water; for the limited volume of a vessel see
`rinse`. What is said of washing out holds for soaking in, with 1 minus the share.
"""

import numpy as np
from numpy.typing import NDArray

from digestplan.kinetics.roots import rising_root
from digestplan.kinetics.shrinking_core import dimension

Array = NDArray[np.float64]
Values = Array | float

MOST_MODES = 400
_SETTLED = 30.0  # e-folds after which a mode is gone
SHORTEST = _SETTLED / (np.pi * (MOST_MODES - 2)) ** 2  # below it a boundary layer is enough
_SHORT = 0.25  # below it a slab's and a sphere's few images do
_RADIUS_SHORT = 1e-3  # below it a cylinder's power series does


def uptake(theta: Values, shape: str) -> Array:
    """
    Return the share that has left, or entered, in an endless well-stirred bath [1]_.

    Parameters
    ----------
    theta : ndarray
        Diffusion clock D t/L². [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    share : ndarray
        Of what there is at equilibrium. [1]

    References
    ----------
    .. [1] J. Crank, The Mathematics of Diffusion, 2nd ed., 1975, chapters 4 to 6 (from memory).
    """
    theta = np.asarray(theta, dtype=float)
    limit = _RADIUS_SHORT if dimension(shape) == 2 else _SHORT
    early = _early_uptake(np.minimum(theta, limit), shape)
    return np.where(theta < limit, early, 1 - _late_left(np.maximum(theta, limit), shape))


def left_in_tissue(theta: Values, shape: str) -> Array:
    """
    Return the share that is still in the tissue in an endless bath, 1 − `uptake` [1]_.

    Parameters
    ----------
    theta : ndarray
        Diffusion clock D t/L². [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    share : ndarray
        Of what there was; accurate also where hardly anything is left. [1]

    References
    ----------
    .. [1] J. Crank, The Mathematics of Diffusion, 2nd ed., 1975, chapters 4 to 6 (from memory).
    """
    theta = np.asarray(theta, dtype=float)
    limit = _RADIUS_SHORT if dimension(shape) == 2 else _SHORT
    early = 1 - _early_uptake(np.minimum(theta, limit), shape)
    return np.where(theta < limit, early, _late_left(np.maximum(theta, limit), shape))


def _late_left(theta: Array, shape: str) -> Array:
    d = dimension(shape)
    q = bath_roots(np.zeros(1), shape, 64 if d == 2 else 8).reshape(-1, *(1,) * theta.ndim)
    left: Array = (2 * d / q**2 * np.exp(-(q**2) * theta)).sum(axis=0)
    return left


def _early_uptake(theta: Array, shape: str) -> Array:
    from scipy.special import gamma

    d, root = dimension(shape), np.sqrt(theta)
    if d == 2:
        powers = [2 * a * root ** (j + 1) / gamma((j + 3) / 2) for j, a in _bessel_ratio()]
        return np.asarray(np.sum(powers, axis=0))
    images = np.full_like(theta, 1 / np.sqrt(np.pi))
    for n in (1, 2, 3, 4):
        sign = (-1.0) ** n if d == 1 else 1.0
        images += 2 * sign * _integrated_erfc(n / np.maximum(root, 1e-100))
    early: Array = 2 * d * root * images - (3 * theta if d == 3 else 0.0)
    return early


def _bessel_ratio() -> list[tuple[int, float]]:
    """Coefficients a_j of I₁(x)/I₀(x) = Σ a_j x^(−j), from R' = 1 − R/x − R²."""
    a = [1.0]
    for j in range(1, 12):
        inner = sum(a[i] * a[j - i] for i in range(1, j))
        a.append(((j - 2) * a[j - 1] - inner) / 2)
    return list(enumerate(a))


def _integrated_erfc(z: Array) -> Array:
    from scipy.special import erfc

    return np.asarray(np.exp(-z * z) / np.sqrt(np.pi) - z * erfc(z))


def local_uptake(theta: Values, place: Values, shape: str) -> Array:
    """
    Return the concentration at a depth over that of an endless bath, soaking in [1]_.

    Parameters
    ----------
    theta : ndarray
        Diffusion clock D t/L². [1]
    place : ndarray
        Distance from the centre over L, 0 to 1. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    concentration : ndarray
        0 before the front arrives, 1 at equilibrium; washing out, 1 minus it is left. [1]

    Notes
    -----
    Accurate to 1e-12 for θ above 2e-5, and to 1e-5 below (a boundary layer).

    References
    ----------
    .. [1] J. Crank, The Mathematics of Diffusion, 2nd ed., 1975, chapters 4 to 6 (from memory).
    """
    theta, x = np.broadcast_arrays(np.asarray(theta, dtype=float), np.asarray(place, dtype=float))
    d, long_ = dimension(shape), np.maximum(theta, SHORTEST)
    n_modes = enough_modes(long_)
    q = bath_roots(np.zeros(1), shape, n_modes).reshape(-1, *(1,) * theta.ndim)
    lack = 2 * d / q**2 * _mode(q * x, d) / mode_mean(q, shape)
    late = 1 - (lack * np.exp(-(q**2) * long_)).sum(axis=0)
    layer = _boundary_layer(np.minimum(theta, SHORTEST), np.maximum(x, 0.5), d)
    early = np.where(x < 0.5, 0.0, layer)
    return np.where(theta < SHORTEST, early, late)


def _boundary_layer(theta: Array, x: Array, d: int) -> Array:
    from scipy.special import erfc

    z = (1 - x) / (2 * np.sqrt(np.maximum(theta, 1e-300)))
    return np.asarray(x ** (-(d - 1) / 2) * erfc(z))


def _mode(z: Array, d: int) -> Array:
    """Eigenfunction of depth, 1 at the centre."""
    from scipy.special import j0

    if d == 2:
        return np.asarray(j0(z))
    return np.cos(z) if d == 1 else np.asarray(np.sinc(z / np.pi))


def mode_mean(roots: Array, shape: str) -> Array:
    """
    Return the mean over the volume of modes of diffusion that are 1 at the centre [1]_.

    Parameters
    ----------
    roots : ndarray
        q_n: the modes are cos(qx), J₀(qx) and sin(qx)/(qx). [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    mean : ndarray
        Mean, with its sign. [1]

    References
    ----------
    .. [1] Elementary integration.
    """
    from scipy.special import j1

    d = dimension(shape)
    if d == 2:
        return np.asarray(2 * j1(roots) / roots)
    if d == 1:
        return np.sin(roots) / roots
    return 3 * (np.sin(roots) - roots * np.cos(roots)) / roots**3


def enough_modes(theta: Array) -> int:
    """
    Return how many modes of diffusion are still alive at the earliest of some times [1]_.

    Parameters
    ----------
    theta : ndarray
        Diffusion clocks D t/L², above 0. [1]

    Returns
    -------
    n_modes : int
        At most `MOST_MODES`. [1]

    References
    ----------
    .. [1] e^(−30) is nothing in double precision.
    """
    least = max(float(np.min(theta, initial=1.0)), SHORTEST)
    return min(int(np.sqrt(_SETTLED / least) / np.pi) + 2, MOST_MODES)


def theta_for_uptake(share: Values, shape: str) -> Array:
    """
    Return the diffusion clock at which a share has left, the inverse of `uptake` [1]_.

    Parameters
    ----------
    share : ndarray
        Share that has left, or entered; 1 takes for ever. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]

    Returns
    -------
    theta : ndarray
        Diffusion clock D t/L². [1]

    Notes
    -----
    No rinse can be shorter: fresh fluid all the time is the best that exchanges can do.

    References
    ----------
    .. [1] J. Crank, The Mathematics of Diffusion, 2nd ed., 1975, chapters 4 to 6 (from memory).
    """
    share = np.asarray(share, dtype=float)
    d = dimension(shape)
    whole = share >= 1
    wanted = np.where(whole, 0.5, share)
    slowest = float(bath_roots(np.zeros(1), shape, 1)[0, 0])
    low = np.sqrt(np.pi) * wanted / (2 * d)  # the share is at most 2d√(θ/π)
    high = np.maximum(np.sqrt(-np.log1p(-wanted)) / slowest, low)  # and at least that of one mode

    def surplus(root: Array) -> Array:
        left = left_in_tissue(root**2, shape)
        near: Array = uptake(root**2, shape) - wanted
        return np.where(wanted > 0.5, np.log((1 - wanted) / left), near)

    root = rising_root(surplus, low, high, tolerance=1e-14)
    return np.where(whole, np.inf, root**2)


def bath_roots(inverse_ratio: Array, shape: str, n_modes: int) -> Array:
    """
    Return the roots q_n of a tissue in a well-stirred bath of limited volume [1]_.

    Parameters
    ----------
    inverse_ratio : ndarray, shape (n_draws,)
        Tissue over bath, 0 for an endless bath. [1]
    shape : str
        ``slab``, ``cylinder`` or ``sphere``. [name]
    n_modes : int
        How many roots. [1]

    Returns
    -------
    roots : ndarray, shape (n_modes, n_draws)
        Positive roots, rising; mode n decays as e^(−q_n² θ). [1]

    Notes
    -----
    With β tissue over bath: tan q = −q/β; q J₀(q) + 2β J₁(q) = 0; tan q = 3βq/(3β + q²).

    References
    ----------
    .. [1] J. Crank, The Mathematics of Diffusion, 2nd ed., 1975, eqs 4.37, 5.33, 6.30 (from
       memory).
    """
    d = dimension(shape)
    b: Array = np.asarray(inverse_ratio, dtype=float)[None, :]
    if d == 2:
        return _cylinder_roots(b, n_modes)
    turns: Array = np.pi * np.arange(1.0, n_modes + 1)[:, None]
    if d == 1:
        q: Array = turns - np.pi / 2 + 0 * b
        for _ in range(8):
            q = q - (q - turns + np.arctan2(q, b)) / (1 + b / (q * q + b * b))
        return q
    q = turns + np.arctan2(3 * b * turns, 3 * b + turns**2)
    for _ in range(8):
        slope = 1 - 3 * b * (3 * b - q * q) / ((3 * b + q * q) ** 2 + (3 * b * q) ** 2)
        q = q - (q - turns - np.arctan2(3 * b * q, 3 * b + q * q)) / slope
    return q


def _cylinder_roots(b: Array, n_modes: int) -> Array:
    from scipy.special import j0, j1, jn_zeros

    low, high = (np.array(jn_zeros(order, n_modes))[:, None] for order in (0, 1))
    q: Array = low + (high - low) * np.arctan2(2 * b, low) * 2 / np.pi
    for _ in range(8):
        zero, one = j0(q), j1(q)
        slope = zero - q * one + 2 * b * (zero - one / q)
        q = np.clip(q - (q * zero + 2 * b * one) / slope, low, high)
    return q


def electrolyte_diffusivity(
    cation: Values, anion: Values, cation_charge: int, anion_charge: int
) -> Array:
    """
    Return the diffusivity of a salt or acid from those of its ions, at infinite dilution [1]_.

    Parameters
    ----------
    cation : ndarray
        Diffusivity of the cation. [m**2/h]
    anion : ndarray
        Diffusivity of the anion. [m**2/h]
    cation_charge : int
        Charge of the cation, positive. [1]
    anion_charge : int
        Charge of the anion, without its sign. [1]

    Returns
    -------
    diffusivity : ndarray
        Of both together, since neither can run away from the other. [m**2/h]

    References
    ----------
    .. [1] Nernst and Haskell; E. L. Cussler, Diffusion, ch. 6 (from memory).
    """
    fast, slow = np.asarray(cation, dtype=float), np.asarray(anion, dtype=float)
    drag = cation_charge * fast + anion_charge * slow
    together: Array = (cation_charge + anion_charge) * fast * slow / drag
    return together
