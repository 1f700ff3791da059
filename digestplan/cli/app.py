"""``digestplan``, ``digestplan open PLAN`` and ``digestplan demo [DIR]``: the terminal app."""

import argparse
import sys

from digestplan.cli import diagnostics, output

_NOWHERE = (
    "there is no terminal for the app here; `digestplan forecast PLAN` prints the same answers as"
    " text, and `digestplan --help` lists all commands"
)
_DEMO = "porpoise-tendon-overnight.toml"


def bare(chosen: argparse.Namespace) -> int | None:
    """Open the app on a choice of plans."""
    if not _is_terminal():
        return diagnostics.refuse(_NOWHERE)
    from digestplan.app.main import run

    run(None, chosen.register, chosen.draws)
    return None


def open_plan(chosen: argparse.Namespace) -> int | None:
    """Open the app on a plan."""
    if not _is_terminal():
        return diagnostics.refuse(_NOWHERE)
    from digestplan.app.main import open_path

    open_path(chosen.plan, chosen.register, chosen.draws)
    return None


def demo(chosen: argparse.Namespace) -> int | None:
    """Copy the demo plans to a folder, and open the app on one of them."""
    from digestplan.app.new_plan import copy_demo

    folder, copied = copy_demo(chosen.dir)
    if not _is_terminal():
        output.write(f"{len(copied)} demo files are in {folder}.")
        return diagnostics.refuse(_NOWHERE)
    from digestplan.app.main import open_path

    open_path(str(folder / _DEMO), chosen.register, chosen.draws)
    return None


def _is_terminal() -> bool:
    return sys.stdin.isatty() and sys.stdout.isatty()
