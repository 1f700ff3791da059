"""What a history leaves of a lot: losses, their moments, and refused histories."""

import csv
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.lattice import even_deviates
from digestplan.lots.history import (
    History,
    Opening,
    Stretch,
    Thaw,
    dimensions,
    draw_remaining,
    log_remaining,
    log_remaining_moments,
    losses,
)
from digestplan.lots.storage import StorageKinetics, log_moments, storage_kinetics
from digestplan.problems import InputError
from digestplan.quantities.model import Quantity

COMPUTED = Path(__file__).parents[1] / "reference" / "computed"
YEAR = 8766.0

SOLUTION = StorageKinetics(
    log_rate=math.log(2e-4),
    log_rate_sd=math.log(2),
    energy=100e3,
    energy_sd=20e3,
    reference_temperature=298.15,
    log_thaw_loss=math.log(0.05),
    log_thaw_loss_sd=math.log(1.6),
    log_opened_factor=math.log(1.5),
    log_opened_factor_sd=0.3,
)
DRY = replace(SOLUTION, log_rate=math.log(5e-6), log_thaw_loss=-math.inf, energy=80e3)
KINETICS = {"solution": SOLUTION, "dry": DRY}


def exact(kinetics):
    return replace(
        kinetics, log_rate_sd=0.0, energy_sd=0.0, log_thaw_loss_sd=0.0, log_opened_factor_sd=0.0
    )


def arrhenius_rows():
    with (COMPUTED / "arrhenius_eyring.csv").open(encoding="utf-8") as lines:
        return [
            r for r in csv.DictReader(lines) if r["case"] == "arrhenius inactivation, Ed 230 kJ/mol"
        ]


@pytest.mark.source("L", "exact SI 2019 gas constant; Arrhenius table by mpmath and cantera")
def test_rate_follows_the_arrhenius_table():
    """Stored at each temperature of the table, a lot loses in proportion to the tabled rates."""
    rows = arrhenius_rows()
    assert rows, "the table has the storage-like activation energy"
    of = StorageKinetics(math.log(0.03), 0.0, 230e3, 0.0, 310.15)
    for row in rows:
        kelvin = float(row["T_C"]) + 273.15
        history = History((Stretch(0, 2.0, kelvin),), kinetics={"dry": of})
        lost = -log_remaining(history, {}, 2.0)[0]

        assert lost == pytest.approx(0.06 * float(row["k_over_k37"]), rel=1e-9)


def test_losses_add_up():
    """Storage, opening and thaws each take their part of ln(remaining)."""
    history = History(
        (
            Stretch(0, 100, 298.15, form="solution"),
            Stretch(100, 50, 298.15, form="solution", opened=True),
        ),
        (Thaw(10), Thaw(120, count=2), Thaw(500)),
        {"solution": exact(SOLUTION)},
        log_label=math.log(1.1),
    )
    taken = losses(history, {}, 150)

    assert taken["rate", "solution"][0] == pytest.approx(2e-4 * (100 + 1.5 * 50), rel=1e-12)
    assert taken["thaw", "solution"][0] == pytest.approx(3 * 0.05, rel=1e-12)
    assert taken["label", ""][0] == pytest.approx(-math.log(1.1), rel=1e-12)


def test_half_way_through_a_stretch():
    """Up to the middle of a stretch, half of its loss has happened; before it, none."""
    history = History((Stretch(10, 100, 298.15, form="solution"),), kinetics=KINETICS)

    whole = log_remaining(history, {}, 110)[0]
    assert log_remaining(history, {}, 60)[0] == pytest.approx(whole / 2, rel=1e-12)
    assert log_remaining(history, {}, 5)[0] == 0.0
    assert log_remaining(history, {}, 1e6)[0] == whole


