"""The grammar of a written value: number, unit, and the spread where there is one."""

import re
import unicodedata
from dataclasses import dataclass
from decimal import Decimal
from typing import Literal

from digestplan.quantities.wording import Refusal

LONGEST = 80  # characters of a value

# ASCII digits alone, an exponent of three digits at most; no nan, inf, underscore or hexadecimal.
NUMBER = r"[+-]?(?:\d++(?:\.\d*+)?|\.\d++)(?:[eE][+-]?\d{1,3}(?!\d))?"

_AMOUNT = re.compile(rf"({NUMBER})\s*+(.*+)", re.ASCII)
_SPREAD = re.compile(r"\s*+(±|\+\s*+/\s*+-|\+-|[x×X]\s*+/)\s*+", re.ASCII)
_BRACKETED = re.compile(rf"\(\s*+({NUMBER})\s*+(?:±|\+/-|\+-)\s*+({NUMBER})\s*+\)(.*+)", re.ASCII)
_RATIO = re.compile(rf"({NUMBER})\s*+:\s*+({NUMBER})(?:\s*+(?:w/w|\(w/w\)))?", re.ASCII)

_SUPERSCRIPT = re.compile("[⁺⁻]?[⁰¹²³⁴⁵⁶⁷⁸⁹]+")
_LIFTED = str.maketrans("⁺⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "+-0123456789")
# What is typed for a degree sign, a minus or a raised dot.
_BEFORE = str.maketrans({"º": "°", "˚": "°"})
_AFTER = str.maketrans({"μ": "µ", "−": "-", "·": "*", "⋅": "*", "∙": "*"})

Sign = Literal["", "±", "x/"]


@dataclass(frozen=True, slots=True)
class Amount:
    """A number and the text of its unit; empty for none."""

    number: Decimal
    unit: str


def normal_form(text: str) -> str:
    """
    Return a text with its look-alike characters made one.

    Parameters
    ----------
    text
        As it was written.

    Returns
    -------
    normal
        Superscripts written as ``^2``, compatibility characters decomposed, µ as U+00B5, without
        spaces around it.

    Raises
    ------
    Refusal
        Where it is too long, empty, or holds characters that cannot be seen.
    """
    if len(text) > LONGEST:
        raise Refusal(f"is longer than the {LONGEST} characters that a value may have")
    if not text.isascii():
        text = _SUPERSCRIPT.sub(_lifted, text.translate(_BEFORE))
        text = unicodedata.normalize("NFKC", text).translate(_AFTER)
    text = text.strip()
    if not text:
        raise Refusal("is empty")
    if not text.isprintable():
        raise Refusal("holds a character that cannot be seen")
    if len(text) > LONGEST:
        raise Refusal(f"is longer than the {LONGEST} characters that a value may have")
    return text


def _lifted(match: re.Match[str]) -> str:
    return "^" + match[0].translate(_LIFTED)


def split_spread(text: str) -> tuple[str, Sign, str]:
    """
    Return a text cut into value, sign of the spread, and spread.

    Parameters
    ----------
    text
        A value in normal form.

    Returns
    -------
    value, sign, spread
        ``(55 ± 5) kJ/mol`` becomes ``55``, ``±``, ``5 kJ/mol``.

    Raises
    ------
    Refusal
        Where there are two spreads.
    """
    bracketed = _BRACKETED.fullmatch(text)
    if bracketed:
        return bracketed[1], "±", f"{bracketed[2]} {bracketed[3]}"
    parts = _SPREAD.split(text)
    if len(parts) == 1:
        return text, "", ""
    if len(parts) > 3:
        raise Refusal("has more than one spread")
    value, sign, spread = parts
    return value, "x/" if sign[0] in "x×X" else "±", spread


def amount_of(text: str) -> Amount | None:
    """Return the number and the unit of a text; None where it does not begin with a number."""
    match = _AMOUNT.fullmatch(text)
    return Amount(Decimal(match[1]), match[2].strip()) if match else None


def mass_ratio_of(text: str) -> tuple[Decimal, Decimal] | None:
    """Return the two numbers of a ratio such as ``1:50``; None where it is none."""
    match = _RATIO.fullmatch(text)
    return (Decimal(match[1]), Decimal(match[2])) if match else None


_SPAN = re.compile(r"\s*+(\d++(?:\.\d++)?)(?![eE]\d)\s*+([A-Za-z]++)", re.ASCII)


def time_parts_of(text: str) -> list[Amount] | None:
    """
    Return the parts of a time in several units, such as ``2 h 30 min``.

    Parameters
    ----------
    text
        A value in normal form.

    Returns
    -------
    parts
        Two or more numbers with their units, whole but for the last; None where it is no such
        time. Whether the units are times, from large to small, is not looked at.
    """
    parts: list[Amount] = []
    position = 0
    while position < len(text):
        match = _SPAN.match(text, position)
        if match is None or (parts and "." in str(parts[-1].number)):
            return None
        parts.append(Amount(Decimal(match[1]), match[2]))
        position = match.end()
    return parts if len(parts) > 1 else None
