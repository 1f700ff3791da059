"""A forecast as plain text: read in ten seconds, 80 columns, no colour needed."""

from collections.abc import Callable, Iterator

import numpy as np

from digestplan.forecast.result import (
    DemineraliseForecast,
    DigestForecast,
    Forecast,
    RinseForecast,
    StepForecast,
)
from digestplan.forecast.window import Spread
from digestplan.report import words
from digestplan.report.lines import wrapped
from digestplan.report.verdict import verdict

WIDTH = 79
Row = tuple[str, Spread, Callable[[float | None], str]]
_WORTH_A_ROW = 0.001


def forecast_text(forecast: Forecast) -> str:
    """
    Return the report on a forecast.

    Parameters
    ----------
    forecast
        The finished forecast.

    Returns
    -------
    text
        Verdict, table, limits and cautions; lines of at most 79 characters.
    """
    blocks = [
        wrapped(verdict(forecast)),
        wrapped(words.plain(forecast.plan.title)),
        *(_step(forecast, step) for step in forecast.steps),
        _visits(forecast),
        _limits(forecast),
        _cautions(forecast),
        "\n".join(wrapped(remark, "  ", "") for remark in forecast.plan.remarks),
        wrapped(_how(forecast)),
    ]
    return "\n\n".join(block for block in blocks if block) + "\n"


def _step(forecast: Forecast, step: StepForecast) -> str:
    head = f"{step.index + 1} {step.do}"
    if step.start is not None and step.end is not None:
        head += f"  {words.day_and_time(step.start)} to {words.day_and_time(step.end)}"
    head += f"  ({words.hours(step.hours)})"
    rows = list(_rows(forecast, step))
    exact = forecast.n_draws == 1
    table = [head]
    if rows and not exact:
        table.append(f"  {'':<30}{'5 %':>12}{'median':>12}{'95 %':>12}")
    for name, spread, say in rows:
        cells = (spread.p50,) if exact else (spread.p05, spread.p50, spread.p95)
        table.append(f"  {name:<30}" + "".join(f"{say(cell):>12}" for cell in cells))
    table += [wrapped(line, "    ", "  ") for line in _facts(step)]
    return "\n".join(table)


def _facts(step: StepForecast) -> Iterator[str]:
    """What a step tells beside its percentiles."""
    if isinstance(step, DemineraliseForecast):
        yield (
            f"reagent needed {1e3 * step.reagent_needed:.2g} mmol, usable in the baths "
            f"{1e3 * step.reagent_held:.2g} mmol; spent at the end of each bath: "
            + ", ".join(words.percent(spent) for spent in step.bath_spent)
        )
        if step.change_times:
            yield "change the bath after " + ", ".join(words.hours(t) for t in step.change_times)
        if step.carbon_dioxide > 0:
            yield f"carbon dioxide given off: about {step.carbon_dioxide:.2g} mL"
    elif isinstance(step, RinseForecast):
        for name, amount in step.carry_over.items():
            share = words.percent(step.left_share[name])
            yield f"{name.replace('-', ' ')} left in the piece: {1e3 * amount:.2g} mM ({share})"
    elif isinstance(step, DigestForecast) and step.do == "digest":
        yield from _liquid(step)


def _liquid(step: DigestForecast) -> Iterator[str]:
    if step.ph_at_temperature is None:
        return
    calcium = (
        "" if step.free_calcium is None else f", {1e3 * step.free_calcium:.2g} mM free calcium"
    )
    yield f"in the warm: pH {step.ph_at_temperature:.2f}{calcium}"


def _rows(forecast: Forecast, step: StepForecast) -> Iterator[Row]:
    if isinstance(step, DemineraliseForecast):
        yield "hours to end-point", step.hours_to_target, words.hours
        yield "mineral gone at the end", step.extent_at_end, words.percent
        if (step.keep_loss_at_end.p95 or 0) > _WORTH_A_ROW:
            yield "keep loss so far", step.keep_loss_at_end, words.percent
    if not isinstance(step, DigestForecast):
        return
    if step.do == "digest":
        yield from _times(forecast, step)
    yield "extent at the end", step.extent_at_end, words.percent
    if step.extent_at_centre != step.extent_at_end and step.do == "digest":
        yield "extent at the centre", step.extent_at_centre, words.percent
    if (step.keep_loss_at_end.p95 or 0) > _WORTH_A_ROW:
        yield "keep loss at the end", step.keep_loss_at_end, words.percent
    held = float(np.median(step.liquid.stopped)) < 0.5
    name = "enzyme alive, but held" if held else "enzyme still active"
    yield name, step.residual_activity_at_end, words.percent
    if step.do == "digest":
        yield "ceiling, however long", step.ceiling, words.percent


def _times(forecast: Forecast, step: DigestForecast) -> Iterator[Row]:
    yield "hours to target", step.hours_to_target, words.hours
    if forecast.plan.sample.keep_loss_limit is not None:
        yield "hours to keep-loss limit", step.hours_to_keep_limit, words.hours


def _visits(forecast: Forecast) -> str:
    if not forecast.visits:
        return ""
    lines = [f"{'Visits':<32}{'in time':>12}{'not ready':>12}{'too far':>12}"]
    for chance in forecast.visits:
        when = words.visit(chance.visit.start, chance.visit.end)
        shares = (chance.in_time, chance.not_ready, chance.too_far)
        lines.append(f"  {when:<30}" + "".join(f"{words.percent(s):>12}" for s in shares))
    return "\n".join(lines)


def _limits(forecast: Forecast) -> str:
    if not forecast.limits:
        return ""
    return "What limits it\n" + "\n".join(wrapped(t, "    ", "  - ") for t in forecast.limits)


def _cautions(forecast: Forecast) -> str:
    if not forecast.cautions:
        return ""
    lines = ["Cautions"]
    for caution in forecast.cautions:
        step = "" if caution.step is None else f"step {caution.step + 1}: "
        lines.append(wrapped(step + caution.text, " " * 8, f"  {caution.level:<6}"))
    return "\n".join(lines)


def _how(forecast: Forecast) -> str:
    if forecast.n_draws == 1:
        return "Exact: nothing in this plan has a spread."
    return (
        f"{forecast.n_draws} draws, seed {forecast.seed}; a forecast, not a measurement: look at "
        "the piece before you trust it."
    )
