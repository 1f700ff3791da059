"""What can happen to a lot: frozen records, each checked as it is made, each with an id of its own.

An event carries its id before it is written, so that writing it twice is writing it once. Masses
are in g, temperatures in K, times are local wall-clock times.
"""

import uuid
from dataclasses import dataclass, field, fields, replace
from datetime import date, datetime
from typing import ClassVar, Literal

from digestplan.lots.register.fields import Form, checked
from digestplan.problems import Problems


def new_id() -> str:
    """Return an id that nobody else will choose."""
    return str(uuid.uuid4())


@dataclass(frozen=True, slots=True, kw_only=True)
class Event:
    """What all events carry.

    Attributes
    ----------
    lot
        The bottle or batch, as it is written on it.
    at
        When it happened (local wall clock).
    who, note
        Who did it, and what else is to be said.
    id
        Chosen as the event is made; a second event of the same id is the same event.
    recorded_at
        When the register took it; set by the register.
    """

    kind: ClassVar[str] = ""

    lot: str
    at: datetime
    who: str = ""
    note: str = ""
    id: str = field(default_factory=new_id)
    recorded_at: datetime | None = None

    def __post_init__(self) -> None:
        problems = Problems()
        for f in fields(self):
            value = getattr(self, f.name)
            if value is None and f.default is None:
                continue
            try:
                object.__setattr__(self, f.name, checked(self.kind, f.name, value))
            except ValueError as error:
                problems.add(f"{self.kind}.{f.name}", str(error))
        if not problems.found:
            self._agree(problems)
        problems.raise_if_any()

    def _agree(self, problems: Problems) -> None:
        """Check the fields against each other."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Received(Event):
    """A lot came in, or was found.

    Attributes
    ----------
    enzyme
        The library's key.
    label_activity
        As the label says it, such as ``280 CDU/mg``; None where it says none.
    form
        ``dry``, ``solution`` or ``glycerol``.
    mass
        What the bottle holds [g]; None until it is weighed.
    temperature, temperature_sd, place
        Where it is kept, how far that may be off, and which freezer or shelf it is. [K]
    conversions
        What the certificate says of other units, such as ``1 CDU = 0.011 FALGPA_U``.
    expiry
        The supplier's date.
    opened
        Whether the bottle was open already.
    """

    kind: ClassVar[str] = "received"

    enzyme: str
    form: Form
    temperature: float
    temperature_sd: float = 0.0
    place: str = ""
    label_activity: str | None = None
    mass: float | None = None
    conversions: tuple[str, ...] = ()
    expiry: date | None = None
    opened: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Moved(Event):
    """From now on it is kept elsewhere, or otherwise (dissolved, sealed again).

    ``form`` and ``opened`` stay what they were where they are None.
    """

    kind: ClassVar[str] = "moved"

    temperature: float
    temperature_sd: float = 0.0
    place: str = ""
    form: Form | None = None
    opened: bool | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Transported(Event):
    """An excursion that began at ``at``: so many hours at a temperature [K], then back."""

    kind: ClassVar[str] = "transported"

    temperature: float
    hours: float
    temperature_sd: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Thawed(Event):
    """It was thawed (and frozen again), once or more often."""

    kind: ClassVar[str] = "thawed"

    count: int = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class Opened(Event):
    """The seal was broken."""

    kind: ClassVar[str] = "opened"


@dataclass(frozen=True, slots=True, kw_only=True)
class Assayed(Event):
    """What an assay said: a fraction of the label with its standard error, or an activity.

    Attributes
    ----------
    fraction, standard_error
        Active fraction of the label. [1]
    degrees_of_freedom
        Of that standard error; None where it is well known.
    scale
        Whether the error is normal in the fraction (``linear``) or in its logarithm.
    activity
        As it was found, such as ``231 ± 9 CDU/mg``.
    """

    kind: ClassVar[str] = "assayed"

    fraction: float | None = None
    standard_error: float | None = None
    degrees_of_freedom: float | None = None
    scale: Literal["linear", "log"] = "linear"
    activity: str | None = None

    def _agree(self, problems: Problems) -> None:
        if self.fraction is None and self.activity is None:
            problems.add(
                "assayed", "a fraction of the label or an activity with its unit is wanted"
            )
        if (self.fraction is None) != (self.standard_error is None):
            problems.add("assayed.standard_error", "a fraction and its standard error go together")
        if self.scale == "log" and self.fraction is not None and self.fraction <= 0:
            problems.add("assayed.fraction", "on the log scale it must lie above zero")


@dataclass(frozen=True, slots=True, kw_only=True)
class Used(Event):
    """A mass was weighed out of it [g], for a plan."""

    kind: ClassVar[str] = "used"

    mass: float
    plan: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Weighed(Event):
    """What is left was weighed [g]; it holds from here on, whatever the ledger had."""

    kind: ClassVar[str] = "weighed"

    mass: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Discarded(Event):
    """It was thrown away."""

    kind: ClassVar[str] = "discarded"


@dataclass(frozen=True, slots=True, kw_only=True)
class Corrected(Event):
    """An earlier event was wrong: read it as ``replacement``, or not at all where that is None.

    The newest correction of an event counts. A correction is taken back by correcting it in
    turn, without a replacement.
    """

    kind: ClassVar[str] = "corrected"

    corrects: str
    replacement: Event | None = None

    def _agree(self, problems: Problems) -> None:
        new = self.replacement
        if self.corrects == self.id:
            problems.add("corrected.corrects", "an event cannot correct itself")
        if new is None:
            return
        if not isinstance(new, Event) or isinstance(new, Corrected):
            problems.add("corrected.replacement", "it must be an event, and no correction")
            return
        if new.lot != self.lot:
            message = "it must stay with its lot: take the event back and write it for the other"
            problems.add("corrected.replacement", message)
        same = replace(new, id=self.corrects, recorded_at=None)
        object.__setattr__(self, "replacement", same)


KINDS: dict[str, type[Event]] = {
    c.kind: c
    for c in (
        *(Received, Moved, Transported, Thawed, Opened),
        *(Assayed, Used, Weighed, Discarded, Corrected),
    )
}
