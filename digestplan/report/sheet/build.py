"""From a plan to its sheet: amounts rounded, forecast once more, laid out from top to bottom."""

from datetime import datetime
from typing import Literal

from digestplan import __version__, library
from digestplan.forecast.result import Forecast
from digestplan.forecast.run import DRAWS, SEED, forecast
from digestplan.library.cautions import deferral
from digestplan.plan.model import Plan
from digestplan.report import words
from digestplan.report.sheet.actions import actions
from digestplan.report.sheet.amounts import amounts
from digestplan.report.sheet.assumptions import assumptions
from digestplan.report.sheet.curves import charts
from digestplan.report.sheet.model import (
    Action,
    Amount,
    Blanks,
    Block,
    Cautions,
    Column,
    Facts,
    Lines,
    Row,
    Section,
    Sheet,
    SheetCaution,
    Table,
)
from digestplan.report.sheet.portions import carried_out
from digestplan.report.sheet.typed import as_typed, celsius, short, value_text
from digestplan.report.verdict import verdict

_HEAD = 160  # characters of a title that fit the head of a page
_BRIEF = 600  # characters of notes that are printed in the usual type
_MARK = "•"


def bench_sheet(plan: Plan, n_draws: int = DRAWS, seed: int = SEED) -> Sheet:
    """
    Return the bench sheet of a plan.

    Parameters
    ----------
    plan
        The plan, read and checked.
    n_draws, seed
        As for the forecast. [1]

    Returns
    -------
    sheet
        Its forecast is that of the rounded amounts, which stand on it.
    """
    carried = carried_out(plan)
    told = forecast(carried.plan, n_draws, seed)
    to_weigh, to_do = amounts(carried, told), actions(carried, told)
    warned = _cautions(told)
    return Sheet(
        title=short(plan.title or "Untitled plan", _HEAD),
        identity=f"{_file_name(plan)}\n{plan.title}",
        footer=_footer(plan),
        sections=_sections(told, to_weigh, to_do, warned),
        amounts=to_weigh,
        actions=to_do,
        cautions=warned,
        start=plan.start,
    )


def _file_name(plan: Plan) -> str:
    return (plan.path or "").replace("\\", "/").rsplit("/", 1)[-1]


def _footer(plan: Plan) -> str:
    name = _file_name(plan)
    return f"digestplan {__version__} · {short(name, 60)}" if name else f"digestplan {__version__}"


def _cautions(told: Forecast) -> tuple[SheetCaution, ...]:
    return tuple(
        SheetCaution(
            c.level,
            "whole plan" if c.step is None else f"step {c.step + 1}, {told.steps[c.step].do}",
            c.code,
            short(c.text, 10 * len(c.text)),
        )
        for c in told.cautions
    )


def _sections(
    told: Forecast,
    to_weigh: tuple[Amount, ...],
    to_do: tuple[Action, ...],
    warned: tuple[SheetCaution, ...],
) -> tuple[Section, ...]:
    stops = tuple(c for c in warned if c.level == "stop")
    others = tuple(c for c in warned if c.level != "stop")
    return (
        Section("", (Lines((verdict(told),), "large"), *_warning(stops, len(warned)))),
        Section("The piece", (Facts(_piece(told)), *_written(told.plan))),
        Section("Weigh and pipette", (_amounts_table(to_weigh), Lines((_ROUNDED,), "small"))),
        Section("On the clock", _clock_blocks(told.plan, to_do)),
        Section("What is expected", charts(told)),
        Section("Cautions", _caution_blocks(stops, others)),
        Section("What this rests on", (Facts(assumptions(told), small=True), _how(told))),
        Section(
            "Signed", (Blanks(("Prepared by, date", "Carried out by, date", "Checked by, date")),)
        ),
    )


def _warning(stops: tuple[SheetCaution, ...], count: int) -> tuple[Block, ...]:
    """What is to be read before anything else."""
    read = f"Before you start: read the cautions on this sheet ({count})."
    return (Cautions(stops), Lines((read,))) if stops else (Lines((read,)),)


_ROUNDED = (
    "Amounts are rounded to what a balance and a pipette give, with the lot's activity taken in;"
    " everything forecast on this sheet is of the rounded amounts. Note what you really weighed."
)


# -- the piece -----------------------------------------------------------------------------------


def _piece(told: Forecast) -> tuple[tuple[str, str], ...]:
    plan, sample = told.plan, told.plan.sample
    what = [library.material(sample.material).name] if sample.material else []
    if sample.wet_mass.origin != "default":
        what.append(value_text(sample.wet_mass))
    if sample.thickness is not None:
        across = "thick" if sample.shape == "slab" else "in diameter"
        what.append(f"{sample.shape}, {value_text(sample.thickness)} {across}")
    aim = f"{words.percent(sample.target_extent.quantity.value)} of the matrix gone"
    if sample.keep_loss_limit is not None:
        limit = words.percent(sample.keep_loss_limit.quantity.value)
        aim += f"; no more than {limit} lost of what must be kept"
    rows = [("Piece", "; ".join(what) or "as the plan has it"), ("Aim", aim)]
    rows.append(("Steps", " → ".join(f"{i + 1} {step.do}" for i, step in enumerate(plan.steps))))
    return tuple(rows)


