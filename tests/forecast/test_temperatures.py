"""The comparison of temperatures says what single forecasts of the same plans say."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from digestplan.forecast.run import forecast
from digestplan.forecast.temperatures import compare
from digestplan.forecast.variants import at_temperature, main_of, with_enzyme
from digestplan.plan.read import parse_plan
from digestplan.problems import InputError
from tests.forecast.plans import DEPTH, SPREAD, plan_text

DEMO = Path(__file__).parents[2] / "presets_demo"
CHILLED = """temperature = [
  { at = "22 degC", for = "20 min" },
  { to = "37 ± 0.5 degC", over = "15 min" },
  { at = "37 ± 0.5 degC", for = "5 h" },
  { to = "4 ± 0.7 degC", over = "30 min" },
  { at = "4 ± 0.7 degC", for = "9 h" },
]
[[steps]]
do = "hold"
temperature = "4 ± 0.7 degC"
for = "6 h"
"""
AUTOLYSIS = """inactivation = "autolysis"
autolysis_rate = "0.5 mL/(mg h) x/ 1.5"
autolysis_energy = "60 kJ/mol"
"""
SATURATED = 'saturation_ratio = "30 CDU/mg x/ 1.3"'
TWO_STAGE = """inactivation = "two_stage"
intermediate_activity = 0.4
second_inactivation_rate = "0.02 1/h"
second_inactivation_energy = "200 kJ/mol"
"""
PLANS = {
    "one temperature": plan_text(**SPREAD),
    "chill and hold": plan_text(**SPREAD, programme=CHILLED),
    "depth": plan_text(**SPREAD, more=DEPTH),
    "depth and autolysis": plan_text(**SPREAD, more=DEPTH + "\n" + AUTOLYSIS),
    "autolysis": plan_text(**SPREAD, more=AUTOLYSIS),
    "two stages": plan_text(**SPREAD, more=TWO_STAGE),
    "crowded surface": plan_text(**SPREAD, more=SATURATED),
    "slab": plan_text(**SPREAD, law="erosion"),
}


def same(ours, single):
    """Draws of a time agree: infinite together, else to a part in a hundred million."""
    assert np.array_equal(np.isinf(ours), np.isinf(single))
    finite = np.isfinite(ours)
    assert single[finite] == pytest.approx(ours[finite], rel=1e-7, abs=1e-9)


def near(hours):
    """A time to eight digits, or none at all."""
    return None if hours is None else pytest.approx(hours, rel=1e-8)


def start_of(plan, result):
    """Hours from the plan's start to its digest."""
    return result.steps[main_of(plan).index].start_h


@pytest.mark.parametrize("name", PLANS)
def test_each_option_is_the_forecast_of_its_plan_draw_by_draw(name):
    """Ready and too far of every draw, and what is told of them, are those of single forecasts."""
    plan = parse_plan(PLANS[name], "plan.toml")
    compared = compare(plan, [4, 20, 37, 58], n_draws=150, seed=5, curve=False)
    for option in compared.options:
        variant = at_temperature(plan, compared.main, option.temperature)
        single = forecast(variant, n_draws=150, seed=5)
        step = single.steps[0]
        same(option.ready_h, single.ready_h)
        same(option.too_far_h, single.too_far_h)
        assert option.chance_in_time == single.visits[0].in_time
        assert option.ceiling.p50 == pytest.approx(step.ceiling.p50, rel=1e-9)
        assert option.window.opens_h == near(single.window.opens_h)
        assert option.window.closes_h == near(single.window.closes_h)
        assert option.ph == step.ph_at_temperature
        assert option.never_reaches_target == single.never_ready


def test_an_option_is_the_plan_that_a_user_would_write():
    """Writing another temperature into the file gives the draws of the comparison."""
    text = PLANS["chill and hold"]
    compared = compare(parse_plan(text, "plan.toml"), [30, 4], n_draws=200, curve=False)
    for option, celsius in zip(compared.options, ("30 ± 0.5", "4 ± 0.5"), strict=True):
        written = parse_plan(text.replace("37 ± 0.5", celsius), "plan.toml")
        same(option.ready_h, forecast(written, n_draws=200).ready_h)


@pytest.mark.parametrize(
    "name", ["gull-femur-acid", "seal-rib-edta", "antler-sliver-formic", "seal-skin-37"]
)
def test_whole_treatments_are_compared_alike(name):
    """Also after a bath and a rinse, and before a stop, options are single forecasts."""
    plan = parse_plan((DEMO / f"{name}.toml").read_text("utf-8"), name)
    compared = compare(plan, [20, 37], n_draws=60, curve=False)
    for option in compared.options:
        single = forecast(at_temperature(plan, compared.main, option.temperature), n_draws=60)
        start = start_of(plan, single)
        same(option.ready_h + start, single.ready_h)
        same(option.too_far_h + start, single.too_far_h)


@pytest.mark.parametrize("name", ["one temperature", "depth", "crowded surface", "two stages"])
def test_the_charge_for_the_visit_makes_it_ready_at_the_visit(name):
    """With that charge the asked share of draws is ready when the visit begins, 15 h on."""
    plan = parse_plan(PLANS[name], "plan.toml")
    (option,) = compare(plan, [30], n_draws=400, curve=False).options
    variant = at_temperature(plan, main_of(plan), 303.15)
    single = forecast(with_enzyme(variant, option.charge_for_visit / 6e-3), n_draws=400)

    assert np.quantile(single.ready_h, 0.9) == pytest.approx(15.0, rel=0.01)


