"""Published measurements, fitted again: estimates, standard errors and profile limits."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest

from digestplan.kinetics.fitting import fit_curve
from digestplan.kinetics.linear import fit_line
from digestplan.kinetics.profile import profile_limits

PUBLISHED = Path(__file__).parents[1] / "reference" / "published"
EXPECTED = json.loads((PUBLISHED / "fits.json").read_text(encoding="utf-8"))
PUROMYCIN = "Treloar 1974; Bates & Watts 1988, A1.3"
BOD = "Marske 1967; Bates & Watts 1988, A1.4"


def columns(name, *wanted, **only):
    with (PUBLISHED / name).open(encoding="utf-8") as lines:
        rows = [r for r in csv.DictReader(lines) if all(r[k] == v for k, v in only.items())]
    return [np.array([float(row[k]) for row in rows]) for k in wanted]


def check(fit, key, rtol, rtol_errors):
    expected = EXPECTED[key]

    assert fit.converged, fit.message
    np.testing.assert_allclose(fit.estimates, list(expected["estimates"].values()), rtol=rtol)
    np.testing.assert_allclose(fit.standard_errors, list(expected["se"].values()), rtol=rtol_errors)
    np.testing.assert_allclose(fit.residual_sd, expected["residual_sd"], rtol=rtol_errors)
    assert fit.degrees_of_freedom == expected["dof"]


def puromycin(state):
    conc, rate = columns("puromycin.csv", "conc_ppm", "rate_counts_per_min2", state=state)

    def model(b):
        return b[0] * conc / (b[1] + conc)

    return model, rate, fit_curve(model, rate, [200.0, 0.1], names=("Vm", "K"))


@pytest.mark.source("P", PUROMYCIN)
@pytest.mark.parametrize("state", ["treated", "untreated"])
def test_rates_against_concentration(state):
    """Michaelis-Menten fits of the treated and the untreated enzyme are the published ones."""
    _, _, fit = puromycin(state)
    expected = EXPECTED[f"puromycin {state}"]

    check(fit, f"puromycin {state}", 1e-6, 1e-5)
    assert fit.correlation[0, 1] == pytest.approx(expected["correlation_12"], rel=1e-5)


@pytest.mark.source("P", PUROMYCIN)
def test_rates_with_a_common_constant():
    """Both states fitted together share K."""
    conc, rate = columns("puromycin.csv", "conc_ppm", "rate_counts_per_min2")
    (treated,) = columns("puromycin.csv", "conc_ppm", state="treated")
    is_treated = np.arange(len(conc)) < len(treated)

    fit = fit_curve(
        lambda b: (b[0] + b[1] * is_treated) * conc / (b[2] + conc), rate, [160.0, 40.0, 0.05]
    )

    check(fit, "puromycin joint, common K", 1e-6, 1e-5)


@pytest.mark.source("P", PUROMYCIN)
@pytest.mark.parametrize("state", ["treated", "untreated"])
@pytest.mark.parametrize("name", ["Vm", "K"])
def test_profile_limits_of_a_saturation_curve(state, name):
    """The profile gives the 95 % limits of both parameters."""
    model, rate, fit = puromycin(state)

    limits = profile_limits(model, rate, fit, name)

    expected = EXPECTED[f"puromycin {state}"]["profile_95"][name]
    np.testing.assert_allclose(limits, expected, rtol=1e-5)


def bod():
    days, demand = columns("bod.csv", "time_d", "demand_mg_per_L")

    def model(b):
        return b[0] * (1 - np.exp(-np.exp(b[1]) * days))

    return model, demand, fit_curve(model, demand, [20.0, -1.0], names=("A", "lrc"))


@pytest.mark.source("P", BOD)
def test_rise_to_a_plateau():
    """The first-order rise has the published plateau and rate."""
    _, _, fit = bod()

    check(fit, "bod", 1e-6, 1e-5)
    assert np.exp(fit["lrc"]) == pytest.approx(EXPECTED["bod"]["k_per_day"], rel=1e-6)


@pytest.mark.source("P", BOD)
@pytest.mark.parametrize("name", ["A", "lrc"])
def test_skew_profile_limits(name):
    """Six points leave the plateau open upwards: the limits are as skew as the published data."""
    model, demand, fit = bod()

    limits = profile_limits(model, demand, fit, name)

    np.testing.assert_allclose(limits, EXPECTED["bod"]["profile_95"][name], rtol=1e-5)


def test_a_limit_that_the_data_do_not_set():
    """At 99.9 % the rate of the rise has no upper limit: it is infinite, not a number."""
    model, demand, fit = bod()

    lower, upper = profile_limits(model, demand, fit, "lrc", level=0.999)

    assert upper == np.inf
    assert lower < EXPECTED["bod"]["profile_95"]["lrc"][0]


@pytest.mark.source("P", "Davidian & Giltinan 1995, run 1")
def test_logistic_calibration_curve():
    """The logistic curve through a calibration run is the published one."""
    conc, density = columns("dnase_run1.csv", "conc", "density")
    log_conc = np.log(conc)

    fit = fit_curve(
        lambda b: b[0] / (1 + np.exp((b[1] - log_conc) / b[2])), density, [2.0, 1.0, 1.0]
    )

    check(fit, "dnase run 1, logistic in ln conc", 1e-6, 1e-5)


@pytest.mark.source("P", "Kwan et al. 1976, subject 1")
def test_two_exponentials():
    """Two populations, fast and slow, are told apart as published."""
    hours, conc = columns("indometh.csv", "time_h", "conc_ug_per_mL", subject="1")

    fit = fit_curve(
        lambda b: b[0] * np.exp(-np.exp(b[1]) * hours) + b[2] * np.exp(-np.exp(b[3]) * hours),
        conc,
        [2.0, 0.5, 0.2, -1.5],
    )

    check(fit, "indometh subject 1, biexponential", 1e-5, 1e-4)


@pytest.mark.source("P", "Boeckmann, Sheiner & Beal 1994, subject 4")
def test_first_order_in_and_out():
    """A first-order rise followed by a first-order fall is fitted as published."""
    dose, hours, conc = columns("theoph_subject4.csv", "dose_mg_per_kg", "time_h", "conc_mg_per_L")

    def model(b):
        ke, ka, cl = np.exp(b)
        return dose * ke * ka / (cl * (ka - ke)) * (np.exp(-ke * hours) - np.exp(-ka * hours))

    fit = fit_curve(model, conc, [-2.5, 0.3, -3.0])

    check(fit, "theoph subject 4, first-order in and out", 1e-5, 1e-4)


@pytest.mark.source("P", "CRC Handbook, Weast (ed.) 1973, vapour pressure of mercury")
def test_slope_over_inverse_temperature():
    """The slope of ln p over 1/T is the handbook's, and so is the enthalpy."""
    celsius, pressure = columns("mercury_vapour_pressure.csv", "temp_C", "pressure_mmHg")
    used = celsius >= 100
    line = fit_line(1 / (celsius[used] + 273.15), np.log(pressure[used]))

    assert line["slope"] == pytest.approx(-7254.88046, rel=1e-7)
    assert line.standard_error("slope") == pytest.approx(12.3165537, rel=1e-7)
    assert -line["slope"] * 8.31446261815324e-3 == pytest.approx(60.3204324, rel=1e-7)


def test_no_profile_without_an_optimum():
    """Limits about a fit that did not arrive are refused."""
    conc, rate = columns("puromycin.csv", "conc_ppm", "rate_counts_per_min2", state="treated")

    def model(b):
        return b[0] * b[1] * conc

    fit = fit_curve(model, rate, [1.0, 1.0])

    with pytest.raises(ValueError, match="no optimum"):
        profile_limits(model, rate, fit, "b1")


def test_limits_of_a_single_parameter_are_students():
    """A model that is linear in its one parameter has the limits of Student's t."""
    x, y = np.array([1.0, 2.0, 3.0, 4.0]), np.array([1.1, 1.9, 3.2, 3.9])
    fit = fit_curve(lambda b: b[0] * x, y, [0.5])

    limits = profile_limits(lambda b: b[0] * x, y, fit, "b1", level=0.9)

    half = 2.3533634348018264 * fit.standard_errors[0]  # t(0.95, 3 df)
    np.testing.assert_allclose(limits, fit["b1"] + np.array([-half, half]), rtol=1e-8)
