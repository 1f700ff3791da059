"""From a written unit to the core unit of a kind, exactly, and cached for each pair of them."""

import re
from dataclasses import dataclass
from decimal import Context, Decimal
from functools import lru_cache
from math import isinf

from digestplan.quantities.hints import nearest_unit
from digestplan.quantities.kinds import KINDS, Form, Kind
from digestplan.quantities.naming import named
from digestplan.quantities.units import Unit, UnknownUnitRefusal, resolve, weight_per_volume
from digestplan.quantities.wording import Refusal, plain

_EXACT = Context(prec=60, Emax=99_999, Emin=-99_999)
_ZERO = Decimal(0)
_ZERO_CELSIUS = Decimal("273.15")

_CELSIUS = re.compile(r"(?:°|deg(?:rees?)?[._]?)?\s*+[Cc](?:elsius)?")
_KELVIN = re.compile(r"K|[Kk]elvin")
_PERCENT = re.compile(r"(?:%|percent)\s*+(?:\(\s*+([wv]/[wv])\s*+\)|([wv]/[wv]))?")


@dataclass(frozen=True, slots=True)
class Scale:
    """
    How to turn numbers of one written unit into the core unit of a kind.

    Attributes
    ----------
    times, over
        Core units in one written unit, as a quotient of whole numbers.
    zero
        Where the written scale has its zero. [core unit]
    activity
        What `Quantity.activity` becomes.
    form
        The form of the kind that the unit answers to.
    """

    times: Decimal
    over: Decimal
    form: Form | None
    activity: str | None = None
    zero: Decimal = _ZERO

    def to_core(self, number: Decimal) -> float:
        """Return a number of written units in the core unit, rounded once."""
        product = _EXACT.divide(_EXACT.multiply(number, self.times), self.over)
        value = float(_EXACT.add(product, self.zero)) + 0.0  # never -0.0
        if isinf(value):
            raise Refusal("is larger than any value can be")
        if value == 0 and number != 0 and not self.zero:
            raise Refusal("is too small to be told from zero")
        return value

    def from_core(self, value: float) -> Decimal:
        """Return a value of the core unit as a number of written units."""
        above = _EXACT.subtract(Decimal(repr(value)), self.zero)
        return _EXACT.divide(_EXACT.multiply(above, self.over), self.times)


BARE = Scale(Decimal(1), Decimal(1), None)


@lru_cache(maxsize=4096)
def scale_of(kind_name: str, unit: str, *, difference: bool = False) -> Scale:
    """
    Return the scale of a written unit for a kind.

    Parameters
    ----------
    kind_name
        Name of the kind.
    unit
        The unit in normal form, not empty.
    difference
        Whether a difference of two such values is meant, as in a spread.

    Returns
    -------
    scale
        How to turn its numbers into the core unit.

    Raises
    ------
    Refusal
        Where the unit is unknown, cannot be read, or is one of another kind.
    """
    kind = KINDS[kind_name]
    if kind_name in ("temperature", "temperature_difference"):
        return _temperature_scale(kind, unit, difference=difference)
    percent = _PERCENT.fullmatch(unit)
    if percent:
        return _percent_scale(kind, percent[1] or percent[2])
    if _CELSIUS.fullmatch(unit) and unit != "c":
        raise Refusal(f"is a temperature; {kind.wanted}")
    return _scale(kind, _resolved(kind, unit), unit)


def is_percent(unit: str) -> bool:
    """Whether a unit is a percentage without further words."""
    return unit in ("%", "percent")


def _temperature_scale(kind: Kind, unit: str, *, difference: bool) -> Scale:
    form = kind.forms[0]
    if _CELSIUS.fullmatch(unit):
        offset = kind.name == "temperature" and not difference
        return Scale(Decimal(1), Decimal(1), form, zero=_ZERO_CELSIUS if offset else _ZERO)
    if _KELVIN.fullmatch(unit):
        return Scale(Decimal(1), Decimal(1), form)
    raise _other_kind(kind, _resolved(kind, unit), unit)


def _percent_scale(kind: Kind, of: str | None) -> Scale:
    if of == "v/v":
        raise Refusal("is a share of volumes, which says no mass; write % w/v or mol/L")
    meant = of or kind.percent
    unit = resolve("percent") if meant == "w/w" else weight_per_volume()
    for form in kind.forms:
        if "{}" not in form.unit and resolve_form(form).dimensions == unit.dimensions:
            if meant:
                return _to_form(unit, form, None)
            raise Refusal("is a percentage, which can be read in two ways; write % w/v")
    raise Refusal(f"is a percentage; {kind.wanted}")


def _resolved(kind: Kind, unit: str) -> Unit:
    try:
        return resolve(unit)
    except UnknownUnitRefusal as unknown:
        near = nearest_unit(unit, kind)
        hint = f'; is "{near}" meant?' if near else ""
        word = plain(str(unknown))
        raise Refusal(f'has an unknown unit, "{word}"; {kind.wanted}{hint}') from None


def _scale(kind: Kind, unit: Unit, text: str) -> Scale:
    assay = unit.assay
    for form in kind.forms:
        if ("{}" in form.unit) != (assay is not None) or (form.by_mass and not unit.has_mass):
            continue
        if resolve_form(form, assay).dimensions == unit.dimensions:
            return _to_form(unit, form, assay)
    raise _other_kind(kind, unit, text)


def resolve_form(form: Form, assay: str | None = None) -> Unit:
    """Return the core unit of a form, with the assay unit put in."""
    return resolve(form.unit.format(assay))


def _to_form(unit: Unit, form: Form, assay: str | None) -> Scale:
    ratio = unit.scale / resolve_form(form, assay).scale
    activity = form.activity and form.activity.format(assay)
    return Scale(Decimal(ratio.numerator), Decimal(ratio.denominator), form, activity)


def _other_kind(kind: Kind, unit: Unit, text: str) -> Refusal:
    name = named(unit)
    what = f"is {name}" if name else f"is not {kind.words}"
    near = nearest_unit(text, kind, same_letters=True)
    hint = f'; is "{near}" meant?' if near else ""
    return Refusal(f"{what}; {kind.wanted}{hint}")
