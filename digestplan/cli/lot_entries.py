"""``digestplan lot add|store|thaw|open|use|weigh|discard|assay|correct``: entries go in."""

import argparse
from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from digestplan.cli import output

if TYPE_CHECKING:
    from digestplan.lots.register import Register
    from digestplan.lots.register.events import Event

# Which option of the command line writes which field of an event.
_FIELDS = {
    "label": "label_activity",
    "conversion": "conversions",
    "times": "count",
    "for": "hours",
}
_OTHER = frozenset(
    {"json", "draws", "seed", "register", "module", "function", "kind", "lot", "at"}
    | {"instead_of", "sealed"}
)


def record(chosen: argparse.Namespace) -> None:
    """Enter what happened to a lot."""
    written = {_FIELDS.get(k, k): v for k, v in vars(chosen).items() if k not in _OTHER}
    kind = chosen.kind
    if kind == "received":
        written["form"] = written["form"] or "dry"
    elif kind == "moved":
        kind = _moved(chosen, written)
    _enter(chosen, lambda _: (kind, written))


def record_assay(chosen: argparse.Namespace) -> None:
    """Enter what an assay of a lot said: a result, or readings that are worked out first."""
    from digestplan.problems import InputError, Problem

    written = {name: getattr(chosen, name) for name in ("fraction", "activity", "who", "note")}
    if chosen.readings is None:
        if chosen.fraction is None and chosen.activity is None:
            message = "a file of readings, --fraction or --activity is wanted"
            raise InputError(Problem("assay", message))
        _enter(chosen, lambda _: ("assayed", written))
        return
    if chosen.fraction is not None or chosen.activity is not None:
        raise InputError(Problem("assay", "give readings or their result, not both"))
    _enter(chosen, lambda register: ("assayed", {**written, **_worked_out(chosen, register)}))


def correct(chosen: argparse.Namespace) -> None:
    """Take an entry back, or give it another time."""
    from digestplan.lots.entry import entry_named, moment, now, replaces
    from digestplan.lots.register import open_register
    from digestplan.lots.register.events import Corrected

    with open_register(chosen.register, create=False) as register:
        register.lot(chosen.lot)  # says which lots there are, where it is not one of them
        target = entry_named(register.events(chosen.lot), chosen.entry)
        event = Corrected(lot=target.lot, at=now(), corrects=target.id)
        if chosen.to is not None:
            event = replaces(target.id, replace(target, at=moment(chosen.to, "to")))
        about = replace(event, at=now(), who=_who(chosen), note=chosen.note or "")
        _append(chosen, register, about)


# -- the parts ------------------------------------------------------------------------------


def _enter(
    chosen: argparse.Namespace,
    what: Callable[["Register"], tuple[str, Mapping[str, Any]]],
) -> None:
    """Check an entry and write it; only a receipt may start a register."""
    from digestplan.lots.entry import entry, entry_named, moment, replaces
    from digestplan.lots.register import open_register

    at = moment(chosen.at)
    if chosen.kind == "received":  # refused before a register is started for it
        kind, written = what(None)  # type: ignore[arg-type]
        entry(kind, chosen.lot, at, written)
    with open_register(chosen.register, create=chosen.kind == "received") as register:
        kind, written = what(register)
        event = entry(kind, chosen.lot, at, {**written, "who": _who(chosen)})
        if chosen.instead_of is not None:
            target = entry_named(register.events(event.lot), chosen.instead_of)
            event = replaces(target.id, event)
        _append(chosen, register, event)


def _append(chosen: argparse.Namespace, register: "Register", event: "Event") -> None:
    """Write an entry, and say what came of it."""
    from digestplan.problems import InputError

    kept = register.append(event)
    try:
        summary = register.lot(event.lot).summary
    except InputError:  # its receipt was taken back
        summary = None
    if chosen.json:
        from digestplan.report.as_json import dumps
        from digestplan.report.lot_json import recorded_document

        output.write(dumps(recorded_document(kept, summary)))
        return
    from digestplan.report.lot_text import recorded_text

    output.write(recorded_text(kept, summary))


def _moved(chosen: argparse.Namespace, written: dict[str, Any]) -> str:
    """Kind of a change of storage: for good, or an excursion."""
    from digestplan.problems import InputError, Problem

    if getattr(chosen, "for") is None:
        written["opened"] = True if chosen.opened else False if chosen.sealed else None
        del written["hours"]
        return "moved"
    if chosen.form or chosen.place or chosen.opened or chosen.sealed:
        message = "for a time only the temperature is told: it goes back as it was"
        raise InputError(Problem("for", message))
    for name in ("form", "place", "opened"):
        written.pop(name)
    return "transported"


def _worked_out(chosen: argparse.Namespace, register: "Register") -> dict[str, Any]:
    """Fraction of the label, from readings."""
    from digestplan.cli.assay import label_of, written_setup
    from digestplan.lots.assay_file import assay_of
    from digestplan.lots.assay_record import written_result

    record = register.lot(chosen.lot)
    outcome = assay_of(chosen.readings, written_setup(chosen), label_of(record))
    return written_result(outcome, chosen.readings, chosen.note)


def _who(chosen: argparse.Namespace) -> str:
    """Whoever is named, or who is logged in."""
    import getpass

    if chosen.who is not None:
        return str(chosen.who)
    try:
        return getpass.getuser()
    except (KeyError, OSError, ImportError):
        return ""
