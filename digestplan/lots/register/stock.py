"""What the events of a lot add up to: how it was kept, what is left in the bottle, what was found.

Corrections are applied in reading: the ledger keeps what was written, and this what is meant.
"""

from collections.abc import Sequence
from dataclasses import dataclass, field
from datetime import date, datetime
from typing import Any, NamedTuple

from digestplan.lots.register.body import event_from
from digestplan.lots.register.events import (
    Assayed,
    Event,
    Received,
    Transported,
    Used,
)
from digestplan.lots.register.fields import Form
from digestplan.lots.register.timeline import StorageStretch, Thaw, stretches, thaws

_SMALLEST = 9  # decimals of a gram that the ledger counts


class Entry(NamedTuple):
    """A row of the ledger, its body parsed."""

    lot: str
    id: str
    kind: str
    at: str
    corrects: str | None
    body: dict[str, Any]
    who: str = ""
    recorded_at: str | None = None


@dataclass(frozen=True, slots=True)
class LotSummary:
    """What a listing shows of a lot.

    Attributes
    ----------
    lot, enzyme, label_activity, form
        As received, or as dissolved since.
    received_at, last_event_at
        Local wall clock.
    temperature, place, opened
        How it is kept now. [K]
    remaining_mass
        What the ledger has left, never below zero [g]; None where it was never weighed.
    overdrawn_mass
        How much more was used than the ledger had; above zero is a caution: weigh it. [g]
    thaws
        How many.
    assayed_at, fraction, standard_error, activity
        What the last assay said; None where there was none.
    discarded_at
        None while it is there.
    used_after_discard
        Whether something was used of it after it was thrown away: another caution.
    expiry
        The supplier's date.
    """

    lot: str
    enzyme: str
    label_activity: str | None
    form: Form
    received_at: datetime
    last_event_at: datetime
    temperature: float
    place: str
    opened: bool
    remaining_mass: float | None
    overdrawn_mass: float
    thaws: int
    assayed_at: datetime | None
    fraction: float | None
    standard_error: float | None
    activity: str | None
    discarded_at: datetime | None
    used_after_discard: bool
    expiry: date | None


@dataclass(frozen=True, slots=True)
class LotRecord:
    """A lot's history, corrections applied.

    Attributes
    ----------
    summary
        What a listing shows.
    received
        How it came in, with its certificate's conversions.
    events
        All that counts, in the order in which it happened.
    """

    summary: LotSummary
    received: Received
    events: tuple[Event, ...]

    @property
    def assays(self) -> tuple[Assayed, ...]:
        """The assays, in the order in which they were done."""
        return tuple(e for e in self.events if isinstance(e, Assayed))

    @property
    def uses(self) -> tuple[Used, ...]:
        """What was weighed out of it."""
        return tuple(e for e in self.events if isinstance(e, Used))

    @property
    def excursions(self) -> tuple[Transported, ...]:
        """The times on the way."""
        return tuple(e for e in self.events if isinstance(e, Transported))

    @property
    def thaws(self) -> tuple[Thaw, ...]:
        """The thaws, each in the form of its time."""
        return thaws(self.events)

    def stretches(self, until: datetime) -> tuple[StorageStretch, ...]:
        """
        Return how the lot was kept from receipt, or from its way here, to a time.

        Parameters
        ----------
        until
            End of the last stretch, unless the lot was discarded before (local wall clock).

        Returns
        -------
        stretches
            In the order of time, without overlap; an excursion stands in for the storage that
            it interrupts.
        """
        return stretches(self.events, until)


# -- corrections ----------------------------------------------------------------------------


def live(entries: Sequence[Entry]) -> list[Entry]:
    """
    Apply the corrections among a lot's entries.

    Parameters
    ----------
    entries
        In the order in which they were written.

    Returns
    -------
    entries
        What counts, in the order in which it happened; a replacement keeps the id of what it
        replaces.
    """
    corrections = {e.id: e for e in entries if e.kind == "corrected"}
    if corrections:
        entries = [_as_corrected(e, _newest(corrections)) for e in entries if e.kind != "corrected"]
        entries = [e for e in entries if e.kind]
    return sorted(entries, key=lambda e: e.at)


def _newest(corrections: dict[str, Entry]) -> dict[str, Entry]:
    """The correction that counts for each event, by the event's id."""
    taken_back: set[str | None] = set()
    newest: dict[str, Entry] = {}
    for correction in reversed(corrections.values()):
        if correction.id in taken_back or correction.corrects is None:
            continue
        if correction.corrects in corrections:
            taken_back.add(correction.corrects)
        else:
            newest.setdefault(correction.corrects, correction)
    return newest


