"""How large a value may be before it can only be a slip of the pen."""

from math import isfinite

from digestplan.plan.field import Field
from digestplan.quantities.model import Quantity

_KELVIN = 273.15
_COLDEST, _WARMEST = -200.0, 150.0  # [°C]
_WIDEST_FACTOR = 100.0  # of one geometric standard deviation
_WIDEST_SPREAD = 3.0  # standard deviations over the value itself
_WIDEST_KELVIN = 50.0

# Smallest (other than 0) and largest size of a value, in the core unit of its kind.
_SIZES = {
    "time": (1e-6, 87_660.0),  # ten years
    "mass": (1e-12, 1e6),
    "volume": (1e-9, 1e6),
    "length": (1e-9, 1.0),
    "energy": (1e-3, 1e7),
    "density": (1e-3, 30.0),
}
_OTHERS = (1e-15, 1e15)


def out_of_bounds(quantity: Quantity, field: Field) -> str | None:
    """
    Return what is wrong with the size of a value, or None.

    Parameters
    ----------
    quantity
        The value.
    field
        Its key, with the bounds that it sets.

    Returns
    -------
    problem
        The rest of a sentence that begins with what was written.
    """
    value = quantity.value
    if field.kind == "temperature" and not _COLDEST <= value - _KELVIN <= _WARMEST:
        return f"is outside {_COLDEST:g} °C to {_WARMEST:g} °C"
    if field.above is not None and value <= field.above:
        return f"is not above {field.above:g}"
    if field.below is not None and value >= field.below:
        return f"is not below {field.below:g}"
    if field.most is not None and value > field.most:
        return f"is above {field.most:g}"
    return _implausible(quantity, field)


def _implausible(quantity: Quantity, field: Field) -> str | None:
    smallest, largest = _SIZES.get(field.kind, _OTHERS)
    size = abs(quantity.value)
    if not isfinite(size) or size > largest:
        return "is far larger than it can be in a plan"
    if 0 < size < smallest:
        return "is far smaller than it can be in a plan"
    return _implausible_spread(quantity, field)


def _implausible_spread(quantity: Quantity, field: Field) -> str | None:
    if quantity.distribution == "exact":
        return None
    if field.exact:
        return "has a spread; this value must be exact"
    spread, value = quantity.spread, abs(quantity.value)
    if quantity.distribution == "lognormal":
        wide = not spread <= _WIDEST_FACTOR
    elif field.kind == "temperature":
        wide = not spread <= _WIDEST_KELVIN
    else:
        wide = not (spread <= _WIDEST_SPREAD * value or (value == 0 and spread <= 1))
    return "has a spread so wide that it says nothing" if wide else None
