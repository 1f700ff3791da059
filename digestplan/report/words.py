"""Numbers, times and shares as people at a bench say them."""

from datetime import datetime, timedelta

_DAYS = ("Mon", "Tue", "Wed", "Thu", "Fri", "Sat", "Sun")
_MONTHS = ("Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec")


def percent(share: float | None) -> str:
    """Return a share as a percentage: never a false 0 % or 100 %."""
    if share is None:
        return "never"
    if 0 < share < 0.005:
        return "<1 %"
    if 0.995 < share < 1:
        return ">99 %"
    return f"{100 * share:.0f} %"


def hours(value: float | None) -> str:
    """Return a time span: minutes below two hours, days beyond three days."""
    if value is None:
        return "never"
    if value < 2:
        return f"{60 * value:.0f} min"
    if value < 72:
        return f"{value:.1f} h"
    if value < 24 * 366:
        return f"{value / 24:.1f} d"
    return "over a year"


def day_and_time(time: datetime) -> str:
    """Return a clock time with its day, to the minute."""
    rounded = to_the_minute(time)
    return f"{_DAYS[rounded.weekday()]} {rounded.day} {_MONTHS[rounded.month - 1]} {rounded:%H:%M}"


def to_the_minute(time: datetime) -> datetime:
    """Return a time rounded to the minute."""
    return (time + timedelta(seconds=30)).replace(second=0, microsecond=0)


def visit(start: datetime, end: datetime) -> str:
    """Return a visit as an interval, the day once where it is one day."""
    if start.date() == end.date():
        return f"{day_and_time(start)}–{to_the_minute(end):%H:%M}"
    return f"{day_and_time(start)} to {day_and_time(end)}"


def plain(text: str, most: int = 200) -> str:
    """Return user text on one line, without control characters, cut where it is too long."""
    flat = "".join(c if c.isprintable() else " " for c in text)
    flat = " ".join(flat.split())
    return flat if len(flat) <= most else flat[: most - 1] + "…"
