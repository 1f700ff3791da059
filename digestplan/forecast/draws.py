"""Draws of every uncertain value in a plan: seeded, and spread evenly over the possibilities.

The points are those of a rank-1 lattice taken in the order of the van der Corput sequence and
shifted at random by the seed, so that any number of draws covers each input, and each pair of
inputs, more evenly than chance would.
"""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import fields, is_dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.library_values import treatment_values
from digestplan.plan.model import Plan, Stretch, Value
from digestplan.quantities.model import Quantity

Array = NDArray[np.float64]

# Made by tests/reference/make_lattice.py, which says how.
_VECTOR = (
    *(1, 46309, 15543, 773, 103885, 104105, 59451, 70301, 76021, 48977, 191, 2753, 75221, 89803),
    *(6971, 86165, 51175, 34553, 5191, 22761, 111395, 55483, 108149, 129013, 74445, 88947, 129603),
    *(62643, 83097, 66599, 117729, 24497, 57191, 44279, 28617, 83035, 95571, 121909, 103339, 82679),
    *(70501, 4241, 31271, 29411, 1701, 37593, 106635, 124127, 12919, 53663, 110705, 84087, 11649),
    *(28565, 43043, 56615, 62717, 90275, 3819, 114869, 19585, 55735, 103993, 46011, 98267, 71407),
    *(19581, 126083, 89833, 127683, 56311, 15481, 8549, 112209, 83883, 52629, 54409, 110043),
    *(106413, 17241, 33747, 23333, 46727, 128735, 11897, 91761, 6433, 79149, 74829, 44849, 12335),
    *(41621, 66725, 72291, 25961, 102199),
)
_FARTHEST = 6.0  # standard deviations at which a draw is cut


def lattice_points(n_draws: int, n_inputs: int, seed: int) -> Array:
    """
    Return evenly spread points in the unit cube.

    Parameters
    ----------
    n_draws
        Number of points. [1]
    n_inputs
        Number of dimensions. Beyond the length of the lattice's vector, plain random numbers. [1]
    seed
        Chooses the random shift. [1]

    Returns
    -------
    points
        Shape (n_inputs, n_draws), between 0 and 1. [1]

    References
    ----------
    I. H. Sloan and A. V. Reztsov, Math. Comput. 71, 263, 2002 (component by component
    construction); R. Cranley and T. N. L. Patterson, SIAM J. Numer. Anal. 13, 904, 1976
    (random shift); both from memory.
    """
    rng = np.random.default_rng(seed)
    shift = rng.random((n_inputs, 1))
    known = min(n_inputs, len(_VECTOR))
    points = np.outer(np.array(_VECTOR[:known], dtype=float), _van_der_corput(n_draws))
    points = (points + shift[:known]) % 1.0
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


def uncertain_values(record: Any) -> Iterator[tuple[str, Quantity]]:
    """
    Walk through a plan's records and yield every value that has a spread.

    Parameters
    ----------
    record
        A plan, or any of its records.

    Yields
    ------
    key, quantity
        The input's key and its quantity. Temperatures of a programme share one key a nominal
        temperature: the same incubator errs in the same direction all night.
    """
    if isinstance(record, Value):
        if record.quantity.distribution != "exact":
            yield record.place, record.quantity
    elif isinstance(record, Stretch):
        if record.temperature.quantity.distribution != "exact":
            yield incubator_key(record.temperature), record.temperature.quantity
    else:
        for part in _parts(record):
            yield from uncertain_values(part)


def _parts(record: Any) -> Iterable[Any]:
    if isinstance(record, Mapping):
        return record.values()
    if isinstance(record, tuple):
        return record
    if is_dataclass(record):
        return [getattr(record, field.name) for field in fields(record)]
    return ()


def incubator_key(temperature: Value) -> str:
    """Key of the error that all stretches at one nominal temperature share."""
    return f"incubator at {temperature.quantity.value - 273.15:.4g} °C"


class Draws:
    """The draws of one plan.

    Parameters
    ----------
    plan
        The plan whose uncertain values are drawn.
    n_draws
        How many draws. [1]
    seed
        The same seed and plan give the same numbers. [1]

    Attributes
    ----------
    inputs
        The uncertain inputs by key, in the order of the plan.
    n_draws, seed
        As given; ``n_draws`` is 1 where the plan has no spread at all.
    """

    def __init__(self, plan: Plan, n_draws: int, seed: int) -> None:
        self.inputs: dict[str, Quantity] = dict(uncertain_values(plan))
        self.inputs |= dict(uncertain_values(treatment_values(plan)))
        self.seed = seed
        self.n_draws = n_draws if self.inputs else 1
        self._deviates = self._normal_deviates()

    def _normal_deviates(self) -> dict[str, Array]:
        if not self.inputs:
            return {}
        from scipy.special import ndtri

        points = lattice_points(self.n_draws, len(self.inputs), self.seed)
        z = np.clip(ndtri(points), -_FARTHEST, _FARTHEST)
        return dict(zip(self.inputs, z, strict=True))

    def deviate(self, key: str) -> Array | None:
        """Standard normal deviates of one input, shape (n_draws,), or None for an exact one."""
        return self._deviates.get(key)

    def of(self, value: Value) -> Array:
        """Draws of a value, shape (n_draws,), in its core unit; a positive one stays so."""
        return self._spread(value.quantity, self.deviate(value.place))

    def temperature(self, value: Value) -> Array:
        """Draws of a temperature of a programme, shape (n_draws,). [K]."""
        return self._spread(value.quantity, self.deviate(incubator_key(value)))

    def optional(self, value: Value | None, otherwise: float) -> Array:
        """Draws of a value that may be missing."""
        return np.full(self.n_draws, otherwise) if value is None else self.of(value)

    def _spread(self, quantity: Quantity, z: Array | None) -> Array:
        if z is None:
            return np.full(self.n_draws, quantity.value)
        if quantity.distribution == "lognormal":
            log_normal: Array = quantity.value * np.exp(np.log(quantity.spread) * z)
            return log_normal
        drawn = quantity.value + quantity.spread * z
        return np.maximum(drawn, 0.0) if quantity.value >= 0 else drawn
