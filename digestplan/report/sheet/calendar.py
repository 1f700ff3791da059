"""A plan's actions and visits as reminders: an iCalendar file (RFC 5545)."""

import hashlib
from collections.abc import Iterator
from datetime import UTC, datetime, timedelta

from digestplan.problems import InputError, Problem
from digestplan.report.sheet.model import Action, Sheet
from digestplan.report.words import to_the_minute

_LINE = 75  # octets that a line may hold
_LASTS = timedelta(minutes=15)  # what is no visit
_BEFORE = {"prepare": "PT15M", "visit": "PT30M"}  # how long before an alarm goes off
_USUALLY_BEFORE = "PT10M"
_TITLE, _SUMMARY = 60, 120  # characters


def calendar(sheet: Sheet, stamp: datetime) -> bytes:
    """
    Return the actions of a sheet as an iCalendar file.

    Parameters
    ----------
    sheet
        The sheet.
    stamp
        When the plan was last changed, in UTC.

    Returns
    -------
    content
        Events in local time of no zone, as the plan has them. An event keeps its name as long as
        the plan keeps its file name and title, so that a calendar that is read in again is
        brought up to date.

    Raises
    ------
    InputError
        If the plan gives no clock.
    """
    if sheet.start is None:
        message = "a calendar needs a clock; write for instance start = 2026-03-12T17:30:00"
        raise InputError(Problem("start", message))
    lines = ["BEGIN:VCALENDAR", "VERSION:2.0", "PRODID:-//digestplan//bench sheet//EN"]
    lines.append("CALSCALE:GREGORIAN")
    for action in sheet.actions:
        if action.at is not None:
            lines += _event(sheet, action, action.at, stamp)
    lines.append("END:VCALENDAR")
    return b"".join(_folded(line) for line in lines)


def _event(sheet: Sheet, action: Action, at: datetime, stamp: datetime) -> Iterator[str]:
    begin = to_the_minute(at)
    end = begin + _LASTS if action.until is None else to_the_minute(action.until)
    summary = _text(_cut(action.text, _SUMMARY))
    yield "BEGIN:VEVENT"
    yield f"UID:{_name(sheet.identity, action.key)}"
    yield f"DTSTAMP:{stamp.astimezone(UTC):%Y%m%dT%H%M%S}Z"
    yield f"DTSTART:{begin:%Y%m%dT%H%M%S}"
    yield f"DTEND:{end:%Y%m%dT%H%M%S}"
    yield f"SUMMARY:{summary}"
    yield f"DESCRIPTION:{_text(_description(sheet, action))}"
    if action.by_itself or action.do in {"window", "end"}:
        yield "TRANSP:TRANSPARENT"
    else:
        yield "BEGIN:VALARM"
        yield "ACTION:DISPLAY"
        yield f"DESCRIPTION:{summary}"
        yield f"TRIGGER:-{_BEFORE.get(action.do, _USUALLY_BEFORE)}"
        yield "END:VALARM"
    yield "END:VEVENT"


def _description(sheet: Sheet, action: Action) -> str:
    parts = [_cut(sheet.title, _TITLE), action.text, action.see]
    if action.do == "prepare":
        first = next(a for a in sheet.actions if a.do == "prepare") is action
        parts += [
            f"{amount.amount} {amount.what}: {amount.how}"
            for amount in sheet.amounts
            if amount.step == action.step or (first and amount.step is None)
        ]
    parts.append("The cautions stand on the bench sheet.")
    return "\n".join(part for part in parts if part)


def _name(identity: str, key: str) -> str:
    digest = hashlib.sha256(identity.encode("utf-8", "surrogatepass")).hexdigest()
    return f"{digest[:20]}-{key}@digestplan"


def _cut(text: str, most: int) -> str:
    return text if len(text) <= most else text[: most - 1] + "…"


def _text(text: str) -> str:
    """Return a text as a value of type TEXT."""
    escaped = text.replace("\\", "\\\\").replace(";", "\\;").replace(",", "\\,")
    return escaped.replace("\n", "\\n")


def _folded(line: str) -> bytes:
    """Return a line with its end, folded between characters where it is too long."""
    content, pieces = line.encode("utf-8"), []
    while len(content) > _LINE:
        end = _LINE
        while content[end] & 0xC0 == 0x80:  # within a character
            end -= 1
        pieces.append(content[:end])
        content = b" " + content[end:]
    return b"\r\n".join([*pieces, content]) + b"\r\n"
