"""A lot's own inactivation from activity against time, at one temperature or several."""

import csv
import json
import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from digestplan.lots.storage import StorageKinetics, fit_inactivation
from digestplan.problems import InputError

STATS = Path(__file__).parents[1] / "reference" / "stats"
EXPECTED = json.loads((STATS / "inactivation_synthetic.json").read_text(encoding="utf-8"))
RESULTS = EXPECTED["results"]
INVENTED = "invented activities, fitted by two statistics packages"


def data(column="activity"):
    with (STATS / "inactivation_synthetic.csv").open(encoding="utf-8") as lines:
        rows = list(csv.DictReader(lines))
    celsius, hours, activity = (
        np.array([float(r[k]) for r in rows]) for k in ("T_C", "t_h", column)
    )
    return celsius + 273.15, hours, activity


def fitted(celsius, column="activity"):
    return fit_inactivation(*data(column), reference_temperature=celsius + 273.15)


@pytest.mark.source("S", INVENTED)
@pytest.mark.parametrize("celsius", [45, 25])
def test_global_fit(celsius):
    """All temperatures together give rate, energy and start with their standard errors."""
    fit, expected = fitted(celsius).fit, RESULTS[f"global_fit_Tref_{celsius}"]

    assert fit["log_rate"] == pytest.approx(expected["ln_kd_ref"], rel=2e-6)
    assert fit["energy"] / 1e3 == pytest.approx(expected["Ed_kJ"], rel=2e-6)
    assert fit["initial"] == pytest.approx(expected["A0"], rel=2e-6)
    errors = [expected["se"][k] for k in ("ln_kd_ref", "Ed_kJ", "A0")]
    np.testing.assert_allclose(fit.standard_errors / [1, 1e3, 1], errors, rtol=1e-4)
    assert fit.correlation[0, 1] == pytest.approx(expected["correlation"]["lnk_Ed"], rel=1e-4)
    assert fit.residual_sd == pytest.approx(expected["residual_sd"], rel=1e-6)


@pytest.mark.source("S", INVENTED)
def test_the_reference_temperature_does_not_matter():
    """At 25 or 45 °C as reference the energy and what is predicted are the same."""
    warm, cool = fitted(45), fitted(25)

    assert warm.fit["energy"] == pytest.approx(cool.fit["energy"], rel=1e-9)
    for kelvin in (277.15, 310.15):
        np.testing.assert_allclose(warm.log_rate_at(kelvin), cool.log_rate_at(kelvin), rtol=1e-6)


@pytest.mark.source("S", INVENTED)
@pytest.mark.parametrize("celsius", [4, 25, 37])
def test_extrapolation_carries_its_error(celsius):
    """Time to 90 % at other temperatures, with its one-sided 95 % limit."""
    expected = RESULTS["prediction_from_Tref_45"][str(celsius)]

    log_rate, error = fitted(45).log_rate_at(celsius + 273.15)
    time = fitted(45).time_to(0.9, celsius + 273.15)

    assert log_rate == pytest.approx(expected["ln_kd"], rel=1e-4)
    assert error == pytest.approx(expected["se_ln_kd"], rel=1e-4)
    assert time.hours == pytest.approx(expected["t90_h"], rel=1e-4)
    assert time.lower_hours == pytest.approx(expected["t90_lower_one_sided_95_h"], rel=1e-4)
    assert time.extrapolated == (celsius < 37)


@pytest.mark.source("S", INVENTED)
def test_profile_limits():
    """The profile of the likelihood gives 95 % limits of energy, rate and start."""
    fit, expected = fitted(45), RESULTS["profile_95"]

    energy = np.array(fit.limits("energy")) / 1e3
    np.testing.assert_allclose(energy, expected["Ed"], atol=0.003)
    np.testing.assert_allclose(fit.limits("log_rate"), expected["lk"], atol=3e-5)
    np.testing.assert_allclose(fit.limits("initial"), expected["A0"], atol=3e-5)


