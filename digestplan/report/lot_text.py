"""Lots of the register as plain text: a listing, one lot with its entries, an entry just made."""

from collections.abc import Callable, Mapping, Sequence
from typing import Any

from digestplan.lots.register.events import (
    Assayed,
    Corrected,
    Event,
    Moved,
    Received,
    Thawed,
    Transported,
    Used,
    Weighed,
)
from digestplan.lots.register.stock import LotRecord, LotSummary
from digestplan.quantities import Quantity, format_quantity
from digestplan.report import words
from digestplan.report.lines import wrapped

SHORT = 8  # letters of an id that a listing shows


def list_text(summaries: Sequence[LotSummary], name: str) -> str:
    """
    Return a listing of lots.

    Parameters
    ----------
    summaries
        What to list.
    name
        What the register is called.

    Returns
    -------
    text
        A line a lot, at 79 characters.
    """
    if not summaries:
        return f"No lots in {name}.\n"
    lines = [f"{'lot':<14}{'enzyme':<24}{'form':<9}{'left':>9}{'kept':>8}{'last assay':>14}"]
    lines += [_line(lot) for lot in summaries]
    lines += [f"{len(summaries)} lot{'s' if len(summaries) > 1 else ''} in {words.plain(name)}"]
    return "\n".join(lines) + "\n"


def show_text(record: LotRecord, n_corrections: int = 0) -> str:
    """
    Return a lot with its entries.

    Parameters
    ----------
    record
        The lot, corrections applied.
    n_corrections
        How many corrections were made.

    Returns
    -------
    text
        What it is, how it is kept, and every entry with its id, at 79 characters.
    """
    lines = [head(record.summary), *cautions_of(record.summary), ""]
    for event in record.events:
        when = f"{event.at:%Y-%m-%d %H:%M}  {event.id[:SHORT]}  "
        by = f" ({words.plain(event.who, 40)})" if event.who else ""
        note = f"; {words.plain(event.note)}" if event.note else ""
        lines.append(wrapped(when + told(event) + by + note, " " * 28))
    if n_corrections:
        many = f"{n_corrections} corrections are" if n_corrections > 1 else "One correction is"
        lines.append(wrapped(f"{many} worked in; --json has all entries as they were written."))
    return "\n".join(lines) + "\n"


def recorded_text(event: Event, summary: LotSummary | None) -> str:
    """
    Return what was just entered.

    Parameters
    ----------
    event
        As the register has it.
    summary
        The lot after it; None where its receipt was taken back.

    Returns
    -------
    text
        The entry, its id, what is left in the bottle, and what is odd about it.
    """
    entry = event.replacement if isinstance(event, Corrected) else event
    what = "taken back" if entry is None else told(entry)
    at = event.at if entry is None else entry.at
    mark = event.corrects if isinstance(event, Corrected) else event.id
    lot = words.plain(event.lot)
    lines = [wrapped(f"{lot}, {at:%Y-%m-%d}: {what}. Entry {mark[:SHORT]}.", "  ", "")]
    if summary is None:
        return "\n".join([*lines, f"{lot} is no longer in the register."]) + "\n"
    if summary.remaining_mass is not None and event.kind != "received":
        lines.append(f"{mass(summary.remaining_mass)} left in the bottle.")
    return "\n".join([*lines, *cautions_of(summary)]) + "\n"


def head(summary: LotSummary) -> str:
    """Return what a lot is and how it is kept, in two lines or three."""
    parts = [summary.enzyme, summary.form, summary.label_activity or "no label activity"]
    if summary.remaining_mass is not None:
        parts.append(f"{mass(summary.remaining_mass)} left")
    lines = [wrapped(f"{words.plain(summary.lot)}: {words.plain(', '.join(parts))}", "  ", "")]
    since = f"received {summary.received_at:%Y-%m-%d}"
    lines.append(wrapped(f"{kept(summary)}; {since}", "  "))
    return "\n".join(lines)


def kept(summary: LotSummary) -> str:
    """Return how a lot is kept now."""
    place = f" in {words.plain(summary.place, 40)}" if summary.place else ""
    opened = ", opened" if summary.opened else ""
    return f"kept at {celsius(summary.temperature)}{place}{opened}"