def test_the_charge_for_the_visit_with_autolysis():
    """Where more enzyme also eats itself the charge is found by trying, to a few per cent."""
    plan = parse_plan(PLANS["autolysis"].replace("0.5 mL", "0.05 mL"), "plan.toml")
    (option,) = compare(plan, [30], n_draws=256, curve=False).options
    variant = at_temperature(plan, main_of(plan), 303.15)
    single = forecast(with_enzyme(variant, option.charge_for_visit / 6e-3), n_draws=256)

    assert option.charge_for_visit > 0
    assert np.quantile(single.ready_h, 0.9) == pytest.approx(15.0, rel=0.02)


def test_a_surface_too_crowded_has_no_charge_for_the_visit():
    """Where even a covered surface is too slow no amount is told."""
    slow = {**SPREAD, "susceptibility": "1e-9 g/(CDU h)"}
    plan = parse_plan(plan_text(**slow, more=SATURATED), "plan.toml")
    (option,) = compare(plan, [37], n_draws=100, curve=False).options

    assert option.charge_for_visit is None


@pytest.mark.parametrize("name", PLANS)
def test_what_is_not_in_time_is_explained_in_full(name):
    """The shares of what keeps draws from being in time add up to those that are not."""
    plan = parse_plan(PLANS[name], "plan.toml")
    for option in compare(plan, [4, 37, 60], n_draws=100, curve=False).options:
        missed = option.missed
        total = missed.dies + missed.slow + missed.melts + missed.too_soon
        assert total == pytest.approx(1 - option.chance_in_time, abs=1e-12)


def test_cold_is_slow_and_heat_kills():
    """At 4 °C it is not done by the visit; at 60 °C the enzyme is dead long before."""
    plan = parse_plan(PLANS["one temperature"], "plan.toml")
    cold, hot = compare(plan, [4, 60], n_draws=200, curve=False).options

    assert cold.missed.slow > 0.9 * (1 - cold.chance_in_time)
    assert hot.missed.dies > 0.9 * (1 - hot.chance_in_time)


def test_where_the_matrix_melts_it_is_said():
    """With heat damage that comes in minutes, heat is what keeps a warm plan from being in time."""
    damage = '[sample.damage]\nmelting_rate = "2 1/h"\nmelting_energy = "500 kJ/mol"\n'
    text = PLANS["one temperature"].replace(
        "[lot]", damage + 'melting_temperature = "60 degC"\n[lot]'
    )
    hot, mild = compare(parse_plan(text, "plan.toml"), [60, 30], n_draws=100, curve=False).options

    assert hot.missed.melts + hot.missed.dies == pytest.approx(1.0)
    assert mild.missed.melts == 0


def test_enzyme_that_goes_on_too_fast_is_too_soon():
    """With ten times the enzyme the window is over before anybody comes."""
    text = plan_text(**SPREAD, charge="120 mg", selectivity="20")
    (option,) = compare(parse_plan(text, "plan.toml"), [37], n_draws=100, curve=False).options

    assert option.missed.too_soon > 0.9


def test_a_short_heating_is_not_where_a_plan_digests():
    """Ten minutes at 95 °C that kill the enzyme are not the main stretch."""
    programme = """temperature = [
      { at = "37 degC", for = "5 h" }, { to = "95 degC", over = "10 min" },
      { at = "95 degC", for = "10 min" } ]"""
    main = main_of(parse_plan(plan_text(programme=programme), "plan.toml"))

    assert main.temperature == pytest.approx(310.15)
    assert main.stretches == (0,)
    assert main.chill is None


def test_the_chill_stays_where_it_is():
    """A variant keeps the programmed chill and every other step; ramps go to the new set point."""
    plan = parse_plan(PLANS["chill and hold"], "plan.toml")
    main = main_of(plan)
    variant = at_temperature(plan, main, 318.15)
    points = [s.temperature.quantity.value - 273.15 for s in variant.steps[0].programme]

    assert main.chill == 3
    assert points == pytest.approx([22, 45, 45, 4, 4])
    assert variant.steps[1] == plan.steps[1]


def test_the_best_temperature_is_that_of_single_forecasts():
    """The fine grid's best chance is the best of forecasts of its neighbours."""
    text = plan_text(**SPREAD, programme=CHILLED, selectivity="300")
    plan = parse_plan(text, "plan.toml")
    compared = compare(plan, [37], n_draws=128)
    best, gentle = compared.best_by_chance, compared.best_by_harm

    def chance(temperature):
        variant = at_temperature(plan, compared.main, temperature)
        return forecast(variant, n_draws=128).visits[0].in_time

    assert max(chance(best + shift) for shift in (-6, -2, 0, 2, 6)) == chance(best)
    assert gentle < best  # colder is gentler, as far as it is still in time
    assert chance(gentle) >= 0.5 > chance(gentle - 0.5)
    assert len(compared.curve.temperature) == 123


def test_without_a_digest_there_is_nothing_to_compare():
    """A plan that only holds is refused in words."""
    plan = parse_plan(PLANS["one temperature"], "plan.toml")
    only = replace(plan, steps=parse_plan(PLANS["chill and hold"], "plan.toml").steps[1:])

    with pytest.raises(InputError, match="no digest step"):
        compare(only, [37], n_draws=10)


def test_without_visits_there_is_no_chance_but_all_else():
    """A plan without a clock has hours, window and reasons; chance and charge are unknown."""
    lines = [x for x in PLANS["one temperature"].splitlines() if not x.startswith(("start", "vis"))]
    compared = compare(parse_plan("\n".join(lines), "plan.toml"), [37], n_draws=64)
    (option,) = compared.options

    assert option.chance_in_time is None
    assert option.charge_for_visit is None
    assert option.hours_to_target.p50 > 0
    assert compared.best_by_chance is None
    assert compared.best_by_harm is not None
