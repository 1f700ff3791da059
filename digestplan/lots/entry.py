"""Entries of the register as people write them: texts with units in, checked events out."""

import dataclasses
import math
from collections.abc import Callable, Mapping, Sequence
from datetime import UTC, date, datetime, timedelta
from typing import Any

from digestplan import library
from digestplan.lots.register.events import (
    Assayed,
    Corrected,
    Discarded,
    Event,
    Moved,
    Opened,
    Received,
    Thawed,
    Transported,
    Used,
    Weighed,
)
from digestplan.lots.register.fields import FORMS
from digestplan.problems import InputError, Problem, Problems
from digestplan.quantities import (
    Quantity,
    QuantityError,
    parse_conversion,
    parse_quantity,
)

_NOON = 12
_AHEAD = timedelta(days=1)  # how far clocks may be apart before an entry lies in the future

# What may be written of each kind of event beside lot, at, who and note; quantities by their kind.
QUANTITIES: Mapping[str, str] = {
    "temperature": "temperature",
    "mass": "mass",
    "hours": "time",
    "count": "count",
    "fraction": "active_fraction",
}
_KINDS: tuple[type[Event], ...] = (
    *(Received, Moved, Transported, Thawed, Opened),
    *(Assayed, Used, Weighed, Discarded),
)
_EXAMPLES = {"temperature": '"-20 ± 2 degC"', "enzyme": "trypsin", "mass": '"8 mg"'}
BY_KIND: Mapping[str, type[Event]] = {kind.kind: kind for kind in _KINDS}


def entry(kind: str, lot: str, at: datetime, written: Mapping[str, Any]) -> Event:
    """
    Return an event from what was written of it.

    Parameters
    ----------
    kind
        Such as ``received`` or ``used``.
    lot
        The lot's name.
    at
        When it happened (local wall clock).
    written
        Texts by field, such as ``temperature = "-20 ± 2 degC"``, or numbers as the event keeps
        them; a field that is None or empty counts as not written.

    Returns
    -------
    event
        Ready to be appended. An `InputError` tells everything that is wrong with it.
    """
    problems = Problems()
    fields: dict[str, Any] = {}
    told = {name: value for name, value in written.items() if value not in (None, "", ())}
    if at > now() + _AHEAD:
        problems.add("at", f"{at:%Y-%m-%d} is still to come: only what has happened is recorded")
    for name, value in told.items():
        if name in QUANTITIES and isinstance(value, str):
            _add_quantity(fields, name, value, problems)
        else:
            read = _READERS.get(name)
            fields[name] = value if read is None else read(value, problems)
    for name in sorted(_needed(kind) - told.keys()):
        example = _EXAMPLES.get(name)
        problems.add(name, f"this is missing, such as {example}" if example else "this is missing")
    problems.raise_if_any()
    return BY_KIND[kind](lot=lot, at=at, **fields)


def replaces(corrects: str, event: Event) -> Corrected:
    """Return the correction that has an earlier entry read as a new one."""
    return Corrected(
        lot=event.lot, at=event.at, who=event.who, corrects=corrects, replacement=event
    )


def entry_named(events: tuple[Event, ...], text: str) -> Event:
    """
    Return the entry whose id begins with a text.

    Parameters
    ----------
    events
        Of one lot.
    text
        The first letters of an id, as a listing shows them.

    Returns
    -------
    event
        An `InputError` where none or several begin so.
    """
    found = {e.id: e for e in events if text and e.id.startswith(text.strip())}
    if len(found) == 1:
        return next(iter(found.values()))
    many = "several entries begin so: write more of it" if found else "no entry has this id"
    raise InputError(Problem("entry", f'"{text:.40}": {many}'))