@pytest.mark.source("S", INVENTED)
def test_exact_data_give_the_truth():
    """Without noise the truth comes back, and nothing bends."""
    fit, truth = fitted(45, "activity_exact"), EXPECTED["truth"]

    found = [fit.fit["log_rate"], fit.fit["energy"] / 1e3, fit.fit["initial"]]
    np.testing.assert_allclose(found, [truth["ln_kd_45"], truth["Ed_kJ"], truth["A0"]], rtol=1e-7)
    assert not fit.bends


@pytest.mark.source("S", INVENTED)
def test_residuals_on_the_log_scale():
    """First-order data lie straight in the logarithm; the residuals are those of the line."""
    fit = fitted(45)
    kelvin, hours, activity = data()

    assert not fit.bends
    rates = np.exp([fit.log_rate_at(k)[0] for k in kelvin])
    line = math.log(fit.fit["initial"]) - rates * hours
    np.testing.assert_allclose(fit.log_residuals, np.log(activity) - line, atol=1e-9)


def test_two_populations_bend():
    """An enzyme of two populations is no straight line in the logarithm, and is flagged."""
    hours = np.repeat(np.arange(0.0, 50, 4), 2)
    noise = 0.004 * np.resize([1.0, -1.0, -0.5, 0.5], len(hours))
    activity = 0.5 * np.exp(-0.4 * hours) + 0.5 * np.exp(-0.02 * hours) + noise

    fit = fit_inactivation(np.full(len(hours), 310.15), hours, activity)

    assert fit.bends
    assert fit.curvature_t > 5


def test_one_temperature_tells_no_energy():
    """One temperature gives its rate; anywhere else the library's energy is needed."""
    kelvin, hours, activity = (v[:12] for v in data())
    fit = fit_inactivation(kelvin, hours, activity)
    library = StorageKinetics(0.0, 1.0, 222e3, 60e3, 298.15, log_thaw_loss=math.log(0.1))

    assert fit.fit.names == ("log_rate", "initial")
    assert fit.log_rate_at(310.15)[0] == fit.fit["log_rate"]
    with pytest.raises(ValueError, match="one temperature"):
        fit.log_rate_at(298.15)
    with pytest.raises(ValueError, match="the library's is needed"):
        fit.kinetics()
    own = fit.kinetics(library)
    assert (own.energy, own.energy_sd, own.log_thaw_loss) == (222e3, 60e3, math.log(0.1))
    assert own.log_rate == fit.fit["log_rate"]
    assert own.reference_temperature == pytest.approx(310.15, abs=1e-9)


@pytest.mark.source("S", INVENTED)
def test_the_lots_own_kinetics():
    """The fit hands rate, energy, their errors and their correlation to the history."""
    fit = fitted(45)
    own = fit.kinetics()

    assert own.correlation == pytest.approx(-0.4232, abs=1e-3)
    assert own.energy_sd == fit.fit.standard_error("energy")
    assert own == replace(own, log_rate=fit.fit["log_rate"], reference_temperature=318.15)


@pytest.mark.parametrize(
    ("activity", "message"),
    [
        ([1.0, 1.01, 1.02, 1.03] * 2, "does not fall with time at any"),
        ([1.0, 0.8, 0.6, 0.5, 1.0, 1.01, 1.02, 1.03], "at one temperature only"),
    ],
)
def test_what_does_not_fall_has_no_rate(activity, message):
    """Activities that do not fall are refused in words, not fitted by some rate."""
    kelvin = np.repeat([310.15, 277.15], 4)

    with pytest.raises(InputError, match=message):
        fit_inactivation(kelvin, np.tile([0.0, 1.0, 2.0, 3.0], 2), activity)


def test_weights_count():
    """A reading of weight zero does not touch the fit."""
    kelvin, hours, activity = data()
    spoiled = activity.copy()
    spoiled[7] = 0.2
    weights = np.ones(len(activity))
    weights[7] = 0.0

    whole = fit_inactivation(kelvin, hours, activity, weights=weights)
    other = fit_inactivation(kelvin, hours, spoiled, weights=weights)

    np.testing.assert_allclose(other.fit.estimates, whole.fit.estimates, rtol=1e-8)
