"""The plan as a form: rows of fields, rebuilt only where their order has changed."""

from collections.abc import Mapping, Sequence
from typing import ClassVar

from textual.binding import Binding, BindingType
from textual.containers import VerticalScroll
from textual.widget import Widget

from digestplan.app.answer import Note
from digestplan.app.form import Cell, Row
from digestplan.app.widgets.quantity_field import CellInput, FieldRow, HeadRow
from digestplan.problems import Problem


class Form(VerticalScroll, can_focus=False):
    """The rows of a plan."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("down", "step(1)", "Next field", show=False),
        Binding("up", "step(-1)", "Field before", show=False),
        Binding("pagedown", "screen.section(1)", "Next part", show=False),
        Binding("pageup", "screen.section(-1)", "Part before", show=False),
    ]

    def __init__(self) -> None:
        super().__init__(id="form")
        self._keys: list[str] = []
        self._words: Mapping[str, Sequence[str]] = {}

    def action_step(self, by: int) -> None:
        """Go to the next field, or the one before."""
        if by > 0:
            self.screen.focus_next(CellInput)
        else:
            self.screen.focus_previous(CellInput)

    def show(self, rows: Sequence[Row]) -> None:
        """Show these rows; where they are the same as before, only their values change."""
        keys = [f"{row.key}|{row.head}|{len(row.cells)}" for row in rows]
        if keys == self._keys:
            for widget, row in zip(self.children, rows, strict=True):
                if isinstance(widget, FieldRow):
                    widget.put(row)
            return
        self._keys = keys
        fresh: list[Widget] = [FieldRow(row) if row.cells else HeadRow(row) for row in rows]
        with self.app.batch_update():
            self.remove_children()
            self.mount(*fresh)
        self.offer(self._words)

    def offer(self, words: Mapping[str, Sequence[str]]) -> None:
        """Offer words to complete; by the name of the key, such as ``material``."""
        self._words = words
        for row in self.children:
            for field in row.inputs if isinstance(row, FieldRow) else ():
                choices = field.cell.field.choices or words.get(_name(field.cell), ())
                if choices:
                    field.offer(choices)

    def say(self, notes: Mapping[str, Note], problems: Sequence[Problem]) -> None:
        """Show what is known of each value, and what is wrong with it, beside it."""
        said: dict[str, str] = {}
        for problem in problems:
            said.setdefault(problem.place, problem.message)
        for row in self.children:
            if isinstance(row, FieldRow):
                found = [said.pop(p) for p in row.places if p in said]
                row.say(notes, "; ".join(found))
        for row in self.children:
            if isinstance(row, HeadRow):
                place = row.row.key.removeprefix("#")
                inside = [p for p in said if place and (p == place or p.startswith(f"{place}."))]
                row.say(
                    "; ".join(f"{p.removeprefix(place)[1:]} {said.pop(p)}".strip() for p in inside)
                )

    def field_at(self, place: str) -> CellInput | None:
        """Return the field of a place, or the first one below it."""
        for row in self.children:
            for field in row.inputs if isinstance(row, FieldRow) else ():
                if field.cell.place == place or field.cell.place.startswith(
                    (f"{place}.", f"{place}[")
                ):
                    return field
        return None

    def heads(self) -> list[HeadRow]:
        """Return the headings."""
        return [row for row in self.children if isinstance(row, HeadRow)]

    def go_to_section(self, by: int) -> None:
        """Put the focus on the first field of the next section, or of the one before."""
        rows = list(self.children)
        focused = self.screen.focused
        here = rows.index(focused.parent) if focused is not None and focused.parent in rows else -1
        starts = [i for i, row in enumerate(rows) if isinstance(row, HeadRow)]
        own = max((i for i in starts if i <= here), default=-1)
        ahead = [i for i in starts if i > own] if by > 0 else [i for i in starts if i < own][::-1]
        for start in ahead:
            row = rows[start + 1] if start + 1 < len(rows) else None
            if isinstance(row, FieldRow):
                self.scroll_to_widget(rows[start], top=True, animate=False)
                row.inputs[0].focus()
                return


def _name(cell: Cell) -> str:
    return cell.field.name if not cell.place.startswith("lot.enzyme") else "lot.enzyme"
