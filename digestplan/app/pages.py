"""Pages to be read: help for keys and fields, and the cautions of a plan."""

from collections.abc import Sequence
from typing import TYPE_CHECKING

from textual.content import Content

from digestplan.app import text
from digestplan.app.answer import Note
from digestplan.app.form import Cell
from digestplan.app.keys import FIELD_KEYS, PLAN_KEYS

if TYPE_CHECKING:
    from digestplan.forecast.result import Caution

_LEVELS = {"stop": "bold reverse $text-error", "care": "bold $text-warning", "note": "bold"}


def about(cell: Cell, note: Note | None) -> list[Content]:
    """Say of a field what it means, how it is written, between which bounds, and who says so."""
    field = cell.field
    lines = [
        text.literal(f"{field.note}.", "bold"),
        text.literal(
            f"In the file: {cell.place}" + (f" = {field.example}" if field.example else "")
        ),
    ]
    if field.choices:
        lines.append(text.literal(f"One of: {', '.join(field.choices)}."))
    bounds = _bounds(cell)
    if bounds:
        lines.append(text.literal(bounds))
    if note is not None:
        whose = "Now" if note.origin == "plan" else f"Now, from the {note.origin}"
        other = f" = {note.other}" if note.other else ""
        lines.append(text.literal(f"{whose}: {note.text}{other}. Source: {note.source}."))
    elif field.default is not None:
        lines.append(text.literal(f"Left out, it is {field.default}."))
    return lines


def _bounds(cell: Cell) -> str:
    from digestplan.quantities import KINDS

    field, kind = cell.field, KINDS.get(cell.field.kind)
    unit = f" {kind.core_unit}" if kind is not None and kind.core_unit not in {"", "g/g"} else ""
    parts = []
    if field.above is not None:
        parts.append(f"above {field.above:g}{unit}")
    if field.below is not None:
        parts.append(f"below {field.below:g}{unit}")
    if field.most is not None:
        parts.append(f"at most {field.most:g}{unit}")
    allowed = " and ".join(parts) or (kind.bounds if kind is not None else "")
    spread = (
        "" if kind is None else " No spread." if field.exact else " A spread may follow: ± or x/."
    )
    return (f"Allowed: {allowed}.{spread}" if allowed else spread).strip()


def help_page(cell: Cell | None, note: Note | None) -> list[Content]:
    """Return help: the field in focus first, then every key."""
    parts: list[Content] = []
    if cell is not None:
        parts += [
            text.literal(cell.label.capitalize(), "bold $primary"),
            *about(cell, note),
            Content(""),
        ]
    parts.append(text.literal("Keys", "bold $primary"))
    parts += [_key(key.spoken, key.does) for key in PLAN_KEYS]
    parts.append(text.literal("In the form", "bold $primary"))
    parts += [_key(keys, does) for keys, does in FIELD_KEYS]
    parts += [Content(""), text.literal(_WORDS)]
    return parts


def _key(spoken: str, does: str) -> Content:
    return Content.assemble(text.literal(f"  {spoken:<14}", "bold"), text.literal(does))


_WORDS = (
    "Values are text with a unit and, where they are uncertain, a spread: 180 mg ± 2 mg (standard "
    "deviation), 4 h x/ 1.15 (factor of one geometric standard deviation). A field that is left "
    "empty takes the library's value, shown in grey. The same answers stand in plain text in "
    "digestplan forecast, temperatures and sheet."
)


def cautions_page(cautions: Sequence["Caution"]) -> list[Content]:
    """Return all cautions, the most serious first."""
    if not cautions:
        return [text.literal(text.NO_CAUTION)]
    parts: list[Content] = []
    for caution in cautions:
        step = "whole plan" if caution.step is None else f"step {caution.step + 1}"
        head = f" {caution.level.upper()} "
        parts.append(Content.assemble(text.literal(head, _LEVELS[caution.level]), f"  {step}"))
        parts.append(text.literal(f"{caution.text}\n"))
    return parts
