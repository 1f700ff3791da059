"""The app: one session, one worker, and the screens over them; it knows no science."""

from collections import deque
from collections.abc import Iterator, Sequence
from math import inf
from pathlib import Path
from time import perf_counter
from typing import ClassVar

from textual import work
from textual.app import App
from textual.binding import Binding, BindingType
from textual.filter import LineFilter
from textual.message import Message

from digestplan.app import remembered, text, themes
from digestplan.app.answer import ROUGH_DRAWS, Answer
from digestplan.app.commands import Commands
from digestplan.app.form import START
from digestplan.app.messages import Answered
from digestplan.app.opening import Opening
from digestplan.app.plain_glyphs import PlainGlyphs
from digestplan.app.recovery import Recovery
from digestplan.app.screens.plan import PlanScreen
from digestplan.app.session import DiskState, Session
from digestplan.app.terminal import Level, Look, glyph_level, no_color
from digestplan.app.widgets.canvas import Drawn
from digestplan.app.widgets.form import Form
from digestplan.app.worker import Finished, LatestWins
from digestplan.problems import InputError

_SLOW = 0.3  # [s] from which on a rough estimate comes first
_KEEP_EVERY = 1.0  # [s]


class DigestplanApp(Opening, App[None]):
    """
    The terminal app.

    Parameters
    ----------
    session
        The plan to begin with; None for a choice of plans.
    register
        Path or URL of the lot register; None for the user's own.
    draws
        How many draws a forecast takes.
    """

    CSS_PATH = "digestplan.tcss"
    TITLE = "digestplan"
    COMMANDS: ClassVar = {Commands}
    HORIZONTAL_BREAKPOINTS = [(0, "-tiny"), (60, "-narrow"), (100, "-wide")]  # noqa: RUF012
    VERTICAL_BREAKPOINTS = [(0, "-flat"), (20, "-low"), (34, "-tall")]  # noqa: RUF012
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("ctrl+q", "leave", "Leave", show=False, priority=True),
        Binding("f10", "leave", "Leave", show=False),
        Binding("ctrl+c", "tell_leave", "Leave", show=False, system=True),
    ]

    def __init__(
        self, session: Session | None = None, register: str | None = None, draws: int = 2000
    ) -> None:
        super().__init__(ansi_color=True if no_color() else None)
        self._chosen = session is not None
        self.session = session or Session('digestplan = 1\ntitle = "New plan"\n')
        self.register, self.draws = register, draws
        self.level: Level = glyph_level()
        self.recovery = Recovery()
        self.disk: DiskState = "unsaved"
        self.answer: Answer | None = None
        self.fresh = False
        self.delays: deque[float] = deque(maxlen=2000)  # [s] from an edit to its redrawn answer
        self._asked: dict[str, float] = {}
        self._cost = inf  # [s] of the last full forecast
        self._plain = PlainGlyphs()
        self._asker = LatestWins(self, self._answers)
        for theme in themes.OWN:
            self.register_theme(theme)
        kept = remembered.theme()
        self.theme = "ansi-dark" if no_color() else kept if kept in themes.NAMES else "bench-dark"

    @property
    def look(self) -> Look:
        """How widgets are to draw on this terminal."""
        poor = self.console.color_system in {None, "standard", "windows"}
        return Look(self.level, pattern=poor or self.no_color or self.native_ansi_color)

    def get_line_filters(self) -> Sequence[LineFilter]:
        """Return what every line goes through; in an ASCII terminal, all glyphs."""
        filters = super().get_line_filters()
        return [*filters, self._plain] if self.level == "ascii" else filters

    def get_theme_variable_defaults(self) -> dict[str, str]:
        """Return the colours of the drawings for themes that have none of their own."""
        own = themes.DARK if self.current_theme.dark else themes.LIGHT
        return {k: v for k, v in own.variables.items() if k.startswith(("ink-", "ground-"))}

    def on_mount(self) -> None:
        """Show the plan's screen."""
        self.plan_screen = PlanScreen()
        self.push_screen(self.plan_screen)

    def on_ready(self) -> None:
        """Fill the form and load what is heavy, now that the first frame stands."""
        self.plan_screen.show_plan(START)
        self.warm_up()
        self.set_interval(_KEEP_EVERY, self._keep)
        self.theme_changed_signal.subscribe(self, lambda theme: remembered.keep_theme(theme.name))
        self.call_after_refresh(self.opened, first=True)
        if not self._chosen:
            self.call_after_refresh(self.plan_screen.action_plans)

    @work(thread=True, group="warm", exit_on_error=False)
    def warm_up(self) -> None:
        """Import in a thread what the first forecast needs, and look words up for the fields."""
        from digestplan import library

        words = {
            "material": library.keys("material"),
            "lot.enzyme": library.keys("enzyme"),
            "buffer": library.keys("buffer"),
            "reagent": library.keys("reagent"),
        }
        self.call_later(lambda: self.plan_screen.query_one(Form).offer(words))

    # --- asking and answering

    def ask(self) -> None:
        """Ask for the forecast of the plan as it stands."""
        self._asked.setdefault(self.session.text, perf_counter())
        self._asker.request(self.session.text)

    def _answers(self, asked: str) -> Iterator[Message]:
        """Answer in a thread: a rough estimate first where the fine one takes long."""
        if self._cost > _SLOW:
            yield Answered(self._answer(asked, ROUGH_DRAWS), rough=True)
        begun = perf_counter()
        yield Answered(self._answer(asked, self.draws))
        self._cost = perf_counter() - begun

    def _answer(self, asked: str, draws: int) -> Answer:
        from digestplan.app.answer import answer_to

        try:
            return answer_to(asked, self.session.name, draws, self.register)
        except Exception as error:  # noqa: BLE001 - the screen must tell it, not die of it
            return Answer(asked, fault=f"The forecast failed ({type(error).__name__}: {error}).")

    def on_finished(self, message: Finished) -> None:
        """Let the worker go on."""
        message.worker.finished()

    def on_answered(self, message: Answered) -> None:
        """Hand an answer to every screen that wants it."""
        self.answer = message.answer
        for screen in self.screen_stack:
            take = getattr(screen, "take_answer", None)
            if take is not None:
                take(message.answer, rough=message.rough)
        if self.fresh and message.answer.problems and self.screen is self.plan_screen:
            self.plan_screen.action_text()
        self.fresh = False
        asked = self._asked.pop(message.answer.text, None)
        if asked is not None and not message.rough:
            self._asked.clear()
            self.call_after_refresh(lambda: self.delays.append(perf_counter() - asked))

    # --- keeping

    def _keep(self) -> None:
        """Keep unsaved work aside, and look whether somebody else has changed the file."""
        try:
            self.recovery.keep(self.session)
        except InputError as error:
            self.tell(str(error), wrong=True)
        disk = self.session.state_on_disk()
        if disk != self.disk:
            self.disk = disk
            self.plan_screen.show_head()

    def redraw_all(self) -> None:
        """Draw everything anew, with other glyphs or colours."""
        for screen in self.screen_stack:
            for drawn in screen.query(Drawn):
                drawn.redraw()

    def tell(self, told: str, *, wrong: bool = False) -> None:
        """Say something in passing, letter for letter."""
        self.notify(told, markup=False, severity="error" if wrong else "information", timeout=6)

    def action_tell_leave(self) -> None:
        """Say how to leave."""
        self.tell("F10 leaves; nothing is lost without being asked about.")


def run(session: Session | None, register: str | None = None, draws: int = 2000) -> None:
    """Open the app and stay in it until somebody leaves."""
    DigestplanApp(session, register, draws).run()


def open_path(path: str, register: str | None = None, draws: int = 2000) -> None:
    """Open the app on a plan's file; an `InputError` says why it cannot be read."""
    run(Session.opened(Path(path)), register, draws)


__all__ = ["DigestplanApp", "open_path", "run", "text"]