def cautions_of(summary: LotSummary) -> list[str]:
    """Return what is odd about a lot's entries, one wrapped line each."""
    found = []
    if summary.overdrawn_mass > 0:
        found.append(
            f"care  {mass(summary.overdrawn_mass)} more was used than the register had: weigh the "
            "bottle (lot weigh)."
        )
    if summary.discarded_at is not None:
        found.append(f"care  It was discarded on {summary.discarded_at:%Y-%m-%d}.")
    if summary.used_after_discard:
        found.append("care  Something was used of it after it was thrown away.")
    if summary.label_activity is None:
        found.append("note  Without a label activity there is nothing to be a fraction of.")
    return [wrapped(text, " " * 6, "") for text in found]


def told(event: Event) -> str:
    """Return an entry in words."""
    told_so = _TOLD.get(event.kind)
    return event.kind if told_so is None else told_so(event)


def mass(grams: float, digits: int = 4) -> str:
    """Return a mass as the bench says it."""
    return "0 mg" if grams == 0 else format_quantity(grams, "mass", digits=digits)


def celsius(kelvin: float, sd: float = 0.0) -> str:
    """Return a temperature, with its spread where it has one."""
    value = f"{kelvin - 273.15:.4g}"
    return f"{value} ± {sd:.2g} °C" if sd else f"{value} °C"


# -- the parts ------------------------------------------------------------------------------


def _line(lot: LotSummary) -> str:
    left = "–" if lot.remaining_mass is None else mass(lot.remaining_mass)
    assay = "–" if lot.assayed_at is None else f"{lot.assayed_at:%Y-%m-%d}"
    marks = "!" if lot.overdrawn_mass > 0 or lot.used_after_discard else ""
    gone = " gone" if lot.discarded_at is not None else ""
    return (
        f"{words.plain(lot.lot, 13):<14}{words.plain(lot.enzyme, 23):<24}{lot.form:<9}"
        f"{left + marks:>9}{celsius(lot.temperature):>8}{assay:>14}{gone}"
    )


def _received(event: Received) -> str:
    parts = ["received", event.enzyme, event.form]
    if event.label_activity:
        parts.append(event.label_activity)
    if event.mass is not None:
        parts.append(mass(event.mass))
    place = f" in {event.place}" if event.place else ""
    parts.append(f"kept at {celsius(event.temperature, event.temperature_sd)}{place}")
    if event.opened:
        parts.append("already open")
    if event.expiry:
        parts.append(f"supplier's date {event.expiry.isoformat()}")
    parts += event.conversions
    return words.plain(", ".join(parts), 400)


def _assayed(event: Assayed) -> str:
    found = [] if event.activity is None else [event.activity]
    if event.fraction is not None and event.standard_error is not None:
        sd, share = event.standard_error, event.fraction
        text = format_quantity(Quantity(share, sd, "normal", text="_"), "number", digits=3)
        found.append(f"{text} of the label")
    return words.plain(f"assayed: {', '.join(found)}")


def _moved(event: Moved) -> str:
    place = f" in {words.plain(event.place, 40)}" if event.place else ""
    form = f", {event.form}" if event.form else ""
    seal = {None: "", True: ", opened", False: ", sealed again"}[event.opened]
    return f"kept at {celsius(event.temperature, event.temperature_sd)}{place}{form}{seal}"


def _transported(event: Transported) -> str:
    temperature = celsius(event.temperature, event.temperature_sd)
    return f"{words.hours(event.hours)} at {temperature}, then back"


def _thawed(event: Thawed) -> str:
    return "thawed" if event.count == 1 else f"thawed {event.count} times"


def _used(event: Used) -> str:
    plan = f" for {words.plain(event.plan, 60)}" if event.plan else ""
    return f"used {mass(event.mass)}{plan}"


def _weighed(event: Weighed) -> str:
    return f"weighed: {mass(event.mass)}"


_TOLD: Mapping[str, Callable[[Any], str]] = {
    "received": _received,
    "moved": _moved,
    "transported": _transported,
    "thawed": _thawed,
    "assayed": _assayed,
    "used": _used,
    "weighed": _weighed,
}