def _written(plan: Plan) -> tuple[Block, ...]:
    """The user's own text in full: a title that the head cannot hold, and the notes."""
    blocks: list[Block] = []
    title, notes = as_typed(plan.title), as_typed(plan.notes)
    if " ".join(title.split()) != short(plan.title, _HEAD).strip("\u2068\u2069"):
        blocks.append(Lines(("Title in full:", *title.split("\n")), "small"))
    if notes.strip():
        size: Literal["normal", "small"] = "normal" if len(notes) <= _BRIEF else "small"
        blocks.append(Lines(("Notes:", *notes.split("\n")), size))
    return tuple(blocks)


# -- amounts and clock ---------------------------------------------------------------------------


def _amounts_table(to_weigh: tuple[Amount, ...]) -> Table:
    columns = (
        Column("", 4, "tick"),
        Column("Step", 6, "small"),
        Column("What", 20),
        Column("Amount", 16, "strong"),
        Column("How", 44, "small"),
        Column("Found", 10, "blank"),
    )
    rows = [
        Row(("", _step_name(a.step), _first_upper(a.what), a.amount, a.how, a.found))
        for a in to_weigh
    ]
    return Table(columns, tuple(rows))


def _step_name(step: int | None) -> str:
    return "" if step is None else str(step + 1)


def _first_upper(text: str) -> str:
    return text[:1].upper() + text[1:]


def _clock_blocks(plan: Plan, to_do: tuple[Action, ...]) -> tuple[Block, ...]:
    blocks: list[Block] = [_clock_table(plan.start, to_do)]
    if any(not action.attended for action in to_do):
        text = (
            f"{_MARK} Outside the visits that the plan names: arrange for somebody, or change"
            " the plan."
        )
        blocks.append(Lines((text,), "small"))
    if plan.start is None:
        blocks.append(
            Lines(("Times count from the start, which the plan does not give.",), "small")
        )
    return tuple(blocks)


def _clock_table(start: datetime | None, to_do: tuple[Action, ...]) -> Table:
    columns = (
        Column("", 4, "tick"),
        Column("When", 14, "time"),
        Column("Step", 6, "small"),
        Column("Do", 40),
        Column("What should be seen", 25, "small"),
        Column("Done, initials", 11, "blank"),
    )
    rows, day = [], ""
    for action in to_do:
        if start is not None and (today := day_of(action)) != day:
            day = today
            rows.append(Row((day,), quiet=True))
        quiet = action.by_itself or action.do in {"window", "end"}
        cells = ("", when(action), _step_name(action.step), action.text, action.see, "")
        rows.append(Row(cells, quiet))
    return Table(columns, tuple(rows))


def day_of(action: Action) -> str:
    """Return the day of an action, which heads its times; empty without a clock."""
    return "" if action.at is None else words.day_and_time(action.at).rsplit(" ", 1)[0]


def when(action: Action) -> str:
    """Return the time of an action as it stands in the table."""
    mark = "" if action.attended else f"\u00a0{_MARK}"
    if action.at is not None:
        day = day_of(action).split(" ")[0]
        return f"{day} {words.to_the_minute(action.at):%H:%M}{mark}"
    sign, minutes = "−" if action.hours < 0 else "+", round(60 * abs(action.hours))
    return f"{sign}{minutes // 60}:{minutes % 60:02d}"


# -- cautions and the rest -----------------------------------------------------------------------


def _caution_blocks(
    stops: tuple[SheetCaution, ...], others: tuple[SheetCaution, ...]
) -> tuple[Block, ...]:
    blocks: list[Block] = []
    if stops:
        blocks.append(Lines(("What says STOP stands at the top of this sheet.",)))
    if others:
        blocks.append(Cautions(others))
    blocks.append(Lines((f"This sheet is no protocol. {deferral()}",)))
    return tuple(blocks)


def _how(told: Forecast) -> Lines:
    temperatures = f"Rooms are taken to be at {celsius(293.15)} to {celsius(298.15)}."
    if told.n_draws == 1:
        return Lines((f"Exact: nothing in this plan has a spread. {temperatures}",), "small")
    text = (
        f"{told.n_draws} draws, seed {told.seed}; 5 % to 95 % in brackets. A forecast, not a"
        f" measurement: look at the piece before you trust it. {temperatures}"
    )
    return Lines((text,), "small")