def _as_corrected(entry: Entry, newest: dict[str, Entry]) -> Entry:
    """An entry as it is meant; without a kind where it is not to count."""
    correction = newest.get(entry.id)
    if correction is None:
        return entry
    body = dict(correction.body.get("replacement") or {"kind": "", "at": "", "who": ""})
    kind, at, who = body.pop("kind"), body.pop("at"), body.pop("who", "")
    return entry._replace(kind=kind, at=at, who=who, body=body)


# -- sums -----------------------------------------------------------------------------------


def summary(entries: Sequence[Entry]) -> LotSummary | None:
    """
    Add up a lot.

    Parameters
    ----------
    entries
        What counts, in the order in which it happened.

    Returns
    -------
    summary
        None where the lot was never received, or its receipt was taken back.
    """
    received = next((e for e in entries if e.kind == "received"), None)
    if received is None:
        return None
    sums = _Sums(dict(received.body))
    for entry in entries:
        step = _STEPS.get(entry.kind)
        if step is not None:
            step(sums, entry)
    now, assay, mass = sums.kept, sums.assay, sums.mass
    left = None if mass is None else round(mass, _SMALLEST)
    return LotSummary(
        lot=received.lot,
        enzyme=now["enzyme"],
        label_activity=now.get("label_activity"),
        form=now["form"],
        received_at=datetime.fromisoformat(received.at),
        last_event_at=datetime.fromisoformat(entries[-1].at),
        temperature=now["temperature_k"],
        place=now.get("place", ""),
        opened=now["opened"],
        remaining_mass=None if left is None else max(left, 0.0),
        overdrawn_mass=0.0 if left is None else max(-left, 0.0),
        thaws=sums.thaws,
        assayed_at=datetime.fromisoformat(assay.at) if assay else None,
        fraction=assay.body.get("fraction") if assay else None,
        standard_error=assay.body.get("standard_error") if assay else None,
        activity=assay.body.get("activity") if assay else None,
        discarded_at=datetime.fromisoformat(sums.discarded) if sums.discarded else None,
        used_after_discard=sums.used_after_discard,
        expiry=date.fromisoformat(now["expiry"]) if now.get("expiry") else None,
    )


@dataclass(slots=True)
class _Sums:
    """What is carried from event to event, in the keys of their bodies."""

    kept: dict[str, Any]
    mass: float | None = field(init=False)
    thaws: int = 0
    assay: Entry | None = None
    discarded: str | None = None
    used_after_discard: bool = False

    def __post_init__(self) -> None:
        self.mass = self.kept.get("mass_g")

    def use(self, entry: Entry) -> None:
        if self.mass is not None:
            self.mass -= entry.body["mass_g"]
        self.used_after_discard |= self.discarded is not None

    def weigh(self, entry: Entry) -> None:
        self.mass = entry.body["mass_g"]

    def thaw(self, entry: Entry) -> None:
        self.thaws += entry.body["count"]

    def move(self, entry: Entry) -> None:
        self.kept["place"] = ""
        self.kept.update((k, v) for k, v in entry.body.items() if k != "note")

    def open(self, _entry: Entry) -> None:
        self.kept["opened"] = True

    def find(self, entry: Entry) -> None:
        self.assay = entry

    def discard(self, entry: Entry) -> None:
        self.discarded = self.discarded or entry.at


_STEPS = {
    "used": _Sums.use,
    "weighed": _Sums.weigh,
    "thawed": _Sums.thaw,
    "moved": _Sums.move,
    "opened": _Sums.open,
    "assayed": _Sums.find,
    "discarded": _Sums.discard,
}

# Events whose bodies a summary looks into; of the others it takes that they happened.
SUMMED = frozenset({"received", "moved", "thawed", "assayed", "used", "weighed", "corrected"})


def record(entries: Sequence[Entry]) -> LotRecord | None:
    """Return the history of one lot from what counts of it; None as with `summary`."""
    found = summary(entries)
    if found is None:
        return None
    events = tuple(_event(e) for e in entries)
    received = next(e for e in events if isinstance(e, Received))
    return LotRecord(found, received, events)


def _event(entry: Entry) -> Event:
    head = {"kind": entry.kind, "lot": entry.lot, "id": entry.id, "at": entry.at, "who": entry.who}
    if entry.recorded_at is not None:
        head["recorded_at"] = entry.recorded_at
    return event_from({**head, **entry.body})
