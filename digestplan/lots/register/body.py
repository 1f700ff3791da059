"""Events as JSON and back: what stands in the ledger's body, and in a line of an export."""

import json
from collections.abc import Mapping
from dataclasses import MISSING, Field, fields
from typing import Any

from digestplan.lots.register.events import KINDS, Event
from digestplan.lots.register.fields import field_of
from digestplan.problems import InputError, Problem, Problems

FORMAT = 1  # of a line of an export

_HEAD = ("lot", "at", "who", "id", "recorded_at", "corrects")  # columns of their own in the ledger


def body_of(event: Event) -> dict[str, Any]:
    """Return what an event holds beside the ledger's own columns, ready for JSON."""
    written = {_key(event.kind, f.name): _written(event, f) for f in fields(event)}
    return {key: value for key, value in written.items() if value is not None}


def text_of(body: Mapping[str, Any]) -> str:
    """Return the JSON text of a body: the same text for the same body."""
    return json.dumps(body, sort_keys=True, ensure_ascii=False, allow_nan=False)


def as_json(event: Event) -> dict[str, Any]:
    """Return an event as one line of an export holds it."""
    head = {name: _plain(event.kind, name, getattr(event, name, None)) for name in _HEAD}
    told = {name: value for name, value in head.items() if value is not None}
    return {"digestplan": FORMAT, "kind": event.kind, **told, **body_of(event)}


def from_json(line: Mapping[str, Any]) -> Event:
    """
    Read an event from a line of an export.

    Parameters
    ----------
    line
        The parsed line.

    Returns
    -------
    event
        The event; an `InputError` tells everything that is wrong with it.
    """
    version = line.get("digestplan")
    if not isinstance(version, int) or isinstance(version, bool):
        raise InputError(Problem("", "this is not an event of a lot register"))
    if version > FORMAT:
        raise InputError(Problem("", "it was written by a newer version of digestplan"))
    return event_from({k: v for k, v in line.items() if k != "digestplan"})


def event_from(written: Mapping[str, Any]) -> Event:
    """Make an event of ``kind``, the ledger's columns and the keys of its body, all in one."""
    kind = written.get("kind")
    if not isinstance(kind, str) or kind not in KINDS:
        wanted = ", ".join(KINDS)
        raise InputError(Problem("kind", f"{kind!r:.40} is none of the events: {wanted}"))
    problems, left, values = Problems(), dict(written), {}
    del left["kind"]
    for f in fields(KINDS[kind]):
        key = _key(kind, f.name)
        if key not in left:
            if f.default is MISSING and (f.name == "id" or f.default_factory is MISSING):
                problems.add(f"{kind}.{key}", "it is missing")
            continue
        try:
            values[f.name] = _read(kind, f.name, left.pop(key), written)
        except (TypeError, ValueError):
            problems.add(f"{kind}.{key}", "it cannot be read")
        except InputError as error:
            problems.found += error.problems
    for key in left:
        problems.add(f"{kind}.{key}", "it is not known here; a newer version may have written it")
    problems.raise_if_any()
    return KINDS[kind](**values)


# -- one field ------------------------------------------------------------------------------


def _key(kind: str, name: str) -> str:
    return field_of(kind, name).key or name


def _plain(kind: str, name: str, value: Any) -> Any:
    write = field_of(kind, name).write
    return value if write is None or value is None else write(value)


def _written(event: Event, f: "Field[Any]") -> Any:
    """One field as JSON; None where it goes without saying or has a column of its own."""
    value = getattr(event, f.name)
    if f.name in _HEAD or value is None or value in ("", ()):
        return None
    if f.name == "replacement":
        return {"kind": value.kind, "at": value.at.isoformat(), "who": value.who, **body_of(value)}
    return _plain(event.kind, f.name, value)


def _read(kind: str, name: str, value: Any, written: Mapping[str, Any]) -> Any:
    if name == "replacement" and isinstance(value, Mapping) and value.get("kind") != "corrected":
        return event_from({**value, "lot": written.get("lot"), "id": written.get("corrects")})
    read = field_of(kind, name).read
    return value if read is None or value is None else read(value)
