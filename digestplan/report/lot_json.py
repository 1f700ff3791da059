"""Lots of the register as JSON documents: plain numbers in the unit that the key names."""

from collections.abc import Sequence
from typing import Any

from digestplan.lots.register.body import as_json
from digestplan.lots.register.events import Event
from digestplan.lots.register.stock import LotRecord, LotSummary
from digestplan.report.as_json import FORMAT, clock, number


def summary_document(lot: LotSummary) -> dict[str, Any]:
    """Return what a listing shows of a lot."""
    return {
        "lot": lot.lot,
        "enzyme": lot.enzyme,
        "label_activity": lot.label_activity,
        "form": lot.form,
        "received": clock(lot.received_at),
        "temperature_c": number(lot.temperature - 273.15),
        "place": lot.place,
        "opened": lot.opened,
        "remaining_mass_mg": None
        if lot.remaining_mass is None
        else number(1e3 * lot.remaining_mass),
        "overdrawn_mass_mg": number(1e3 * lot.overdrawn_mass),
        "thaws": lot.thaws,
        "assayed": clock(lot.assayed_at),
        "fraction": number(lot.fraction),
        "standard_error": number(lot.standard_error),
        "activity": lot.activity,
        "discarded": clock(lot.discarded_at),
        "used_after_discard": lot.used_after_discard,
        "expiry": None if lot.expiry is None else lot.expiry.isoformat(),
    }


def list_document(lots: Sequence[LotSummary], name: str) -> dict[str, Any]:
    """Return a listing of lots."""
    return {
        "digestplan": FORMAT,
        "register": name,
        "lots": [summary_document(lot) for lot in lots],
    }


def show_document(record: LotRecord, written: Sequence[Event]) -> dict[str, Any]:
    """Return a lot with what counts of it, and with all entries as they were written."""
    return {
        "digestplan": FORMAT,
        **summary_document(record.summary),
        "conversions": list(record.received.conversions),
        "events": [_event(event) for event in record.events],
        "written": [_event(event) for event in written],
    }


def recorded_document(event: Event, summary: LotSummary | None) -> dict[str, Any]:
    """Return an entry as the register took it, and the lot after it."""
    return {
        "digestplan": FORMAT,
        "recorded": _event(event),
        "lot": None if summary is None else summary_document(summary),
    }


def _event(event: Event) -> dict[str, Any]:
    return {key: value for key, value in as_json(event).items() if key != "digestplan"}
