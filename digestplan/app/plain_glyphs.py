"""Every glyph as ASCII, for terminals whose locale has nothing else."""

import unicodedata
from functools import cache

from rich.cells import cell_len
from rich.segment import Segment
from textual.color import Color
from textual.filter import LineFilter

_LIKE = str.maketrans(
    {
        **dict.fromkeys("─━╌▔▁–—−", "-"),
        **dict.fromkeys("│▏▕▎▊┃┤├", "|"),
        **dict.fromkeys("└┘┌┐┴┬┼╭╮╰╯", "+"),
        **dict.fromkeys("█▉▇▆▅▄▃▂", "#"),
        **dict.fromkeys("“”", '"'),
        **dict.fromkeys("‘’", "'"),
        "±": "~",
        "°": "o",
        "µ": "u",
        "μ": "u",
        "×": "x",
        "…": ".",
        "·": ".",
        "☐": "_",
        "↑": "^",
        "↓": "v",
        "←": "<",
        "→": ">",
    }
)


@cache
def plain(text: str) -> str:
    """Return a text in ASCII, each cell for a cell."""
    if text.isascii():
        return text
    return "".join(c if c.isascii() else _plain(c) for c in text.translate(_LIKE))


def _plain(glyph: str) -> str:
    width = cell_len(glyph)
    base = unicodedata.normalize("NFKD", glyph)[0]
    return base if base.isascii() and width == 1 else "?" * width


class PlainGlyphs(LineFilter):
    """Shows every line in ASCII."""

    def apply(self, segments: list[Segment], background: Color) -> list[Segment]:  # noqa: ARG002 - only glyphs change
        """Return the segments in ASCII."""
        return [Segment(plain(text), style, control) for text, style, control in segments]
