"""Rows of the ledger: each holds the hash of the one before, so that a change shows."""

import hashlib
import json
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from typing import Any

from sqlalchemy import Row

from digestplan.lots.register.body import body_of, event_from, text_of
from digestplan.lots.register.events import Corrected, Event
from digestplan.lots.register.stock import Entry
from digestplan.problems import InputError

_FIRST = "0" * 64  # what the first row has for the hash of the one before
_HASHED = ("seq", "id", "lot", "kind", "at", "who", "recorded_at", "corrects", "body", "previous")


@dataclass(frozen=True, slots=True)
class Head:
    """The newest row: its number, and the hash that stands for all rows up to it."""

    number: int = 0
    hash: str = _FIRST


@dataclass(frozen=True, slots=True)
class BrokenRow:
    """The first row that is not as it was written."""

    number: int
    why: str


def chained(events: Iterable[Event], head: Head) -> Iterator[dict[str, Any]]:
    """Yield events as rows that follow on a head."""
    number, previous = head.number, head.hash
    for event in events:
        number += 1
        assert event.recorded_at is not None
        row = {
            "seq": number,
            "id": event.id,
            "lot": event.lot,
            "kind": event.kind,
            "at": event.at.isoformat(),
            "who": event.who,
            "recorded_at": event.recorded_at.isoformat(),
            "corrects": event.corrects if isinstance(event, Corrected) else None,
            "body": text_of(body_of(event)),
            "previous": previous,
        }
        previous = row["hash"] = row_hash(row)
        yield row


def row_hash(row: dict[str, Any]) -> str:
    """Return the SHA-256 of everything else in a row."""
    text = json.dumps([row[name] for name in _HASHED], ensure_ascii=False)
    return hashlib.sha256(text.encode()).hexdigest()


def fault(row: Row[Any], before: Head) -> str | None:
    """Return what is wrong with a row that follows on a head, or None."""
    if row.seq != before.number + 1:
        return f"{row.seq - before.number - 1} before it are gone"
    if row.previous != before.hash:
        return "it does not follow on the row before"
    if row.hash != row_hash(dict(row._mapping)):  # noqa: SLF001 - SQLAlchemy's public name
        return "it has been changed"
    try:
        event_of(row)
    except (InputError, ValueError) as error:
        return f"it cannot be read ({error})"
    return None


def entry_of(row: Row[Any]) -> Entry:
    """Return a row with its body parsed."""
    body = json.loads(row.body)
    return Entry(row.lot, row.id, row.kind, row.at, row.corrects, body, row.who, row.recorded_at)


def written_in(row: Row[Any]) -> dict[str, Any]:
    """Return a row as a line of an export holds it, but for the format's number."""
    head = {name: getattr(row, name) for name in ("kind", "id", "lot", "at", "who", "recorded_at")}
    if row.corrects is not None:
        head["corrects"] = row.corrects
    return {**head, **json.loads(row.body)}


def event_of(row: Row[Any]) -> Event:
    """Return a row as the event that was written."""
    return event_from(written_in(row))
