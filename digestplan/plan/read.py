"""From a plan file to a plan, or to everything that is wrong with it."""

import stat
from dataclasses import replace
from os import PathLike, fspath
from pathlib import Path

from digestplan.plan.check import checked_plan
from digestplan.plan.lines import line_of, lines_by_place
from digestplan.plan.model import Plan
from digestplan.plan.syntax import loaded
from digestplan.plan.wording import plain
from digestplan.problems import InputError, Problem, Problems

LARGEST_FILE = 1_000_000  # [bytes]


def read_plan(path: str | PathLike[str], problems: Problems | None = None) -> Plan:
    """
    Read a plan file.

    Parameters
    ----------
    path
        The file; messages name it as it is given here.
    problems
        A collector that is to hold the problems as well.

    Returns
    -------
    plan
        The plan, with everything that it leaves open filled from the library.

    Raises
    ------
    InputError
        With all that is wrong, each problem with its place and, where it is known, its line.
    """
    try:
        text = read_plan_text(path)
    except InputError as error:
        if problems is not None:
            problems.found.extend(error.problems)
        raise
    return parse_plan(text, fspath(path), problems)


def read_plan_text(path: str | PathLike[str]) -> str:
    """Return the text of a plan file as it stands there, or raise an `InputError`."""
    name = plain(fspath(path), 400)
    try:
        about = Path(path).stat()
        if not stat.S_ISREG(about.st_mode):
            kind = "a folder" if stat.S_ISDIR(about.st_mode) else "not a file"
            raise _refusal(name, f"this is {kind}; a plan file (TOML) is wanted here")
        if about.st_size > LARGEST_FILE:
            raise _refusal(name, "this is larger than 1 MB, far more than any plan needs")
        content = Path(path).read_bytes()
    except FileNotFoundError:
        raise _refusal(name, "there is no such file") from None
    except PermissionError:
        raise _refusal(name, "this file may not be read (its permissions forbid it)") from None
    except (OSError, ValueError) as error:  # ValueError: a NUL in the name
        reason = getattr(error, "strerror", None) or "its name cannot be used"
        raise _refusal(name, f"this file cannot be read: {reason}") from None
    return _decoded(content, name)


def _decoded(content: bytes, name: str) -> str:
    if content.startswith((b"\xff\xfe", b"\xfe\xff")):
        raise _refusal(name, "this text is saved as UTF-16; save it as UTF-8")
    if b"\0" in content:
        raise _refusal(name, "this is no text but a binary file; a plan file is TOML text")
    try:
        return content.decode("utf-8")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        message = "this text is not saved as UTF-8 (look at µ, °, ± and letters with accents)"
        raise _refusal(name, message, line) from None


def _refusal(name: str, message: str, line: int | None = None) -> InputError:
    return InputError(Problem("", message, name, line))


def parse_plan(text: str, name: str, problems: Problems | None = None) -> Plan:
    """
    Make a plan of the text of a plan file.

    Parameters
    ----------
    text
        TOML.
    name
        Name of the file, for messages.
    problems
        A collector that is to hold the problems as well.

    Returns
    -------
    plan
        The plan, with everything that it leaves open filled from the library.

    Raises
    ------
    InputError
        With all that is wrong, each problem with its place and, where it is known, its line.
    """
    text = text.removeprefix("\ufeff")
    tables = loaded(text)
    if isinstance(tables, Problem):
        found = [tables]
    else:
        gathered = Problems()
        plan = checked_plan(tables, name, gathered)
        if plan is not None and not gathered.found:
            return plan
        found = _in_order(gathered.found, text)
    named = [replace(problem, file=plain(name, 400)) for problem in found]
    if problems is not None:
        problems.found.extend(named)
    raise InputError(*named)


def _in_order(found: list[Problem], text: str) -> list[Problem]:
    lines = lines_by_place(text.replace("\r\n", "\n"))
    placed = [replace(p, line=p.line or line_of(p.place, lines)) for p in found]
    return sorted(placed, key=lambda problem: problem.line or 0)
