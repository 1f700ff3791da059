"""From the text of a plan to all that the screen tells about it; runs in a thread."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, fields, is_dataclass, replace
from typing import TYPE_CHECKING, Any

from digestplan.app.picture import Picture, picture_of
from digestplan.problems import InputError, Problem

if TYPE_CHECKING:
    from digestplan.forecast.result import Caution
    from digestplan.plan.model import Plan

ROUGH_DRAWS = 200


@dataclass(frozen=True, slots=True)
class Note:
    """What is known of one place of a plan: its value, in another unit, from where, who says so."""

    text: str
    other: str
    origin: str
    source: str


@dataclass(frozen=True, slots=True, eq=False)
class Answer:
    """
    What a plan's text answers with.

    Attributes
    ----------
    text
        The text that was asked about.
    problems
        What is wrong with it; then there is no forecast.
    fault
        A failure of the program itself, in words; else empty.
    notes
        By place.
    chance
        The best chance in time of all visits; None without visits.
    draws
        How many went into it.
    """

    text: str
    problems: tuple[Problem, ...] = ()
    fault: str = ""
    plan: "Plan | None" = None
    picture: Picture | None = None
    verdict: str = ""
    limits: tuple[str, ...] = ()
    remarks: tuple[str, ...] = ()
    cautions: "tuple[Caution, ...]" = ()
    notes: Mapping[str, Note] | None = None
    chance: float | None = None
    draws: int = 0


def plan_of(text: str, name: str, register: str | None = None) -> "Plan":
    """Read a plan's text, and ask the register for what it leaves to it; or an `InputError`."""
    from digestplan.plan.lot import asks_register
    from digestplan.plan.read import parse_plan

    plan = parse_plan(text, name)
    if not asks_register(plan):
        return plan
    from digestplan.forecast.from_register import with_register
    from digestplan.lots.register import open_register

    with open_register(register, create=False) as opened:
        return with_register(plan, opened)


def answer_to(text: str, name: str, draws: int = 2000, register: str | None = None) -> Answer:
    """
    Read, check and forecast a plan.

    Parameters
    ----------
    text, name
        The plan, and what messages call it.
    draws
        How many.
    register
        Path or URL of the lot register; None for the user's own.

    Returns
    -------
    answer
        With the forecast, or with what is wrong.
    """
    try:
        plan = plan_of(text, name, register)
    except InputError as error:
        return Answer(text, problems=tuple(replace(p, file=None) for p in error.problems))
    return _forecast(text, plan, draws)


def _forecast(text: str, plan: "Plan", draws: int) -> Answer:
    from digestplan.forecast.run import forecast
    from digestplan.report.verdict import verdict

    result = forecast(plan, draws)
    return Answer(
        text,
        plan=plan,
        picture=picture_of(result),
        verdict=verdict(result),
        limits=result.limits,
        remarks=plan.remarks,
        cautions=result.cautions,
        notes=notes_of(plan),
        chance=max((v.in_time for v in result.visits), default=None),
        draws=result.n_draws,
    )


def notes_of(plan: "Plan") -> dict[str, Note]:
    """Say of every value of a plan what it is in another unit, and who says so."""
    from digestplan.plan.model import Value

    def values(part: Any) -> Iterator[Value]:
        if isinstance(part, Value):
            yield part
        elif is_dataclass(part):
            for each in fields(part):
                yield from values(getattr(part, each.name))
        elif isinstance(part, Mapping):
            for item in part.values():
                yield from values(item)
        elif isinstance(part, tuple):
            for item in part:
                yield from values(item)

    return {value.place: _note(value) for value in values(plan)}


def _note(value: Any) -> Note:
    from digestplan.app.form import kind_at
    from digestplan.quantities import KINDS, other_unit

    kind = kind_at(value.place)
    other = None
    if kind is not None and kind in KINDS and value.quantity.text:
        try:
            other = other_unit(value.quantity, kind)
        except (ValueError, ArithmeticError):
            other = None
    return Note(value.quantity.text, other or "", value.origin, value.source)
