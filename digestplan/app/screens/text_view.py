"""The plan as text, with what is wrong beside it: where bad files are mended."""

from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal
from textual.screen import Screen
from textual.widgets import Footer, OptionList, Static, TextArea
from textual.widgets.option_list import Option

from digestplan.app import text
from digestplan.app.answer import Answer
from digestplan.app.form import START

if TYPE_CHECKING:
    from digestplan.app.main import DigestplanApp


class TextScreen(Screen[None]):
    """The text on one side, the problems by place on the other."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape", "back", "Back to the form", key_display="Esc", priority=True),
        Binding("f2", "save", "Save", key_display="F2"),
        Binding("f3", "plans", "Plans", key_display="F3"),
        Binding("f6", "other", "Text / problems", key_display="F6", priority=True),
        Binding("f10", "app.leave", "Leave", key_display="F10"),
    ]
    app: "DigestplanApp"

    def compose(self) -> ComposeResult:
        """Yield the text and the list."""
        yield Static(text.literal(f" Plan as text: {self.app.session.name}"), classes="title")
        with Horizontal(id="mend"):
            yield TextArea(
                self.app.session.text, show_line_numbers=True, tab_behavior="focus", id="source"
            )
            yield OptionList(id="problems")
        yield Static("", id="problem")
        yield Footer()

    def on_mount(self) -> None:
        """List what is known to be wrong."""
        self.query_one(TextArea).focus()
        if self.app.answer is not None:
            self.take_answer(self.app.answer, rough=False)

    def on_text_area_changed(self, message: TextArea.Changed) -> None:
        """Take the text over and ask."""
        if message.text_area.text != self.app.session.text:
            self.app.session.replace(message.text_area.text, "the text")
            self.app.ask()

    def take_answer(self, answer: Answer, *, rough: bool) -> None:
        """List what is wrong with the newest text."""
        if rough or answer.text != self.app.session.text:
            return
        shown = self.query_one(OptionList)
        shown.clear_options()
        for problem in answer.problems:
            line = f"line {problem.line}: " if problem.line else ""
            where = f"{problem.place}: " if problem.place else ""
            shown.add_option(Option(text.literal(f"{line}{where}{problem.message}")))
        self._lines = [problem.line for problem in answer.problems]
        n = len(answer.problems)
        wrong = "1 thing is wrong" if n == 1 else f"{n} things are wrong"
        told = f"! {wrong}; F6 goes to the list, Enter to the line" if n else text.NOTHING_WRONG
        self.query_one("#problem", Static).update(text.literal(answer.fault or told, "bold"))

    def on_option_list_option_selected(self, message: OptionList.OptionSelected) -> None:
        """Go to the line of a problem."""
        line = self._lines[message.option_index]
        area = self.query_one(TextArea)
        area.move_cursor(((line or 1) - 1, 0), center=True)
        area.focus()

    def action_other(self) -> None:
        """Change between the text and its problems."""
        listed, area = self.query_one(OptionList), self.query_one(TextArea)
        (listed if area.has_focus else area).focus()

    def action_save(self) -> None:
        """Save the plan as it stands, wrong or not."""
        self.app.save()

    def action_plans(self) -> None:
        """Choose another plan."""
        self.dismiss()
        self.app.plan_screen.action_plans()

    def action_back(self) -> None:
        """Go back to the form, where the text can be read as one."""
        if not self.app.session.readable:
            self.app.tell(text.BROKEN, wrong=True)
            return
        self.app.session.pause()
        self.app.plan_screen.show_plan(START)
        self.dismiss()
