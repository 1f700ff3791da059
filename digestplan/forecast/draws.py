"""Draws of every uncertain value in a plan: seeded, and spread evenly over the possibilities."""

from collections.abc import Iterable, Iterator, Mapping, Sequence
from copy import copy
from dataclasses import fields, is_dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.library_values import treatment_values
from digestplan.kinetics.lattice import even_deviates
from digestplan.plan.model import Plan, Stretch, Value
from digestplan.quantities.model import Quantity

Array = NDArray[np.float64]


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


def inputs_of(plan: Plan) -> dict[str, Quantity]:
    """Return the uncertain inputs of a plan by key, those of its treatment last."""
    inputs = dict(uncertain_values(plan))
    return inputs | dict(uncertain_values(treatment_values(plan)))


def normal_deviates(n_draws: int, n_inputs: int, seed: int) -> Array:
    """Return standard normal deviates, shape (n_inputs, n_draws), evenly spread and cut."""
    if n_inputs == 0:
        return np.zeros((0, n_draws))
    from scipy.special import ndtri

    deviates: Array = ndtri(lattice_points(n_draws, n_inputs, seed))
    return np.clip(deviates, -_FARTHEST, _FARTHEST)


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
        z = even_deviates(self.n_draws, len(self.inputs), self.seed)
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
