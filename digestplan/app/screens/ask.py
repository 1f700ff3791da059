"""Questions: one of a few answers, or a name for a file. Esc answers nothing."""

from collections.abc import Sequence
from typing import ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Vertical
from textual.screen import ModalScreen
from textual.widgets import Input, OptionList, Static
from textual.widgets.option_list import Option

from digestplan.app.text import literal


class Ask(ModalScreen[str]):
    """A question with its answers, each an id and words."""

    BINDINGS: ClassVar[list[BindingType]] = [Binding("escape", "dismiss('')", "Back")]

    def __init__(self, question: str, answers: Sequence[tuple[str, str]]) -> None:
        super().__init__()
        self._question, self._answers = question, answers

    def compose(self) -> ComposeResult:
        """Yield the question and its answers."""
        with Vertical(classes="dialog"):
            yield Static(literal(self._question), classes="question")
            yield OptionList(*(Option(literal(words), id=key) for key, words in self._answers))
            yield Static(literal("Enter takes one, Esc goes back"), classes="hint")

    def on_option_list_option_selected(self, message: OptionList.OptionSelected) -> None:
        """Give the answer."""
        self.dismiss(message.option.id or "")


class AskName(ModalScreen[str]):
    """Asks for the name of a file."""

    BINDINGS: ClassVar[list[BindingType]] = [Binding("escape", "dismiss('')", "Back")]

    def __init__(self, question: str, name: str = "") -> None:
        super().__init__()
        self._question, self._proposed = question, name

    def compose(self) -> ComposeResult:
        """Yield the question and a field."""
        with Vertical(classes="dialog"):
            yield Static(literal(self._question), classes="question")
            yield Input(self._proposed, select_on_focus=False, compact=True)
            yield Static(literal("Enter takes it, Esc goes back"), classes="hint")

    def on_input_submitted(self, message: Input.Submitted) -> None:
        """Give the name."""
        self.dismiss(message.value.strip())
