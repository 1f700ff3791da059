"""Text broken into lines for a terminal: 79 characters, no number torn from its unit."""

import re
import textwrap

WIDTH = 79
_JOINED = "\N{NO-BREAK SPACE}"
_NUMBER_AND_UNIT = re.compile(r"(?<=\d) (?=[%°µa-zA-Z]{1,6}\b|[%°])|(?<=[\d±]) (?=[±\d])")


def wrapped(text: str, indent: str = "", first: str = "") -> str:
    """
    Return text broken into lines.

    Parameters
    ----------
    text
        One paragraph.
    indent
        Before every line but the first.
    first
        Before the first line.

    Returns
    -------
    lines
        Of at most 79 characters, as far as the words allow.
    """
    lines = textwrap.fill(
        _NUMBER_AND_UNIT.sub(_JOINED, text),
        WIDTH,
        initial_indent=first,
        subsequent_indent=indent,
        break_on_hyphens=False,
        # textwrap breaks at ASCII blanks alone, so that joined words stay together
    )
    return lines.replace(_JOINED, " ")
