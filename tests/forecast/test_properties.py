"""What must hold for any plan: more is never later, cutting changes nothing, spelling neither."""

import math

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from digestplan.forecast.run import forecast
from digestplan.forecast.window import spread
from digestplan.plan.read import parse_plan
from tests.forecast.plans import DEPTH, SPREAD, plan_text

few = settings(deadline=None, derandomize=True, max_examples=25)
laws = st.sampled_from(["first_order", "erosion"])
masses = st.floats(0.5, 40.0)


def digest(n_draws=200, **changes):
    """The forecast of the one digest step of a changed plan."""
    return forecast(parse_plan(plan_text(**changes), "plan.toml"), n_draws).steps[0]


def hours(step):
    """Hours to target, infinite for never."""
    return math.inf if step.hours_to_target.p50 is None else step.hours_to_target.p50


@few
@given(masses, st.floats(1.01, 4.0), st.sampled_from(["", DEPTH]), laws)
def test_more_enzyme_is_never_later(mass, factor, more, law):
    """A larger charge never reaches the target later."""
    assume(not (more and law == "erosion"))
    less, much = (digest(charge=f"{m:.6g} mg", more=more, law=law) for m in (mass, mass * factor))

    assert hours(much) <= hours(less) * (1 + 1e-9)


@few
@given(st.floats(5.0, 60.0), st.floats(0.5, 20.0), st.sampled_from(["", DEPTH]))
def test_warmer_without_inactivation_is_never_later(celsius, warmer, more):
    """Without inactivation, warmth never delays."""
    cold, warm = (
        digest(death="0 1/h", more=more, programme=f'temperature = "{t:.4f} degC"\nfor = "16 h"')
        for t in (celsius, celsius + warmer)
    )

    assert hours(warm) <= hours(cold) * (1 + 1e-9)


@few
@given(st.floats(0.05, 0.95), st.sampled_from(["", DEPTH]))
def test_splitting_a_stretch_changes_nothing(share, more):
    """A stretch written as two of the same temperature gives the same forecast."""
    first, second = 16 * share, 16 * (1 - share)
    cut = (
        f'temperature = [{{ at = "37 degC", for = "{first!r} h" }}, '
        f'{{ at = "37 degC", for = "{second!r} h" }}]'
    )
    whole, parts = digest(more=more), digest(more=more, programme=cut)

    assert parts.extent_at_end.p50 == pytest.approx(whole.extent_at_end.p50, rel=1e-9)
    assert parts.dose_at_end.p50 == pytest.approx(whole.dose_at_end.p50, rel=1e-9)
    assert hours(parts) == pytest.approx(hours(whole), rel=1e-6)


@few
@given(st.floats(0.05, 0.95), st.sampled_from(["", DEPTH]))
def test_time_for_a_target_inverts_extent_at_a_time(share, more):
    """A step that ends at the hours to its target ends at its target."""
    step = digest(target=f"{share:.6f}", more=more)
    assume(step.hours_to_target.p50 is not None)
    again = digest(
        target=f"{share:.6f}",
        more=more,
        programme=f'temperature = "37 degC"\nfor = "{step.hours_to_target.p50!r} h"',
    )

    assert again.extent_at_end.p50 == pytest.approx(float(f"{share:.6f}"), rel=1e-7)


SPELLINGS = [
    {"charge": "0.006 g"},
    {"charge": "6000 µg"},
    {"charge": "6000 ug"},
    {"mass": "0.18 g"},
    {"thickness": "1500 µm"},
    {"thickness": "0.15 cm"},
    {"fraction": "30 %"},
    {"energy": "52000 J/mol"},
    {"death": "0.0005 1/min"},
    {"death": "0.03 h-1"},
    {"programme": 'temperature = "37 °C"\nfor = "960 min"'},
    {"programme": 'temperature = "310.15 K"\nfor = "15 h 60 min"'},
    {"programme": 'temperature = "37 C"\nfor = "16h"'},
]


@pytest.mark.parametrize("spelling", SPELLINGS)
def test_units_in_any_spelling_give_the_same_forecast(spelling):
    """However a value is spelt, the forecast is the same."""
    plain, other = digest(), digest(**spelling)

    assert other.extent_at_end.p50 == pytest.approx(plain.extent_at_end.p50, rel=1e-12)
    assert hours(other) == pytest.approx(hours(plain), rel=1e-9)


def test_permuting_draws_changes_nothing():
    """The percentiles of a forecast do not depend on the order of its draws."""
    step = digest(**SPREAD)
    shuffled = np.random.default_rng(3).permutation(step.ready_h)

    assert spread(shuffled) == step.hours_to_target


