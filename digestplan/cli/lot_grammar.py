"""Grammar of ``digestplan lot …`` and ``digestplan assay``; it loads nothing of the program."""

import argparse
from collections.abc import Sequence
from typing import TypeAlias

Commands: TypeAlias = "argparse._SubParsersAction[argparse.ArgumentParser]"  # noqa: SLF001
Option = tuple[str, str, str]  # name, what stands for its value, what it is

_WHEN: Option = ("--at", "DATE", "when: 2026-03-01 or 2026-03-01T09:30 (default: now)")
_TEMPERATURE: Option = ("--temperature", "T", 'of the place, such as "-20 ± 2 degC"')
_PLACE: Option = ("--place", "NAME", "which freezer or shelf")
_FORM: Option = ("--form", "FORM", "dry, solution or glycerol")
_NOTED: tuple[Option, ...] = (
    _WHEN,
    ("--who", "NAME", "who did it (default: your login name)"),
    ("--note", "TEXT", "what else is to be said"),
    ("--instead-of", "ENTRY", "read this in place of an earlier entry, named by its id"),
)
_ASSAY: tuple[Option, ...] = (
    ("--assay", "KEY", "the library's assay, such as falgpa"),
    ("--unit", "UNIT", "the unit wanted, where no assay is named"),
    ("--extinction", "E", 'of the change, such as "6.22 ± 0.06 1/(mM cm)"'),
    ("--direction", "WAY", "rising or falling"),
    ("--total-volume", "V", 'of the assay mixture, such as "1 mL"'),
    ("--sample-volume", "V", 'of diluted enzyme in it, such as "20 ± 0.3 uL"'),
    ("--path", "L", 'of the light (default "1 cm")'),
    ("--dilution", "N", "how many times the stock was diluted"),
    ("--concentration", "C", 'of enzyme in the stock, such as "2 mg/mL"'),
    ("--time", "T", "how long an end-point assay ran"),
    ("--label", "A", 'on the bottle, such as "280 CDU/mg"'),
)

_RECORDING: tuple[tuple[str, str, str, tuple[Option, ...]], ...] = (
    (
        "add",
        "received",
        "enter a lot: it came in, or was found",
        (
            ("--enzyme", "KEY", "the library's key, such as trypsin"),
            ("--label", "A", 'what the label says, such as "280 CDU/mg"'),
            _FORM,
            ("--mass", "M", 'what the bottle holds, such as "100 mg"'),
            _TEMPERATURE,
            _PLACE,
            ("--expiry", "DATE", "the supplier's date"),
        ),
    ),
    ("thaw", "thawed", "it was thawed", (("--times", "N", "how often (default 1)"),)),
    ("open", "opened", "the seal was broken", ()),
    ("discard", "discarded", "it was thrown away", ()),
)


def add_lot(commands: Commands, shared: argparse.ArgumentParser) -> None:
    """
    Add ``lot`` with its own commands.

    Parameters
    ----------
    commands
        Of the program.
    shared
        The options that all commands take.
    """
    does = "the lot register: what came in, how it was kept, what is left of it"
    lot = commands.add_parser("lot", help=does, description=does, allow_abbrev=False)
    own = lot.add_subparsers(title="lot commands", metavar="COMMAND", required=True)
    for name, kind, told, options in _RECORDING:
        _recording(own, shared, name, kind, told, options)
    _add_flags(own)
    _store(own, shared)
    _masses(own, shared)
    _assay_of_lot(own, shared)
    _correct(own, shared)
    _answers(own, shared)
    _files(own, shared)


def add_assay(commands: Commands, shared: argparse.ArgumentParser) -> None:
    """
    Add ``assay``.

    Parameters
    ----------
    commands
        Of the program.
    shared
        The options that all commands take.
    """
    command = _command(
        commands, shared, "assay", "assay", "run", "activity from absorbance readings", _ASSAY
    )
    command.add_argument("readings", metavar="READINGS.csv", help="time and reading, or end-points")
    command.add_argument("--lot", metavar="LOT", help="a lot of the register, for its label")
    _conversion(command)


# -- the parts ------------------------------------------------------------------------------


def _command(
    commands: Commands,
    shared: argparse.ArgumentParser,
    name: str,
    module: str,
    function: str,
    does: str,
    options: Sequence[Option] = (),
) -> argparse.ArgumentParser:
    command: argparse.ArgumentParser = commands.add_parser(
        name, help=does, description=does, parents=[shared], allow_abbrev=False
    )
    for option, stands_for, told in options:
        command.add_argument(option, metavar=stands_for, help=told)
    command.set_defaults(module=module, function=function)
    return command


