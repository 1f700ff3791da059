"""Text in, value out: what is written becomes a quantity in the core unit of its kind."""

import re
from decimal import Decimal
from itertools import pairwise
from math import isfinite, isinf

from digestplan.quantities.grammar import (
    NUMBER,
    Amount,
    amount_of,
    mass_ratio_of,
    normal_form,
    split_spread,
    time_parts_of,
)
from digestplan.quantities.hints import hint_for
from digestplan.quantities.kinds import KINDS, Kind
from digestplan.quantities.model import Distribution, Quantity
from digestplan.quantities.scale import BARE, Scale, is_percent, scale_of
from digestplan.quantities.wording import QuantityError, Refusal, shown

_BARE_NUMBER = re.compile(NUMBER, re.ASCII)
_MG_PER_G = Decimal(1000)


def parse_quantity(written: str | float, kind: str) -> Quantity:
    """
    Return what is written as a value with its spread.

    Parameters
    ----------
    written
        Text such as ``3 mL``, ``55 ± 5 kJ/mol`` or ``0.03 1/h x/ 2``; a number where the kind has
        no dimension.
    kind
        What is wanted: a name in `KINDS`.

    Returns
    -------
    quantity
        In the core unit of the kind.

    Raises
    ------
    QuantityError
        Where what is written is no such value; its message says what would be.
    KeyError
        Where there is no such kind.
    """
    wanted = KINDS[kind]
    if isinstance(written, bool) or not isinstance(written, str | int | float):
        raise QuantityError(f"{shown(written)} is neither a number nor text; {wanted.wanted}")
    try:
        if isinstance(written, str):
            return _from_text(written, wanted)
        return Quantity(_from_number(written, wanted), text=str(written))
    except Refusal as refusal:
        said = str(refusal)
        complete = wanted.wanted in said or "write " in said
        ending = "" if complete else f"; {wanted.wanted}"
        raise QuantityError(f"{shown(written)} {said}{ending}") from None


def _from_number(written: float, kind: Kind) -> float:
    if isinstance(written, int) and abs(written) > 10**300:
        raise Refusal("is larger than any value can be")
    value = float(written) + 0.0
    if not isfinite(value):
        raise Refusal(f"is no finite number; {kind.wanted}")
    if not kind.bare:
        raise Refusal(f"has no unit; {kind.wanted}")
    return _checked(value, kind)


def _from_text(written: str, kind: Kind) -> Quantity:
    text = normal_form(written)
    try:
        value, spread, distribution, activity = _read(text, kind)
    except Refusal as refusal:
        raise Refusal(hint_for(text, kind) or str(refusal)) from None
    return Quantity(value, spread, distribution, activity, written)


def _read(text: str, kind: Kind) -> tuple[float, float, Distribution, str | None]:
    left, sign, right = split_spread(text)
    if not sign:
        value, scale = _value(left, kind)
        return _checked(value, kind), 0.0, "exact", scale.activity
    if kind.scale == "whole":
        raise Refusal("has a spread, but a count is exact")
    if sign == "x/":
        value, scale = _value(left, kind)
        factor = _factor(_checked(value, kind), right, kind)
        exact = factor == 1.0
        return value, 0.0 if exact else factor, "exact" if exact else "lognormal", scale.activity
    value, scale, spread = _with_deviation(left, right, kind)
    return _checked(value, kind), spread, "normal" if spread else "exact", scale.activity


def _value(text: str, kind: Kind) -> tuple[float, Scale]:
    """Return a value in the core unit, and the scale that it was written in."""
    if kind.name == "ratio" and ":" in text:
        return _mass_ratio(text, kind)
    amount = amount_of(text)
    if amount is None:
        raise Refusal(f"is no number{'' if kind.bare else ' with its unit'}; {kind.wanted}")
    if kind.name == "time":
        parts = time_parts_of(text.lstrip("-"))
        if parts:
            sign = -1 if text.startswith("-") else 1
            return sign * _time(parts), scale_of("time", "h")
    scale = _scale(amount.unit, kind)
    return scale.to_core(amount.number), scale


def _scale(unit: str, kind: Kind) -> Scale:
    if unit and kind.forms:
        return scale_of(kind.name, unit)
    if is_percent(unit):
        raise Refusal(f"is a percentage; {kind.wanted}")
    if unit:
        raise Refusal(f"has a unit, which is not wanted here; {kind.wanted}")
    if not kind.bare:
        raise Refusal(f"has no unit; {kind.wanted}")
    return BARE