@settings(deadline=None, derandomize=True, max_examples=40)
@given(
    cut=st.floats(0.01, 0.99),
    celsius=st.floats(-30, 60),
    deviates=st.tuples(*[st.floats(-3, 3)] * 3),
)
def test_cutting_a_stretch_changes_nothing(cut, celsius, deviates):
    """A stretch in one place, cut in two, loses what it lost whole, for any lot."""
    place = Stretch(0, 1000, celsius + 273.15, 2.0, "solution", place="cold room")
    parts = (
        replace(place, hours=1000 * cut),
        replace(place, start=1000 * cut, hours=1000 * (1 - cut)),
    )
    z = dict(
        zip(
            [("rate", "solution"), ("energy", "solution"), ("place", "cold room")],
            (np.array([d]) for d in deviates),
            strict=True,
        )
    )
    whole = log_remaining(History((place,), kinetics=KINETICS), z, 1000)
    cut_up = log_remaining(History(parts, kinetics=KINETICS), z, 1000)

    np.testing.assert_allclose(cut_up, whole, rtol=1e-12)


def test_one_place_errs_in_one_direction():
    """Stretches in the same place share its temperature error; others have their own."""
    at = Stretch(0, 10, 277.15, 2.0, place="fridge")
    shared = History((at, replace(at, start=10)), kinetics=KINETICS)
    apart = History((replace(at, place=""), replace(at, start=10, place="")), kinetics=KINETICS)

    assert [d for d in dimensions(shared) if d[0] == "place"] == [("place", "fridge")]
    assert len([d for d in dimensions(apart) if d[0] == "place"]) == 2


def test_moments_of_one_lognormal_loss():
    """One stretch at one temperature is log-normal, with the textbook mean and variance."""
    history = History((Stretch(0, YEAR, 277.15, form="solution"),), kinetics=KINETICS)
    lever = (1 / 298.15 - 1 / 277.15) / 8.31446261815324
    m = math.log(2e-4 * YEAR) + 100e3 * lever
    v = math.log(2) ** 2 + (20e3 * lever) ** 2

    mean, sd = log_remaining_moments(history, YEAR)

    assert mean == pytest.approx(-math.exp(m + v / 2), rel=1e-12)
    assert sd == pytest.approx(math.exp(m + v / 2) * math.sqrt(math.expm1(v)), rel=1e-12)


def test_moments_agree_with_draws():
    """The exact moments of a mixed history are those of many draws of the same."""
    history = History(
        (
            Stretch(0, 300, 295.15, form="dry"),
            Stretch(300, 48, 295.15, form="solution"),
            Stretch(348, YEAR, 277.15, form="solution", opened=True),
        ),
        (Thaw(400, count=2),),
        {
            "solution": replace(SOLUTION, log_rate_sd=0.3, energy_sd=5e3, correlation=-0.6),
            "dry": DRY,
        },
        log_label_sd=0.05,
    )
    drawn = np.log(draw_remaining(history, history.end, 2**16))

    mean, sd = log_remaining_moments(history, history.end)

    assert mean == pytest.approx(drawn.mean(), rel=2e-3)
    assert sd == pytest.approx(drawn.std(), rel=5e-3)


def test_moments_have_no_closed_form_with_uncertain_temperatures():
    """With a temperature that is itself uncertain the moments are left to draws."""
    history = History((Stretch(0, 10, 277.15, 1.0),), kinetics=KINETICS)

    assert log_remaining_moments(history, 10) is None


def test_draws_repeat_with_their_seed():
    """The same seed gives the same draws, another one others of the same distribution."""
    history = History((Stretch(0, YEAR, 277.15, form="solution"),), kinetics=KINETICS)
    first, again, other = (draw_remaining(history, YEAR, 1024, seed) for seed in (1, 1, 2))

    np.testing.assert_array_equal(first, again)
    assert not np.array_equal(first, other)
    assert np.median(first) == pytest.approx(np.median(other), abs=0.002)


def test_deviates_are_even():
    """The deviates are standard normal in each dimension, far more evenly than chance."""
    z = even_deviates(2048, 6, seed=3)
    chance = np.random.default_rng(3).standard_normal((6, 2048))

    assert np.max(np.abs(z.mean(axis=1))) < 2e-3
    np.testing.assert_allclose(z.var(axis=1), 1.0, atol=1e-2)
    products = np.abs(np.corrcoef(z) - np.eye(6)).max()
    assert products < np.abs(np.corrcoef(chance) - np.eye(6)).max() / 2


