"""The user's own text on a sheet: as it was typed, and nothing in it that acts."""

import re
import unicodedata

from digestplan.plan.model import Value

LONGEST = 10_000  # characters of a title or a note that a sheet repeats

_JOINERS = "\u200c\u200d"  # they join or part letters, and do nothing else
_SIGNS = (("degC", "°C"), (" x/ ", " ×/ "), ("+/-", "±"), ("**2", "²"))
_UNIT = re.compile(r"(?<=\d) (?=(?:%|°C|[mµn]?[gLM]|h|min|d)(?!\w))")
_ISOLATE, _POP = "\u2068", "\u2069"


def as_typed(text: str, most: int = LONGEST) -> str:
    """
    Return the user's text as it was typed, several lines where there were several.

    Parameters
    ----------
    text
        The text.
    most
        Characters that are repeated; how many more there are is said. [1]

    Returns
    -------
    shown
        Characters that act on what surrounds them, such as those that turn the direction of
        writing, are written out by their code.
    """
    lines = text.replace("\r\n", "\n").replace("\r", "\n").replace("\t", "    ")
    shown = "".join(map(_visible, lines[:most])).strip("\n")
    more = len(lines) - most
    return shown if more <= 0 else f"{shown} … ({more} characters more in the plan)"


def short(text: str, most: int = 80) -> str:
    """Return the user's text on one line, to stand in a line of ours, cut where it is long."""
    flat = " ".join(as_typed(text[: 4 * most + 4]).split())
    cut = flat if len(flat) <= most else flat[: most - 1] + "…"
    if any(unicodedata.bidirectional(c) in {"R", "AL", "AN"} for c in cut):
        return _ISOLATE + cut + _POP
    return cut


def value_text(value: Value) -> str:
    """Return a value as it was written in its plan or in the library, with its signs set well."""
    text = value.quantity.text or f"{value.quantity.value:.4g}"
    for typed, set_well in _SIGNS:
        text = text.replace(typed, set_well)
    return short(text, 60)


def celsius(kelvin: float) -> str:
    """Return a temperature [K] as it is set on a bath."""
    return f"{round(kelvin - 273.15, 1):g} °C"


def typeset(text: str) -> str:
    """Return a text in which no line ends between a number and its unit."""
    return _UNIT.sub("\u00a0", text)


def without_isolates(text: str) -> str:
    """Return a text for a form that writes everything from left to right."""
    return text.replace(_ISOLATE, "").replace(_POP, "")


def _visible(character: str) -> str:
    if character.isprintable() or character == "\n" or character in _JOINERS:
        return character
    if unicodedata.category(character) == "Zs":
        return " "
    return f"[U+{ord(character):04X}]"
