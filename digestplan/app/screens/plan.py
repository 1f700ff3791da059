"""The plan beside its answer: what people have open all day."""

from collections.abc import Mapping
from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.binding import BindingType
from textual.containers import Horizontal, Vertical
from textual.content import Content
from textual.screen import Screen
from textual.widgets import Footer, Static

from digestplan.app import lines, text
from digestplan.app.answer import Answer, Note
from digestplan.app.form import Cell, rows_of, written_for
from digestplan.app.keys import bindings
from digestplan.app.messages import Edited, Looked
from digestplan.app.pages import about
from digestplan.app.screens.editing import Editing
from digestplan.app.screens.views import Views
from digestplan.app.widgets.band_plot import BandPlot
from digestplan.app.widgets.form import Form
from digestplan.app.widgets.night_strip import NightStrip
from digestplan.problems import InputError, Problem

if TYPE_CHECKING:
    from digestplan.app.main import DigestplanApp


class PlanScreen(Editing, Views, Screen[None]):
    """The form, the forecast, the night strip, and what is to be said."""

    BINDINGS: ClassVar[list[BindingType]] = [*bindings()]
    app: "DigestplanApp"

    def __init__(self) -> None:
        super().__init__(id="plan")
        self.full = False
        self.zoomed = False
        self.cell: Cell | None = None
        self.notes: Mapping[str, Note] = {}
        self.answer: Answer | None = None
        self.refused: Problem | None = None  # an edit that fits nowhere

    def compose(self) -> ComposeResult:
        """Yield the parts; the form is empty until the first frame stands."""
        yield Static(text.TOO_SMALL, id="small")
        yield Static("", id="head", classes="title")
        with Horizontal(id="main"):
            with Vertical(id="left"):
                yield Form()
                yield Static("", id="about")
            with Vertical(id="right"):
                yield Static("", id="stop")
                yield BandPlot(id="plot")
                yield NightStrip(id="night")
                yield Static(text.LOADING, id="verdict")
                yield Static("", id="said")
        yield Footer()

    def on_mount(self) -> None:
        """Name the plan."""
        self.show_head()

    # --- what is shown

    def show_plan(self, place: str | None = None) -> None:
        """Show the session's plan; with a place, put the focus there."""
        form = self.query_one(Form)
        form.show(rows_of(self.session.tables, full=self.full))
        form.say(self.notes, self.answer.problems if self.answer else ())
        self.show_head()
        if place is not None:
            self.call_after_refresh(self._focus_place, place)

    def _focus_place(self, place: str) -> None:
        form = self.query_one(Form)
        field = form.field_at(place) or form.field_at("title")
        if field is not None:
            field.focus()

    def show_head(self, state: str = "") -> None:
        """Show title, file and state in the line at the top."""
        self.query_one("#head", Static).update(lines.head(self.session, self.app.disk, state))

    def take_answer(self, answer: Answer, *, rough: bool) -> None:
        """Show what the newest text answers."""
        self.answer = answer
        form = self.query_one(Form)
        if answer.picture is not None:
            self.notes = answer.notes or {}
            self._show_picture(answer)
        if answer.text == self.session.text:
            found = list(answer.problems)
            form.say(self.notes, [self.refused, *found] if self.refused else found)
        wrong = bool(answer.problems or answer.fault)
        self.query_one("#right").set_class(wrong, "-stale")
        self.query_one("#verdict", Static).update(lines.verdict(answer))
        self.query_one("#said", Static).update(lines.said(answer))
        stop = lines.stop(answer)
        self.query_one("#stop", Static).update(stop)
        self.query_one("#stop").set_class(bool(stop.plain), "-shown")
        self.show_head(text.ROUGH if rough else "")
        if self.cell is not None:
            self._show_about(self.cell)

    def _show_picture(self, answer: Answer) -> None:
        assert answer.picture is not None
        span = answer.picture.digests if self.zoomed else None
        self.query_one(BandPlot).show(answer.picture, span)
        self.query_one(NightStrip).show(answer.picture, span)

    def on_looked(self, message: Looked) -> None:
        """Say what the field in focus means."""
        self.session.pause()
        self.cell = message.cell
        self._show_about(message.cell)

    def _show_about(self, cell: Cell) -> None:
        first, *rest = about(cell, self.notes.get(cell.place))
        told = [*rest[-1:], *rest[:-1]]
        self.query_one("#about", Static).update(Content("\n").join([first, *told]))

    # --- what is typed

    def on_edited(self, message: Edited) -> None:
        """Write what was typed into the plan, and ask for the forecast."""
        cell = message.cell
        try:
            self.session.edit(cell.place, written_for(cell, message.typed))
            self.refused = None
        except InputError as error:
            self.refused = Problem(cell.place, error.problems[0].message)
        self.app.ask()
        self.show_head(text.LOADING)

    # --- keys

    def action_full(self) -> None:
        """Show every field, or the usual ones."""
        self.full = not self.full
        self.show_plan(self.cell.place if self.cell else None)

    def action_flip(self) -> None:
        """Change between plan and forecast on a narrow screen; zoom on a wide one."""
        if self.app.has_class("-narrow") or self.has_class("-narrow"):
            self.toggle_class("-forecast")
        else:
            self.action_zoom()

    def action_zoom(self) -> None:
        """Show the digestion alone, or the whole plan."""
        self.zoomed = not self.zoomed
        if self.answer is not None and self.answer.picture is not None:
            self._show_picture(self.answer)

    def action_section(self, by: int) -> None:
        """Go to another part of the plan."""
        self.query_one(Form).go_to_section(by)
