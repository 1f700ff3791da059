"""The clock of a sheet: every action is there, at the time that the plan gives it."""

from dataclasses import replace
from datetime import datetime
from pathlib import Path

import pytest

from digestplan.forecast.run import forecast
from digestplan.plan.read import read_plan
from digestplan.report.sheet.build import bench_sheet
from digestplan.report.sheet.model import Chart, Table
from digestplan.report.sheet.seen import seen_at
from tests.report.sheet_plans import plan_of, sheet_of

DEMOS = Path(__file__).parents[2] / "presets_demo"


def clock(text):
    """A time of March 2026, day and time."""
    return datetime.fromisoformat(f"2026-03-{text}")


def times(sheet):
    """Clock times by the key of their action."""
    return {action.key: action.at for action in sheet.actions}


def test_a_digest_keeps_the_clock_of_its_plan():
    """Start, slopes, addition, visits and end of a digest stand at their times."""
    at = times(sheet_of())

    assert at["step-1-prepare"] == clock("12T17:00")
    assert at["step-1-start"] == clock("12T17:30")
    assert at["step-1-bath-2"] == clock("12T17:50")
    assert at["step-1-bath-4"] == clock("12T23:05")
    assert at["step-1-addition-1"] == clock("12T20:30")
    assert at["visit-1"] == clock("13T08:30")
    assert at["visit-2"] == clock("14T08:30")
    assert at["end"] == clock("13T08:35")


def test_a_whole_treatment_keeps_the_clock_of_its_plan():
    """All five kinds of step, their changes and exchanges, stand at their times."""
    sheet = sheet_of(whole=True)
    at = times(sheet)

    assert at["step-1-start"] == clock("12T17:30")
    assert at["step-1-change-2"] == clock("13T05:30")
    assert at["step-1-change-3"] == clock("13T17:30")
    assert at["step-1-end-point"] == clock("14T05:30")
    assert [at[f"step-2-exchange-{n}"] for n in (1, 2, 3)] == [
        clock("14T05:30"),
        clock("14T06:10"),
        clock("14T06:50"),
    ]
    assert at["step-3-prepare"] == clock("14T07:00")
    assert at["step-3-start"] == clock("14T07:30")
    assert at["step-4-start"] == clock("14T22:35")
    assert at["step-5-start"] == clock("14T22:45")
    assert at["end"] == clock("15T22:45")
    assert {action.do for action in sheet.actions} >= {
        *("prepare", "add", "move", "change", "rinse", "check", "stop", "hold", "visit", "end")
    }


@pytest.mark.parametrize("path", sorted(DEMOS.glob("*.toml")), ids=lambda path: path.stem)
def test_the_steps_of_the_demo_plans_start_on_the_sheet_when_they_do(path):
    """Each step of a demo plan starts on its sheet when the forecast says that it starts."""
    plan = read_plan(path)
    told = forecast(plan, 32)
    first = {}
    for action in bench_sheet(plan, 32).actions:
        if action.step is not None and action.do != "prepare":
            first.setdefault(action.step, action.at)

    assert [first[step.index] for step in told.steps] == [step.start for step in told.steps]


def test_actions_follow_one_another():
    """The actions stand in the order of the clock, each under a name of its own."""
    sheet = sheet_of(whole=True)
    hours = [action.hours for action in sheet.actions]

    assert hours == sorted(hours)
    assert len(times(sheet)) == len(hours)


def test_times_outside_the_visits_are_marked():
    """What falls where nobody is said to be there is marked; what a bath does by itself is not."""
    sheet = sheet_of()
    actions = {action.key: action for action in sheet.actions}

    assert not actions["step-1-addition-1"].attended
    assert actions["step-1-bath-4"].attended
    assert actions["step-1-bath-4"].by_itself
    assert actions["visit-1"].attended
    assert actions["step-1-start"].attended
    (table,) = [
        block
        for section in sheet.sections
        if section.heading == "On the clock"
        for block in section.blocks
        if isinstance(block, Table)
    ]
    marked = [row.cells[1] for row in table.rows if len(row.cells) > 1 and "•" in row.cells[1]]
    assert marked == ["Thu 20:30\u00a0•"]


def test_a_plan_without_a_clock_counts_from_its_start():
    """Without a start the actions have hours and no clock, and visits are none."""
    sheet = sheet_of(start="")
    table = next(
        block
        for section in sheet.sections
        if section.heading == "On the clock"
        for block in section.blocks
    )
    shown = [row.cells[1] for row in table.rows]

    assert {action.at for action in sheet.actions} == {None}
    assert shown[:3] == ["−0:30", "+0:00", "+0:20"]
    assert "+15:05" in shown


def test_window_and_chances_are_those_of_the_forecast():
    """Ready, too far and the chance of a visit stand on the clock as the forecast has them."""
    plan = read_plan(DEMOS / "porpoise-tendon-overnight.toml")
    told, sheet = forecast(plan), bench_sheet(plan)
    at = times(sheet)
    visit = next(action for action in sheet.actions if action.key == "visit-1")

    assert at["ready"] == told.window.opens
    assert at["too-far"] == told.window.closes
    assert f"{100 * told.visits[0].in_time:.0f} %" in visit.text
    assert f"Ready by now: {100 * (told.ready_h <= 15.0).mean():.0f} %" in visit.see


def test_what_should_be_seen_follows_the_extent():
    """The look of the piece goes from firm to falling apart as the extent grows."""
    told = forecast(plan_of(spread="", visits=""))
    looks = [seen_at(told, hours).split(",")[0] for hours in (0.0, 1.0, 2.5, 15.0)]

    assert looks[0] == "Firm"
    assert looks[-1].startswith("Falls apart")
    assert len(set(looks)) >= 3


def test_the_charts_hold_what_the_forecast_tells():
    """The chart has the forecast's curve, target, window and visits, in hours of the plan."""
    plan = plan_of()
    told = forecast(plan, 64)
    charts = [b for s in bench_sheet(plan, 64).sections for b in s.blocks if isinstance(b, Chart)]
    (chart,) = charts
    rounded = bench_sheet(plan, 64)

    assert chart.target == told.plan.sample.target_extent.quantity.value
    assert chart.visits == ((15.0, 23.5), (39.0, 47.5))
    assert chart.hours[-1] == pytest.approx(told.steps[0].hours)
    assert chart.opens == next(a.hours for a in rounded.actions if a.key == "ready")
    assert all(low <= high for low, high in zip(chart.low, chart.high, strict=True))


def test_a_treatment_without_a_digest_has_a_sheet():
    """Demineralising alone gives a sheet with its baths and its chart, and no digest."""
    plan = plan_of(whole=True)
    sheet = bench_sheet(replace(plan, steps=plan.steps[:2]), 32)

    assert times(sheet)["step-1-change-3"] == clock("13T17:30")
    assert [c.low_drawn for s in sheet.sections for c in s.blocks if isinstance(c, Chart)] == [True]
