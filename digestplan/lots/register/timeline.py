"""How a lot was kept, from its events: stretches of storage, times on the way, thaws."""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import datetime, timedelta
from itertools import pairwise
from typing import TypeVar

from digestplan.lots.register.events import (
    Discarded,
    Event,
    Moved,
    Opened,
    Received,
    Thawed,
    Transported,
)
from digestplan.lots.register.fields import Form

E = TypeVar("E", bound=Event)


@dataclass(frozen=True, slots=True)
class StorageStretch:
    """A time in which a lot was kept in one way (local wall clock, [K]).

    ``place`` is empty on the way, where no other stretch shares the error of its temperature.
    """

    start: datetime
    end: datetime
    temperature: float
    form: Form
    opened: bool
    temperature_sd: float = 0.0
    place: str = ""

    @property
    def hours(self) -> float:
        """How long it lasted [h]."""
        return (self.end - self.start) / timedelta(hours=1)


@dataclass(frozen=True, slots=True)
class Thaw:
    """One thaw or more, in the form that the lot had then."""

    at: datetime
    form: Form
    count: int


def thaws(events: Sequence[Event]) -> tuple[Thaw, ...]:
    """Return a lot's thaws, each in the form of its time."""
    kept = _kept(events)
    return tuple(Thaw(e.at, _kept_at(kept, e.at).form, e.count) for e in _all(events, Thawed))


def stretches(events: Sequence[Event], until: datetime) -> tuple[StorageStretch, ...]:
    """
    Return how a lot was kept.

    Parameters
    ----------
    events
        All that counts of the lot, in the order in which it happened, its receipt among them.
    until
        End of the last stretch, unless the lot was discarded before (local wall clock).

    Returns
    -------
    stretches
        In the order of time, without overlap; an excursion stands in for the storage that it
        interrupts.
    """
    end = min([until, *(e.at for e in _all(events, Discarded))])
    kept, trips = _kept(events), _all(events, Transported)
    changes = {k.start for k in kept} | {t.at for t in trips} | {_back(t) for t in trips} | {end}
    joined: list[StorageStretch] = []
    for start, stop in pairwise(sorted(time for time in changes if time <= end)):
        trip = next((t for t in reversed(trips) if t.at <= start < _back(t)), None)
        if trip is None and start < kept[0].start:
            continue  # before receipt, nothing is known but the way
        now = replace(_kept_at(kept, start), start=start, end=stop)
        if trip is not None:
            now = replace(
                now, temperature=trip.temperature, temperature_sd=trip.temperature_sd, place=""
            )
        if joined and replace(joined[-1], start=start, end=stop) == now and joined[-1].end == start:
            now = replace(joined.pop(), end=stop)
        joined.append(now)
    return tuple(joined)


# -- the parts ------------------------------------------------------------------------------


def _all(events: Sequence[Event], kind: type[E]) -> list[E]:
    return [e for e in events if isinstance(e, kind)]


def _back(trip: Transported) -> datetime:
    return trip.at + timedelta(hours=trip.hours)


def _kept(events: Sequence[Event]) -> list[StorageStretch]:
    """Every way in which the lot was kept, each as a stretch without length at its start."""
    first = _all(events, Received)[0]
    now = StorageStretch(
        *(first.at, first.at, first.temperature, first.form, first.opened),
        *(first.temperature_sd, first.place),
    )
    kept = [now]
    for event in events:
        at = max(event.at, first.at)
        if isinstance(event, Opened):
            now = replace(now, start=at, end=at, opened=True)
        elif isinstance(event, Moved):
            form = event.form or now.form
            opened = now.opened if event.opened is None else event.opened
            now = StorageStretch(
                *(at, at, event.temperature, form, opened),
                *(event.temperature_sd, event.place),
            )
        else:
            continue
        kept.append(now)
    return kept


def _kept_at(kept: Sequence[StorageStretch], at: datetime) -> StorageStretch:
    return next((k for k in reversed(kept) if k.start <= at), kept[0])
