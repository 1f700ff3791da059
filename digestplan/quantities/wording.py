"""How messages show what was written, and the errors that carry them."""

from typing import Any

_LONGEST = 60  # characters of the user's text that a message repeats


class QuantityError(ValueError):
    """What was written is not a value of the kind that is wanted.

    Attributes
    ----------
    message
        What was written, what is wrong with it, what is wanted and an example; without the place.
    """

    def __init__(self, message: str) -> None:
        super().__init__(message)
        self.message = message


class Refusal(Exception):  # noqa: N818  # never leaves the room
    """Why a text is refused, as the rest of a sentence that begins with the text."""


def shown(written: Any) -> str:
    """Return what was written as a message may show it: short, harmless, text in quotes."""
    if isinstance(written, str):
        return f'"{plain(written)}"'
    if isinstance(written, bool):
        return "true" if written else "false"
    if isinstance(written, int):
        return str(written) if abs(written) < 10**30 else "a huge number"
    if isinstance(written, float):
        return repr(float(written))
    return _OTHER_TYPES.get(type(written).__name__, "this")


_OTHER_TYPES = {"list": "a list", "dict": "a table", "NoneType": "nothing", "bytes": "raw bytes"}


def plain(text: str) -> str:
    """Return text shortened, and with characters that a terminal would act upon written out."""
    cut = text if len(text) <= _LONGEST else text[: _LONGEST - 1] + "…"
    return "".join(c if c.isprintable() else _escaped(c) for c in cut)


def _escaped(character: str) -> str:
    code = ord(character)
    return f"\\x{code:02x}" if code < 0x100 else f"\\u{code:04x}"
