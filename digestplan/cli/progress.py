"""How far a long command is, told on a terminal's standard error and taken away again."""

import sys
import time
from typing import Self

_PATIENCE = 0.5  # [s] before anything is said
_EVERY = 0.1  # [s]


class Progress:
    """
    Tells how far a command is; says nothing unless standard error is a terminal.

    Parameters
    ----------
    doing
        What is going on, such as ``comparing``.
    """

    def __init__(self, doing: str) -> None:
        self.doing = doing
        self._started = self._said = time.monotonic()
        self._shown = False

    def __call__(self, done: int, of: int) -> None:
        """Note that so many of so many pieces of work are done."""
        now = time.monotonic()
        if now - self._started < _PATIENCE or now - self._said < _EVERY:
            return
        if sys.stderr.isatty():
            self._said, self._shown = now, True
            sys.stderr.write(f"\r{self.doing} {100 * done // max(of, 1)} %")
            sys.stderr.flush()

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        if self._shown:
            sys.stderr.write("\r" + " " * (len(self.doing) + 6) + "\r")
            sys.stderr.flush()
