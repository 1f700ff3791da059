"""Stability data: shelf life, and the lot's own kinetics in place of the library's."""

import math

import numpy as np
import pytest

from digestplan.lots.from_library import kinetics_of
from digestplan.lots.readings import Stability
from digestplan.lots.shelf_life import BatchShelfLife, ShelfLife
from digestplan.lots.stability import own_kinetics, stability_of
from digestplan.problems import InputError

K4, ENERGY = 2.5e-4, 90e3  # 1/h at 4 °C, J/mol


def data(celsius=(4, 22, 30), batches=("1",), noise=0.004, seed=1, days=(0, 7, 14, 28, 56)):
    """Invented activities at some temperatures."""
    rng = np.random.default_rng(seed)
    rows = [(c + 273.15, 24.0 * d, b) for c in celsius for b in batches for d in days]
    kelvin, hours = (np.array([r[i] for r in rows]) for i in (0, 1))
    rate = K4 * np.exp(ENERGY / 8.31446261815324 * (1 / 277.15 - 1 / kelvin))
    activity = np.exp(-rate * hours) + noise * rng.standard_normal(len(rows))
    return Stability(kelvin, hours, np.maximum(activity, 0.0), tuple(r[2] for r in rows))


@pytest.mark.source("S", "invented activities of a known rate and energy")
def test_time_to_the_limit_is_what_was_put_in():
    """Rate, energy and time to 90 % come back within their limits."""
    found = stability_of(data())

    assert found.temperature == pytest.approx(277.15)
    assert found.time.hours == pytest.approx(-math.log(0.9) / K4, rel=0.05)
    assert found.time.lower_hours < found.time.hours
    low, high = found.profile["energy"]
    assert low < ENERGY < high
    assert not found.time.extrapolated
    assert not found.fit.bends


def test_another_temperature_and_limit():
    """Colder than measured is extrapolated and longer; a lower limit is later."""
    cold, half = stability_of(data(), 268.15), stability_of(data(), None, 0.5)

    assert cold.time.extrapolated
    assert cold.time.hours > stability_of(data()).time.hours
    assert half.time.hours == pytest.approx(-math.log(0.5) / K4, rel=0.05)


def test_shelf_life_by_batches_or_by_one():
    """Several batches are tested for pooling; one has a line of its own; too few have none."""
    assert isinstance(stability_of(data(batches=("A", "B"))).shelf, BatchShelfLife)
    one = stability_of(data()).shelf
    assert isinstance(one, ShelfLife)
    assert one.time < -math.log(0.9) / K4 < one.mean_time * 1.1
    assert stability_of(data(days=(0, 28, 28))).shelf is None


def test_one_temperature_says_nothing_of_others():
    """Measured at one temperature, another is refused, and the library's energy serves a lot."""
    one = data(celsius=(4,))
    with pytest.raises(InputError, match=r"temperature: .*not known"):
        stability_of(one, 295.15)

    library = kinetics_of("clostridial-collagenase")
    own = own_kinetics(one, "solution", library, "x.csv")["solution"]
    assert math.exp(own.log_rate) == pytest.approx(K4, rel=0.1)
    assert own.energy == library["solution"].energy
    assert own.log_thaw_loss == library["solution"].log_thaw_loss
    assert own.log_opening_loss == library["solution"].log_opening_loss


def test_the_other_forms_stay_the_library_s():
    """Only the form that was measured changes."""
    library = kinetics_of("clostridial-collagenase")
    own = own_kinetics(data(), "solution", library, "x.csv")

    assert own["dry"] is library["dry"]
    assert own["solution"].energy == pytest.approx(ENERGY, rel=0.05)
    assert own["solution"].log_rate_sd < library["solution"].log_rate_sd / 5


@pytest.mark.parametrize("limit", [0.0, 1.0, 1.2])
def test_a_limit_that_cannot_be(limit):
    """A share of the start lies between 0 and 1."""
    with pytest.raises(InputError, match="between 0 and 1"):
        stability_of(data(), None, limit)


def test_too_few_measurements_are_told():
    """Two measurements a temperature give no rate, and that is what is said."""
    with pytest.raises(InputError, match="3 measurements or more"):
        stability_of(data(days=(0, 28)))


def test_what_does_not_fall_is_told_with_its_file():
    """Activities that do not fall name the file that they stand in."""
    flat = Stability(np.full(4, 277.15), np.arange(4.0), np.ones(4), ("1",) * 4)

    with pytest.raises(InputError, match=r"x\.csv: activity"):
        own_kinetics(flat, "dry", kinetics_of("trypsin"), "x.csv")
