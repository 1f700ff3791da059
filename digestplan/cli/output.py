"""Standard output: this module alone writes to it."""

import os
import sys


def write(text: str) -> None:
    """
    Write a whole document to standard output and flush it once.

    A reader that has gone away (``| head``) is not an error of ours: what is left is dropped and
    the interpreter is kept from complaining about it at its end.
    """
    try:
        sys.stdout.write(text if text.endswith("\n") else text + "\n")
        sys.stdout.flush()
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def prepare() -> None:
    """Let standard output carry µ and ± whatever the locale says."""
    for stream in (sys.stdout, sys.stderr):
        reconfigure = getattr(stream, "reconfigure", None)
        if reconfigure is not None:
            reconfigure(encoding="utf-8", errors="backslashreplace")
