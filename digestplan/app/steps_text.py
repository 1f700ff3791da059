"""Steps added, taken out, copied and moved in the text of a plan, comments and all.

A step is a block of lines, from the comments above its ``[[steps]]`` to the next one. What comes
out is read again and must hold the steps that are meant.
"""

import re
import tomllib
from collections.abc import Mapping, Sequence
from itertools import pairwise
from typing import Any

from digestplan.plan.write import edited_text
from digestplan.problems import InputError, Problem

_HEADER = re.compile(r"\s*\[\[\s*steps\s*\]\]\s*(#.*)?")
_FRESH = {
    "digest": 'charge = "5 mg"\nvolume = "3 mL"\ntemperature = "37 degC"\nfor = "4 h"\n',
    "demineralise": 'reagent = "edta"\nconcentration = "0.5 M"\nph = 7.4\nvolume = "20 mL"\n'
    'temperature = "20 degC"\nfor = "72 h"\n',
    "rinse": 'fluid = "water"\nvolume = "10 mL"\nexchanges = 3\neach = "20 min"\n'
    'temperature = "22 degC"\n',
    "stop": 'how = "chelate"\nconcentration = "20 mM"\n',
    "hold": 'temperature = "4 degC"\nfor = "12 h"\n',
}


def with_added(text: str, kind: str, index: int) -> str:
    """Return a plan's text with a fresh step of a kind in a place of the order."""
    fresh = f'[[steps]]\ndo = "{kind}"\n{_FRESH[kind]}'
    steps = _steps(text)
    meant = [*steps[:index], tomllib.loads(fresh)["steps"][0], *steps[index:]]
    if not steps:
        return _checked(f"{text.rstrip()}\n\n{fresh}", meant)
    blocks = _blocks(text, len(steps))
    blocks.steps.insert(index, fresh.splitlines())
    return _joined(blocks, text, meant)


def without(text: str, index: int) -> str:
    """Return a plan's text without one of its steps."""
    steps = _steps(text)
    blocks = _blocks(text, len(steps))
    del blocks.steps[index]
    return _joined(blocks, text, [*steps[:index], *steps[index + 1 :]])


def with_copy(text: str, index: int) -> str:
    """Return a plan's text with a copy of a step behind it."""
    steps = _steps(text)
    blocks = _blocks(text, len(steps))
    blocks.steps.insert(index + 1, list(blocks.steps[index]))
    return _joined(blocks, text, [*steps[: index + 1], *steps[index:]])


def moved(text: str, index: int, to: int) -> str:
    """Return a plan's text with a step in another place of the order."""
    steps = list(_steps(text))
    blocks = _blocks(text, len(steps))
    blocks.steps.insert(to, blocks.steps.pop(index))
    steps.insert(to, steps.pop(index))
    return _joined(blocks, text, steps)


def programme_text(stretches: Sequence[Mapping[str, Any]]) -> str:
    """Return a temperature programme as TOML, a line a stretch."""
    lines = [
        "{ " + ", ".join(f"{key} = {_spelled(value)}" for key, value in stretch.items()) + " }"
        for stretch in stretches
    ]
    return "[\n" + "".join(f"  {line},\n" for line in lines) + "]"


def _spelled(value: object) -> str:
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, int | float):
        return repr(value)
    escaped = "".join(
        c if c.isprintable() and c not in '"\\' else f"\\u{ord(c):04x}" for c in str(value)
    )
    return f'"{escaped}"'


class _Blocks:
    """The lines of a text: what stands before the steps, and a block of lines a step."""

    def __init__(self, head: list[str], steps: list[list[str]]) -> None:
        self.head, self.steps = head, steps


def _steps(text: str) -> list[Any]:
    try:
        found = tomllib.loads(text.removeprefix("\ufeff")).get("steps", [])
    except (tomllib.TOMLDecodeError, RecursionError):
        raise _refusal() from None
    if not isinstance(found, list):
        raise _refusal()
    return found


def _refusal() -> InputError:
    return InputError(
        Problem("steps", "these steps are written so that only the text can be edited")
    )


def _blocks(text: str, n_steps: int) -> _Blocks:
    lines = text.replace("\r\n", "\n").splitlines()
    starts = [i for i, line in enumerate(lines) if _HEADER.fullmatch(line)]
    if len(starts) != n_steps:
        return _rewritten(text, n_steps)
    ends = [_with_comments(lines, start) for start in starts] + [len(lines)]
    blocks = [lines[a:b] for a, b in pairwise(ends)]
    return _Blocks(lines[: ends[0]], blocks)


def _with_comments(lines: Sequence[str], start: int) -> int:
    """Return where the comments begin that stand right above a header."""
    while start > 0 and lines[start - 1].lstrip().startswith("#"):
        start -= 1
    return start


def _rewritten(text: str, n_steps: int) -> _Blocks:
    """Take steps that are not written as ``[[steps]]`` out, and write them so."""
    import tomlkit

    steps = _steps(text)
    head = edited_text(text, {"steps": None}, "plan").splitlines()
    blocks = [tomlkit.dumps({"steps": [step]}).splitlines() for step in steps]
    if len(blocks) != n_steps:
        raise _refusal()
    return _Blocks(head, blocks)


def _joined(blocks: _Blocks, original: str, meant: list[Any]) -> str:
    parts = [blocks.head, *blocks.steps]
    text = "\n\n".join("\n".join(part).strip("\n") for part in parts if part) + "\n"
    if "\r\n" in original:
        text = text.replace("\n", "\r\n")
    return _checked(text, meant)


def _checked(text: str, meant: list[Any]) -> str:
    try:
        found = tomllib.loads(text.removeprefix("\ufeff")).get("steps", [])
    except (tomllib.TOMLDecodeError, RecursionError):
        raise _refusal() from None
    if found != meant:
        raise _refusal()
    return text
