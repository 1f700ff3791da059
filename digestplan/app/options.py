"""Temperatures compared, as lines of a table; and an option as edits of the plan."""

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from digestplan.app.picture import Line
from digestplan.plan.model import Plan
from digestplan.plan.write import Written
from digestplan.problems import InputError, Problem

if TYPE_CHECKING:
    from digestplan.forecast.temperatures import Comparison, Option

_CELSIUS = 273.15
_MOST = 24


@dataclass(frozen=True, slots=True, eq=False)
class Compared:
    """A finished comparison: headings, a line an option, the best in words, the curve."""

    comparison: "Comparison"
    columns: str
    lines: tuple[str, ...]
    best: str
    curve: Line | None


def compared(plan: Plan, at: str, draws: int) -> Compared:
    """
    Compare a plan at several temperatures.

    Parameters
    ----------
    plan
        The plan.
    at
        As typed: temperatures with commas between them. [°C]
    draws
        How many.

    Returns
    -------
    compared
        Ready to be shown.

    Raises
    ------
    InputError
        If what was typed is no list of temperatures.
    """
    from digestplan.forecast.temperatures import compare
    from digestplan.report.temperatures_text import celsius

    found = compare(plan, _celsius(at), draws)
    curve = None
    if found.curve is not None and np.isfinite(found.curve.chance_in_time).any():
        curve = Line(found.curve.temperature - _CELSIUS, found.curve.chance_in_time)
    best, kind = found.best_by_chance, found.best_by_harm
    told = f"Best chance near {celsius(best)}, gentlest with an even chance near {celsius(kind)}."
    return Compared(
        found, _line(_HEADS), tuple(_line(_cells(o)) for o in found.options), told, curve
    )


def _celsius(at: str) -> list[float]:
    from digestplan.quantities import QuantityError, parse_quantity

    wanted: list[float] = []
    for part in filter(None, (part.strip() for part in at.split(","))):
        written = part if part[-1:].isalpha() else f"{part} degC"
        try:
            wanted.append(parse_quantity(written, "temperature").value - _CELSIUS)
        except QuantityError as error:
            raise InputError(Problem("", error.message)) from None
    if not 1 <= len(wanted) <= _MOST:
        raise InputError(
            Problem("", f"from 1 to {_MOST} temperatures are wanted, such as 4, 20, 37")
        )
    return wanted


_HEADS = ("at", "to target", "ready", "too far", "active then", "weigh in", "in time")
_WIDTHS = (9, 11, 12, 12, 13, 11, 9)


def _line(cells: tuple[str, ...]) -> str:
    return "".join(f"{cell:>{width}}" for cell, width in zip(cells, _WIDTHS, strict=True))


def _cells(option: "Option") -> tuple[str, ...]:
    from digestplan.report import words

    mass = option.charge_for_visit
    measured = "" if option.measured is not False else "*"
    return (
        f"{option.temperature - _CELSIUS:.4g} °C{measured}",
        words.hours(option.hours_to_target.p50),
        words.hours(option.window.opens_h),
        words.hours(option.window.closes_h),
        words.percent(option.residual_activity_at_target.p50),
        "–" if mass is None else f"{1e3 * mass:.3g} mg",
        "–" if option.chance_in_time is None else words.percent(option.chance_in_time),
    )


def as_edits(found: Compared, number: int) -> dict[str, Written]:
    """Return the edits that make an option the plan: its main stretches at that temperature."""
    from digestplan.forecast.variants import moved, temperature_text

    comparison = found.comparison
    main, temperature = comparison.main, comparison.options[number].temperature
    programme = main.step(comparison.plan).programme
    edits: dict[str, Written] = {}
    for number_of in main.stretches:
        value = programme[number_of].temperature
        edits[value.place] = temperature_text(moved(value, temperature).quantity)
    return edits
