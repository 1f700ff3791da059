"""Dose over temperature programmes, against reference solutions of the rate equations."""

import csv
import json
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.dose import Course
from digestplan.kinetics.extent import LAWS
from digestplan.kinetics.programme import Leg, compile_programme
from digestplan.kinetics.state import Rates, nothing
from digestplan.kinetics.temperature import (
    arrhenius_factor,
    equilibrium_factor,
    inactive_share_factor,
)

ODE = Path(__file__).parents[1] / "reference" / "ode"
SCENARIOS = json.loads((ODE / "scenarios.json").read_text())["scenarios"]
KELVIN = 273.15


def course_of(scenario, n_draws=1, graded=False):
    """The engine's course through one of the published scenarios, and its parameters."""
    legs, points = [], []
    for line in scenario["programme"]:
        legs.append(Leg(float(Fraction(line.get("for_h") or line["over_h"])), "to_C" in line))
        points.append(line.get("at_C", line.get("to_C")) + KELVIN)
    points = np.array([scenario.get("T_start_C", points[0] - KELVIN) + KELVIN, *points])
    additions = {float(Fraction(a["after_h"])): a["E"] for a in scenario.get("additions", [])}
    lag = float(Fraction(scenario.get("lag_h", "0")))
    cells = compile_programme(legs, points, lag, list(additions), graded=graded)
    temperature = cells.temperatures(np.repeat(points[:, None], n_draws, axis=1))
    rates, intermediate = _rates(scenario, temperature)
    charges = {0: np.full(n_draws, scenario["parameters"]["E0"])}
    charges |= {cells.cell_at(t) + 1: np.full(n_draws, e) for t, e in additions.items()}
    return Course(cells, rates, nothing(n_draws), charges, intermediate)


def _rates(scenario, temperature):
    p = scenario["parameters"]
    reference = p["T_ref_C"] + KELVIN

    def scaled(energy):
        return arrhenius_factor(temperature, p[energy] * 1e3, reference)

    activity, first = scaled("Ea_kJ"), p["kd_ref_per_h"] * scaled("Ed_kJ")
    if scenario["inactivation"] == "equilibrium":
        shares = (p["Teq_C"] + KELVIN, p["dHeq_kJ"] * 1e3, reference)
        activity = equilibrium_factor(temperature, p["Ea_kJ"] * 1e3, *shares)
        first = first * inactive_share_factor(temperature, *shares)
    if scenario["inactivation"] == "two_stage":
        second = p["kd2_ref_per_h"] * scaled("Ed2_kJ")
        return Rates(activity, first, second), p["intermediate_activity"]
    if scenario["inactivation"] == "autolysis":
        return Rates(activity, first, autolysis=p["ka_ref_per_h_per_E"] * scaled("Eka_kJ")), 0.0
    return Rates(activity, first), 0.0


@pytest.mark.source("C", "rate equations stated in ode/scenarios.json; mpmath 34 digits and CVODE")
@pytest.mark.parametrize("graded", [False, True])
@pytest.mark.parametrize("name", SCENARIOS)
def test_dose_follows_the_rate_equations(name, graded):
    """Enzyme, dose and extent agree with the integrated rate equations at every tabled time."""
    scenario = SCENARIOS[name]
    course = course_of(scenario, graded=graded)
    p = scenario["parameters"]
    additions = [float(Fraction(a["after_h"])) for a in scenario.get("additions", [])]
    with (ODE / scenario["file"]).open() as file:
        rows = list(csv.DictReader(file))
    assert len(rows) > 20
    for row in rows:
        time = float(row["t_h"])
        state = course.at(time)
        if any(abs(time - a) < 1e-9 for a in additions):  # the row holds the value just after
            state = course.starts[course.cells.cell_at(time) + 1]
        scaled = p["kcat_ref_mM_per_h_per_E"] / p["Km_mM"] * state.dose
        extent = LAWS["michaelis_menten"].extent(scaled, p["S0_mM"] / p["Km_mM"])
        assert float(row["E"]) == pytest.approx(course.active(state)[0], rel=1e-6, abs=1e-6)
        assert float(row["dose_E_h"]) == pytest.approx(state.dose[0], rel=1e-8, abs=1e-12)
        assert float(row["extent"]) == pytest.approx(extent[0], abs=1e-8)


