"""One table of keys: footer, help and palette are made from it."""

from dataclasses import dataclass

from textual.binding import Binding


@dataclass(frozen=True, slots=True)
class Key:
    """
    One key of the plan's screen.

    Attributes
    ----------
    key, action
        As Textual calls them.
    label
        For the footer: a word or two.
    does
        For help and palette: what it does, without its full stop.
    show
        Whether it stands in the footer.
    """

    key: str
    action: str
    label: str
    does: str
    show: bool = False

    @property
    def spoken(self) -> str:
        """The key as people say it."""
        return " ".join(_spoken(part) for part in self.key.split(","))


_NAMES = {"up": "↑", "down": "↓", "pageup": "PgUp", "pagedown": "PgDn", "escape": "Esc"}


def _spoken(key: str) -> str:
    parts = [_NAMES.get(part, part) for part in key.split("+")]
    if parts[0] == "ctrl":
        return "^" + parts[1].upper()
    if parts[0] == "shift":
        return "Shift " + parts[1]
    return parts[0].upper() if len(parts[0]) <= 3 and parts[0].startswith("f") else parts[0]


PLAN_KEYS = (
    Key("f1", "help", "Help", "What this field means, and what every key does", show=True),
    Key("f2", "save", "Save", "Save the plan; comments and layout of the file are kept", show=True),
    Key("f3", "plans", "Plans", "Open a plan, a demo, a recent one, or start a new one", show=True),
    Key("f4", "text", "Text", "Edit the plan as text, with its problems beside it", show=True),
    Key("f5", "cautions", "Cautions", "Read all cautions of this plan", show=True),
    Key("f6", "temperatures", "Temps", "Compare temperatures, and take one", show=True),
    Key("f7", "sheet", "Sheet", "Look at the bench sheet, and write it to a file", show=True),
    Key("f8", "full", "All fields", "Show every field, or the usual ones"),
    Key("f9", "flip", "View", "Plan or forecast, on a narrow screen", show=True),
    Key("ctrl+o", "zoom", "Zoom", "Show the digestion alone, or the whole plan"),
    Key("ctrl+z", "undo", "Undo", "Take the last change back"),
    Key("ctrl+y", "redo", "Redo", "Do again what was taken back"),
    Key("ctrl+n", "add", "Add", "Add a step, or a line to a temperature programme or the visits"),
    Key("ctrl+t", "duplicate", "Twice", "Put a copy of this step or line behind it"),
    Key("ctrl+r", "remove", "Remove", "Take this step or line out"),
    Key("shift+up", "move(-1)", "Up", "Move this step or line up"),
    Key("shift+down", "move(1)", "Down", "Move this step or line down"),
    Key("pagedown", "section(1)", "Next part", "Go to the next part of the plan"),
    Key("pageup", "section(-1)", "Part before", "Go to the part of the plan before"),
    Key("f10", "app.leave", "Leave", "Leave; unsaved work is asked about", show=True),
)
FIELD_KEYS = (
    ("Tab ↓ Enter", "the next field"),
    ("Shift Tab ↑", "the field before"),
    ("→", "take the word that is offered, at the end of a field"),
    ("^U", "empty the field up to the cursor: the library's value stands in again"),
    ("^P", "find any of these by its name"),
    ("Esc", "go back from any other view; in a field it does nothing"),
)


def bindings(keys: tuple[Key, ...] = PLAN_KEYS) -> list[Binding]:
    """Return the bindings of a screen; each has an id, so that users can re-map it."""
    return [
        Binding(
            k.key, k.action, k.label, show=k.show, key_display=k.spoken, tooltip=k.does, id=k.action
        )
        for k in keys
    ]
