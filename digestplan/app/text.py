"""Every sentence of the app, and how user text is made harmless for the screen."""

from textual.content import Content

TOO_SMALL = "digestplan needs a terminal of at least 60 by 20 cells; this one is smaller."
NO_TERMINAL = (
    "there is no terminal here for the app; use `digestplan forecast PLAN`, or another command"
    " (`digestplan --help` lists them)"
)
LOADING = "working it out …"
ROUGH = "first estimate …"
BROKEN = "This text cannot be read as a plan, so there is no form to go back to. Mend it first."
STEP_KINDS = "What is to be done in the new step?"
UNSAVED = "This plan has changes that are not saved."
SAVE_AS = "Save as"
CHANGED = "The file has been changed by somebody else since it was opened."
EXISTS = "There is a file of that name already."
WHO_ELSE = "changed by somebody else"
NOTHING_WRONG = "Nothing is wrong with this plan."
NO_CAUTION = "This plan brings no caution."
KEPT = "Unsaved work on this plan, kept {when}, was found. It was not saved to the file."


def literal(text: str, style: str = "") -> Content:
    """Return a text that is shown letter for letter, whatever brackets it holds."""
    flat = "".join(c if c.isprintable() or c == "\n" else "\N{REPLACEMENT CHARACTER}" for c in text)
    return Content.styled(flat, style) if style else Content(flat)
