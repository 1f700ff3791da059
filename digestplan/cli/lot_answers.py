"""``digestplan lot list|show|check|stability``: questions to the register."""

import argparse
from typing import TYPE_CHECKING

from digestplan.cli import diagnostics, output

if TYPE_CHECKING:
    from collections.abc import Mapping
    from datetime import datetime

    from digestplan.lots.register.stock import LotRecord
    from digestplan.lots.storage import Form, StorageKinetics
    from digestplan.plan.model import Plan


def list_lots(chosen: argparse.Namespace) -> None:
    """List the lots of the register."""
    from digestplan.lots.entry import moment
    from digestplan.lots.register import open_register

    at = None if chosen.at is None else moment(chosen.at)
    with open_register(chosen.register, create=False) as register:
        name = register.name
        lots = [x for x in register.lots(at) if chosen.all or x.discarded_at is None]
    if chosen.json:
        from digestplan.report.as_json import dumps
        from digestplan.report.lot_json import list_document

        output.write(dumps(list_document(lots, name)))
        return
    from digestplan.report.lot_text import list_text

    output.write(list_text(lots, name))


def show(chosen: argparse.Namespace) -> None:
    """Show a lot with all its entries."""
    from digestplan.lots.entry import moment
    from digestplan.lots.register import open_register

    at = None if chosen.at is None else moment(chosen.at)
    with open_register(chosen.register, create=False) as register:
        record = register.lot(chosen.lot, at)
        written = register.events(chosen.lot)
    if chosen.json:
        from digestplan.report.as_json import dumps
        from digestplan.report.lot_json import show_document

        output.write(dumps(show_document(record, written)))
        return
    from digestplan.report.lot_text import show_text

    output.write(show_text(record, sum(event.kind == "corrected" for event in written)))


def check(chosen: argparse.Namespace) -> None:
    """Say what is left of a lot, whether it is enough, and how much more to weigh in."""
    from digestplan.forecast.from_register import of_lot
    from digestplan.forecast.lot_for_plan import check_for_plan
    from digestplan.forecast.lot_words import contradiction
    from digestplan.lots.register import open_register
    from digestplan.report.lot_check import check_document, check_text

    needed = _fraction(chosen.needed, "needed")
    plan = _plan(chosen)
    with open_register(chosen.register, create=False) as register:
        at = _moment(chosen, plan)
        record = register.lot(chosen.lot, at)
    checked = check_for_plan(
        record,
        at,
        None if plan is None else of_lot(plan, record),
        needed_fraction=needed,
        kinetics=_own_kinetics(chosen.stability, record),
        n_draws=chosen.draws,
        seed=chosen.seed,
    )
    if chosen.json:
        from digestplan.report.as_json import dumps

        output.write(dumps(check_document(checked)))
        if checked.posterior.contradicted:  # not to be missed by whoever reads the numbers alone
            diagnostics.complain(
                f"{record.received.lot}: {contradiction(record, checked.posterior)}"
            )
        return
    output.write(check_text(checked))


def stability(chosen: argparse.Namespace) -> None:
    """Say how an enzyme ages, from activity against time."""
    from digestplan.lots.readings import read_stability
    from digestplan.lots.stability import stability_of
    from digestplan.problems import InputError, Problem
    from digestplan.quantities import QuantityError, parse_quantity

    temperature = None
    if chosen.temperature is not None:
        try:
            temperature = parse_quantity(chosen.temperature, "temperature").value
        except QuantityError as error:
            raise InputError(Problem("temperature", str(error))) from None
    limit = _fraction(chosen.limit, "limit")
    found = stability_of(read_stability(chosen.data), temperature, 0.9 if limit is None else limit)
    if chosen.json:
        from digestplan.report.as_json import dumps
        from digestplan.report.stability_text import stability_document

        output.write(dumps(stability_document(found)))
        return
    from digestplan.report.stability_text import stability_text

    output.write(stability_text(found))


# -- the parts ------------------------------------------------------------------------------


def _plan(chosen: argparse.Namespace) -> "Plan | None":
    if chosen.plan is None:
        return None
    from digestplan.plan.read import read_plan
    from digestplan.problems import InputError, Problem

    if chosen.needed is not None:
        raise InputError(Problem("needed", "the plan says what is needed: give one of the two"))
    return read_plan(chosen.plan)


def _moment(chosen: argparse.Namespace, plan: "Plan | None") -> "datetime":
    """When to check: as asked, or at the plan's start if that is to come, or now."""
    from digestplan.lots.entry import moment

    at = moment(chosen.at)
    if chosen.at is None and plan is not None and plan.start is not None:
        return max(at, plan.start)
    return at


def _fraction(text: str | None, place: str) -> float | None:
    if text is None:
        return None
    from digestplan.problems import InputError, Problem
    from digestplan.quantities import QuantityError, parse_quantity

    try:
        value = parse_quantity(text, "active_fraction").value
    except QuantityError as error:
        raise InputError(Problem(place, str(error))) from None
    if not value > 0:
        raise InputError(Problem(place, f'"{text}": a fraction above zero is wanted'))
    return value


def _own_kinetics(path: str | None, record: "LotRecord") -> "Mapping[Form, StorageKinetics] | None":
    """The library's kinetics, with that of the lot's form from its own data."""
    if path is None:
        return None
    from digestplan.lots.from_library import kinetics_of
    from digestplan.lots.readings import read_stability
    from digestplan.lots.stability import own_kinetics

    return own_kinetics(
        read_stability(path), record.summary.form, kinetics_of(record.received.enzyme), path
    )
