"""A line of the form: what it is called, one or two values, and what is to be said of them."""

import textwrap
from collections.abc import Mapping, Sequence

from textual import events
from textual.app import ComposeResult
from textual.content import Content
from textual.suggester import SuggestFromList
from textual.widget import Widget
from textual.widgets import Input

from digestplan.app.answer import Note
from digestplan.app.form import Cell, Row
from digestplan.app.messages import Edited, Looked
from digestplan.app.text import literal

LABEL = 20  # cells
_LONG = {"text", "texts", "moment"}  # nothing is to be said beside them
_ONE, _FIRST, _SECOND, _JOINT = 22, 17, 9, 6


class CellInput(Input):
    """The field of one value; typing into it is told, and so is the focus."""

    def __init__(self, cell: Cell) -> None:
        super().__init__(cell.value, compact=True, id=None)
        self.cell = cell
        self.shown = cell.value
        self.cursor_position = 0

    def on_blur(self) -> None:
        """Show the beginning again of what is too long."""
        self.cursor_position = 0

    def put(self, cell: Cell) -> None:
        """Show another value without telling that somebody typed it."""
        self.cell = cell
        if self.value != cell.value:
            self.shown = cell.value
            self.value = cell.value

    def offer(self, words: Sequence[str]) -> None:
        """Offer words to complete what is typed."""
        self.suggester = SuggestFromList(words, case_sensitive=False)

    def on_focus(self) -> None:
        """Say that somebody looks at this value."""
        self.post_message(Looked(self.cell))

    def on_input_changed(self, message: Input.Changed) -> None:
        """Say what was typed; what the program has put there itself was not typed."""
        message.stop()
        if message.value != self.shown:
            self.shown = message.value
            self.post_message(Edited(self.cell, message.value))

    def on_input_submitted(self, message: Input.Submitted) -> None:
        """Go on to the next field."""
        message.stop()
        self.screen.focus_next(CellInput)


class HeadRow(Widget):
    """A heading of the form."""

    def __init__(self, row: Row) -> None:
        super().__init__(classes="head")
        self.row = row
        self.problem = ""

    def say(self, problem: str) -> None:
        """Show a problem of the whole section."""
        if problem != self.problem:
            self.problem = problem
            lines = _wrapped(problem, max(20, (self.size.width or 58) - 2))
            self.styles.height = 1 + len(lines)
            self.refresh(layout=True)

    def render(self) -> Content:
        """Return the heading, and under it what is wrong."""
        width = self.content_size.width
        said = literal(self.row.head, "bold $primary")
        rule = Content.styled(" " + "─" * max(0, width - len(self.row.head) - 1), "$secondary 60%")
        lines = [Content.assemble(said, rule)]
        lines += [literal(f"! {t}", "bold $text-error") for t in _wrapped(self.problem, width - 2)]
        return Content("\n").join(lines)


class FieldRow(Widget):
    """A line with one or two values."""

    def __init__(self, row: Row) -> None:
        long = row.cells[0].field.kind in _LONG
        super().__init__(classes="pair" if len(row.cells) > 1 else "long" if long else "")
        self.row = row
        self.problem = ""
        self.note = ""
        self.note_is_default = False
        self.inputs = [CellInput(cell) for cell in row.cells]
        for second in self.inputs[1:]:
            second.add_class("second")

    def compose(self) -> ComposeResult:
        """Yield the fields."""
        yield from self.inputs

    @property
    def places(self) -> list[str]:
        """Places of its values."""
        return [cell.place for cell in self.row.cells]

    def put(self, row: Row) -> None:
        """Show other values in the same places."""
        self.row = row
        for field, cell in zip(self.inputs, row.cells, strict=True):
            field.put(cell)

    def say(self, notes: Mapping[str, Note], problem: str) -> None:
        """Show what is known of its values: the problem, the other unit, the library's default."""
        said, default = "", False
        for field in self.inputs:
            note = notes.get(field.cell.place)
            taken = note is not None and note.origin != "plan"
            field.placeholder = (
                (note.text if note and taken else "") or field.cell.field.default or ""
            )
            if note is None or field.has_class("-wrong"):
                continue
            if not field.value:
                default = default or taken
                said = said or (f"{note.origin}: {note.source}" if taken else "")
            elif note.other and len(self.inputs) == 1:
                said = f"= {note.other}"
        if (said, default, problem) != (self.note, self.note_is_default, self.problem):
            self.note, self.note_is_default, self.problem = said, default, problem
            self._fit()

    def _fit(self) -> None:
        lines = _wrapped(self.problem, max(20, (self.size.width or 58) - 4))
        self.set_class(bool(self.problem), "-wrong")
        self.styles.height = 1 + len(lines)
        self.refresh(layout=True)

    def on_resize(self, _: events.Resize) -> None:
        """Give a problem the lines that it needs at this width."""
        if self.problem and self.size.height != 1 + len(
            _wrapped(self.problem, max(20, self.size.width - 4))
        ):
            self._fit()

    def render(self) -> Content:
        """Return what stands beside and under the fields."""
        width = self.size.width
        cells = self.row.cells
        first = f"{cells[0].label:<{LABEL - 1}}"[: LABEL - 1]
        line = Content.styled(first + " ", "$foreground")
        used = LABEL
        if len(cells) > 1:
            gap = " " * _FIRST + f"{cells[1].label:^{_JOINT}}"
            line = Content.assemble(
                Content.styled(f"{cells[0].label:>{LABEL - 1}} "), gap, " " * _SECOND
            )
            used += _FIRST + _JOINT + _SECOND
        else:
            line = Content.assemble(line, " " * _ONE)
            used += _ONE
        note = " " + self.note
        room = width - used
        if room > 4 and self.note:
            cut = note if len(note) <= room else note[: room - 1] + "…"
            style = "$secondary italic" if self.note_is_default else "$secondary"
            line = Content.assemble(line, literal(cut, style))
        lines = [line]
        for text in _wrapped(self.problem, max(20, width - 4)):
            lines.append(Content.assemble("  ", literal(f"! {text}", "bold $text-error")))  # noqa: PERF401
        return Content("\n").join(lines)


def _wrapped(text: str, width: int) -> list[str]:
    return textwrap.wrap(text, max(10, width - 2)) if text else []