def test_every_draw_gets_the_same_dose_as_alone():
    """Draws do not leak into one another."""
    scenario = SCENARIOS["7-autolysis-redosing"]
    together, alone = course_of(scenario, n_draws=5), course_of(scenario)

    assert np.ptp(together.at_end().dose) == 0
    assert alone.at_end().dose[0] == together.at_end().dose[3]


def simple_course(hours, rate, activity=1.0, breaks=(), second=None, autolysis=None, alpha=0.0):
    """A course at constant temperature."""
    cells = compile_programme([Leg(hours, ramp=False)], np.full(2, 300.0), breaks=breaks)
    full = np.ones((len(cells.weights), 1))
    rates = Rates(
        activity * full,
        rate * full,
        None if second is None else second * full,
        None if autolysis is None else autolysis * full,
    )
    return Course(cells, rates, nothing(1), {0: np.ones(1)}, alpha)


rates_per_hour = st.one_of(st.just(0.0), st.floats(1e-12, 50.0))


@settings(deadline=None, derandomize=True, max_examples=60)
@given(
    st.floats(0.01, 1000.0),
    rates_per_hour,
    st.one_of(st.none(), rates_per_hour),
    st.one_of(st.none(), rates_per_hour),
    st.floats(0.05, 0.95),
)
def test_splitting_a_stretch_changes_nothing(hours, rate, second, autolysis, share):
    """A stretch cut in two gives the same dose and leaves the same enzyme."""
    kind = {"second": second, "alpha": 0.4} if second is not None else {"autolysis": autolysis}
    whole = simple_course(hours, rate, **kind)
    cut = simple_course(hours, rate, breaks=[share * hours], **kind)
    a, b = whole.at_end(), cut.at_end()

    assert b.dose[0] == pytest.approx(a.dose[0], rel=1e-9)
    assert cut.active(b)[0] == pytest.approx(whole.active(a)[0], rel=1e-9, abs=1e-14)


@settings(deadline=None, derandomize=True, max_examples=40)
@given(st.floats(1e-9, 1e-3), st.floats(1.0, 1000.0))
def test_slow_death_tends_to_none(rate, hours):
    """As the inactivation rate goes to zero the dose goes to activity times time."""
    dose = simple_course(hours, rate).at_end().dose[0]

    assert dose == pytest.approx(hours * (1 - rate * hours / 2), rel=(rate * hours) ** 2)


def test_dead_enzyme_gives_its_ceiling_and_no_more():
    """Given for ever, first-order death leaves the dose activity over rate."""
    course = simple_course(1.0, 0.25, activity=3.0)

    assert course.at(1e6).dose[0] == pytest.approx(12.0, rel=1e-12)


def test_a_crowded_surface_slows_every_molecule():
    """At the saturating ratio each molecule works at half its rate (Langmuir)."""
    cells = compile_programme([Leg(2.0, ramp=False)], np.full(2, 300.0))
    rates = Rates(np.ones((1, 1)), np.zeros((1, 1)))
    crowded = Course(cells, rates, nothing(1), {0: np.ones(1)}, saturation=np.ones(1))

    assert crowded.at_end().dose[0] == pytest.approx(1.0, rel=1e-12)


def test_a_time_of_its_own_for_each_draw():
    """States at draw-wise times are those of the common clock."""
    course = course_of(SCENARIOS["6-redosing"], n_draws=3)
    times = np.array([0.4, 4.0, 12.0])
    each = course.at_each(times)

    for i, time in enumerate(times):
        assert each.dose[i] == pytest.approx(course.at(float(time)).dose[i], rel=1e-12)
