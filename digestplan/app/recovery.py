"""Work that was not saved, kept aside every few seconds, and found again after a crash."""

import hashlib
import json
import os
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

from digestplan.app.session import Session
from digestplan.problems import InputError
from digestplan.report.sheet.save import save


@dataclass(frozen=True, slots=True)
class Kept:
    """Work found again: the text, the plan's file (None: it had none) and when it was kept."""

    file: Path
    text: str
    path: Path | None
    when: datetime


def state_folder() -> Path:
    """Return the folder for what the program remembers."""
    own = os.environ.get("DIGESTPLAN_STATE")
    if own:
        return Path(own)
    base = os.environ.get("XDG_STATE_HOME") or os.environ.get("LOCALAPPDATA")
    return (Path(base) if base else Path.home() / ".local" / "state") / "digestplan"


class Recovery:
    """
    The place where one session's unsaved work is kept.

    Parameters
    ----------
    folder
        Where the files go; made when it is first needed.
    """

    def __init__(self, folder: Path | None = None) -> None:
        self.folder = folder or state_folder() / "unsaved"
        self._last: str | None = None
        self._file: Path | None = None

    def keep(self, session: Session) -> None:
        """
        Write the work aside if there is any that the file does not hold.

        Raises
        ------
        InputError
            If it cannot be written.
        """
        if not session.dirty:
            self.forget()
            return
        if session.text == self._last:
            return
        path = None if session.path is None else str(session.path.resolve())
        file = self._file_for(path)
        if self._file not in {None, file}:
            self.forget()
        when = datetime.now().isoformat(timespec="seconds")  # noqa: DTZ005 - local wall clock
        record = {"path": path, "text": session.text, "when": when, "process": os.getpid()}
        try:
            self.folder.mkdir(parents=True, exist_ok=True, mode=0o700)
        except OSError as error:
            from digestplan.problems import Problem

            told = f"unsaved work cannot be kept: {error.strerror}"
            raise InputError(Problem("", told, str(self.folder))) from None
        save(file, json.dumps(record).encode())
        file.chmod(0o600)
        self._last, self._file = session.text, file

    def _file_for(self, path: str | None) -> Path:
        name = hashlib.sha256((path or "").encode()).hexdigest()[:16]
        return self.folder / f"{name}-{os.getpid()}.json"

    def forget(self) -> None:
        """Take away what was kept: it has been saved, or given up."""
        if self._file is not None:
            self._file.unlink(missing_ok=True)
        self._last = self._file = None

    def found(self, path: Path | None = None) -> list[Kept]:
        """Return kept work of programs that have ended, the newest first; of one file, or all."""
        kept = [k for k in map(_read, self.folder.glob("*.json")) if k is not None]
        if path is not None:
            kept = [k for k in kept if k.path == path.resolve()]
        return sorted(kept, key=lambda k: k.when, reverse=True)


def _read(file: Path) -> Kept | None:
    try:
        record = json.loads(file.read_text("utf-8"))
        if record["process"] == os.getpid() or _is_running(record["process"]):
            return None
        path = None if record["path"] is None else Path(record["path"])
        return Kept(file, str(record["text"]), path, datetime.fromisoformat(record["when"]))
    except (OSError, ValueError, KeyError, TypeError):
        return None


def _is_running(process: int) -> bool:
    if os.name != "posix":
        return False
    try:
        os.kill(process, 0)
    except ProcessLookupError:
        return False
    except PermissionError:
        return True
    return True
