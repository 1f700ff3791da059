"""One open plan: its text, what was done to it, and where it is kept. Nothing of a screen."""

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Literal

from digestplan.app import steps_text
from digestplan.plan.read import read_plan_text
from digestplan.plan.write import Written, edited_text
from digestplan.problems import InputError, Problem
from digestplan.report.sheet.save import save as write_file

DiskState = Literal["same", "changed", "gone", "unsaved"]
_MOST_UNDOS = 500


@dataclass(frozen=True, slots=True)
class Done:
    """A text that can be gone back to, and the place that was edited after it."""

    text: str
    place: str


class Session:
    """
    A plan that is being worked on.

    Parameters
    ----------
    text
        The plan's text (TOML).
    path
        Its file; None for a plan that was never saved.
    on_disk
        What stands in that file; None where nothing does.

    Attributes
    ----------
    tables
        What the text holds, as the TOML reader gives it; empty where it is no TOML.
    readable
        Whether it is TOML.
    """

    def __init__(self, text: str, path: Path | None = None, on_disk: str | None = None) -> None:
        self.path = path
        self.on_disk = on_disk
        self.tables: Mapping[str, Any] = {}
        self.readable = True
        self._undo: list[Done] = []
        self._redo: list[Done] = []
        self._place = ""  # that the last edit went to, as long as it is still being typed
        self._set(text)

    @classmethod
    def opened(cls, path: Path) -> "Session":
        """Read a plan's file; an `InputError` says why it cannot be read."""
        text = read_plan_text(path)
        return cls(text, path, text)

    @property
    def text(self) -> str:
        """The plan as it stands now."""
        return self._text

    @property
    def dirty(self) -> bool:
        """Whether there is something that the file does not hold."""
        return self._text != self.on_disk

    @property
    def name(self) -> str:
        """What messages call it."""
        return "new plan" if self.path is None else str(self.path)

    @property
    def can_undo(self) -> bool:
        """Whether there is something to take back."""
        return bool(self._undo)

    @property
    def can_redo(self) -> bool:
        """Whether there is something to do again."""
        return bool(self._redo)

    def _set(self, text: str) -> None:
        self._text = text
        try:
            self.tables = tomllib.loads(text.removeprefix("\ufeff"))
            self.readable = True
        except (tomllib.TOMLDecodeError, RecursionError):
            self.tables, self.readable = {}, False

    def _do(self, text: str, place: str) -> None:
        if text == self._text:
            return
        if not place or place != self._place or not self._undo:
            self._undo.append(Done(self._text, place))
            del self._undo[:-_MOST_UNDOS]
        self._redo.clear()
        self._place = place
        self._set(text)

    def edit(self, place: str, written: Written) -> None:
        """
        Write a value into the plan; comments and layout stay.

        Parameters
        ----------
        place
            Such as ``steps[0].volume``. Edits that follow each other in one place are undone
            together, until `pause` is called.
        written
            As for `digestplan.plan.write.save_plan`; None takes the key out.

        Raises
        ------
        InputError
            If it fits nowhere; then nothing has changed.
        """
        going_on = place == self._place and bool(self._undo)
        base = self._undo[-1].text if going_on else self._text  # a key emptied on the way stays
        self._do(edited_text(base, {place: written}, self.name), place)

    def edit_all(self, edits: Mapping[str, Written]) -> None:
        """Write several values as one edit."""
        self.pause()
        self._do(edited_text(self._text, edits, self.name), "")

    def replace(self, text: str, place: str = "") -> None:
        """Put another text in the place of the whole plan."""
        self._do(text, place)

    def pause(self) -> None:
        """Let the next edit be undone on its own, wherever it goes."""
        self._place = ""

    def undo(self) -> bool:
        """Take the last edit back; False where there is none."""
        return self._step_back(self._undo, self._redo)

    def redo(self) -> bool:
        """Do again what was taken back; False where there is nothing."""
        return self._step_back(self._redo, self._undo)

    def _step_back(self, take: list[Done], keep: list[Done]) -> bool:
        if not take:
            return False
        done = take.pop()
        keep.append(Done(self._text, done.place))
        self.pause()
        self._set(done.text)
        return True

    def add_step(self, kind: str, after: int) -> int:
        """Add a step behind another (-1: before all); return its number."""
        self.pause()
        self._do(steps_text.with_added(self._text, kind, after + 1), "")
        return after + 1

    def remove_step(self, index: int) -> int:
        """Take a step out; return the number of the one that is next to it."""
        self.pause()
        self._do(steps_text.without(self._text, index), "")
        return max(index - 1, 0)

    def duplicate_step(self, index: int) -> int:
        """Put a copy of a step behind it; return its number."""
        self.pause()
        self._do(steps_text.with_copy(self._text, index), "")
        return index + 1

    def move_step(self, index: int, to: int) -> int:
        """Move a step to another place in the order; return its number."""
        self.pause()
        to = max(0, min(to, len(self.steps) - 1))
        self._do(steps_text.moved(self._text, index, to), "")
        return to

    @property
    def steps(self) -> list[Mapping[str, Any]]:
        """The steps as they are written, as far as they are tables."""
        found = self.tables.get("steps", [])
        return [s for s in found if isinstance(s, Mapping)] if isinstance(found, list) else []

    def set_programme(self, index: int, stretches: list[Mapping[str, Any]]) -> None:
        """Write a step's temperature programme as a list of stretches."""
        self.pause()
        written = steps_text.programme_text(stretches)
        edits: dict[str, Written] = {f"steps[{index}].temperature": written}
        if "for" in self.steps[index]:
            edits[f"steps[{index}].for"] = None
        self._do(edited_text(self._text, edits, self.name), "")

    def state_on_disk(self) -> DiskState:
        """Say whether the file still holds what it held when it was last read or written."""
        if self.path is None or self.on_disk is None:
            return "unsaved"
        if not self.path.exists():
            return "gone"
        try:
            return "same" if read_plan_text(self.path) == self.on_disk else "changed"
        except InputError:
            return "changed"

    def reload(self) -> None:
        """Take over what the file holds now; it can be undone."""
        if self.path is None:
            return
        text = read_plan_text(self.path)
        self.pause()
        self._do(text, "")
        self.on_disk = text

    def save(self, path: Path | None = None, *, overwrite: bool = False) -> None:
        """
        Write the plan to its file.

        Parameters
        ----------
        path
            A new file; by default its own.
        overwrite
            Whether a file that somebody else has written meanwhile may be replaced.

        Raises
        ------
        InputError
            If it has no file yet, the file holds something that was not seen, or it cannot be
            written.
        """
        target = path or self.path
        if target is None:
            raise InputError(Problem("", "say under which name this plan is to be saved"))
        own = target == self.path and self.on_disk is not None
        taken = self.state_on_disk() == "changed" if own else target.exists()
        if taken and not overwrite:
            told = "has changed since it was opened" if own else "is there already"
            raise InputError(Problem("", f"this file {told}", str(target)))
        try:
            content = self._text.encode("utf-8")
        except UnicodeEncodeError:
            raise InputError(Problem("", "half a character cannot be saved", self.name)) from None
        write_file(target, content)
        self.path, self.on_disk = target, self._text
        self.pause()
