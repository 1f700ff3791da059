"""On which line of a plan file each value stands.

TOML readers give lines for syntax errors only. This scanner runs after an error, on a text that
the TOML reader has already accepted; if it were ever wrong, only a hint would be wrong.
"""

import re
from collections.abc import Iterator, Mapping
from contextlib import suppress
from itertools import islice

from digestplan.plan.wording import place_of

Path = tuple[str | int, ...]

_MOST_TOKENS = 50_000  # far more than a plan has; what stands behind them gets no line

_TOKEN = re.compile(
    r"""(?P<blank>[ \t\r]+ | \#[^\n]*)
    | (?P<newline>\n)
    | (?P<text>\"{3}(?:\\.|[^\\])*?\"{3,5} | '{3}.*?'{3,5} | "(?:\\.|[^"\\\n])*" | '[^'\n]*')
    | (?P<mark>[\[\]{},=.])
    | (?P<bare>[^\s"'\#\[\]{},=.]+)""",
    re.VERBOSE | re.DOTALL,
)


def lines_by_place(text: str) -> dict[str, int]:
    """Return the line of every table and value, by its place such as ``steps[2].volume``."""
    scanner = _Scanner(text)
    with suppress(RecursionError, StopIteration):  # what was found up to there still serves
        scanner.document()
    return {place_of(path): line for path, line in scanner.lines.items()}


def line_of(place: str, lines: Mapping[str, int]) -> int | None:
    """Return the line of a place, or of the nearest table around it; None if there is none."""
    while place and place not in lines:
        place = re.sub(r"(\[\d+\]|\.?[^.\[\]]*|\.?\"[^\"]*\")\Z", "", place, count=1)
    return lines.get(place)


class _Scanner:
    """Walks through the tokens of a text and notes where each path begins."""

    def __init__(self, text: str) -> None:
        self.lines: dict[Path, int] = {}
        self._tables: dict[Path, int] = {}  # arrays of tables and the index of their last one
        self._tokens = self._split(text)
        self._kind, self._text, self._line = "newline", "", 0

    @staticmethod
    def _split(text: str) -> Iterator[tuple[str, str, int]]:
        line = 1
        for match in islice(_TOKEN.finditer(text), _MOST_TOKENS):
            if match.lastgroup != "blank":
                yield str(match.lastgroup), match.group(), line
            line += match.group().count("\n")

    def _next(self) -> None:
        self._kind, self._text, self._line = next(self._tokens)

    def _is(self, marks: str) -> bool:
        return self._kind == "mark" and self._text in marks

    def _note(self, path: Path) -> None:
        self.lines.setdefault(path, self._line)

    def document(self) -> None:
        """Read statements up to the end, which is a `StopIteration`."""
        table: Path = ()
        self._next()
        while True:
            if self._kind == "newline":
                self._next()
            elif self._is("["):
                table = self._header()
            else:
                self._pair(table)

    def _header(self) -> Path:
        self._next()
        many = self._is("[")
        if many:
            self._next()
        keys = self._keys("]")
        path = (*self._inside(keys[:-1]), *keys[-1:])
        if many:
            self._tables[path] = self._tables.get(path, -1) + 1
            self._note(path)
            path = (*path, self._tables[path])
        self._note(path)
        while self._is("]"):
            self._next()
        return path

    def _inside(self, keys: Path) -> Path:
        path: Path = ()
        for key in keys:
            path = (*path, key)
            if path in self._tables:
                path = (*path, self._tables[path])
        return path

    def _keys(self, end: str) -> tuple[str, ...]:
        keys: list[str] = []
        while not self._is(end):
            if self._kind != "mark":
                keys.append(self._text.strip("\"'") if self._kind == "text" else self._text)
            self._next()
        return tuple(keys)

    def _pair(self, table: Path) -> None:
        line = self._line
        path = (*table, *self._keys("="))
        for length in range(len(table) + 1, len(path) + 1):
            self.lines.setdefault(path[:length], line)
        self._next()
        self._value(path)

    def _value(self, path: Path) -> None:
        """Walk past a value: the token after it is the current one at the end."""
        if self._is("["):
            self._array(path)
        elif self._is("{"):
            self._inline(path)
        else:
            while self._kind != "newline" and not self._is(",]}"):
                self._next()

    def _array(self, path: Path) -> None:
        index = 0
        self._next()
        while not self._is("]"):
            if self._is(","):
                index += 1
            if self._is(",") or self._kind == "newline":
                self._next()
            else:
                self._note((*path, index))
                self._value((*path, index))
        self._next()

    def _inline(self, path: Path) -> None:
        self._next()
        while not self._is("}"):
            if self._is(",") or self._kind == "newline":
                self._next()
            else:
                self._pair(path)
        self._next()
