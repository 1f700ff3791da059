"""``digestplan lot export|import|backup|verify``: the register as a whole."""

import argparse
from typing import Any

from digestplan.cli import diagnostics, output


def export_register(chosen: argparse.Namespace) -> None:
    """Write the whole register as JSON lines."""
    from digestplan.lots.register import open_register
    from digestplan.lots.register.transfer import export_to

    with open_register(chosen.register, create=False) as register:
        count = export_to(register, chosen.file)
    _tell(chosen, {"file": chosen.file, "events": count}, f"{count} entries in {chosen.file}.")


def import_register(chosen: argparse.Namespace) -> None:
    """Read JSON lines into the register: all of them, or none."""
    from digestplan.lots.register import open_register
    from digestplan.lots.register.transfer import import_from

    with open_register(chosen.register) as register:
        taken, name = import_from(register, chosen.file), register.name
    known = f"; {taken.n_known} were there already" if taken.n_known else ""
    told = f"{taken.n_new} new entries in {name}{known}."
    _tell(chosen, {"register": name, "new": taken.n_new, "known": taken.n_known}, told)


def backup_register(chosen: argparse.Namespace) -> None:
    """Copy the register while it is in use."""
    from digestplan.lots.register import open_register
    from digestplan.lots.register.transfer import backup

    with open_register(chosen.register, create=False) as register:
        count = backup(register, chosen.file)
    _tell(chosen, {"file": chosen.file, "events": count}, f"{count} entries in {chosen.file}.")


def verify(chosen: argparse.Namespace) -> int:
    """Check that every entry is as it was written."""
    from digestplan.lots.register import open_register

    with open_register(chosen.register, create=False) as register:
        broken, head, name = register.verify(), register.head(), register.name
    document = {"register": name, "events": head.number, "hash": head.hash}
    if broken is None:
        told = f"All {head.number} entries of {name} are as they were written.\nHead: {head.hash}"
        _tell(chosen, {**document, "sound": True, "broken_row": None}, told)
        return diagnostics.DONE
    if chosen.json:
        _tell(chosen, {**document, "sound": False, "broken_row": broken.number}, "")
    diagnostics.complain(f"{name}: row {broken.number}: {broken.why}; go back to a backup")
    return diagnostics.WRONG_INPUT


def _tell(chosen: argparse.Namespace, document: dict[str, Any], text: str) -> None:
    if chosen.json:
        from digestplan.report.as_json import dumps

        output.write(dumps({"digestplan": 1, **document}))
        return
    output.write(text)
