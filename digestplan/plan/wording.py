"""How messages show places, and what the user wrote, without letting it do any harm."""

import difflib
import re
from collections.abc import Iterable, Mapping
from datetime import date, datetime, time
from typing import Any

from digestplan.quantities import wording

_LONGEST = 60  # characters of the user's text that a message repeats
_BARE = re.compile(r"[A-Za-z0-9_-]{1,40}")


def shown(written: Any) -> str:
    """
    Return what was written as a message may show it.

    Parameters
    ----------
    written
        A value as the TOML reader gives it.

    Returns
    -------
    text
        In quotation marks where it was text; on one line, short, without any character that a
        terminal would act upon.
    """
    if isinstance(written, datetime | date | time):
        return written.isoformat()
    return "a table" if isinstance(written, Mapping) else wording.shown(written)


def plain(text: str, longest: int = _LONGEST) -> str:
    """Return the user's text shortened, and with control characters written out."""
    cut = text if len(text) <= longest else text[: longest - 1] + "…"
    return "".join(c if c.isprintable() else _escaped(c) for c in cut)


def _escaped(character: str) -> str:
    code = ord(character)
    return f"\\x{code:02x}" if code < 0x100 else f"\\u{code:04x}"


def place_of(path: Iterable[str | int]) -> str:
    """Return the dotted name of a value, such as ``steps[2].volume``, from its keys."""
    place = ""
    for key in path:
        if isinstance(key, int):
            place += f"[{key}]"
        else:
            name = key if _BARE.fullmatch(key) else f'"{plain(key, 40)}"'
            place = f"{place}.{name}" if place else name
    return place


def nearest(written: str, known: Iterable[str]) -> str | None:
    """Return the known word that is nearest to what was written, if any is near."""
    if len(written) > _LONGEST:
        return None
    folded = written.strip().lower().replace("-", "_").replace(" ", "_")
    by_folded = {word.lower().replace("-", "_").replace(" ", "_"): word for word in known}
    near = difflib.get_close_matches(folded, by_folded, n=1, cutoff=0.6)
    return by_folded[near[0]] if near else None


def listed(words: Iterable[str], last: str = "or") -> str:
    """Return words as a list in a sentence: ``a, b or c``."""
    *most, end = words
    return f"{', '.join(most)} {last} {end}" if most else end
