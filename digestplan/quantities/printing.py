"""Value in, text out: how values are printed, so that they can be read back."""

from decimal import Decimal
from math import inf, log10

from digestplan.quantities.assays import ASSAY_UNITS
from digestplan.quantities.grammar import amount_of, normal_form, split_spread, time_parts_of
from digestplan.quantities.kinds import KINDS, Form, Kind
from digestplan.quantities.model import Quantity
from digestplan.quantities.scale import BARE, Scale, scale_of
from digestplan.quantities.wording import QuantityError, Refusal

# Between which numbers a unit reads well, where it is not from 1 to 1000.
_READS_WELL = {
    "s": (0.0, 60.0),
    "mL": (0.1, 1000.0),
    "µL": (0.1, 1000.0),
    "mg/mL": (0.1, 1000.0),
    "mg": (0.1, 1000.0),
    "mm": (0.1, 1000.0),
    "M": (0.1, 1000.0),
    "mM": (0.1, 1000.0),
    "% w/v": (0.1, 100.0),
    "1/d": (0.1, 1000.0),
}
_SMALLEST_PLAIN, _LARGEST_PLAIN = Decimal("1e-4"), Decimal("1e6")


def format_quantity(
    value: float | Quantity,
    kind: str,
    unit: str | None = None,
    digits: int = 3,
    activity: str | None = None,
) -> str:
    """
    Return a value as text that `parse_quantity` reads back.

    Parameters
    ----------
    value
        In the core unit of the kind; a quantity is printed with its spread. [core unit]
    kind
        A name in `KINDS`.
    unit
        The unit to print; by default one that gives a readable number.
    digits
        Significant digits. [1]
    activity
        The unit in which enzyme is counted, where the kind needs one; a quantity knows its own.

    Returns
    -------
    text
        Such as ``3 mL``, ``52 ± 6 kJ/mol`` or ``0.03 1/h ×/ 1.6``.

    Raises
    ------
    QuantityError
        Where ``unit`` is none of the kind, or counts enzyme by another assay.
    ValueError
        Where the unit in which enzyme is counted is needed and not given.
    """
    wanted = KINDS[kind]
    quantity = value if isinstance(value, Quantity) else Quantity(float(value), activity=activity)
    if unit is None:
        unit = _readable_unit(quantity.value, wanted, quantity.activity)
    scale, step = _scales(quantity, kind, unit)
    number = rounded(scale.from_core(quantity.value), digits)
    tail = f" {unit}" if unit else ""
    if quantity.distribution == "normal":
        deviation = step.from_core(quantity.spread)
        return f"{number} ± {rounded(deviation, digits - 1)}{tail}"
    if quantity.distribution == "lognormal":
        return f"{number}{tail} ×/ {rounded(Decimal(quantity.spread), digits)}"
    return number + tail


def _scales(quantity: Quantity, kind: str, unit: str) -> tuple[Scale, Scale]:
    """Scales for the value and for its spread."""
    try:
        scale = _scale(kind, unit, difference=False)
        step = _scale(kind, unit, difference=True)
    except Refusal as refusal:
        raise QuantityError(f'"{unit}" {refusal}') from None
    counted = quantity.activity
    if scale.activity != counted and (counted is not None or quantity.text):
        raise QuantityError(f'"{unit}" does not count in {counted or "mass"}, as the value does')
    return scale, step


def rounded(number: Decimal, digits: int) -> str:
    """Return a number with so many significant digits, without zeros that say nothing."""
    if not number.is_finite():
        return str(float(number))
    if number == 0:
        return "0"
    text = f"{number:.{max(digits, 1) - 1}e}"
    value = Decimal(text)
    if _SMALLEST_PLAIN <= abs(value) < _LARGEST_PLAIN:
        return f"{value.normalize():f}"
    mantissa, _, exponent = text.partition("e")
    if "." in mantissa:
        mantissa = mantissa.rstrip("0").rstrip(".")
    return f"{mantissa}e{int(exponent)}"


def _scale(kind: str, unit: str, *, difference: bool) -> Scale:
    return scale_of(kind, normal_form(unit), difference=difference) if unit else BARE


def _form_of(kind: Kind, activity: str | None) -> Form:
    """Return the form in which enzyme is counted so."""
    for counted in (activity, "{}" if activity in ASSAY_UNITS else activity):
        for form in kind.forms:
            if form.activity == counted:
                return form
    raise ValueError(f"{kind.name}: no form is counted in {activity}; say which unit of activity")


def _units_of(kind: Kind, activity: str | None, *, further: bool) -> list[str]:
    if not kind.forms:
        return []
    form = _form_of(kind, activity)
    units = [unit.format(activity) for unit in (*form.shown, *(form.also if further else ()))]
    assay = ASSAY_UNITS.get(activity or "")
    if further and assay and assay.also:
        units += [unit.format(assay.also) for unit in form.shown]
    return units


def _readable_unit(value: float, kind: Kind, activity: str | None) -> str:
    units = _units_of(kind, activity, further=False)
    return next((unit for unit in units if _reads_well(value, kind, unit)), (*units, "")[0])


def _reads_well(value: float, kind: Kind, unit: str) -> bool:
    number = abs(_scale(kind.name, unit, difference=False).from_core(value))
    low, high = _READS_WELL.get(unit, (1.0, 1000.0))
    return low <= float(rounded(number, 3)) < high


def other_unit(quantity: Quantity, kind: str) -> str | None:
    """
    Return a value in another common unit than the one it was written in.

    Parameters
    ----------
    quantity
        A parsed value.
    kind
        Its kind.

    Returns
    -------
    text
        Such as ``1.5 h`` for ``90 min``, without the spread; None where no other unit is common.
    """
    wanted = KINDS[kind]
    if quantity.value == 0 and wanted.scale != "interval":
        return None
    if kind == "ratio" and quantity.activity == "mg" and ":" not in quantity.text:
        return f"1:{rounded(1000 / Decimal(quantity.value), 5)}"
    written = _written_scale(quantity, wanted)
    units = _units_of(wanted, quantity.activity, further=True)
    others = [unit for unit in units if written is None or not _alike(wanted, unit, written)]
    if not others:
        return None
    best = min(others, key=lambda unit: _strangeness(quantity.value, wanted, unit))
    exact = Quantity(quantity.value, activity=quantity.activity)
    return format_quantity(exact, kind, best, digits=5)


def _written_scale(quantity: Quantity, kind: Kind) -> Scale | None:
    """Return the scale that a value was written in; None where there were several, or a 1:50."""
    if not quantity.text:
        unit = _readable_unit(quantity.value, kind, quantity.activity)
        return _scale(kind.name, unit, difference=False)
    try:
        left, sign, right = split_spread(normal_form(quantity.text))
    except Refusal:
        return None
    first, second = amount_of(left), amount_of(right)
    if first is None or ":" in left or time_parts_of(left):
        return None
    unit = first.unit or (second.unit if second and sign == "±" else "")
    return _scale(kind.name, unit, difference=False)


def _alike(kind: Kind, unit: str, written: Scale) -> bool:
    scale = _scale(kind.name, unit, difference=False)
    return (scale.times, scale.over, scale.zero) == (written.times, written.over, written.zero)


def _strangeness(value: float, kind: Kind, unit: str) -> float:
    """How far a unit is from giving a readable number; 0 where it does."""
    if _reads_well(value, kind, unit):
        return 0.0
    number = abs(_scale(kind.name, unit, difference=False).from_core(value))
    return abs(log10(number)) if number else inf
