"""Keys that open the other views from the plan's screen."""

from typing import TYPE_CHECKING

from digestplan.app import pages, text
from digestplan.app.answer import Answer
from digestplan.app.form import Cell
from digestplan.app.screens.reading import Reading

if TYPE_CHECKING:
    from digestplan.app.main import DigestplanApp


class Views:
    """Actions that push screens; mixed into the plan's screen."""

    app: "DigestplanApp"
    cell: Cell | None
    answer: Answer | None

    def action_help(self) -> None:
        """Say what the field in focus means, and what every key does."""
        notes = (self.answer.notes if self.answer else None) or {}
        note = notes.get(self.cell.place) if self.cell else None
        self.app.push_screen(Reading("Help", pages.help_page(self.cell, note)))

    def action_save(self) -> None:
        """Save the plan."""
        self.app.save()

    def action_plans(self) -> None:
        """Choose a plan."""
        from digestplan.app.screens.plans import PlansScreen

        self.app.push_screen(PlansScreen())

    def action_text(self) -> None:
        """Edit the plan as text."""
        from digestplan.app.screens.text_view import TextScreen

        self.app.push_screen(TextScreen())

    def action_cautions(self) -> None:
        """Read all cautions."""
        if self._has_forecast():
            assert self.answer is not None
            self.app.push_screen(Reading("Cautions", pages.cautions_page(self.answer.cautions)))

    def action_temperatures(self) -> None:
        """Compare temperatures."""
        from digestplan.app.screens.temperatures import TemperaturesScreen

        if self._has_forecast():
            assert self.answer is not None
            assert self.answer.plan is not None
            if not any(step.do == "digest" for step in self.answer.plan.steps):
                self.app.tell("There is no digest step whose temperature could be compared.")
                return
            self.app.push_screen(TemperaturesScreen(self.answer.plan))

    def action_sheet(self) -> None:
        """Look at the bench sheet."""
        from digestplan.app.screens.sheet import SheetScreen

        if self._has_forecast():
            assert self.answer is not None
            assert self.answer.plan is not None
            self.app.push_screen(SheetScreen(self.answer.plan))

    def _has_forecast(self) -> bool:
        """Whether the plan as it stands has a forecast; if not, that is said."""
        answer = self.answer
        if answer is None or answer.text != self.app.session.text:
            self.app.tell(text.LOADING)
            return False
        if answer.plan is None:
            self.app.tell("Mend what is wrong with the plan first; F4 lists it.", wrong=True)
            return False
        return True
