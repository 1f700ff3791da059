"""What this terminal can show: how fine the glyphs are, and whether there is colour."""

import os
import sys
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

Level = Literal["braille", "blocks", "ascii"]
LEVELS: tuple[Level, ...] = ("braille", "blocks", "ascii")


@dataclass(frozen=True, slots=True)
class Look:
    """How to draw: with which glyphs, and whether by patterns instead of colours."""

    level: Level = "braille"
    pattern: bool = False


def is_terminal() -> bool:
    """Whether there is somebody to look at a screen."""
    return sys.stdin.isatty() and (sys.stdout.isatty() or sys.stderr.isatty())


def glyph_level(environment: Mapping[str, str] | None = None) -> Level:
    """Return the finest glyphs that the terminal is likely to have; a setting overrules."""
    env = os.environ if environment is None else environment
    wanted = env.get("DIGESTPLAN_GLYPHS", "")
    if wanted in LEVELS:
        return next(level for level in LEVELS if level == wanted)
    if env.get("TERM") == "linux":
        return "ascii"
    locale = next((env[k] for k in ("LC_ALL", "LC_CTYPE", "LANG") if env.get(k)), "UTF-8")
    charset = locale.upper().replace("-", "")
    plain = charset in {"C", "POSIX"} or ("." in charset and "UTF8" not in charset)
    return "ascii" if plain else "braille"


def no_color(environment: Mapping[str, str] | None = None) -> bool:
    """Whether the user asks for no colour."""
    env = os.environ if environment is None else environment
    return bool(env.get("NO_COLOR"))