def test_more_dimensions_than_the_lattice_has():
    """Beyond the lattice, plain random numbers take over and are still standard normal."""
    z = even_deviates(4096, 15, seed=1)

    assert z.shape == (15, 4096)
    np.testing.assert_allclose(z.std(axis=1), 1.0, atol=0.05)


def test_below_freezing_is_flagged():
    """A lot that was frozen is flagged, because an Arrhenius line bends there; one at 4 °C not."""
    frozen = History((Stretch(0, 10, 277.15), Stretch(10, 10, 253.15)), kinetics=KINETICS)

    assert frozen.frozen()
    assert not frozen.frozen(until=5.0)


def test_wrong_histories_are_refused_all_at_once():
    """Every wrong stretch and thaw is named, with its place, in one refusal."""
    with pytest.raises(InputError) as refused:
        History(
            (Stretch(0, -1, 277.15), Stretch(0, 1, -5.0), Stretch(0, 1, 277.15, form="glycerol")),
            (Thaw(math.nan), Thaw(1, form="glycerol")),
            KINETICS,
        )

    places = [p.place for p in refused.value.problems]
    assert places == [
        "stretches[0].hours",
        "stretches[1].temperature",
        "stretches[2].form",
        "thaws[0]",
        "thaws[1].form",
    ]
    assert "no storage kinetics for the form 'glycerol'" in str(refused.value)


def test_kinetics_from_quantities():
    """A log-normal keeps median and factor; a thaw's fraction becomes its part of ln(remaining)."""
    of = storage_kinetics(
        Quantity(0.03, 2.0, "lognormal"),
        Quantity(222e3, 60e3, "normal"),
        310.15,
        thaw_loss=Quantity(0.2, 1.5, "lognormal"),
        opened_factor=Quantity(2.0, 1.3, "lognormal"),
    )

    assert (of.log_rate, of.log_rate_sd) == (math.log(0.03), math.log(2.0))
    assert (of.energy, of.energy_sd) == (222e3, 60e3)
    assert math.exp(-math.exp(of.log_thaw_loss)) == pytest.approx(0.8, rel=1e-12)
    assert (of.log_opened_factor, of.log_opened_factor_sd) == (math.log(2), math.log(1.3))


def test_a_normal_spread_keeps_mean_and_deviation():
    """A positive quantity with a normal spread becomes the log-normal of the same moments."""
    m, s = log_moments(Quantity(0.03, 0.01, "normal"))

    assert math.exp(m + s**2 / 2) == pytest.approx(0.03, rel=1e-12)
    assert 0.03 * math.sqrt(math.expm1(s**2)) == pytest.approx(0.01, rel=1e-12)
    assert log_moments(Quantity(2.0)) == (math.log(2.0), 0.0)


def test_openings_take_their_part():
    """Each opening takes what the form loses at one, and shares its spread with the others."""
    dry = replace(DRY, log_opening_loss=math.log(0.02), log_opening_loss_sd=0.5)
    history = History(
        (Stretch(0, 100, 277.15),),
        kinetics={"dry": dry},
        openings=(Opening(10), Opening(20, count=2), Opening(500)),
    )

    assert losses(history, {}, 50)["opening", "dry"][0] == pytest.approx(3 * 0.02, rel=1e-12)
    assert dimensions(history)["opening", "dry"] == 0.5
    more = losses(history, {("opening", "dry"): np.array([2.0])}, 50)["opening", "dry"][0]
    assert more == pytest.approx(3 * 0.02 * math.exp(1), rel=1e-12)


def test_moments_with_openings():
    """The exact mean and spread with openings and thaws are those of many draws."""
    of = replace(SOLUTION, log_opening_loss=math.log(0.03), log_opening_loss_sd=0.6)
    history = History(
        (Stretch(0, 2000, 277.15, form="solution"),),
        (Thaw(10), Thaw(20)),
        {"solution": of},
        openings=(Opening(5, "solution"), Opening(50, "solution", 2)),
    )
    mean, sd = log_remaining_moments(history, 2000)
    drawn = np.log(draw_remaining(history, 2000, 2**16))

    assert mean == pytest.approx(drawn.mean(), abs=3e-3)
    assert sd == pytest.approx(drawn.std(), rel=2e-2)
