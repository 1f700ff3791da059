"""The lines that say in words what the drawings show."""

from typing import TYPE_CHECKING

from textual.content import Content

from digestplan.app import text
from digestplan.app.answer import Answer
from digestplan.app.form import text_of

if TYPE_CHECKING:
    from digestplan.app.session import DiskState, Session


def head(session: "Session", disk: "DiskState", state: str) -> Content:
    """Return the line at the top: title, file, whether it is saved, and what is going on."""
    title = text_of(session.tables.get("title")) or "Untitled plan"
    name = "not saved yet" if session.path is None else session.path.name
    parts = [text.literal(f" {name}", "$secondary")]
    if session.dirty:
        parts.append(text.literal(" * changed", "bold $text-warning"))
    if disk in {"changed", "gone"}:
        told = text.WHO_ELSE if disk == "changed" else "the file has gone"
        parts.append(text.literal(f"  {told}", "bold $text-error"))
    if state:
        parts.append(text.literal(f"  {state}", "italic $secondary"))
    parts.append(text.literal(f"  {title}", "bold"))
    return Content.assemble(*parts)


def verdict(answer: Answer) -> Content:
    """Return the verdict, or what stands in the way of one."""
    if answer.fault:
        return text.literal(f"! {answer.fault}", "bold $text-error")
    if not answer.problems:
        return text.literal(answer.verdict, "bold")
    first, n = answer.problems[0], len(answer.problems)
    count = "One thing is wrong" if n == 1 else f"{n} things are wrong"
    where = f"{first.place}: " if first.place else ""
    line = f" (line {first.line})" if first.line else ""
    return text.literal(
        f"! {count} (F4 lists all). {where}{first.message}{line}", "bold $text-error"
    )


def stop(answer: Answer) -> Content:
    """Return all cautions of level stop, for the banner; empty without one."""
    found = [c for c in answer.cautions if c.level == "stop"]
    if not found:
        return Content("")
    told = [f" STOP  {_where(c.step)}{c.text}" for c in found]
    return text.literal("\n".join(told))


def said(answer: Answer) -> Content:
    """Return what limits the plan, and its first caution that is no stop."""
    parts: list[Content] = []
    if answer.limits:
        parts.append(_labelled("Limit", answer.limits[0]))
    others = [c for c in answer.cautions if c.level != "stop"]
    if others:
        first, n = others[0], len(answer.cautions)
        more = "" if n == 1 else f"  (F5: all {n})"
        label = first.level.capitalize()
        parts.append(_labelled(label, _where(first.step) + _short(first.text), more))
    return Content("\n").join(parts)


def _labelled(label: str, told: str, more: str = "") -> Content:
    return Content.assemble(
        text.literal(f"{label} ", "bold $text-warning" if label == "Care" else "bold $primary"),
        text.literal(more.strip() + " " if more else "", "bold"),
        text.literal(told),
    )


def _short(told: str) -> str:
    """Return the first sentence of a caution; all of it is one key away, and on every sheet."""
    first, point, rest = told.partition(". ")
    return f"{first}. …" if point and rest else told


def _where(step: int | None) -> str:
    return "" if step is None else f"step {step + 1}: "
