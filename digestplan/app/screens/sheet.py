"""The bench sheet: looked at, and written to a file."""

from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, ClassVar

from textual import work
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import VerticalScroll
from textual.screen import Screen
from textual.widgets import Footer, Static

from digestplan.app import text
from digestplan.app.screens.ask import AskName
from digestplan.plan.model import Plan
from digestplan.problems import InputError

if TYPE_CHECKING:
    from digestplan.app.main import DigestplanApp
    from digestplan.report.sheet.model import Sheet


class SheetScreen(Screen[None]):
    """The sheet as Markdown text; F2 writes it as .pdf, .html, .md, or its times as .ics."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("escape,q", "dismiss", "Back", key_display="Esc"),
        Binding("f2", "write", "Write to a file", key_display="F2"),
    ]
    app: "DigestplanApp"

    def __init__(self, plan: Plan) -> None:
        super().__init__()
        self._plan = plan
        self._sheet: Sheet | None = None

    def compose(self) -> ComposeResult:
        """Yield the page."""
        yield Static(text.literal(" Bench sheet"), classes="title")
        with VerticalScroll(classes="page") as page:
            yield Static(text.literal(text.LOADING), id="page")
        page.focus()
        yield Footer()

    def on_mount(self) -> None:
        """Make the sheet in a thread."""
        self.make()

    @work(thread=True, exit_on_error=False)
    def make(self) -> None:
        """Make the sheet and show it."""
        try:
            from digestplan.report.sheet.as_markdown import markdown
            from digestplan.report.sheet.build import bench_sheet

            sheet = bench_sheet(self._plan, self.app.draws)
            shown = markdown(sheet)
        except Exception as error:  # noqa: BLE001 - told on the screen
            sheet, shown = None, f"The sheet cannot be made: {error}"
        self.app.call_from_thread(self._show, sheet, shown)

    def _show(self, sheet: "Sheet | None", shown: str) -> None:
        self._sheet = sheet
        if self.is_attached:
            self.query_one("#page", Static).update(text.literal(shown))

    def action_write(self) -> None:
        """Ask for a name and write the sheet."""
        if self._sheet is None:
            self.app.tell(text.LOADING)
            return
        path = self.app.session.path
        name = str((path or Path.cwd() / "plan.toml").with_suffix(".html"))
        question = "Write the sheet to (.html, .pdf, .md; or .ics for the times alone)"
        self.app.push_screen(AskName(question, name), self._named)

    def _named(self, name: str | None) -> None:
        if not name or self._sheet is None:
            return
        target = Path(name).expanduser()
        make = _WRITERS.get(target.suffix.lower())
        if make is None:
            self.app.tell(
                f"A sheet is written as {', '.join(_WRITERS)}; end its name so.", wrong=True
            )
            return
        try:
            from digestplan.report.sheet.save import save

            save(target, make(self._sheet))
        except ModuleNotFoundError:
            self.app.tell("A PDF needs reportlab; .html and .md need nothing.", wrong=True)
        except InputError as error:
            self.app.tell(str(error), wrong=True)
        else:
            self.app.tell(f"Written to {target}.")


def _html(sheet: "Sheet") -> bytes:
    from digestplan.report.sheet.as_html import html

    return html(sheet).encode("utf-8")


def _markdown(sheet: "Sheet") -> bytes:
    from digestplan.report.sheet.as_markdown import markdown

    return markdown(sheet).encode("utf-8")


def _pdf(sheet: "Sheet") -> bytes:
    from digestplan.report.sheet.as_pdf import pdf

    return pdf(sheet)


def _calendar(sheet: "Sheet") -> bytes:
    from digestplan.report.sheet.calendar import calendar

    return calendar(sheet, datetime.now(UTC).replace(microsecond=0))


_WRITERS: dict[str, Callable[["Sheet"], bytes]] = {
    ".html": _html,
    ".pdf": _pdf,
    ".md": _markdown,
    ".ics": _calendar,
}
