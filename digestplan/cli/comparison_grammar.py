"""Grammar of ``temperatures``, ``suggest`` and ``explain``; it loads nothing of the program."""

import argparse

from digestplan.cli.lot_grammar import Commands

_COLDEST, _WARMEST = -200.0, 150.0  # [°C] as in a plan


def add_comparisons(commands: Commands, shared: argparse.ArgumentParser) -> None:
    """
    Add the commands that vary a plan.

    Parameters
    ----------
    commands
        The program's commands.
    shared
        Options that all commands take.
    """
    does = "the same plan at each temperature, as a table"
    temperatures = _add(commands, shared, "temperatures", does)
    temperatures.add_argument(
        "--at",
        type=celsius,
        metavar="T,T,…",
        help="temperatures in °C (default 4,20,30,37,45,56)",
    )


def _add(
    commands: Commands, shared: argparse.ArgumentParser, name: str, does: str
) -> argparse.ArgumentParser:
    command = commands.add_parser(
        name, help=does, description=does, parents=[shared], allow_abbrev=False
    )
    command.add_argument("plan", metavar="PLAN", help="the plan file (TOML)")
    command.set_defaults(module=name, function="run")
    return command


def celsius(text: str) -> tuple[float, ...]:
    """
    Read the temperatures of ``--at``.

    Parameters
    ----------
    text
        Numbers in degrees Celsius, divided by commas; a unit (``C``, ``degC``) may follow each.

    Returns
    -------
    temperatures
        In the order in which they stand there. [°C]
    """
    found = tuple(_one(word.strip()) for word in text.split(",") if word.strip())
    if not found:
        raise argparse.ArgumentTypeError("no temperature stands there; write for instance 4,20,37")
    return found


def _one(word: str) -> float:
    plain = word.removesuffix("C").removesuffix("deg").removesuffix("°").strip()
    try:
        value = float(plain)
    except ValueError:
        message = f'"{word}" is no temperature; write for instance 4,20,37'
        raise argparse.ArgumentTypeError(message) from None
    if not _COLDEST <= value <= _WARMEST:
        message = f"{word} is outside {_COLDEST:g} °C to {_WARMEST:g} °C"
        raise argparse.ArgumentTypeError(message)
    return value