def _mass_ratio(text: str, kind: Kind) -> tuple[float, Scale]:
    """1:50 is one mass of enzyme to fifty of substrate."""
    numbers = mass_ratio_of(text)
    if numbers is None:
        raise Refusal(f"is no ratio of two numbers; {kind.wanted}")
    enzyme, substrate = numbers
    if substrate <= 0:
        raise Refusal(f"has no substrate; {kind.wanted}")
    per_gram = scale_of("ratio", "mg/g")
    ratio = Scale(_MG_PER_G, substrate, per_gram.form, "mg")
    return ratio.to_core(enzyme), ratio


def _time(parts: list[Amount]) -> float:
    scales = [scale_of("time", part.unit) for part in parts]
    sizes = [scale.to_core(Decimal(1)) for scale in scales]
    if any(later >= earlier for earlier, later in pairwise(sizes)):
        raise Refusal('has its units out of order; write it such as "2 h 30 min"')
    return sum(scale.to_core(part.number) for scale, part in zip(scales, parts, strict=True))


def _factor(value: float, text: str, kind: Kind) -> float:
    """Return the factor of one geometric standard deviation."""
    if kind.scale == "interval":
        raise Refusal(f"has a spread by a factor, which {kind.words} cannot have; write it with ±")
    if not _BARE_NUMBER.fullmatch(text):
        raise Refusal('has no plain number after x/; write it such as "x/ 2"')
    factor = BARE.to_core(Decimal(text))
    if factor < 1:
        raise Refusal("has a factor of spread below 1; write it as 1 or more")
    if value <= 0:
        raise Refusal("has a factor of spread, for which the value must be above zero")
    return factor


def _with_deviation(left: str, right: str, kind: Kind) -> tuple[float, Scale, float]:
    """Return value, its scale and its standard deviation, where one unit may serve for both."""
    spread = amount_of(right)
    if spread is None:
        raise Refusal("has no number after ±")
    if spread.number < 0:
        raise Refusal("has a spread below zero")
    bare = _BARE_NUMBER.fullmatch(left) is not None
    if bare and spread.unit:
        if is_percent(spread.unit) and kind.bare:
            _refuse_ambiguous(left, spread.number, kind)
        left = f"{left} {spread.unit}"
    value, scale = _value(left, kind)
    return value, scale, _deviation(value, scale, spread.number, spread.unit, left, kind)


def _refuse_ambiguous(left: str, percent: Decimal, kind: Kind) -> None:
    """Refuse `0.82 ± 5 %`, which may be of the value or of the whole."""
    if kind.percent is None:
        raise Refusal("has a spread in percent; write it as a number, as the value")
    if Decimal(left) > Decimal(kind.high):
        return  # 82 ± 5 % can only mean both
    absolute, relative = percent / 100, Decimal(left) * percent / 100
    spreads = sorted({absolute.normalize(), relative.normalize()})
    hint = " or ".join(f'"{left} ± {spread:f}"' for spread in spreads)
    raise Refusal(f"has a spread in percent, which can be read in two ways; write {hint}")


def _deviation(
    value: float, scale: Scale, number: Decimal, unit: str, left: str, kind: Kind
) -> float:
    amount = amount_of(left)
    in_percent = amount is not None and amount.unit.startswith("%")
    if not unit:
        if in_percent or ":" in left or time_parts_of(left):
            raise Refusal("has a spread without its unit; write both with their units")
        return Scale(scale.times, scale.over, scale.form).to_core(number)
    if is_percent(unit) and not in_percent:
        return _relative(value, scale, number, kind)
    other = scale_of(kind.name, unit, difference=True)
    if other.activity != scale.activity:
        raise Refusal("has a spread in another unit than its value")
    return other.to_core(number)


def _relative(value: float, scale: Scale, percent: Decimal, kind: Kind) -> float:
    """`52 kJ/mol ± 10 %`: of the value, unless a percentage is a value of this kind itself."""
    if kind.scale == "interval":
        raise Refusal("has a spread in percent; write it in the unit of the value")
    if kind.percent and scale_of(kind.name, "%").activity == scale.activity:
        hint = "write the spread in the unit of the value"
        raise Refusal(f"has a spread in percent, which can be read in two ways; {hint}")
    spread = abs(value) * (BARE.to_core(percent) / 100)
    if isinf(spread):
        raise Refusal("has a spread larger than any value can be")
    return spread


def _checked(value: float, kind: Kind) -> float:
    if kind.allows(value):
        if kind.scale == "whole" and value != int(value):
            raise Refusal(f"is no whole number; {kind.wanted}")
        return value
    if kind.bounds:
        raise Refusal(f"is not {kind.bounds}; {kind.wanted}")
    raise Refusal(f"is {'negative' if value < 0 else 'zero'}; {kind.wanted}")
