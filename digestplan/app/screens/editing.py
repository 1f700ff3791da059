"""What the keys of the plan's screen do to the plan: undo, and lines added, copied, moved."""

import re
from collections.abc import Mapping
from datetime import datetime, timedelta
from typing import TYPE_CHECKING, Any

from digestplan.app import text
from digestplan.app.form import Cell
from digestplan.app.screens.ask import Ask
from digestplan.plan.field import STEPS
from digestplan.problems import InputError

if TYPE_CHECKING:
    from digestplan.app.main import DigestplanApp
    from digestplan.app.session import Session

_STEP = re.compile(r"steps\[(\d+)\]")
_STRETCH = re.compile(r"steps\[(\d+)\]\.temperature\[(\d+)\]")
_VISIT = re.compile(r"visits\[(\d+)\]")


class Editing:
    """Actions on the session; mixed into the plan's screen."""

    app: "DigestplanApp"
    cell: Cell | None

    @property
    def session(self) -> "Session":
        """The open plan."""
        return self.app.session

    def show_plan(self, place: str | None = None) -> None:
        """Show the plan anew."""
        raise NotImplementedError

    def _after(self, place: str | None) -> None:
        self.show_plan(place)
        self.app.ask()
        if not self.session.readable:  # undone into a text that is being mended
            self.app.plan_screen.action_text()

    def _tell(self, error: InputError) -> None:
        self.app.tell(error.problems[0].message, wrong=True)

    @property
    def _place(self) -> str:
        return self.cell.place if self.cell is not None else ""

    def action_undo(self) -> None:
        """Take the last change back."""
        if self.session.undo():
            self._after(self._place or None)
        else:
            self.app.tell("Nothing is left to take back.")

    def action_redo(self) -> None:
        """Do again what was taken back."""
        if self.session.redo():
            self._after(self._place or None)
        else:
            self.app.tell("There is nothing to do again.")

    def action_add(self) -> None:
        """Add a visit, a stretch or a step, by where the focus is."""
        if _VISIT.match(self._place):
            self._try_visits(lambda visits: [*visits, _next_visit(visits)], len(self._visits()))
        elif _STRETCH.match(self._place) or re.search(r"\]\.(temperature|for)$", self._place):
            step, number = self._stretch()
            stretches = self._stretches(step)
            last = stretches[number] if number < len(stretches) else {"at": "37 degC", "for": "1 h"}
            temperature = last.get("at") or last.get("to") or "37 degC"
            stretches.insert(number + 1, {"at": temperature, "for": "1 h"})
            self._set_programme(step, stretches, number + 1)
        else:
            kinds = [(kind, kind) for kind in STEPS]
            self.app.push_screen(Ask(text.STEP_KINDS, kinds), self._add_step)

    def _add_step(self, kind: str | None) -> None:
        if not kind:
            return
        step = _STEP.match(self._place)
        after = int(step[1]) if step else len(self.session.steps) - 1
        try:
            index = self.session.add_step(kind, after)
        except (InputError, IndexError) as error:
            self.app.tell(str(error), wrong=True)
            return
        self._after(f"steps[{index}]")

    def action_duplicate(self) -> None:
        """Put a copy of a visit, a stretch or a step behind it."""
        visit, stretch, step = self._where()
        if visit is not None:
            self._try_visits(lambda v: [*v[: visit + 1], *v[visit:]], visit + 1)
        elif stretch is not None:
            stretches = self._stretches(stretch[0])
            stretches.insert(stretch[1], dict(stretches[stretch[1]]))
            self._set_programme(stretch[0], stretches, stretch[1] + 1)
        elif step is not None:
            self._try_step(lambda: self.session.duplicate_step(step))
        else:
            self.app.tell("Go to a step, a line of a programme or a visit first.")

    def action_remove(self) -> None:
        """Take a visit, a stretch or a step out; it can be undone."""
        visit, stretch, step = self._where()
        if visit is not None:
            self._try_visits(lambda v: [*v[:visit], *v[visit + 1 :]], max(visit - 1, 0))
        elif stretch is not None and len(self._stretches(stretch[0])) > 1:
            stretches = self._stretches(stretch[0])
            del stretches[stretch[1]]
            self._set_programme(stretch[0], stretches, min(stretch[1], len(stretches) - 1))
        elif step is not None:
            self._try_step(lambda: self.session.remove_step(step))
        else:
            self.app.tell("Go to a step, a line of a programme or a visit first.")

    def action_move(self, by: int) -> None:
        """Move a stretch or a step up or down."""
        _, stretch, step = self._where()
        if stretch is not None:
            stretches = self._stretches(stretch[0])
            to = max(0, min(stretch[1] + by, len(stretches) - 1))
            stretches.insert(to, stretches.pop(stretch[1]))
            self._set_programme(stretch[0], stretches, to)
        elif step is not None:
            self._try_step(lambda: self.session.move_step(step, step + by))

    def _where(self) -> tuple[int | None, tuple[int, int] | None, int | None]:
        """Return the visit, the stretch, and the step in which the focus is."""
        visit, stretch = _VISIT.match(self._place), _STRETCH.match(self._place)
        step = _STEP.match(self._place)
        number = int(step[1]) if step else None
        if number is not None and number >= len(self.session.steps):
            number, stretch = None, None
        if visit and int(visit[1]) >= len(self._visits()):
            visit = None
        found = (int(stretch[1]), int(stretch[2])) if stretch else None
        if found and found[1] >= len(self._stretches(found[0])):
            found = None
        return int(visit[1]) if visit else None, found, number

    def _visits(self) -> list[Any]:
        found = self.session.tables.get("visits", [])
        return list(found) if isinstance(found, list) else []

    def _try_visits(self, change: Any, focus: int) -> None:
        written = change(self._visits())
        try:
            self.session.edit_all({"visits": written or None})
        except InputError as error:
            self._tell(error)
            return
        self._after(f"visits[{focus}]")

    def _stretch(self) -> tuple[int, int]:
        stretch, step = _STRETCH.match(self._place), _STEP.match(self._place)
        if stretch:
            return int(stretch[1]), int(stretch[2])
        assert step is not None
        return int(step[1]), 0

    def _stretches(self, step: int) -> list[Mapping[str, Any]]:
        steps = self.session.steps
        table = steps[step] if step < len(steps) else {}
        written = table.get("temperature")
        if isinstance(written, list):
            return [s for s in written if isinstance(s, Mapping)]
        single = {"at": written, "for": table.get("for", "1 h")}
        return [single] if written is not None else []

    def _set_programme(self, step: int, stretches: list[Mapping[str, Any]], focus: int) -> None:
        try:
            self.session.set_programme(step, stretches)
        except (InputError, IndexError) as error:
            self.app.tell(str(error), wrong=True)
            return
        self._after(f"steps[{step}].temperature[{focus}]")

    def _try_step(self, change: Any) -> None:
        try:
            index = change()
        except (InputError, IndexError) as error:
            self.app.tell(str(error), wrong=True)
            return
        self._after(f"steps[{index}]")


def _next_visit(visits: list[Any]) -> str:
    """Return the last visit a day later, or one of tomorrow."""
    try:
        first, _, second = str(visits[-1]).partition("/")
        start, end = (datetime.fromisoformat(part.strip()) for part in (first, second))
        day = timedelta(days=1)
        return " / ".join((t + day).isoformat(timespec="minutes") for t in (start, end))
    except (IndexError, ValueError, OverflowError):
        tomorrow = datetime.now().date() + timedelta(days=1)  # noqa: DTZ005 - local wall clock
        return f"{tomorrow}T08:30 / {tomorrow}T17:00"
