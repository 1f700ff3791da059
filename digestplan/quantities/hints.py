"""What is often written at a bench and cannot be taken, and what to write in its place."""

import re
from difflib import get_close_matches
from functools import cache

from digestplan.quantities.assays import ASSAY_UNITS
from digestplan.quantities.kinds import KINDS, Kind
from digestplan.quantities.units import resolve, spellings

_IGNORE = re.ASCII | re.IGNORECASE
_COMMA = re.compile(r"\d,\d")
_THOUSANDS = re.compile(r"(?:[^,]*[^\d,.])?[1-9]\d{0,2}(?:,\d{3})+(?![\d,]).*", re.ASCII)

Hints = tuple[tuple[str, str], ...]


# What the whole text looks like (compiled when first needed), and what is said of it. {wanted}
# ends a message, {spread} is a value with a spread. "⁄" is what normal form makes of ½.
_FOR_ALL = (
    (r"[+-]?(?:nan|inf|infinity|∞)\b.*", "is no finite number; {wanted}"),
    (
        r"(?:~|≈|∼|<|>|≤|≥|ca\.?|c\.|circa|about|approx\w*+\.?)\s*+\d.*",
        "is not definite; write the value with its spread, such as {spread}",
    ),
    (
        r".*\d\s*+[x×*]\s*+10\s*+(?:\^|\*\*|-?\d).*|[+-]?\d++\s*+(?:\^|\*\*).*",
        'has a power; write a power of ten with e, such as "3e-11"',
    ),
    (r".*⁄.*", "has a fraction; write it with a decimal point, such as 0.5"),
    (
        r".*\d[^\d±/^*(]{0,12}?(?:\s-|-\s|–|—|\bto\b|\.\.)\s*+\d.*|.*\d-\d.*",
        "is a range; write one value with its spread, such as {spread}",
    ),
)
_FOR_TIMES = (
    (r"over ?night|o/n", 'says no time; write how long, such as "16 h"'),
    (r"(?:over the )?week ?end", 'says no time; write how long, such as "64 h"'),
    (r"\d++:\d\d(?::\d\d)?", 'can be read in two ways; write it such as "2 h 30 min"'),
    (r".*\bmonths?", "is no definite time; write it in days or weeks"),
    (r".*[a-z]\s*+\d++", 'has a number without its unit; write it such as "2 h 30 min"'),
)
_NO_TEMPERATURE = 'says no temperature; write it, such as "{}"'
_FOR_TEMPERATURES = (
    (
        r".*\d\s*+(?:°|deg\.?|degrees?)?\s*+F(?:ahrenheit)?",
        "is on the Fahrenheit scale; write degrees Celsius, such as 37 degC",
    ),
    (
        r"(?:at )?(?:rt|r\.t\.?|room temp(?:erature|\.)?|ambient)",
        _NO_TEMPERATURE.format("22 degC"),
    ),
    (r"(?:on )?ice", _NO_TEMPERATURE.format("0 degC")),
    (r"(?:in the )?(?:fridge|refrigerator|cold room)", _NO_TEMPERATURE.format("4 degC")),
    (r"(?:in the )?freezer", _NO_TEMPERATURE.format("-20 degC")),
    (r"body temp(?:erature|\.)?", _NO_TEMPERATURE.format("37 degC")),
)
_FOR_CONCENTRATIONS = (
    (r".*\d\s*+(?-i:m?N)", "is a normality, which depends on the reaction; write mol/L"),
)
_FOR_RATIOS = ((r"\d++\s*+/\s*+\d++", 'can be read in two ways; write it such as "1:50"'),)
_FOR_NUMBERS = (
    (
        r".*\d\s*+(?:m?AU|m?OD|abs)",
        "has a unit, but an absorbance has none; write the number alone; {wanted}",
    ),
)
_FOR_ACTIVITIES = (
    (
        r".*\b(?:units?|IU)\b.*",
        "does not say which unit of activity; write one of "
        + ", ".join(ASSAY_UNITS)
        + " (U is 1 µmol/min)",
    ),
)


def hint_for(text: str, kind: Kind) -> str | None:
    """
    Return a better reason for a refusal than the grammar has, if there is one.

    Parameters
    ----------
    text
        What was written, in normal form, already refused.
    kind
        What is wanted.

    Returns
    -------
    reason
        The rest of a sentence that begins with what was written.
    """
    if _COMMA.search(text):
        return _comma(text)
    for said, hint in (*_FOR_ALL, *_hints_of(kind)):
        if re.fullmatch(said, text, _IGNORE):
            return hint.format(wanted=kind.wanted, spread=_spread(kind))
    return None


def _hints_of(kind: Kind) -> Hints:
    hints: Hints = _FOR_ACTIVITIES if any("{}" in form.unit for form in kind.forms) else ()
    if kind.name.endswith("concentration"):
        return _FOR_CONCENTRATIONS + hints
    if kind.name.endswith("number"):
        return _FOR_NUMBERS
    by_name = {"time": _FOR_TIMES, "temperature": _FOR_TEMPERATURES, "ratio": _FOR_RATIOS}
    return by_name.get(kind.name, ()) + hints


def _comma(text: str) -> str:
    point = text.replace(",", ".")
    if _THOUSANDS.fullmatch(text):
        none = text.replace(",", "")
        if text.count(",") > 1:
            return f'has commas between its digits; write "{none}"'
        return f'has a comma, which can be read in two ways; write "{none}" or "{point}"'
    return f'has a decimal comma, which can be read in two ways; write "{point}"'


def _spread(kind: Kind) -> str:
    number, _, unit = kind.example.partition(" ")
    if kind.scale == "whole":
        return kind.example
    if kind.scale == "interval":
        return f'"{number} ± 0.5 {unit}"'.replace(' "', '"')
    return f'"{kind.example} x/ 1.2"'


def nearest_unit(text: str, kind: Kind, *, same_letters: bool = False) -> str | None:
    """
    Return the unit of the kind that is nearest to what was written.

    Parameters
    ----------
    text
        The unit, in normal form.
    kind
        What is wanted.
    same_letters
        Whether the letters must be the same, but for capitals.

    Returns
    -------
    unit
        As it is to be written; None where none is near.
    """
    written = text.lower()
    folded = {unit.lower(): unit for unit in reversed(_units_of(kind.name)) if unit != text}
    if written in folded or same_letters:
        return folded.get(written)
    near = get_close_matches(written, folded, n=1, cutoff=0.6)
    return folded[near[0]] if near else None


@cache
def _units_of(kind_name: str) -> tuple[str, ...]:
    """Every unit that may be offered for a kind, the usual ones first."""
    kind = KINDS[kind_name]
    if kind_name.startswith("temperature"):
        return ("degC", "°C", "K")
    shown = dict.fromkeys(
        unit.format(name)
        for unit in kind.display
        for name in (ASSAY_UNITS if "{}" in unit else ("",))
        if unit
    )
    plain = (form for form in kind.forms if "{}" not in form.unit and not form.by_mass)
    wanted = {resolve(form.unit).dimensions for form in plain}
    words = sorted(word for word in spellings() if "_wv" not in word)
    others = (word for word in words if resolve(word).dimensions in wanted)
    return (*shown, *(word for word in others if not kind.bare))
