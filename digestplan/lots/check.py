"""A lot of the register, checked: from its events to what is left of it now."""

from collections.abc import Mapping, Sequence
from datetime import datetime, timedelta
from typing import TYPE_CHECKING

from digestplan.lots.assay import label_in_unit
from digestplan.lots.grid import AssayedFraction
from digestplan.lots.history import History, Opening, Stretch, Thaw
from digestplan.lots.posterior import LotPosterior, posterior
from digestplan.lots.storage import Form, StorageKinetics
from digestplan.lots.uncertainty import Measured, propagate
from digestplan.problems import InputError, Problem
from digestplan.quantities import Quantity, QuantityError, parse_conversion, parse_quantity

if TYPE_CHECKING:
    from digestplan.lots.register.events import Assayed
    from digestplan.lots.register.stock import LotRecord
    from digestplan.lots.register.timeline import StorageStretch

_OPENS = frozenset({"opened", "used", "assayed"})


def check_lot(
    record: "LotRecord",
    kinetics: Mapping[Form, StorageKinetics],
    now: datetime,
    *,
    log_label_sd: float = 0.0,
    planned: Stretch | None = None,
) -> LotPosterior:
    """
    Bring a lot's ledger together with the storage kinetics of its enzyme.

    Parameters
    ----------
    record
        The lot, from the register.
    kinetics
        How each form of the enzyme dies.
    now
        Local wall clock.
    log_label_sd
        How far the activity at receipt may lie from the label, as a logarithm. [1]
    planned
        Storage from now on; as it is kept now if None.

    Returns
    -------
    posterior
        Times in it count from `began`. [h]
    """
    history = history_of(record, kinetics, now, log_label_sd=log_label_sd)
    hours = (now - began(record)) / timedelta(hours=1)
    assays = tuple(a for a in assayed_fractions(record) if a.at <= hours)
    return posterior(history, assays, hours, planned=planned)


def began(record: "LotRecord") -> datetime:
    """When the lot's first stretch of storage, or its way here, began (local wall clock)."""
    return min([record.received.at, *(e.at for e in record.excursions)])


def history_of(
    record: "LotRecord",
    kinetics: Mapping[Form, StorageKinetics],
    until: datetime,
    *,
    log_label_sd: float = 0.0,
) -> History:
    """
    Return what a lot has been through, in hours since it began.

    Parameters
    ----------
    record
        The lot, from the register.
    kinetics
        How each form of the enzyme dies.
    until
        Local wall clock.
    log_label_sd
        How far the activity at receipt may lie from the label, as a logarithm. [1]

    Returns
    -------
    history
        Stretches, thaws and openings: the bottle is opened when it is said to be, and on every
        day on which something was taken out of it.
    """
    start = began(record)

    def hours(at: datetime) -> float:
        return (at - start) / timedelta(hours=1)

    stretches = record.stretches(until)
    return History(
        tuple(
            Stretch(
                hours(s.start), s.hours, s.temperature, s.temperature_sd, s.form, s.opened, s.place
            )
            for s in stretches
        ),
        tuple(Thaw(hours(t.at), t.form, t.count) for t in record.thaws if t.at <= until),
        kinetics,
        log_label_sd=log_label_sd,
        openings=tuple(
            Opening(hours(at), _form_at(stretches, at)) for at in _opened(record) if at <= until
        ),
    )


def _opened(record: "LotRecord") -> list[datetime]:
    """When the bottle was opened: once a day at most."""
    days = {record.received.at.date(): record.received.at} if record.received.opened else {}
    for event in record.events:
        if event.kind in _OPENS:
            days.setdefault(event.at.date(), event.at)
    return list(days.values())


def _form_at(stretches: "Sequence[StorageStretch]", at: datetime) -> Form:
    """Form of the enzyme when the bottle was opened, before anything else was done with it."""
    before = [s.form for s in stretches if s.start < at]
    return before[-1] if before else stretches[0].form


def assayed_fractions(record: "LotRecord") -> tuple[AssayedFraction, ...]:
    """
    Return what the assays of a lot say of its label.

    Parameters
    ----------
    record
        The lot, from the register.

    Returns
    -------
    assays
        One for each; an activity is divided by the number on the label, in the unit of the assay
        if the certificate leads there.
    """
    start = began(record)
    assays = []
    for event in record.assays:
        at = max((event.at - start) / timedelta(hours=1), 0.0)
        if event.fraction is not None and event.standard_error is not None:
            freedom = event.degrees_of_freedom
            assays.append(
                AssayedFraction(
                    at,
                    event.fraction,
                    event.standard_error,
                    float("inf") if freedom is None else freedom,
                    event.scale,
                )
            )
        else:
            assays.append(_of_activity(event, record, at))
    return tuple(assays)


def _of_activity(event: "Assayed", record: "LotRecord", at: float) -> AssayedFraction:
    found = _activity(event.activity or "", "assayed.activity")
    label_text = record.summary.label_activity
    if label_text is None:
        message = "the lot has no label activity to compare an assay with"
        raise InputError(Problem("label_activity", message))
    if found.distribution == "exact":
        message = f'"{event.activity}" has no uncertainty: write it as "231 ± 9 CDU/mg"'
        raise InputError(Problem("assayed.activity", message))
    label = _activity(label_text, "label_activity")
    conversions = {
        (one, other): factor
        for one, other, factor in map(parse_conversion, record.received.conversions)
    }
    nominal = Measured(label.value)  # what is left is told as a multiple of the label's number
    comparable = label_in_unit(nominal, label.activity or "", found.activity or "", conversions)
    fraction = propagate(
        lambda v: v["found"] / v["label"], {"found": Measured.of(found), "label": comparable}
    )
    return AssayedFraction(
        at,
        fraction.value,
        fraction.uncertainty,
        scale="log" if found.distribution == "lognormal" else "linear",
    )


def _activity(text: str, place: str) -> Quantity:
    try:
        return parse_quantity(text, "activity")
    except QuantityError as error:
        raise InputError(Problem(place, str(error))) from error
