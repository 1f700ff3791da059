"""A page to be read: help, cautions, explanations. Esc goes back."""

from collections.abc import Sequence
from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import VerticalScroll
from textual.content import Content
from textual.screen import Screen
from textual.widgets import Footer, Static

from digestplan.app.text import literal


class Reading(Screen[None]):
    """A page with a heading."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape,q", "dismiss", "Back", key_display="Esc")
    ]

    def __init__(self, heading: str, parts: Sequence[Content]) -> None:
        super().__init__()
        self._heading, self._parts = heading, parts

    def compose(self) -> ComposeResult:
        """Yield the heading and the parts."""
        yield Static(literal(f" {self._heading}"), classes="title")
        with VerticalScroll(classes="page") as page:
            for part in self._parts:
                yield Static(part, classes="part")
        page.focus()
        yield Footer()
