"""Writing a finished file: all of it or nothing."""

import os
import secrets
from pathlib import Path

from digestplan.problems import InputError, Problem


def save(path: Path, content: bytes) -> None:
    """
    Write a file, so that there is never a half of it.

    Parameters
    ----------
    path
        The file; one that is there already is replaced.
    content
        All of it.

    Raises
    ------
    InputError
        If it cannot be written.
    """
    try:
        _replace(path, content)
    except OSError as error:
        message = f"this file cannot be written: {error.strerror or 'no reason is given'}"
        raise InputError(Problem("", message, str(path))) from None
    except ValueError:  # a NUL in the name
        raise InputError(Problem("", "this name cannot be used for a file", ascii(path))) from None


def _replace(path: Path, content: bytes) -> None:
    """Write a new file beside the old one and put it in its place in one step."""
    path = path.resolve()  # a link stays a link
    temporary = path.with_name(f".{path.name[:40]}.{secrets.token_hex(6)}")
    try:
        with temporary.open("xb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        if path.exists():
            temporary.chmod(path.stat().st_mode & 0o7777)
        temporary.replace(path)
    except BaseException:
        temporary.unlink(missing_ok=True)
        raise
