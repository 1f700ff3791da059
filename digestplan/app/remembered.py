"""What the app remembers from one time to the next: the theme, and the plans opened last."""

import json
from pathlib import Path
from typing import Any

from digestplan.app.recovery import state_folder
from digestplan.problems import InputError
from digestplan.report.sheet.save import save

_MOST = 12


def _file() -> Path:
    return state_folder() / "app.json"


def _all() -> dict[str, Any]:
    try:
        found = json.loads(_file().read_text("utf-8"))
    except (OSError, ValueError):
        return {}
    return found if isinstance(found, dict) else {}


def _put(**new: object) -> None:
    try:
        _file().parent.mkdir(parents=True, exist_ok=True, mode=0o700)
        save(_file(), json.dumps(_all() | new).encode())
    except (OSError, InputError):
        return  # what cannot be remembered is no reason to stop


def theme() -> str | None:
    """Return the theme that was chosen last."""
    found = _all().get("theme")
    return found if isinstance(found, str) else None


def keep_theme(name: str) -> None:
    """Remember a theme."""
    if theme() != name:
        _put(theme=name)


def recent() -> list[Path]:
    """Return the plans opened last that are still there, the newest first."""
    found = _all().get("recent", [])
    paths = (
        [Path(name) for name in found if isinstance(name, str)] if isinstance(found, list) else []
    )
    return [path for path in paths if path.is_file()]


def keep_recent(path: Path) -> None:
    """Remember a plan that was opened or saved."""
    names = [str(path.resolve()), *(str(p) for p in recent())]
    _put(recent=list(dict.fromkeys(names))[:_MOST])
