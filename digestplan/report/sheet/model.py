"""The neutral model of a sheet: what stands on it, before it is HTML, Markdown or PDF.

All texts are plain: each writer escapes every one of them, so that a text of the user can never
become markup.
"""

from dataclasses import dataclass
from datetime import datetime
from typing import Literal

from digestplan.forecast.result import Level

Doing = Literal[
    "prepare",
    "add",
    "move",
    "change",
    "rinse",
    "check",
    "stop",
    "hold",
    "visit",
    "window",
    "end",
]


@dataclass(frozen=True, slots=True)
class Action:
    """One thing that is done, or one moment to know, on the clock.

    Attributes
    ----------
    key
        Stable name within the plan, such as ``step-2-exchange-3``.
    do
        What kind of thing it is; a ``window`` is a moment to know, with nothing to do.
    hours
        From the plan's start; before it where negative. [h]
    at, until
        On the clock, where the plan has one; ``until`` is the end of a visit.
    text
        What to do, as an order.
    see
        What should be seen then, or what to keep in mind.
    step
        Index of its step, None for the whole plan.
    by_itself
        A programmed bath does it without anybody.
    attended
        Whether somebody is at the bench then, as the plan says.
    """

    key: str
    do: Doing
    hours: float
    at: datetime | None
    text: str
    see: str = ""
    step: int | None = None
    until: datetime | None = None
    by_itself: bool = False
    attended: bool = True


@dataclass(frozen=True, slots=True)
class Amount:
    """What is weighed or pipetted for a step: the amount large, how it comes about small.

    ``found`` is the label of the line on which the true value is written; empty for none.
    """

    step: int | None
    what: str
    amount: str
    how: str = ""
    found: str = ""


@dataclass(frozen=True, slots=True)
class SheetCaution:
    """A caution as it stands on the sheet, with the step that it belongs to in words."""

    level: Level
    where: str
    code: str
    text: str


@dataclass(frozen=True, slots=True)
class Facts:
    """Labels and values, in two columns."""

    rows: tuple[tuple[str, str], ...]
    small: bool = False


@dataclass(frozen=True, slots=True)
class Column:
    """A column of a table.

    ``kind`` is ``text``, ``strong`` (read at arm's length), ``time`` (the same, with its day
    small before it), ``small``, ``tick`` (a box) or ``blank`` (a line to write on). ``weight`` is
    its share of the width.
    """

    title: str
    weight: float
    kind: Literal["text", "strong", "time", "small", "tick", "blank"] = "text"


@dataclass(frozen=True, slots=True)
class Row:
    """A row of cells; with one cell alone, a heading across the table.

    A ``quiet`` row has no box to tick and no line to write on.
    """

    cells: tuple[str, ...]
    quiet: bool = False


@dataclass(frozen=True, slots=True)
class Table:
    """A table; its heading is repeated on every page."""

    columns: tuple[Column, ...]
    rows: tuple[Row, ...]


@dataclass(frozen=True, slots=True)
class Lines:
    """Paragraphs of text."""

    lines: tuple[str, ...]
    size: Literal["large", "normal", "small"] = "normal"


@dataclass(frozen=True, slots=True)
class Blanks:
    """Lines to fill in and sign, each with its label."""

    labels: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Cautions:
    """Cautions in their frames."""

    items: tuple[SheetCaution, ...]


@dataclass(frozen=True, slots=True)
class Chart:
    """An extent on the clock. All hours count from the plan's start.

    Attributes
    ----------
    caption
        What is drawn, in words.
    start
        Clock time of hour 0, or None.
    hours, low, middle, high
        Times, and the 5th, 50th and 95th percentile of the extent.
    target
        The extent that is wanted, and how it is called.
    temperature_hours, celsius
        The programme of temperatures.
    opens, closes
        The window, where there is one.
    visits
        When somebody is at the bench.
    sure
        How sure the window is, in words.
    low_drawn
        Drawn lower than the others: a chart that is looked at for a moment.
    """

    caption: str
    start: datetime | None
    hours: tuple[float, ...]
    low: tuple[float, ...]
    middle: tuple[float, ...]
    high: tuple[float, ...]
    target: float
    target_name: str
    temperature_hours: tuple[float, ...]
    celsius: tuple[float, ...]
    opens: float | None
    closes: float | None
    visits: tuple[tuple[float, float], ...]
    sure: str
    low_drawn: bool = False


Block = Facts | Table | Lines | Blanks | Cautions | Chart


@dataclass(frozen=True, slots=True)
class Section:
    """A heading and what stands under it; no heading where it is empty."""

    heading: str
    blocks: tuple[Block, ...]


@dataclass(frozen=True, slots=True)
class Sheet:
    """A whole sheet.

    Attributes
    ----------
    title
        The plan's title on one line, to head the page.
    identity
        What tells this plan from others in a calendar.
    footer
        Stands on every page.
    sections
        The page, from top to bottom.
    amounts, actions, cautions
        What the sections were made of, for the calendar, for scripts and for checks.
    """

    title: str
    identity: str
    footer: str
    sections: tuple[Section, ...]
    amounts: tuple[Amount, ...]
    actions: tuple[Action, ...]
    cautions: tuple[SheetCaution, ...]
    start: datetime | None
