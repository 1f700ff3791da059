"""Where a register is, whether what is found there is one, and what a database's errors mean."""

import os
import sqlite3
import sys
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

from digestplan.problems import InputError, Problem

if TYPE_CHECKING:
    from sqlalchemy import URL

VARIABLE = "DIGESTPLAN_REGISTER"


class RegisterError(InputError):
    """The register cannot be opened, read or written, or refuses what it was given."""


def refusal(name: str, message: str) -> RegisterError:
    """Return an error about the register of a name."""
    return RegisterError(Problem("", message, file=name))


def default_location(environment: Mapping[str, str] = os.environ) -> str:
    """
    Return where the user's own register is.

    Parameters
    ----------
    environment
        The process's; ``DIGESTPLAN_REGISTER`` holds a path or a URL that overrides the default.

    Returns
    -------
    location
        A path in the folder in which the platform keeps a user's data, or what the variable says.
    """
    if environment.get(VARIABLE):
        return environment[VARIABLE]
    home = Path.home()
    if sys.platform == "win32":
        folder = Path(environment.get("LOCALAPPDATA") or home / "AppData" / "Local")
    elif sys.platform == "darwin":
        folder = home / "Library" / "Application Support"
    else:
        folder = Path(environment.get("XDG_DATA_HOME") or "")
        if not folder.is_absolute():  # as the XDG base directory specification asks
            folder = home / ".local" / "share"
    return str(folder / "digestplan" / "lots.sqlite")


def register_url(location: str | Path) -> "URL":
    """
    Return the database URL of a path or a URL.

    Parameters
    ----------
    location
        A path of an SQLite file, or a URL such as ``postgresql://user@host/database``.

    Returns
    -------
    url
        With the driver that is used here.
    """
    from sqlalchemy import URL, make_url
    from sqlalchemy.exc import ArgumentError

    text = str(location)
    if "://" not in text:
        if "\x00" in text or not text.strip():
            raise refusal(repr(text), "this is no path of a register")
        path = text if text == ":memory:" else str(Path(text).expanduser())
        return URL.create("sqlite", database=path)
    try:
        url = make_url(text)
    except (ArgumentError, ValueError):
        raise refusal(
            "register", "the URL cannot be read; its form is name://user@host/database"
        ) from None
    if url.drivername in {"postgres", "postgresql"}:
        return url.set(drivername="postgresql+psycopg")
    return url


def name_of(url: "URL") -> str:
    """Return how messages call a register: its path, or its URL without the password."""
    file = file_of(url)
    return str(file) if file else url.render_as_string(hide_password=True)


def file_of(url: "URL") -> Path | None:
    """Return the SQLite file of a URL; None for a database in memory and for all others."""
    database = url.database or ""
    if url.get_backend_name() != "sqlite" or database in {"", ":memory:"}:
        return None
    return None if database.startswith("file:") else Path(database)


def look_at(file: Path, *, create: bool) -> None:
    """
    Refuse, in words, a path at which no register can be.

    Parameters
    ----------
    file
        The path.
    create
        Whether a register is to be started where there is none.
    """
    name = str(file)
    try:
        if file.is_dir():
            raise refusal(name, "this is a folder; the name of a file in it is wanted")
        if not file.exists():
            if not file.parent.is_dir():
                raise refusal(name, "its folder does not exist; make the folder, or mend the path")
            if not create:
                raise refusal(name, NONE_HERE)
            return
        if not file.is_file():
            raise refusal(name, "this is not a file that a register could be kept in")
        file.open("rb").close()
    except PermissionError:
        raise refusal(name, "you have no permission to read it") from None
    except OSError as error:
        raise refusal(name, f"it cannot be read ({error.strerror or error})") from None


def make_home(file: Path) -> None:
    """Make the folder of the user's own register, for the user alone."""
    try:
        file.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
    except OSError as error:
        why = error.strerror or error
        raise refusal(str(file.parent), f"this folder cannot be made ({why})") from None


# -- a database's errors in words -------------------------------------------------------------

NONE_HERE = "there is no lot register here; enter or import a lot, and there will be one"

_SQLITE = {
    3: "you have no permission to use it",
    5: "another program keeps it locked; nothing was written. Close that program, or try again",
    6: "another program keeps it locked; nothing was written. Close that program, or try again",
    8: "it cannot be written: it, its folder or its disk is read-only. Nothing was changed",
    10: "its disk cannot be read or written (input/output error); nothing was lost that was "
    "acknowledged",
    11: "the file is damaged; go back to a backup, and keep the damaged file",
    13: "its disk is full; nothing was written. Make room and try again",
    14: "it cannot be opened: it, or its folder, is missing or not permitted to you",
    23: "you have no permission to use it",
    26: "this file is not a lot register, and was left as it is",
}

_UNSURE = "the connection was lost: see whether the last entry is there before you repeat it"

_SQLSTATES = {
    "08": "the database cannot be reached",
    "25006": "the database can only be read; nothing was written",
    "28": "the database refuses this user or password",
    "3D": "the server has no database of this name",
    "42501": "this user may not do that in the database",
    "53100": "the disk of the database's server is full; nothing was written",
    "53300": "the database's server has too many connections; try again",
    "55P03": "somebody else has been writing for too long; nothing was written. Try again",
    "57": "the database's server is stopping or starting; try again",
}


@contextmanager
def in_words(name: str) -> Iterator[None]:
    """Turn what a database raises inside the block into a `RegisterError`."""
    from sqlalchemy.exc import DBAPIError, NoSuchModuleError, SQLAlchemyError

    try:
        yield
    except DBAPIError as error:
        unsure = f"; {_UNSURE}" if error.connection_invalidated else ""
        raise refusal(name, _told(error.orig) + unsure) from error
    except sqlite3.Error as error:
        raise refusal(name, _told(error)) from error
    except NoSuchModuleError as error:
        raise refusal(name, "this kind of database is not known here") from error
    except SQLAlchemyError as error:
        raise refusal(name, f"the database cannot be used ({_first_line(error)})") from error
    except ModuleNotFoundError as error:
        message = f"this kind of database needs the package {error.name}, which is not installed"
        raise refusal(name, message) from error


def _told(error: Any) -> str:
    code = getattr(error, "sqlite_errorcode", None)
    if code is not None and code & 0xFF in _SQLITE:
        return _SQLITE[code & 0xFF]
    state = getattr(error, "sqlstate", None) or ""
    for start, words in _SQLSTATES.items():
        if state.startswith(start):
            return words
    if type(error).__name__ == "OperationalError" and not state and code is None:
        why = _first_line(error).rpartition("FATAL:")[2].strip()
        return f"the database cannot be reached ({why})"
    return f"the database refuses ({_first_line(error)})"


def _first_line(error: object) -> str:
    return next(iter(str(error).strip().splitlines()), type(error).__name__)