def test_the_same_seed_gives_the_same_numbers_and_another_nearly():
    """A seed fixes the forecast; another moves its median by little."""
    text = plan_text(**SPREAD)
    one, same, other = (
        forecast(parse_plan(text, "plan.toml"), 2000, seed).steps[0] for seed in (1, 1, 2)
    )

    assert one.hours_to_target == same.hours_to_target
    assert other.hours_to_target != one.hours_to_target
    assert other.hours_to_target.p50 == pytest.approx(one.hours_to_target.p50, rel=0.02)


@pytest.mark.source("C", "first-order law and no death: hours = ln(10)/(s r), by hand")
def test_a_plan_that_can_be_done_by_hand():
    """Without death at the reference temperature the hours are those of the closed formula."""
    ratio = 6 * 280 * 0.82 / (0.180 * 0.30)  # CDU/g
    step = digest(death="0 1/h")

    assert step.hours_to_target.p50 == pytest.approx(math.log(10) / (2e-5 * ratio), rel=1e-9)
    assert step.hours_to_keep_limit.p50 == pytest.approx(
        -math.log(0.95) / (2e-5 / 60 * ratio), rel=1e-9
    )
    assert step.dose_at_end.p50 == pytest.approx(16 * ratio, rel=1e-12)


@pytest.mark.source("C", "first-order death: ceiling = 1 − exp(−s r/k), by hand")
def test_the_ceiling_is_the_dose_given_for_ever():
    """The ceiling is the extent of the whole dose that a dying enzyme can give."""
    ratio = 6 * 280 * 0.82 / (0.180 * 0.30)
    step = digest(death="0.4 1/h", susceptibility="2e-5 g/(CDU h)")

    assert step.ceiling.p50 == pytest.approx(1 - math.exp(-2e-5 * ratio / 0.4), rel=1e-9)
    assert step.never_reaches_target == 1.0
    assert step.hours_to_target.p50 is None


def test_a_known_run_repeats_itself():
    """The known run's own plan ends at the known run's extent, whatever the enzyme's constants."""
    run = """
[sample.known_run]
ratio = "25 CDU/mg"
temperature = "30 degC"
duration = "5 h"
extent = 0.7
"""
    text = plan_text(**SPREAD, programme='temperature = "30 degC"\nfor = "5 h"', more=run).replace(
        'charge = "6 mg"', 'ratio = "25 CDU/mg"'
    )
    text = text.replace("[sample.known_run]", "").replace(run.replace("[sample.known_run]", ""), "")
    text = text.replace("[lot]", run + "[lot]").replace("0.82 ± 0.06", "0.82")
    step = forecast(parse_plan(text, "plan.toml"), 500).steps[0]

    assert step.extent_at_end.p05 == pytest.approx(0.7, rel=1e-9)
    assert step.extent_at_end.p95 == pytest.approx(0.7, rel=1e-9)


def test_a_thicker_piece_of_what_is_eaten_from_its_surface_takes_as_much_longer():
    """Under erosion the time goes with the thickness over that of the known run."""
    run = """
[sample.known_run]
ratio = "25 CDU/mg"
temperature = "37 degC"
duration = "5 h"
extent = 0.7
thickness = "1 mm"
"""

    def taken(thickness):
        text = plan_text(law="erosion", death="0 1/h", thickness=thickness, target="0.6")
        text = text.replace("[lot]", run + "[lot]")
        return hours(forecast(parse_plan(text, "plan.toml")).steps[0])

    assert taken("2 mm") == pytest.approx(2 * taken("1 mm"), rel=1e-9)


def test_an_addition_is_never_worse_than_none():
    """Fresh enzyme during the digest brings the target nearer and the ceiling up."""
    programme = 'temperature = "37 degC"\nfor = "16 h"'
    more = programme + '\nadditions = [{ after = "3 h", charge = "2 mg" }]'
    plain, helped = (
        digest(death="0.4 1/h", programme=p, susceptibility="2e-6 g/(CDU h)")
        for p in (programme, more)
    )

    assert helped.ceiling.p50 > plain.ceiling.p50
    assert helped.extent_at_end.p50 > plain.extent_at_end.p50


def test_a_hold_goes_on_with_what_is_left():
    """A digest cut in two by calling its second half a hold ends as the whole one."""
    halves = (
        'temperature = "37 degC"\nfor = "8 h"\n'
        '[[steps]]\ndo = "hold"\ntemperature = "37 degC"\nfor = "8 h"\nlag = "0 min"'
    )
    for more in ("", DEPTH):
        whole = digest(more=more)
        steps = forecast(parse_plan(plan_text(programme=halves, more=more), "plan.toml")).steps
        assert steps[1].extent_at_end.p50 == pytest.approx(whole.extent_at_end.p50, rel=1e-9)
        assert steps[1].residual_activity_at_end.p50 == pytest.approx(
            whole.residual_activity_at_end.p50, rel=1e-9
        )
