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
        self.inputs = inputs_of(plan)
        self.seed = seed
        self.n_draws = n_draws if self.inputs else 1
        deviates = even_deviates(self.n_draws, len(self.inputs), seed) if self.inputs else ()
        self._deviates: dict[str, Array] = dict(zip(self.inputs, deviates, strict=True))

    def of_variant(self, plan: Plan) -> "Draws":
        """
        Return the draws of a plan that differs from this one in its steps alone.

        Parameters
        ----------
        plan
            The variant.

        Returns
        -------
        draws
            Those that the variant has by itself with this seed; made anew only where it has more
            inputs.
        """
        inputs = inputs_of(plan)
        if len(inputs) > len(self.inputs) or not inputs:
            return Draws(plan, self.n_draws, self.seed)
        return self.with_deviates(inputs, list(self._deviates.values()))

    def with_deviates(self, inputs: dict[str, Quantity], deviates: Sequence[Array]) -> "Draws":
        """Return draws whose inputs have these deviates, each of shape (n_draws,), in order."""
        other = copy(self)
        other.inputs, other.n_draws = inputs, len(deviates[0])
        other._deviates = dict(zip(inputs, deviates, strict=False))  # noqa: SLF001
        return other

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