def _recording(
    own: Commands,
    shared: argparse.ArgumentParser,
    name: str,
    kind: str,
    does: str,
    options: Sequence[Option],
) -> argparse.ArgumentParser:
    command = _command(own, shared, name, "lot_entries", "record", does, (*options, *_NOTED))
    command.add_argument("lot", metavar="LOT", help="its name, as it is written on the bottle")
    command.set_defaults(kind=kind)
    return command


def _conversion(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--conversion",
        action="append",
        metavar="FACTOR",
        help='from the certificate, such as "1 CDU = 0.011 FALGPA_U"; may be repeated',
    )


def _add_flags(own: Commands) -> None:
    received = own.choices["add"]
    _conversion(received)
    received.add_argument("--opened", action="store_true", help="the bottle was open already")


def _store(own: Commands, shared: argparse.ArgumentParser) -> None:
    options = (
        _TEMPERATURE,
        _PLACE,
        _FORM,
        ("--for", "TIME", 'only for so long, then back: a journey, a power cut, such as "6 h"'),
    )
    store = _recording(own, shared, "store", "moved", "it is kept elsewhere from now on", options)
    sealed = store.add_mutually_exclusive_group()
    sealed.add_argument("--sealed", action="store_true", help="it was sealed again")
    sealed.add_argument("--opened", action="store_true", help="it is open from now on")


def _masses(own: Commands, shared: argparse.ArgumentParser) -> None:
    use = _recording(own, shared, "use", "used", "a mass was weighed out of it", ())
    use.add_argument("mass", metavar="MASS", help='such as "8 mg"')
    use.add_argument("--plan", metavar="PLAN", help="for which plan")
    weigh = _recording(
        own, shared, "weigh", "weighed", "what is left in the bottle was weighed", ()
    )
    weigh.add_argument("mass", metavar="MASS", help='such as "42 mg"')


def _assay_of_lot(own: Commands, shared: argparse.ArgumentParser) -> None:
    assay = _recording(
        own, shared, "assay", "assayed", "enter what an assay of it said", _ASSAY[:-1]
    )
    assay.add_argument(
        "readings", nargs="?", metavar="READINGS.csv", help="readings, to be worked out and entered"
    )
    _conversion(assay)
    result = assay.add_mutually_exclusive_group()
    result.add_argument("--fraction", metavar="F", help='of the label: "0.82 ± 0.04"')
    result.add_argument("--activity", metavar="A", help='as found: "231 ± 9 CDU/mg"')
    assay.set_defaults(function="record_assay")


def _correct(own: Commands, shared: argparse.ArgumentParser) -> None:
    does = "take an entry back, or give it another time; nothing is erased"
    correct = _command(own, shared, "correct", "lot_entries", "correct", does, _NOTED[1:3])
    correct.add_argument("lot", metavar="LOT", help="its name")
    correct.add_argument("entry", metavar="ENTRY", help="the id, as `lot show` tells it")
    correct.add_argument("--to", metavar="DATE", help="when it really happened")


def _answers(own: Commands, shared: argparse.ArgumentParser) -> None:
    module = "lot_answers"
    at: Option = ("--at", "DATE", "as things are then (default: now)")
    listing = _command(own, shared, "list", module, "list_lots", "all lots at a glance", (at,))
    listing.add_argument("--all", action="store_true", help="those that were discarded as well")
    show = _command(own, shared, "show", module, "show", "a lot with all its entries", (at,))
    show.add_argument("lot", metavar="LOT", help="its name")
    check = _command(
        own,
        shared,
        "check",
        module,
        "check",
        "is it still good enough, and how much more to weigh in",
        (
            ("--plan", "PLAN", "the plan that it is to serve"),
            ("--needed", "F", "the fraction of the label that is needed, without a plan"),
            ("--stability", "FILE.csv", "the lot's own ageing: time, temperature, activity"),
            ("--at", "DATE", "as things are then (default: the plan's start, or now)"),
        ),
    )
    check.add_argument("lot", metavar="LOT", help="its name")
    stability = _command(
        own,
        shared,
        "stability",
        module,
        "stability",
        "how an enzyme ages, from activity against time",
        (
            ("--temperature", "T", "at which the shelf life is asked for (default: as measured)"),
            ("--limit", "SHARE", 'what must be left (default "90 %%")'),
        ),
    )
    stability.add_argument("data", metavar="FILE.csv", help="time, temperature, activity, batch")


def _files(own: Commands, shared: argparse.ArgumentParser) -> None:
    module = "lot_files"
    for name, operand, told in (
        ("export", "FILE", "write the whole register as JSON lines"),
        ("import", "FILE", "read JSON lines into the register"),
        ("backup", "FILE", "copy the register while it is in use"),
    ):
        command = _command(own, shared, name, module, f"{name}_register", told)
        command.add_argument("file", metavar=operand, help="JSON lines" if name != "backup" else "")
    _command(own, shared, "verify", module, "verify", "check that every entry is as it was written")
