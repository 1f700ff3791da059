"""Registers as JSON lines, out and in again, and backups.

A line is one event with an id of its own, so that an export can be read into any register, once
or more often, beside what that register has already.
"""

import json
import os
import sqlite3
from collections.abc import Iterable, Iterator
from contextlib import closing, contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import IO

from digestplan.lots.register.body import from_json
from digestplan.lots.register.events import Event, new_id
from digestplan.lots.register.ledger import Register
from digestplan.lots.register.locate import RegisterError, in_words, refusal
from digestplan.problems import InputError, Problem

_LONGEST_LINE = 1_000_000


@dataclass(frozen=True, slots=True)
class Imported:
    """How many events of a file are new to the register, and how many it had already."""

    n_new: int
    n_known: int


def export_lines(register: Register) -> Iterator[str]:
    """
    Yield the whole register as JSON lines, in the order of writing.

    Parameters
    ----------
    register
        Open; it is read as it is at the first line.

    Yields
    ------
    line
        One event, without the end of line.
    """
    with closing(register.lines()) as events:
        for event in events:
            yield json.dumps(event, ensure_ascii=False, allow_nan=False)


def export_to(register: Register, target: str | Path) -> int:
    """
    Write the whole register to a new file of JSON lines.

    Parameters
    ----------
    register
        Open.
    target
        A file that does not exist yet; it appears when it is complete.

    Returns
    -------
    n_events
        How many events it holds.
    """
    n_events = 0
    with _new_file(Path(target)) as part, part.open("w", encoding="utf-8", newline="\n") as file:
        for line in export_lines(register):
            file.write(f"{line}\n")
            n_events += 1
        _to_disk(file)
    return n_events


def import_from(register: Register, source: str | Path) -> Imported:
    """
    Add the events of a file of JSON lines: all of them, or none where one is refused.

    Parameters
    ----------
    register
        Open; what it has already is left as it is.
    source
        An export of this or another register.

    Returns
    -------
    imported
        A `RegisterError` tells every line that is refused, and why.
    """
    name = str(source)
    try:
        with Path(source).open("rb") as file:
            return import_lines(register, file, name)
    except OSError as error:
        raise refusal(name, f"it cannot be read ({error.strerror or error})") from None


def import_lines(register: Register, lines: Iterable[bytes], source: str = "import") -> Imported:
    """
    Add events from JSON lines, as `import_from` does.

    Parameters
    ----------
    register
        Open.
    lines
        UTF-8; empty ones are passed over.
    source
        What messages call the lines.

    Returns
    -------
    imported
        How many are new, and how many were known.
    """
    events, numbers, problems = _read(lines, source)
    if problems:
        raise RegisterError(*problems)
    taken = register.append_many(events, source=source, lines=numbers)
    return Imported(taken.n_new, len(events) - taken.n_new)


def backup(register: Register, target: str | Path) -> int:
    """
    Copy a register while it is in use.

    Parameters
    ----------
    register
        Open.
    target
        A file that does not exist yet. For an SQLite register it becomes a register like it; for
        any other database it becomes an export, to be imported into an empty register.

    Returns
    -------
    n_events
        How many events it holds.
    """
    if register.url.get_backend_name() != "sqlite":
        return export_to(register, target)
    with _new_file(Path(target)) as part, closing(sqlite3.connect(part)) as copy:
        register.copy_to(copy)
        if copy.execute("PRAGMA integrity_check").fetchone()[0] != "ok":
            raise refusal(str(target), "the copy is not sound; check the disk, and the register")
        (n_events,) = copy.execute("SELECT count(*) FROM digestplan_event").fetchone()
    return int(n_events)


# -- the parts ------------------------------------------------------------------------------


def _read(lines: Iterable[bytes], source: str) -> tuple[list[Event], list[int], list[Problem]]:
    events, numbers, problems = [], [], []
    for number, line in enumerate(lines, start=1):
        if not line.strip():
            continue
        try:
            events.append(_event(line))
            numbers.append(number)
        except InputError as error:
            problems += [Problem(p.place, p.message, source, number) for p in error.problems]
    return events, numbers, problems


def _event(line: bytes) -> Event:
    if len(line) > _LONGEST_LINE:
        raise InputError(Problem("", "this line is longer than any event"))
    try:
        written = json.loads(line.decode("utf-8-sig"), parse_constant=_refuse_constant)
    except (ValueError, RecursionError):
        raise InputError(Problem("", "this is not a line of JSON in UTF-8")) from None
    if not isinstance(written, dict):
        raise InputError(Problem("", "this is not an event of a lot register"))
    return from_json(written)


def _refuse_constant(name: str) -> float:
    raise ValueError(name)


@contextmanager
def _new_file(target: Path) -> Iterator[Path]:
    """Give a path to write to, which becomes the target when all went well, and only then."""
    name = str(target)
    if target.is_dir():
        raise refusal(name, "this is a folder; the name of a file in it is wanted")
    part = target.with_name(f".{target.name}.{new_id()}")
    try:
        if target.exists():
            raise _there_already(name)
        part.touch(exist_ok=False)
        with in_words(name):
            yield part
        _give_name(part, target)
    except OSError as error:
        raise refusal(name, f"it cannot be written ({error.strerror or error})") from None
    finally:
        part.unlink(missing_ok=True)


def _give_name(part: Path, target: Path) -> None:
    try:
        os.link(part, target)
    except FileExistsError:
        raise _there_already(str(target)) from None
    except OSError:  # a disk that knows no links
        if target.exists():
            raise _there_already(str(target)) from None
        part.rename(target)


def _there_already(name: str) -> RegisterError:
    return refusal(name, "there is a file of this name already; it was left as it is")


def _to_disk(file: IO[str]) -> None:
    file.flush()
    os.fsync(file.fileno())
