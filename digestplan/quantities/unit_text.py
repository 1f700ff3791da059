"""The grammar of a compound unit, such as ``g/(CDU h)``, ``kJ mol-1`` or ``m**2/s``.

A closed grammar: words of letters, small whole exponents, products, quotients and brackets. What
does not fit is refused here, so that nothing else ever reaches the library of units.
"""

import re
from collections import Counter

from digestplan.quantities.wording import Refusal, plain

Factors = tuple[tuple[str, int], ...]

_HIGHEST = 3  # exponent
_MOST = 8  # factors
_DEEPEST = 2  # brackets

_TOKEN = re.compile(
    r"""\s*+(?:
        (?P<word>[A-Za-zµ]++(?:_[A-Za-z]++)*+)
        (?:\s*+(?:\*\*|\^)\s*+(?:(?P<power>[+-]?\d)|\(\s*+(?P<inner>[+-]?\d)\s*+\))
          |(?P<glued>[+-]?\d))?+(?!\d)
      | (?P<mark>[*./()])
      | (?P<one>1)(?=\s*+/)
    )""",
    re.ASCII | re.VERBOSE,
)


def read_unit(text: str) -> Factors:
    """
    Return the words of a compound unit with their exponents.

    Parameters
    ----------
    text
        The unit, in normal form.

    Returns
    -------
    factors
        Each word once, in the order of the text; the exponent is 0 where it cancels.

    Raises
    ------
    Refusal
        Where the text is no unit, or can be read in two ways.
    """
    reader = _Reader(text)
    factors = reader.product(0)
    if reader.index < len(reader.tokens) or not factors:
        raise reader.refusal()
    if any(abs(power) > _HIGHEST for power in factors.values()):
        raise reader.refusal()
    return tuple(factors.items())


class _Reader:
    """A walk along the tokens of one unit."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.index = 0
        self.tokens = list(self._tokens())
        if sum(power != 0 for _, power in self.tokens) > _MOST:
            raise self.refusal()

    def refusal(self) -> Refusal:
        """Say that the unit cannot be read."""
        return Refusal(f'has a unit that cannot be read, "{plain(self.text)}"')

    def _tokens(self) -> list[tuple[str, int]]:
        """Pairs of word and exponent; marks have the exponent 0."""
        tokens: list[tuple[str, int]] = []
        position, end = 0, len(self.text)
        while position < end:
            match = _TOKEN.match(self.text, position)
            if match is None:
                raise self.refusal()
            tokens.append(self._token(match))
            position = match.end()
        return tokens

    def _token(self, match: re.Match[str]) -> tuple[str, int]:
        word = match["word"]
        if word is None:
            mark = match["mark"] or "1"
            return ("*" if mark == "." else mark), 0
        power = int(match["power"] or match["inner"] or match["glued"] or 1)
        if power == 0:
            raise self.refusal()
        return word, power

    def _next(self) -> tuple[str, int]:
        if self.index >= len(self.tokens):
            raise self.refusal()
        token = self.tokens[self.index]
        self.index += 1
        return token

    def _peek(self) -> str:
        return self.tokens[self.index][0] if self.index < len(self.tokens) else ""

    def product(self, depth: int) -> Counter[str]:
        """Read factors up to the end or a closing bracket."""
        found: Counter[str] = Counter()
        divided = False
        if self._peek() == "1":  # 1/h
            self._next()
        if self._peek() != "/":
            self._take(found, 1, depth)
        while self._peek() not in {"", ")"}:
            mark = self._peek()
            if mark in {"/", "*"}:
                self._next()
            if divided and mark != "/":  # mL/mg h: is it h/mg or 1/(mg h)?
                raise Refusal(self._two_ways())
            divided = divided or mark == "/"
            self._take(found, -1 if mark == "/" else 1, depth)
        return found

    def _take(self, found: Counter[str], sign: int, depth: int) -> None:
        word, power = self._next()
        if power:
            found[word] += sign * power
        elif word == "(" and depth < _DEEPEST:
            inner = self.product(depth + 1)
            if self._next()[0] != ")":
                raise self.refusal()
            for name, exponent in inner.items():
                found[name] += sign * exponent
        else:
            raise self.refusal()

    def _two_ways(self) -> str:
        top, _, below = self.text.partition("/")
        hint = f"{top.strip()}/({below.strip().replace('*', ' ')})"
        fits = not set(below) & set("/()")
        example = f'; write "{plain(hint)}"' if fits else "; write brackets after the /"
        return f'has a unit that can be read in two ways, "{plain(self.text)}"{example}'
