"""Factors between activity units, as the certificate of a lot gives them."""

import re
from decimal import Decimal

from digestplan.quantities.assays import ASSAY_UNITS
from digestplan.quantities.grammar import NUMBER, normal_form
from digestplan.quantities.hints import hint_for
from digestplan.quantities.kinds import KINDS
from digestplan.quantities.scale import Scale, scale_of
from digestplan.quantities.wording import QuantityError, Refusal, shown

_SIDE = rf"({NUMBER})\s*+([A-Za-zµ_]++)"
_EQUATION = re.compile(rf"{_SIDE}\s*+=\s*+{_SIDE}", re.ASCII)
_WANTED = 'a factor between two activity units is wanted here, such as "1 CDU = 0.011 FALGPA_U"'


def parse_conversion(text: str) -> tuple[str, str, float]:
    """
    Return what a certificate says that two activity units are worth in each other.

    Parameters
    ----------
    text
        Such as ``1 CDU = 0.011 FALGPA_U``.

    Returns
    -------
    one, other, factor
        Names in `ASSAY_UNITS`, and how many of ``other`` there are in one of ``one``.

    Raises
    ------
    QuantityError
        Where the text is no such equation.
    """
    if not isinstance(text, str):
        raise QuantityError(f"{shown(text)} is no text; {_WANTED}")
    try:
        return _read(normal_form(text))
    except Refusal as refusal:
        raise QuantityError(f"{shown(text)} {refusal}; {_WANTED}") from None


def _read(text: str) -> tuple[str, str, float]:
    match = _EQUATION.fullmatch(text)
    if match is None:
        comma = hint_for(text, KINDS["charge"]) if "," in text else None
        raise Refusal(comma or "is no equation of two amounts")
    one, other = _side(match[2]), _side(match[4])
    if one.activity == other.activity:
        raise Refusal(f"gives a factor between units of one quantity, {one.activity}")
    left, right = one.to_core(Decimal(match[1])), other.to_core(Decimal(match[3]))
    if left <= 0 or right <= 0:
        raise Refusal("has an amount that is not above zero")
    factor = right / left
    if not 1e-300 < factor < 1e300:
        raise Refusal("gives a factor that cannot be")
    return str(one.activity), str(other.activity), factor


def _side(unit: str) -> Scale:
    try:
        scale = scale_of("charge", unit)
    except Refusal:
        raise Refusal(f'has "{unit}", which is none of {", ".join(ASSAY_UNITS)}') from None
    if scale.activity is None:
        raise Refusal(f'has "{unit}", which is no unit of activity')
    return scale
