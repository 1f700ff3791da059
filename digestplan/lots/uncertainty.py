"""Uncertainty of a result from the uncertainties of everything that went into it (GUM)."""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from digestplan.quantities.model import Quantity

_STEP = 1e-50


@dataclass(frozen=True, slots=True)
class Measured:
    """A value with its standard uncertainty.

    Attributes
    ----------
    value, uncertainty
        In the same unit.
    degrees_of_freedom
        How well the uncertainty itself is known; infinite where it is given.
    """

    value: float
    uncertainty: float = 0.0
    degrees_of_freedom: float = np.inf

    @classmethod
    def of(cls, quantity: Quantity) -> "Measured":
        """A written quantity; a log-normal spread becomes the relative one of its logarithm."""
        spread = quantity.spread
        if quantity.distribution == "lognormal":
            spread = abs(quantity.value) * float(np.log(quantity.spread))
        return cls(quantity.value, spread)


@dataclass(frozen=True, slots=True)
class BudgetLine:
    """What one input contributes.

    Attributes
    ----------
    name
        The input.
    value, uncertainty
        Of the input.
    sensitivity
        Derivative of the result by the input.
    share
        Share of the variance of the result, 0 to 1.
    """

    name: str
    value: float
    uncertainty: float
    sensitivity: float
    share: float


@dataclass(frozen=True, slots=True)
class Result:
    """A computed value with its standard uncertainty and the budget behind it.

    Attributes
    ----------
    value, uncertainty
        In the same unit.
    degrees_of_freedom
        Effective, by Welch and Satterthwaite.
    budget
        One line an uncertain input, the greatest share first.
    """

    value: float
    uncertainty: float
    degrees_of_freedom: float
    budget: tuple[BudgetLine, ...]


def propagate(
    formula: Callable[[Mapping[str, Any]], Any], inputs: Mapping[str, Measured]
) -> Result:
    """
    Carry the uncertainty of every input through a formula.

    Parameters
    ----------
    formula
        From the values of the inputs by name to the result; it must take complex numbers.
    inputs
        Independent inputs by name.

    Returns
    -------
    result
        Value, combined standard uncertainty, effective degrees of freedom, and budget.

    References
    ----------
    JCGM 100:2008, Guide to the expression of uncertainty in measurement, 5.1 and G.4 (from
    memory).
    """
    values = {name: m.value for name, m in inputs.items()}
    value = float(formula(values))
    slopes = {
        name: complex(formula({**values, name: values[name] + 1j * _STEP})).imag / _STEP
        for name, m in inputs.items()
        if m.uncertainty > 0
    }
    variances = {name: (slope * inputs[name].uncertainty) ** 2 for name, slope in slopes.items()}
    variance = sum(variances.values())
    lost = sum(v**2 / inputs[name].degrees_of_freedom for name, v in variances.items())
    freedom = variance**2 / lost if lost > 0 else np.inf
    budget = [
        BudgetLine(
            name,
            values[name],
            inputs[name].uncertainty,
            slopes[name],
            v / variance if variance > 0 else 0.0,
        )
        for name, v in variances.items()
    ]
    budget.sort(key=lambda line: -line.share)
    return Result(value, float(np.sqrt(variance)), float(freedom), tuple(budget))


def mean_of(values: ArrayLike, uncertainties: ArrayLike, freedoms: ArrayLike) -> Measured:
    """
    Mean of replicates, no surer than they agree among each other.

    Parameters
    ----------
    values, uncertainties, freedoms
        Of each replicate, shape (n,).

    Returns
    -------
    mean
        Its uncertainty is the greater of what the replicates' own uncertainties and what their
        scatter give.
    """
    v, u, f = (np.asarray(a, dtype=float) for a in (values, uncertainties, freedoms))
    n = len(v)
    own = float(np.sqrt(np.sum(u**2)) / n)
    freedom = _pooled(u, f)
    if n > 1:
        scatter = float(np.std(v, ddof=1) / np.sqrt(n))
        if scatter > own:
            return Measured(float(v.mean()), scatter, n - 1)
    return Measured(float(v.mean()), own, freedom)


def _pooled(u: NDArray[np.float64], f: NDArray[np.float64]) -> float:
    lost = float(np.sum(u**4 / f))
    return float(np.sum(u**2)) ** 2 / lost if lost > 0 else np.inf
