"""Whole treatments: the clock, what one step leaves to the next, common practice of digests."""

from itertools import pairwise
from pathlib import Path

import pytest

from digestplan.forecast.run import forecast
from digestplan.plan.read import parse_plan, read_plan
from tests.forecast.treatment import bath, codes, digest, forecast_of, plan, rinse, step, within

DEMOS = Path(__file__).parents[2] / "presets_demo"
EDTA = bath("edta", "0.5 M", 20, 300, ph=7.4)
STOP = step("stop", how="chelate", concentration="20 mM")
HOLD = step("hold", temperature="4 degC", for_="24 h")
WHOLE = plan(EDTA, rinse(4, "4 h", "20 mL"), digest(ratio="200 CDU/mg"), STOP, HOLD)


def test_steps_follow_each_other_on_one_clock():
    """Each step starts where the one before ended."""
    steps = forecast_of(WHOLE).steps

    assert [s.do for s in steps] == ["demineralise", "rinse", "digest", "stop", "hold"]
    assert steps[0].start_h == 0
    for before, after in pairwise(steps):
        assert after.start_h == pytest.approx(before.start_h + before.hours, abs=1e-9)


def test_after_a_good_stop_nothing_moves():
    """Dose and extent stand still from the stop on."""
    digested, stopped, held = forecast_of(WHOLE).steps[2:]

    assert stopped.extent_at_end.p50 == pytest.approx(digested.extent_at_end.p50, abs=1e-3)
    assert held.extent_at_end.p50 == pytest.approx(stopped.extent_at_end.p50, abs=1e-3)
    assert held.dose_at_end.p50 == pytest.approx(digested.dose_at_end.p50, rel=2e-3)


def test_a_thoroughly_rinsed_treatment_digests_as_a_plain_digest_does():
    """With nothing left in the piece the steps before leave the digest alone."""
    alone = plan(digest(ratio="200 CDU/mg"), material="demineralised-bone", sample="")
    rinsed = forecast_of(WHOLE).steps[2].hours_to_target

    assert rinsed.p50 == pytest.approx(forecast_of(alone).steps[0].hours_to_target.p50, rel=0.05)


def test_damage_adds_up():
    """What acid cost at first is still lost after the digest."""
    text = plan(
        bath("hydrochloric acid", "1 M", 30, 100),
        rinse(5, "2 h", "50 mL"),
        digest(ratio="40 CDU/mg", hours=1),
    )
    acid, _, digested = forecast_of(text).steps

    assert acid.keep_loss_at_end.p50 > 0.02
    assert digested.keep_loss_at_end.p50 >= acid.keep_loss_at_end.p50


@pytest.mark.parametrize("name", sorted(path.name for path in DEMOS.glob("*.toml")))
def test_demo_plans_are_forecast(name):
    """Every demo plan is read and forecast, and none of its cautions is a stop."""
    result = forecast(read_plan(DEMOS / name), 200)

    assert len(result.steps) == len(result.plan.steps)
    assert all(c.level != "stop" for c in result.cautions)


@pytest.mark.parametrize("name", ["seal-rib-edta.toml", "gull-femur-acid.toml"])
def test_demo_treatments_are_sound(name):
    """The demo treatments demineralise to the end, rinse enough and stop for good."""
    result = forecast(read_plan(DEMOS / name))
    found = {c.code for c in result.cautions}

    assert result.steps[0].extent_at_end.p05 > 0.99
    assert not found & {"rinse-too-short", "bath-cannot-hold", "mineral-left", "stop-does-not-stop"}


def test_the_same_plan_gives_the_same_numbers():
    """A treatment is forecast alike twice, and otherwise with another seed."""
    one, two, other = (
        forecast(parse_plan(WHOLE, "p.toml"), 200, seed).steps[0].hours_to_target
        for seed in (1, 1, 2)
    )

    assert one == two
    assert one != other


# -- digests of common practice -------------------------------------------------------------------


@pytest.mark.parametrize("thickness", ["0.08 mm", "0.12 mm"])
def test_a_small_loose_collagen_sample_goes_in_half_an_hour(thickness):
    """Common practice: small, loose, plenty of collagenase, 37 °C: about half an hour."""
    text = plan(digest(ratio="100 CDU/mg"), material="tendon", thickness=thickness)
    hours = forecast_of(text).steps[0].hours_to_target

    assert within(hours, 0.5)
    assert 0.25 < hours.p50 < 1.0


def test_an_overnight_trypsin_digest_is_about_complete():
    """Common practice: trypsin 1:50 at 37 °C is about complete (95 %) in 12 to 18 h."""
    text = plan(
        digest(ratio="1:50", ph=8.0, ph_at="37 degC", hours=18, buffer_concentration="50 mM"),
        material="muscle",
        enzyme="trypsin",
        thickness="0.2 mm",
        sample="target_extent = 0.95",
    )
    hours = forecast_of(text).steps[0].hours_to_target

    assert 12 < hours.p50 < 18


def dose_rate(enzyme, celsius):
    """Median dose of the first quarter of an hour."""
    ratio = "40 CDU/mg" if enzyme == "clostridial-collagenase" else "1:50"
    text = plan(
        digest(celsius, hours=0.25, ratio=ratio, ph_at=f"{celsius} degC", ph=7.8, lag="0 min"),
        material="tendon",
        enzyme=enzyme,
    )
    return forecast_of(text).steps[0].dose_at_end.p50


@pytest.mark.parametrize("enzyme", ["clostridial-collagenase", "trypsin"])
def test_the_cold_room_is_ten_times_slower_or_more(enzyme):
    """Common practice: at 4 °C a digest is roughly ten times slower than at 37 °C, or more."""
    assert 9 < dose_rate(enzyme, 37) / dose_rate(enzyme, 4) < 40


def test_collagenase_overnight_in_common_amounts_takes_a_millimetre_of_tendon():
    """Common practice: millimetre pieces are gone overnight or sooner."""
    text = plan(digest(ratio="100 CDU/mg"), material="tendon", thickness="1 mm")

    assert 2 < forecast_of(text).steps[0].hours_to_target.p50 < 16


def test_pepsin_takes_days_in_the_cold_and_hours_in_the_warm():
    """Common practice: pepsin in dilute acid, 1 to 3 days at 4 °C; far sooner at 37 °C."""
    hours = {
        celsius: forecast_of(
            plan(
                digest(celsius, 100, "1:10", buffer="formate", ph=2.2, calcium=None),
                material="tendon",
                enzyme="pepsin",
            )
        )
        .steps[0]
        .hours_to_target.p50
        for celsius in (4, 37)
    }

    assert 24 < hours[4] < 72
    assert hours[37] < hours[4] / 4


def test_a_mineralised_piece_is_not_digested_before_its_mineral_is_gone():
    """A plan that leaves most of the mineral is told so."""
    text = plan(bath("edta", "0.5 M", 4, 2, ph=7.4), rinse(4, "4 h"), digest())

    assert "mineral-left" in codes(text)
