"""The clock of a plan: when it starts, and when someone is at the bench."""

import re
from collections.abc import Sequence
from datetime import date, datetime, time, timedelta
from itertools import pairwise
from typing import Any

from digestplan.plan.model import Visit
from digestplan.plan.wording import shown
from digestplan.problems import Problems

_MOST_VISITS = 200
_YEARS = (1900, 2200)  # a plan outside them is a slip of the pen
_VISIT = '"2026-03-13T08:30 / 2026-03-13T17:00"'
_DURATION = re.compile(r"P(?:(\d{1,4})D)?(?:T(?:(\d{1,4})H)?(?:(\d{1,4})M)?)?", re.ASCII)
_MOMENT = re.compile(r"\d{4}-\d\d-\d\d[T ]\d\d:\d\d(:\d\d)?", re.ASCII)
_TIME = re.compile(r"\d\d:\d\d(:\d\d)?", re.ASCII)


def checked_start(written: Any, problems: Problems) -> datetime | None:
    """Return the start of a plan, or note why what was written is none."""
    example = "such as 2026-03-12T17:30:00, without quotation marks"
    if isinstance(written, datetime):
        if written.tzinfo is not None:
            wanted = (
                f"write the local wall-clock time alone: {written.replace(tzinfo=None).isoformat()}"
            )
            problems.add("start", f"{shown(written)} carries an offset from UTC; {wanted}")
        elif not _YEARS[0] <= written.year <= _YEARS[1]:
            problems.add("start", f"{shown(written)} is in no year in which this plan can be done")
        else:
            return written
    elif isinstance(written, date | time):
        problems.add("start", f"{shown(written)} is not a date with a time of day; {example}")
    else:
        problems.add(
            "start", f"{shown(written)} is no date and time; one is wanted here, {example}"
        )
    return None


def checked_visits(written: Any, start: datetime | None, problems: Problems) -> tuple[Visit, ...]:
    """Return the visits of a plan in the order of the clock; problems are noted."""
    if not isinstance(written, list):
        message = f"{shown(written)} is not a list; visits are wanted as a list, such as [{_VISIT}]"
        problems.add("visits", message)
        return ()
    if len(written) > _MOST_VISITS:
        problems.add("visits", f"{len(written)} visits are more than any plan needs")
        return ()
    found: list[tuple[Visit, str]] = []
    for index, text in enumerate(written):
        place = f"visits[{index}]"
        visit = _visit(text, place, problems)
        if visit is not None and start is not None and visit.end <= start:
            message = f"{shown(text)} is over before the plan starts ({start.isoformat()})"
            problems.add(place, message)
        elif visit is not None:
            found.append((visit, place))
    found.sort(key=lambda item: item[0].start)
    _refuse_overlaps(found, problems)
    return tuple(visit for visit, _ in found)


def _refuse_overlaps(found: Sequence[tuple[Visit, str]], problems: Problems) -> None:
    for (earlier, its_place), (later, place) in pairwise(found):
        if later.start < earlier.end:
            message = f"this visit starts before the one in {its_place} ends; write them as one"
            problems.add(place, message)


def _visit(text: Any, place: str, problems: Problems) -> Visit | None:
    wanted = f"a visit is wanted as its start and its end, such as {_VISIT}"
    if not isinstance(text, str):
        problems.add(place, f"{shown(text)} is no text; {wanted}")
        return None
    first, slash, second = text.partition("/")
    first, second = first.strip(), second.strip()
    if not slash:
        problems.add(place, f"{shown(text)} has no / between start and end; {wanted}")
        return None
    try:
        start, end = _interval(first, second)
    except ValueError as error:
        reason = error.args[0]
        problems.add(place, f"{shown(text)}: {reason}; {wanted}")
        return None
    if end <= start:
        problems.add(place, f"{shown(text)} ends before it starts")
        return None
    return Visit(start, end)


def _interval(first: str, second: str) -> tuple[datetime, datetime]:
    if first.startswith("P"):
        end = _moment(second)
        return end - _duration(first), end
    start = _moment(first)
    if second.startswith("P"):
        return start, start + _duration(second)
    if _TIME.fullmatch(second.removeprefix("T")):  # ISO 8601 lets the end leave out its date
        second = f"{start.date().isoformat()}T{second.removeprefix('T')}"
    return start, _moment(second)


def _moment(text: str) -> datetime:
    if not _MOMENT.fullmatch(text):
        if re.search(r"\d\d:\d\d(:\d\d)?(Z|[+-]\d\d(:?\d\d)?)\Z", text):
            raise ValueError("local wall-clock time is wanted, without Z or an offset from UTC")
        if re.fullmatch(r"\d{4}-\d\d-\d\d", text):
            raise ValueError("a time of day is missing")
        raise ValueError("this is no date and time")
    try:
        moment = datetime.fromisoformat(text)
    except ValueError:
        raise ValueError("there is no such date or time") from None
    if not _YEARS[0] <= moment.year <= _YEARS[1]:
        raise ValueError("nobody is at the bench in that year")
    return moment


def _duration(text: str) -> timedelta:
    found = _DURATION.fullmatch(text)
    if not found or not any(found.groups()):
        raise ValueError("this is no duration such as PT8H30M")
    days, hours, minutes = (int(part or 0) for part in found.groups())
    return timedelta(days=days, hours=hours, minutes=minutes)
