"""The plan at several temperatures, side by side; Enter makes one of them the plan."""

from typing import TYPE_CHECKING, ClassVar

from textual import work
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.screen import Screen
from textual.widgets import Footer, Input, OptionList, Static
from textual.widgets.option_list import Option

from digestplan.app import text
from digestplan.app.options import Compared, as_edits, compared
from digestplan.app.widgets.chance_curve import ChanceCurve
from digestplan.plan.model import Plan
from digestplan.problems import InputError

if TYPE_CHECKING:
    from digestplan.app.main import DigestplanApp

_AT = "4, 20, 30, 37, 45, 56"


class TemperaturesScreen(Screen[None]):
    """A line an option, and the curve of chance and time over temperature."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape", "dismiss", "Back", key_display="Esc"),
        Binding("enter", "take", "Make it the plan"),
        Binding("tab", "app.focus_next", "Temperatures / options"),
    ]
    app: "DigestplanApp"

    def __init__(self, plan: Plan) -> None:
        super().__init__()
        self._plan = plan
        self._compared: Compared | None = None

    def compose(self) -> ComposeResult:
        """Yield the field, the options and the curve."""
        yield Static(text.literal(" Temperatures: the same plan at each"), classes="title")
        yield Input(_AT, id="at", select_on_focus=False, compact=True)
        yield Static("", id="columns")
        yield OptionList(id="options")
        yield Static(text.LOADING, id="best")
        yield ChanceCurve(id="curve")
        yield Footer()

    def on_mount(self) -> None:
        """Compare."""
        self.query_one(OptionList).focus()
        self.compare(_AT)

    def on_input_submitted(self, message: Input.Submitted) -> None:
        """Compare at other temperatures."""
        self.query_one("#best", Static).update(text.LOADING)
        self.compare(message.value)
        self.query_one(OptionList).focus()

    @work(thread=True, exclusive=True, exit_on_error=False)
    def compare(self, at: str) -> None:
        """Compare in a thread."""
        try:
            found: Compared | str = compared(self._plan, at, self.app.draws)
        except InputError as error:
            found = str(error)
        except Exception as error:  # noqa: BLE001 - told on the screen
            found = f"The comparison failed ({type(error).__name__}: {error})."
        self.app.call_from_thread(self._show, found)

    def _show(self, found: "Compared | str") -> None:
        if not self.is_attached:
            return
        if isinstance(found, str):
            self.query_one("#best", Static).update(text.literal(f"! {found}", "bold $text-error"))
            return
        self._compared = found
        shown = self.query_one(OptionList)
        shown.clear_options()
        self.query_one("#columns", Static).update(text.literal(found.columns, "bold"))
        for line in found.lines:
            shown.add_option(Option(text.literal(line)))
        shown.action_first()
        self.query_one("#best", Static).update(text.literal(found.best))
        self.query_one(ChanceCurve).show(found.curve)

    def on_option_list_option_selected(self, message: OptionList.OptionSelected) -> None:
        """Make an option the plan; it can be undone."""
        if self._compared is None:
            return
        try:
            self.app.session.edit_all(as_edits(self._compared, message.option_index))
        except InputError as error:
            self.app.tell(str(error), wrong=True)
            return
        self.dismiss()
        self.app.plan_screen.show_plan()
        self.app.ask()
        self.app.tell("The plan is set to that temperature; ^Z takes it back.")
