"""Choosing a plan: by its file, among the last ones, the demo, or a new one from a protocol."""

from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.screen import Screen
from textual.widgets import Footer, Input, OptionList, Static
from textual.widgets.option_list import Option

from digestplan.app import remembered, text
from digestplan.app.new_plan import demo_plans, new_plan, protocols
from digestplan.app.recovery import Kept
from digestplan.app.session import Session
from digestplan.problems import InputError

if TYPE_CHECKING:
    from digestplan.app.main import DigestplanApp

Choice = Path | Kept | tuple[str, str]


class PlansScreen(Screen[None]):
    """A field for a file's name, and a list."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape", "dismiss", "Back", key_display="Esc"),
        Binding("down", "list", "To the list", key_display="↓"),
        Binding("f10", "app.leave", "Leave", key_display="F10"),
    ]
    app: "DigestplanApp"

    def __init__(self) -> None:
        super().__init__()
        self._choices: dict[str, Choice] = {}

    def compose(self) -> ComposeResult:
        """Yield the field and the list."""
        yield Static(text.literal(" Plans"), classes="title")
        yield Input(
            placeholder="name of a plan's file, then Enter; ↓ goes to the list",
            id="path",
            compact=True,
        )
        yield OptionList(id="plans")
        yield Footer()

    def on_mount(self) -> None:
        """Fill the list."""
        shown = self.query_one(OptionList)
        for heading, choices in self._groups():
            if choices:
                shown.add_option(Option(text.literal(heading, "bold $primary"), disabled=True))
            for choice, words in choices:
                key = f"choice-{len(self._choices)}"
                self._choices[key] = choice
                shown.add_option(Option(text.literal(f"  {words}"), id=key))
        shown.focus()
        shown.action_first()

    def _groups(self) -> list[tuple[str, list[tuple[Choice, str]]]]:
        kept = [(k, _kept_words(k)) for k in self.app.recovery.found()]
        recent = [(p, f"{p.name}  ({p.parent})") for p in remembered.recent()]
        here = [
            (p, p.name)
            for p in sorted(Path.cwd().glob("*.toml"))[:50]
            if p.name != "pyproject.toml"
        ]
        demo = [(p, p.stem.replace("-", " ")) for p in demo_plans()]
        new = [((e, m), f"{m} with {e}") for e, m in protocols()]
        return [
            ("Unsaved work that was kept", list(kept)),
            ("Opened last", list(recent)),
            ("In this folder", list(here)),
            ("Demo plans (invented; opened as copies)", list(demo)),
            ("New, from a protocol of the library", list(new)),
        ]

    def action_list(self) -> None:
        """Go to the list."""
        self.query_one(OptionList).focus()

    def on_input_submitted(self, message: Input.Submitted) -> None:
        """Open the file that was named."""
        name = message.value.strip()
        if name:
            self._open_file(Path(name).expanduser())

    def on_option_list_option_selected(self, message: OptionList.OptionSelected) -> None:
        """Open what was chosen."""
        choice = self._choices.get(message.option.id or "")
        if isinstance(choice, tuple):
            now = datetime.now()  # noqa: DTZ005 - local wall clock
            self._open(Session(new_plan(*choice, now)))
        elif isinstance(choice, Kept):
            self._open_kept(choice)
        elif choice is not None and choice in demo_plans():
            self._open(Session(choice.read_text("utf-8")))
        elif choice is not None:
            self._open_file(choice)

    def _open_file(self, path: Path) -> None:
        try:
            session = Session.opened(path)
        except InputError as error:
            self.app.tell(str(error), wrong=True)
            return
        self._open(session)

    def _open_kept(self, kept: Kept) -> None:
        if kept.path is not None and kept.path.is_file():
            self._open_file(kept.path)  # there it is asked whether the kept text is wanted
            return
        kept.file.unlink(missing_ok=True)
        session = Session(kept.text, kept.path)
        self._open(session)

    def _open(self, session: Session) -> None:
        self.dismiss()
        self.app.open_session(session)


def _kept_words(kept: Kept) -> str:
    name = kept.path.name if kept.path is not None else "a plan that was never saved"
    return f"{name}, {kept.when.isoformat(' ', 'minutes')}"
