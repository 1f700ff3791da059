"""A finished forecast: frozen records that the report and the app only read."""

from collections.abc import Mapping
from dataclasses import dataclass
from datetime import datetime
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from digestplan.forecast.environment import Liquid
from digestplan.forecast.window import Spread, VisitChance, Window
from digestplan.plan.model import Plan

Array = NDArray[np.float64]
Level = Literal["stop", "care", "note"]


@dataclass(frozen=True, slots=True)
class Caution:
    """One caution: its level, the step it belongs to (None: the whole plan), code and text."""

    level: Level
    step: int | None
    code: str
    text: str


@dataclass(frozen=True, slots=True, eq=False)
class Curve:
    """A step on the clock. Each array has shape (n_times,)."""

    hours: Array
    extent_p05: Array
    extent_p50: Array
    extent_p95: Array
    activity_p50: Array
    temperature_c: Array


@dataclass(frozen=True, slots=True, eq=False)
class StepForecast:
    """What every kind of step tells.

    Attributes
    ----------
    do, index
        Kind of step and its place in the plan.
    start_h, hours
        From the start of the plan, and how long the step lasts. [h]
    start, end
        On the clock, where the plan has one.
    """

    do: str
    index: int
    start_h: float
    hours: float
    start: datetime | None
    end: datetime | None


@dataclass(frozen=True, slots=True, eq=False)
class DigestForecast(StepForecast):
    """A digestion, or a hold in which the enzyme goes on. Extents and losses are fractions.

    ``dose_unit`` is the unit of ``dose_at_end``; ``ready_h`` and ``too_far_h`` are the draws of
    hours to target and to the keep-loss limit from the step's start, shape (n_draws,), infinite
    for never. ``liquid`` is what the enzyme works in, ``brought`` what the piece brought along
    into it [mol/L]; ``harm_by_heat`` is the median keep loss by heat alone; ``enzyme_factor`` how
    many times the enzyme each draw would have needed to reach the target, given for ever.
    """

    extent_at_end: Spread
    extent_at_centre: Spread
    residual_activity_at_end: Spread
    keep_loss_at_end: Spread
    ceiling: Spread
    dose_at_end: Spread
    dose_unit: str
    hours_to_target: Spread
    never_reaches_target: float
    hours_to_keep_limit: Spread
    window: Window
    curve: Curve
    ph_at_temperature: float | None
    free_calcium: float | None  # [mol/L]
    ready_h: Array
    too_far_h: Array
    liquid: Liquid
    brought: Mapping[str, Array]
    harm_by_heat: float
    enzyme_factor: Array


@dataclass(frozen=True, slots=True, eq=False)
class DemineraliseForecast(StepForecast):
    """A demineralisation.

    Attributes
    ----------
    extent_at_end
        Fraction of the mineral that is gone.
    hours_to_target, never_reaches_target
        To the end-point `END_POINT`, from the step's start.
    bath_spent
        Median share of each bath's usable reagent that is used up at its end.
    change_times
        When the bath is changed, from the step's start. [h]
    reagent_needed, reagent_held
        What the mineral that is still there at the start needs, and what all baths hold that can
        be used: medians. [mol]
    carbon_dioxide
        Gas given off, at the bath's temperature: median. [mL]
    keep_loss_at_end
        Fraction lost of what must be kept, by acid and heat so far.
    curve_hours, curve_extent
        Times, shape (n_times,), and 5th, 50th and 95th percentile, shape (3, n_times).
    """

    extent_at_end: Spread
    hours_to_target: Spread
    never_reaches_target: float
    bath_spent: tuple[float, ...]
    change_times: tuple[float, ...]
    reagent_needed: float
    reagent_held: float
    carbon_dioxide: float
    keep_loss_at_end: Spread
    curve_hours: Array
    curve_extent: Array


@dataclass(frozen=True, slots=True, eq=False)
class RinseForecast(StepForecast):
    """A rinse.

    Attributes
    ----------
    carry_over
        What is left in the piece at the end, by substance: medians. [mol/L]
    carry_over_at_most
        The same, with the plan's confidence. [mol/L]
    left_share
        The same as a share of what was there before the rinse.
    more_exchanges
        How many more exchanges would bring each substance under what the next digest bears, with
        the plan's confidence, where that is not met: None where no number of them would.
    """

    carry_over: Mapping[str, float]
    carry_over_at_most: Mapping[str, float]
    left_share: Mapping[str, float]
    more_exchanges: Mapping[str, int | None]


@dataclass(frozen=True, slots=True, eq=False)
class Forecast:
    """The whole plan's forecast.

    Attributes
    ----------
    plan, n_draws, seed
        What was asked.
    steps
        One forecast a step, in order.
    ready_h, too_far_h
        Hours from the plan's start at which each draw is ready and too far; infinite for never.
        Shape (n_draws,). [h]
    never_ready
        Share of draws that never reach the target in this plan.
    window
        From ready to too far, over the whole plan, hours from the plan's start.
    visits
        Chances at each visit.
    limits
        What limits the plan, in words, most important first.
    cautions
        All cautions, the most serious first.
    """

    plan: Plan
    n_draws: int
    seed: int
    steps: tuple[StepForecast, ...]
    ready_h: Array
    too_far_h: Array
    never_ready: float
    window: Window
    visits: tuple[VisitChance, ...]
    limits: tuple[str, ...]
    cautions: tuple[Caution, ...]
    weighed: Mapping[int, float]  # enzyme to weigh in at each digest step [g]