def moment(text: str | None, place: str = "at") -> datetime:
    """
    Return a local wall-clock time.

    Parameters
    ----------
    text
        ISO 8601, with or without a time; a day alone stands for its noon. None for now.
    place
        What messages call it.

    Returns
    -------
    moment
        Without a zone.
    """
    if text is None:
        return now()
    try:
        found = datetime.fromisoformat(text.strip())
    except ValueError:
        message = f'"{text:.40}" is no date; write 2026-03-01 or 2026-03-01T09:30'
        raise InputError(Problem(place, message)) from None
    if found.tzinfo is not None:
        message = "local time without a zone is wanted, such as 2026-03-01T09:30"
        raise InputError(Problem(place, message))
    if len(text.strip()) <= len("2026-03-01"):
        return found.replace(hour=_NOON)
    return found


def now() -> datetime:
    """Return the local wall clock, to the second."""
    return datetime.now(UTC).astimezone().replace(tzinfo=None, microsecond=0)


def _needed(kind: str) -> set[str]:
    """Names of the fields that an event of a kind cannot do without."""
    without_default = {
        f.name
        for f in dataclasses.fields(BY_KIND[kind])
        if f.default is dataclasses.MISSING and f.default_factory is dataclasses.MISSING
    }
    return without_default - {"lot", "at"}


# -- one field ------------------------------------------------------------------------------


def _add_quantity(fields: dict[str, Any], name: str, text: str, problems: Problems) -> None:
    try:
        quantity = parse_quantity(text, QUANTITIES[name])
    except QuantityError as error:
        problems.add(name, str(error))
        return
    if name == "count":
        fields[name] = round(quantity.value)
        return
    fields[name] = quantity.value
    if name == "temperature":
        fields["temperature_sd"] = _sd(name, quantity, problems)
    elif name == "fraction":
        fields["standard_error"] = _fraction_error(quantity, fields, problems)
    elif quantity.distribution != "exact":
        problems.add(name, f'"{quantity.text}": the register keeps no spread of this')


def _sd(name: str, quantity: Quantity, problems: Problems) -> float:
    if quantity.distribution == "lognormal":
        problems.add(name, f'"{quantity.text}": write the spread with ±')
    return quantity.spread


def _fraction_error(quantity: Quantity, fields: dict[str, Any], problems: Problems) -> float | None:
    if quantity.distribution == "exact":
        message = f'"{quantity.text}" has no uncertainty: write it as "0.82 ± 0.04"'
        problems.add("fraction", message)
        return None
    if quantity.distribution == "lognormal":
        fields["scale"] = "log"
        return quantity.value * math.log(quantity.spread)
    return quantity.spread


def _enzyme(key: str, problems: Problems) -> str:
    if key not in library.keys("enzyme"):
        near = library.near(key, "enzyme")
        hint = f"; is {near[0]} meant?" if near else f"; it has {', '.join(library.keys('enzyme'))}"
        problems.add("enzyme", f'the library has no "{key:.40}"{hint}')
    return key


def _label(text: str, problems: Problems) -> str:
    try:
        parse_quantity(text, "activity")
    except QuantityError as error:
        problems.add("label_activity", str(error))
    return text


def _activity(text: str, problems: Problems) -> str:
    try:
        exact = parse_quantity(text, "activity").distribution == "exact"
    except QuantityError as error:
        problems.add("activity", str(error))
    else:
        if exact:
            message = f'"{text}" has no uncertainty: write it as "231 ± 9 CDU/mg"'
            problems.add("activity", message)
    return text


def _conversions(texts: Sequence[str], problems: Problems) -> tuple[str, ...]:
    for text in texts:
        try:
            parse_conversion(text)
        except QuantityError as error:
            problems.add("conversion", str(error))
    return tuple(texts)


def _form(text: str, problems: Problems) -> str:
    if text not in FORMS:
        problems.add("form", f'"{text:.40}": one of {", ".join(FORMS)} is wanted')
    return text


def _day(text: str, problems: Problems) -> date | None:
    try:
        return date.fromisoformat(text.strip())
    except ValueError:
        problems.add("expiry", f'"{text:.40}" is no date; write 2027-06-30')
        return None


_READERS: Mapping[str, Callable[[Any, Problems], Any]] = {
    "enzyme": _enzyme,
    "label_activity": _label,
    "activity": _activity,
    "conversions": _conversions,
    "form": _form,
    "expiry": _day,
}
