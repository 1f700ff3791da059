"""Writing a finished file: all of it or nothing."""

from pathlib import Path

from digestplan.plan.replace import replace_file
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
        replace_file(path, content)
    except OSError as error:
        message = f"this file cannot be written: {error.strerror or 'no reason is given'}"
        raise InputError(Problem("", message, str(path))) from None
    except ValueError:  # a NUL in the name
        raise InputError(Problem("", "this name cannot be used for a file", ascii(path))) from None
