"""Writing a file so that there is never a half of it."""

import os
import secrets
from pathlib import Path


def replace_file(path: Path, content: bytes) -> None:
    """
    Write a new file beside the old one and put it in its place in one step.

    Parameters
    ----------
    path
        The file; one that is there already keeps its permissions, and a link stays a link.
    content
        All of it.

    Raises
    ------
    OSError
        If it cannot be written; what was there before is then untouched.
    """
    path = path.resolve()
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
