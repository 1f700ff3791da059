"""Put what the commands really print into docs/lots.md: ``python -m tests.make_lots_doc``."""

import contextlib
import io
import os
import re
import shlex
import shutil
import sys
import tempfile
from pathlib import Path

from digestplan.cli.main import main as command

ROOT = Path(__file__).parents[1]
DOCUMENT = ROOT / "docs" / "lots.md"
BLOCK = re.compile(r"```\n(\$ digestplan .*?)```", re.DOTALL)
_ID = re.compile(r"Entry [0-9a-f]{8}\.")  # chosen anew at each run


@contextlib.contextmanager
def fresh_folder():
    """A folder with the demo and an empty register, as somebody has it who starts."""
    before = os.environ.get("DIGESTPLAN_REGISTER")
    with tempfile.TemporaryDirectory() as folder, contextlib.chdir(folder):
        shutil.copytree(ROOT / "presets_demo", "presets_demo")
        os.environ["DIGESTPLAN_REGISTER"] = "lots.sqlite"
        try:
            yield
        finally:
            os.environ.pop("DIGESTPLAN_REGISTER")
            if before is not None:
                os.environ["DIGESTPLAN_REGISTER"] = before


def printed(words: str) -> str:
    """What a command prints."""
    out = io.StringIO()
    with contextlib.redirect_stdout(out):
        status = command(shlex.split(words))
    if status != 0:
        raise RuntimeError(f"digestplan {words} ended with {status}")
    return _ID.sub("Entry 3f2a91c0.", out.getvalue())


def fresh(text: str) -> str:
    """Return the document with every block made anew, in its order and on one register."""

    def block(match: re.Match[str]) -> str:
        lines = [line for line in match[1].splitlines() if line.startswith("$ digestplan ")]
        whole = [f"{line}\n{printed(line.removeprefix('$ digestplan '))}" for line in lines]
        return "```\n" + "\n".join(whole) + "```"

    with fresh_folder():
        return BLOCK.sub(block, text)


if __name__ == "__main__":
    DOCUMENT.write_text(fresh(DOCUMENT.read_text("utf-8")), "utf-8")
    sys.exit(0)
