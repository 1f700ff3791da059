"""The command line: its grammar, and which module carries out what."""

import argparse
import sys
from collections.abc import Sequence
from functools import partial
from importlib import import_module

from digestplan import __version__
from digestplan.cli import diagnostics, output
from digestplan.cli.comparison_grammar import add_comparisons
from digestplan.cli.lot_grammar import add_assay, add_lot

_MOST_DRAWS = 1_000_000


def main(arguments: Sequence[str] | None = None) -> int:
    """
    Run the command line.

    Parameters
    ----------
    arguments
        Words after the program's name; those of the process where None.

    Returns
    -------
    status
        0 done; 1 the input is wrong; 2 the command line is wrong; 3 the program failed.
    """
    output.prepare()
    chosen = parser().parse_args(_joined(sys.argv[1:] if arguments is None else arguments))
    command = getattr(import_module(f"digestplan.cli.{chosen.module}"), chosen.function)
    return diagnostics.run(partial(command, chosen))


def _joined(arguments: Sequence[str]) -> list[str]:
    """Join an option with a value that begins with a minus, such as ``--temperature -20C``."""
    joined: list[str] = []
    for word in arguments:
        option = joined[-1] if joined else ""
        if (
            option.startswith("--")
            and "=" not in option
            and word[:1] == "-"
            and word[1:2].isdigit()
        ):
            joined[-1] = f"{option}={word}"
        else:
            joined.append(word)
    return joined


def parser() -> argparse.ArgumentParser:
    """Return the grammar of the command line; it loads nothing of the program."""
    top = argparse.ArgumentParser(
        prog="digestplan",
        description="Plan the enzymatic digestion of a small piece of tissue, and know when it "
        "is ready.",
        allow_abbrev=False,
    )
    top.add_argument("--version", action="version", version=f"digestplan {__version__}")
    top.set_defaults(module="app", function="bare", register=None, draws=2000)
    commands = top.add_subparsers(title="commands", metavar="COMMAND")
    shared = shared_options()
    _add_app(commands, shared)
    _add(commands, shared, "forecast", "forecast", "one plan's forecast, as a short report", "plan")
    add_comparisons(commands, shared)
    does = "the bench sheet (.pdf, .html or .md), or the times as a calendar (.ics)"
    sheet = _add(commands, shared, "sheet", "sheet", does, "plan")
    sheet.add_argument("-o", "--output", metavar="FILE", help="where it goes; its ending says how")
    sheet.add_argument("--paper", choices=["a4", "letter"], help="of a PDF (default a4)")
    _add(commands, shared, "library", "library", "what the library knows, with its sources", "key")
    add_lot(commands, shared)
    add_assay(commands, shared)
    return top


def shared_options() -> argparse.ArgumentParser:
    """Return the options that all commands take."""
    shared = argparse.ArgumentParser(add_help=False, allow_abbrev=False)
    shared.add_argument("--json", action="store_true", help="one JSON document on standard output")
    shared.add_argument(
        "--draws", type=_count, default=2000, metavar="N", help="how many draws (default 2000)"
    )
    shared.add_argument(
        "--seed", type=_seed, default=1, metavar="N", help="same seed, same numbers (default 1)"
    )
    shared.add_argument(
        "--register", metavar="PATH-OR-URL", help="the lot register (default: the user's own)"
    )
    return shared


def _add_app(
    commands: "argparse._SubParsersAction[argparse.ArgumentParser]",
    shared: argparse.ArgumentParser,
) -> None:
    opened = _add(commands, shared, "open", "app", "open the terminal app on a plan", "plan")
    opened.set_defaults(function="open_plan")
    does = "copy the demo plans to a folder, and open the app on one"
    demo = _add(commands, shared, "demo", "app", does)
    demo.add_argument("dir", metavar="DIR", nargs="?", help="where to (default: digestplan-demo)")
    demo.set_defaults(function="demo")


def _add(
    commands: "argparse._SubParsersAction[argparse.ArgumentParser]",
    shared: argparse.ArgumentParser,
    name: str,
    module: str,
    does: str,
    *operands: str,
) -> argparse.ArgumentParser:
    command = commands.add_parser(
        name, help=does, description=does, parents=[shared], allow_abbrev=False
    )
    for operand in operands:
        if operand == "plan":
            command.add_argument("plan", metavar="PLAN", help="the plan file (TOML)")
        else:
            command.add_argument(operand, metavar=operand.upper(), nargs="?", help="an entry's key")
    command.set_defaults(module=module, function="run")
    return command


def _count(text: str) -> int:
    value = int(text)
    if not 1 <= value <= _MOST_DRAWS:
        raise argparse.ArgumentTypeError(f"a number from 1 to {_MOST_DRAWS} is wanted")
    return value


def _seed(text: str) -> int:
    value = int(text)
    if value < 0:
        raise argparse.ArgumentTypeError("a seed is 0 or more")
    return value
