"""Amounts on a sheet: practical, with the lot taken in, and forecast as they are rounded."""

from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.forecast.run import forecast
from digestplan.plan.model import Digest, Environment, Value
from digestplan.plan.read import read_plan
from digestplan.quantities.model import Quantity
from digestplan.report.sheet.amounts import amounts, room_ph
from digestplan.report.sheet.assumptions import assumptions
from digestplan.report.sheet.build import bench_sheet
from digestplan.report.sheet.portions import FIRST, carried_out
from digestplan.report.sheet.rounding import (
    mass_text,
    practical_mass,
    practical_volume,
    stock_for,
    volume_text,
)
from digestplan.report.verdict import verdict
from tests.report.sheet_plans import plan_of, sheet_of

DEMOS = Path(__file__).parents[2] / "presets_demo"


def shown(sheet, what):
    """The amount of which a sheet says `what`."""
    (found,) = [amount for amount in sheet.amounts if amount.what == what]
    return found


# -- rounding ------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("grams", "text"),
    [
        (2.3871e-3, "2.4 mg"),
        (8e-3, "8.0 mg"),
        (1.04e-3, "1.0 mg"),
        (99.96e-3, "100 mg"),
        (0.18049, "180 mg"),
        (3.7224, "3.72 g"),
        (1234.5, "1,230 g"),
        (0.3335e-3, "330 µg"),
        (0.45e-6, "450 ng"),
    ],
)
def test_a_mass_is_what_a_balance_gives(grams, text):
    """Masses are told to 0.1 mg, larger ones to three digits, those for a stock to two."""
    assert mass_text(practical_mass(grams)) == text


@pytest.mark.parametrize(
    ("millilitres", "text"),
    [
        (3.0, "3 mL"),
        (0.012345, "12.3 µL"),
        (0.5, "500 µL"),
        (2.3456, "2.35 mL"),
        (0.9999, "1 mL"),
        (1234.0, "1.23 L"),
    ],
)
def test_a_volume_is_what_a_pipette_gives(millilitres, text):
    """Volumes are told to three digits, in µL below 1 mL and in litres from 1000 mL on."""
    assert volume_text(practical_volume(millilitres)) == text


@settings(deadline=None, derandomize=True)
@given(st.floats(1e-3, 1e3))
def test_rounding_a_mass_moves_it_by_half_a_step(grams):
    """A mass that is weighed moves by 0.05 mg at the most, or by half a per cent."""
    assert abs(practical_mass(grams) - grams) <= max(0.0501e-3, 0.00501 * grams)


@settings(deadline=None, derandomize=True)
@given(st.floats(1e-9, 0.999e-3), st.floats(0.3, 100.0))
def test_a_stock_holds_the_amount_in_a_volume_worth_pipetting(grams, bath):
    """The volume of a stock holds the amount, can be pipetted, and leaves the bath its volume."""
    stock = stock_for(grams, bath)

    assert stock.amount == pytest.approx(grams, rel=0.0051)
    assert stock.mass / stock.volume == pytest.approx(stock.concentration)
    assert stock.mass >= 1e-3  # it can be weighed itself
    strongest = grams / 0.010  # mL of a stock of 10 mg/mL
    assert 0.00995 <= stock.pipetted <= 1.006 * max(0.1 * bath, strongest)
    assert stock.pipetted <= stock.volume * stock.dilution


def test_a_bath_too_small_for_a_tenth_still_gets_a_stock():
    """In a drop of 20 µL no tenth is worth pipetting: the volume is still given."""
    stock = stock_for(0.5e-3, 0.02)

    assert stock.amount == pytest.approx(0.5e-3, rel=0.01)


# -- the plan in rounded amounts -----------------------------------------------------------------


def test_the_lot_is_taken_in():
    """A ratio becomes the mass that holds it: label activity and what is left of it count."""
    sheet = sheet_of(charge='ratio = "40 CDU/mg"')
    by_hand = 40 * 180 * 0.30 / (280 * 0.82)  # mg

    assert by_hand == pytest.approx(9.408, abs=0.001)
    assert shown(sheet, "an invented protease").amount == "9.4 mg"
    assert "2,160 CDU active" in shown(sheet, "an invented protease").how  # 9.4 · 280 · 0.82


@pytest.mark.parametrize(
    "charge",
    [
        'charge = "6.27 mg"',
        'charge = "1755 CDU"',
        'ratio = "26.7 CDU/mg"',
        'concentration = "2.09 mg/mL"',
        'concentration = "585 CDU/mL"',
        'charge = "0.4277 mg"',
    ],
)
def test_the_forecast_weighs_in_what_the_sheet_says(charge):
    """However the charge is written, the forecast of the rounded plan weighs in what is shown."""
    carried = carried_out(plan_of(charge=charge, volume="3.0049 mL", spread=""))
    told = forecast(carried.plan)
    portion = carried.portions[0, FIRST]
    texts = [amount.amount for amount in amounts(carried, told)]

    assert told.weighed[0] == pytest.approx(portion.mass, rel=1e-12)
    assert carried.plan.steps[0].volume.quantity.value == pytest.approx(3.0)
    if portion.stock is None:
        assert mass_text(portion.mass) in texts
        assert portion.mass * 1e4 == pytest.approx(round(portion.mass * 1e4), abs=1e-9)
    else:
        assert volume_text(portion.stock.pipetted) in texts


