"""Put what the commands really print into README.md: ``python -m tests.make_readme``."""

import contextlib
import io
import re
import sys
from pathlib import Path

from digestplan.cli.main import main as command

ROOT = Path(__file__).parents[1]
README = ROOT / "README.md"
BLOCK = re.compile(
    r"(?P<head>```\n\$ digestplan (?P<words>[^\n]+)\n)(?P<printed>.*?)(?P<end>```)", re.DOTALL
)


def printed(words: str) -> str:
    """What a command prints, run in the project's folder."""
    out = io.StringIO()
    with contextlib.chdir(ROOT), contextlib.redirect_stdout(out):
        status = command(words.split())
    if status != 0:
        raise RuntimeError(f"digestplan {words} ended with {status}")
    return out.getvalue()


def fresh(text: str) -> str:
    """README with every block that begins with a command made anew."""
    return BLOCK.sub(lambda m: m["head"] + printed(m["words"]) + m["end"], text)


if __name__ == "__main__":
    README.write_text(fresh(README.read_text("utf-8")), "utf-8")
    sys.exit(0)
