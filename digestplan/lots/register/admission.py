"""Which events a register takes: on lots that it has, and corrections of what is there."""

from collections.abc import Iterable
from difflib import get_close_matches

from digestplan.lots.register.body import body_of
from digestplan.lots.register.events import Corrected, Event, Received
from digestplan.lots.register.stock import Entry, live

_DECIDING = frozenset({"received", "corrected"})  # on whether a lot is there


class Admission:
    """
    What a register already holds, as far as it decides on what comes next.

    Parameters
    ----------
    entries
        Receipts and corrections of the lots concerned and the events that are to be corrected,
        in the order in which they were written.
    names
        The names of all lots, for a hint at the one that was meant.
    """

    def __init__(self, entries: Iterable[Entry], names: Iterable[str] = ()) -> None:
        self._by_id: dict[str, Entry] = {}
        self._by_lot: dict[str, list[Entry]] = {}
        self._present: set[str] = set()
        self._names = list(names)
        for entry in entries:
            self._keep(entry)
        for lot in self._by_lot:
            self._look(lot)

    def take(self, event: Event) -> str | None:
        """Take an event in, or return why it cannot be taken."""
        entry, why = entry_of(event), None
        if isinstance(event, Corrected):
            why = self._against_correction(event)
        elif not isinstance(event, Received) and event.lot not in self._present:
            why = unknown_lot(event.lot, {*self._names, *self._present})
        why = why or self._against_second_receipt(entry)
        if why is None:
            self._keep(entry)
            if entry.kind in _DECIDING:
                self._look(event.lot)
        return why

    def _keep(self, entry: Entry) -> None:
        self._by_id[entry.id] = entry
        if entry.kind in _DECIDING:
            self._by_lot.setdefault(entry.lot, []).append(entry)

    def _look(self, lot: str) -> None:
        self._present.discard(lot)
        if _receipts(self._by_lot[lot]):
            self._present.add(lot)

    def _against_correction(self, event: Corrected) -> str | None:
        target, new = self._by_id.get(event.corrects), event.replacement
        if target is None:
            return f'there is no event "{event.corrects}" to correct'
        if target.lot != event.lot:
            return f'the event to correct belongs to lot "{target.lot}", not to "{event.lot}"'
        if new is None:
            return None
        if target.kind == "corrected":
            return "a correction can be taken back only; correct the event itself once more"
        if (target.kind == "received") != isinstance(new, Received):
            return "a receipt can be replaced by a receipt only, and nothing else by one"
        return None

    def _against_second_receipt(self, entry: Entry) -> str | None:
        if entry.kind not in _DECIDING:
            return None
        receipts = _receipts([*self._by_lot.get(entry.lot, []), entry])
        if len(receipts) < 2:
            return None
        return (
            f'lot "{entry.lot}" is in the register already, received at {receipts[0].at}; '
            "another bottle needs a name of its own"
        )


def unknown_lot(lot: str, names: Iterable[str]) -> str:
    """Return the words for a lot that is not there, with those that may have been meant."""
    near = get_close_matches(lot, list(names), n=3)
    hint = f"did you mean {' or '.join(near)}?" if near else "receive it first"
    return f'there is no lot "{lot}" in the register; {hint}'


def entry_of(event: Event) -> Entry:
    """Return an event as a row of the ledger with its body parsed."""
    corrects = event.corrects if isinstance(event, Corrected) else None
    at = event.at.isoformat()
    return Entry(event.lot, event.id, event.kind, at, corrects, body_of(event), event.who)


def _receipts(entries: list[Entry]) -> list[Entry]:
    return [e for e in live(entries) if e.kind == "received"]