def test_the_forecast_is_of_the_rounded_amounts():
    """What a sheet forecasts is the rounded plan's, which is another than that of the plan."""
    plan = plan_of(charge='charge = "1.049 mg"', spread="")
    rounded = replace(
        plan,
        steps=tuple(
            replace(
                step,
                charge=replace(step.charge, quantity=Quantity(1.0e-3)),
                additions=tuple(
                    replace(a, charge=replace(a.charge, quantity=Quantity(2.0e-3)))
                    for a in step.additions
                ),
            )
            for step in plan.steps
        ),
    )
    large = bench_sheet(plan).sections[0].blocks[0].lines[0]

    assert large == verdict(forecast(rounded))
    assert large != verdict(forecast(plan))


def test_what_is_round_already_stays_as_it_is():
    """A plan in round amounts is carried out as written, to the last bit."""
    plan = plan_of()
    plain = replace(plan, steps=tuple(replace(step, additions=()) for step in plan.steps))

    assert carried_out(plain).plan == plain


def test_too_little_to_weigh_becomes_a_stock():
    """Less than a milligram is pipetted from a stock, and the liquid leaves room for it."""
    sheet = sheet_of(charge='charge = "0.3 mg"')

    assert shown(sheet, "stock of an invented protease").amount == "5.0 mg"
    assert shown(sheet, "an invented protease from the stock").amount == "60 µL"
    assert shown(sheet, "liquid").amount == "2.94 mL"
    assert "3 mL in all" in shown(sheet, "liquid").how


def test_a_piece_that_is_not_weighed_yet_gives_no_mass():
    """A ratio without the mass of the piece stays a ratio: no mass is invented."""
    plan = plan_of(charge='ratio = "40 CDU/mg"')
    piece = plan.sample.wet_mass
    open_plan = replace(
        plan,
        sample=replace(plan.sample, wet_mass=replace(piece, origin="default")),
        steps=tuple(replace(step, additions=()) for step in plan.steps),
    )
    sheet = bench_sheet(open_plan, 32)

    assert shown(sheet, "an invented protease").amount == "40 CDU/mg"
    assert "weigh the piece first" in shown(sheet, "an invented protease").how
    assert shown(sheet, "piece, blotted").amount == "weigh it"


# -- liquids -------------------------------------------------------------------------------------


def exact(value, place):
    """A value of a plan without spread."""
    return Value(Quantity(value), place, "plan", "")


@pytest.mark.source("P", "Bates & Hetzer 1961, as quoted by Goldberg, Kishore & Lennen 2002")
@pytest.mark.parametrize(("celsius", "pk"), [(0, 8.8500), (35, 7.8031), (50, 7.4365)])
def test_the_ph_to_set_moves_as_the_pk_of_tris(celsius, pk):
    """Tris wanted at a pH in the warm or in the cold is set as its measured pK moves."""
    liquid = Environment(ph=exact(7.5, "ph"), ph_at=exact(celsius + 273.15, "ph_at"), buffer="tris")

    assert room_ph(liquid, 293.15) == pytest.approx(7.5 + 8.2138 - pk, abs=0.012)


def test_the_ph_set_at_room_temperature_is_told_for_the_room():
    """A pH stated in the warm is told for a room at 20 and at 25 °C, and as it will be."""
    told = shown(sheet_of(ph_at="37 degC"), "liquid").how

    assert "set to pH 7.82 in a room at 25 °C, 7.96 at 20 °C; it is 7.50 at 37 °C" in told
    assert "50 mM tris, 5 mM calcium" in told


def test_a_buffer_that_hardly_moves_has_one_ph():
    """Where the pH is the same at 20 and 25 °C it is told once."""
    plan = plan_of()
    steps = tuple(
        replace(step, environment=Environment(ph=exact(4.8, "ph"), buffer="acetate"))
        for step in plan.steps
        if isinstance(step, Digest)
    )

    assert (
        "set to pH 4.80 (room at 20 to 25 °C)"
        in shown(bench_sheet(replace(plan, steps=steps), 16), "liquid").how
    )


@pytest.mark.source("P", "Formula weight of disodium EDTA dihydrate, 372.24 g/mol (from memory)")
def test_edta_is_weighed_by_its_formula():
    """The mass of EDTA for a bath is volume times strength times formula weight."""
    sheet = bench_sheet(read_plan(DEMOS / "seal-rib-edta.toml"), 16)

    grams = 0.020 * 0.5 * 372.24
    assert shown(sheet, "EDTA, disodium dihydrate").amount == f"{grams:.2f} g"


def test_what_stops_is_pipetted_so_that_it_reaches_its_strength():
    """The volume of stock brings the liquid to the strength that the plan states."""
    stop = shown(sheet_of(whole=True), "EDTA, to stop")
    microlitres = float(stop.amount.split()[0])

    assert stop.amount.endswith("µL")
    assert "0.5 M" in stop.how
    assert microlitres * 500 / (3000 + microlitres) == pytest.approx(20, rel=0.003)  # mM


def test_baths_and_rinses_are_told_each_and_in_all():
    """Each bath and each rinse has its volume, and all of them together theirs."""
    sheet = sheet_of(whole=True)

    assert shown(sheet, "each bath").amount == "20 mL"
    assert "60 mL for 3 baths" in shown(sheet, "each bath").how
    assert shown(sheet, "each rinse").amount == "10 mL"
    assert "30 mL for 3 exchanges" in shown(sheet, "each rinse").how


def test_every_assumption_has_its_source():
    """Each value of the library stands with its source, each of the plan as written there."""
    plan = read_plan(DEMOS / "seal-skin-37.toml")
    rows = dict(assumptions(forecast(plan, 16)))

    assert "wet mass 95 mg ± 2 mg" in rows["Written in the plan"]
    for name, value in plan.enzyme.values.items():
        told = f"{name.replace('_', ' ')} "
        if value.origin == "library":
            assert told in rows["Library, enzyme"]
            assert f"[{value.source}]" in rows["Library, enzyme"]
    assert all(rows.values())
