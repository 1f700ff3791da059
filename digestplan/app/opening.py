"""Opening, saving and leaving, with the questions that belong to them."""

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any

from digestplan.app import remembered, text
from digestplan.app.form import START
from digestplan.app.recovery import Kept, Recovery
from digestplan.app.screens.ask import Ask, AskName
from digestplan.app.session import DiskState, Session
from digestplan.problems import InputError

if TYPE_CHECKING:
    from digestplan.app.screens.plan import PlanScreen

_SAVE_FIRST = (("save", "Save it"), ("drop", "Go on without saving"), ("", "Stay here"))


class Opening:
    """What the app does with files; mixed into it."""

    session: Session
    recovery: Recovery
    disk: DiskState
    fresh: bool  # whether the first answer to a plan that was opened is still to come
    plan_screen: "PlanScreen"
    push_screen: Any
    exit: Any
    ask: Callable[[], None]
    tell: Callable[..., None]
    call_after_refresh: Any

    def opened(self, *, first: bool = False) -> None:
        """Show the session that was just opened, and ask for its forecast."""
        self.disk = self.session.state_on_disk()
        screen = self.plan_screen
        screen.answer, screen.notes = None, {}
        self.fresh = self.session.path is not None
        if not first:
            screen.show_plan(START)
        self.ask()
        path = self.session.path
        if path is None:
            return
        remembered.keep_recent(path)
        kept = [k for k in self.recovery.found(path) if k.text != self.session.text]
        if kept:
            self._offer(kept[0])

    def _offer(self, kept: Kept) -> None:
        when = kept.when.isoformat(" ", "minutes")
        answers = (
            ("take", "Take it (undo brings the file's text back)"),
            ("drop", "Throw it away"),
            ("", "Decide later"),
        )

        def decided(answer: str | None) -> None:
            if answer == "take":
                self.session.replace(kept.text)
                self.plan_screen.show_plan(START)
                self.ask()
            if answer in {"take", "drop"}:
                kept.file.unlink(missing_ok=True)

        self.push_screen(Ask(text.KEPT.format(when=when), answers), decided)

    def open_session(self, session: Session) -> None:
        """Open another plan; unsaved work is asked about first."""

        def go_on() -> None:
            self.recovery.forget()
            self.session = session
            self.opened()

        self.settle(go_on)

    def open_file(self, path: Path) -> None:
        """Open a plan's file, or say why it cannot be opened."""
        try:
            session = Session.opened(path)
        except InputError as error:
            self.tell(str(error), wrong=True)
            return
        self.open_session(session)

    def settle(self, go_on: Callable[[], None]) -> None:
        """Go on at once where nothing is unsaved; else ask."""
        if not self.session.dirty or (self.session.path is None and not self.session.can_undo):
            go_on()
            return

        def decided(answer: str | None) -> None:
            if answer == "drop":
                go_on()
            elif answer == "save":
                self.save(go_on)

        self.push_screen(Ask(text.UNSAVED, _SAVE_FIRST), decided)

    def save(self, then: Callable[[], None] | None = None, path: Path | None = None) -> None:
        """Save the plan; ask for a name, or what to do with a file that has changed."""
        if path is None and self.session.path is None:
            self._ask_name(then)
            return
        try:
            self.session.save(path)
        except InputError as error:
            if self.session.state_on_disk() == "changed" or (path is not None and path.exists()):
                self._ask_overwrite(then, path)
            else:
                self.tell(str(error), wrong=True)
            return
        self._saved(then)

    def _saved(self, then: Callable[[], None] | None) -> None:
        self.recovery.forget()
        self.disk = self.session.state_on_disk()
        assert self.session.path is not None
        remembered.keep_recent(self.session.path)
        self.plan_screen.show_head()
        self.tell(f"Saved to {self.session.path}.")
        if then is not None:
            then()

    def _ask_name(self, then: Callable[[], None] | None) -> None:
        def named(name: str | None) -> None:
            if name:
                file = Path(name).expanduser()
                self.save(then, file if file.suffix else file.with_suffix(".toml"))

        here = self.session.path or Path.cwd() / "plan.toml"
        self.push_screen(AskName(text.SAVE_AS, str(here)), named)

    def _ask_overwrite(self, then: Callable[[], None] | None, path: Path | None) -> None:
        own = path in {None, self.session.path}
        answers = [("other", "Save under another name"), ("over", "Write over it")]
        if own:
            answers.append(("reload", "Read the file again (undo brings this text back)"))
        answers.append(("", "Stay here"))

        def decided(answer: str | None) -> None:
            if answer == "other":
                self._ask_name(then)
            elif answer == "over":
                self._overwrite(then, path)
            elif answer == "reload":
                self._reload()

        self.push_screen(Ask(text.CHANGED if own else text.EXISTS, answers), decided)

    def _overwrite(self, then: Callable[[], None] | None, path: Path | None) -> None:
        try:
            self.session.save(path, overwrite=True)
        except InputError as error:
            self.tell(str(error), wrong=True)
            return
        self._saved(then)

    def _reload(self) -> None:
        try:
            self.session.reload()
        except InputError as error:
            self.tell(str(error), wrong=True)
            return
        self.disk = self.session.state_on_disk()
        self.plan_screen.show_plan(START)
        self.ask()

    def action_leave(self) -> None:
        """Leave; unsaved work is asked about."""

        def go() -> None:
            self.recovery.forget()
            self.exit()

        self.settle(go)
