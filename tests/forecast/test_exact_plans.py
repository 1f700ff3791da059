"""Exact plans, written as a user writes them, against reference solutions."""

import csv
import json
from fractions import Fraction

import numpy as np
import pytest

from digestplan.forecast.run import forecast
from digestplan.plan.read import parse_plan


def plan_text(scenario):
    """One of the published scenarios as a plan file: 1 mg of enzyme of 1 U/mg on 1 g in 1 mL."""
    p = scenario["parameters"]
    law = {"equilibrium": "equilibrium"}.get(scenario["inactivation"], "arrhenius")
    inactivation = scenario["inactivation"] if law == "arrhenius" else "first_order"
    lines = [
        "digestplan = 1",
        "[sample]",
        'wet_mass = "1 g"',
        "substrate_fraction = 1.0",
        'shape = "slab"',
        "target_extent = 0.5",
        'law = "michaelis_menten"',
        f'half_saturation = "{p["Km_mM"]} mM"',
        f'initial = "{p["S0_mM"]} mM"',
        f'susceptibility = "{p["kcat_ref_mM_per_h_per_E"] / p["Km_mM"]!r} g/(U h)"',
        "[lot]",
        'label_activity = "1 U/mg"',
        "remaining = 1.0",
        "[enzyme]",
        f'reference_temperature = "{p["T_ref_C"]} degC"',
        f'rate_law = "{law}"',
        f'activation_energy = "{p["Ea_kJ"]} kJ/mol"',
        f'inactivation_rate = "{p["kd_ref_per_h"]} 1/h"',
        f'inactivation_energy = "{p["Ed_kJ"]} kJ/mol"',
        f'inactivation = "{inactivation}"',
    ]
    if inactivation == "two_stage":
        lines += [
            f"intermediate_activity = {p['intermediate_activity']}",
            f'second_inactivation_rate = "{p["kd2_ref_per_h"]} 1/h"',
            f'second_inactivation_energy = "{p["Ed2_kJ"]} kJ/mol"',
        ]
    if inactivation == "autolysis":
        lines += [
            f'autolysis_rate = "{p["ka_ref_per_h_per_E"]} mL/(mg h)"',
            f'autolysis_energy = "{p["Eka_kJ"]} kJ/mol"',
        ]
    if law == "equilibrium":
        lines += [
            f'equilibrium_temperature = "{p["Teq_C"]} degC"',
            f'equilibrium_enthalpy = "{p["dHeq_kJ"]} kJ/mol"',
        ]
    lines += ["[[steps]]", 'do = "digest"', 'charge = "1 mg"', 'volume = "1 mL"']
    lag = float(Fraction(scenario.get("lag_h", "0"))) * 60
    lines.append(f'lag = "{lag} min"')
    if "T_start_C" in scenario:
        lines.append(f'start_temperature = "{scenario["T_start_C"]} degC"')
    stretches = [_stretch(line) for line in scenario["programme"]]
    lines.append("temperature = [" + ", ".join(stretches) + "]")
    additions = [
        f'{{ after = "{_hours(a["after_h"])}", charge = "{a["E"]} mg" }}'
        for a in scenario.get("additions", [])
    ]
    if additions:
        lines.append("additions = [" + ", ".join(additions) + "]")
    return "\n".join(lines)


def _hours(text):
    return f"{float(Fraction(text))!r} h"


def _stretch(line):
    if "to_C" in line:
        return f'{{ to = "{line["to_C"]} degC", over = "{_hours(line["over_h"])}" }}'
    return f'{{ at = "{line["at_C"]} degC", for = "{_hours(line["for_h"])}" }}'


def scenarios(reference):
    return json.loads((reference / "ode" / "scenarios.json").read_text())["scenarios"]


@pytest.mark.source("C", "rate equations stated in ode/scenarios.json; mpmath 34 digits and CVODE")
@pytest.mark.parametrize("number", range(9))
def test_a_plan_file_meets_the_reference_scenario(reference, number):
    """Extent, dose and residual activity of an exact plan agree with the tables to 1e-6."""
    scenario = list(scenarios(reference).values())[number]
    result = forecast(parse_plan(plan_text(scenario), "scenario.toml"))
    step = result.steps[0]
    with (reference / "ode" / scenario["file"]).open() as file:
        rows = list(csv.DictReader(file))
    last = rows[-1]
    charged = 1.0 + sum(a["E"] for a in scenario.get("additions", []))

    assert result.n_draws == 1
    assert float(last["extent"]) == pytest.approx(step.extent_at_end.p50, abs=1e-6)
    assert float(last["dose_E_h"]) == pytest.approx(step.dose_at_end.p50, rel=1e-6)
    assert float(last["E"]) / charged == pytest.approx(step.residual_activity_at_end.p50, abs=1e-6)


@pytest.mark.source("C", "rate equations stated in ode/scenarios.json; mpmath 34 digits and CVODE")
@pytest.mark.parametrize("number", range(9))
def test_hours_to_target_invert_the_reference_scenario(reference, number):
    """The time for an extent that the table gives is the table's time."""
    scenario = list(scenarios(reference).values())[number]
    with (reference / "ode" / scenario["file"]).open() as file:
        rows = list(csv.DictReader(file))
    for row in rows[3::6]:
        text = plan_text(scenario).replace(
            "target_extent = 0.5", f"target_extent = {float(row['extent'])!r}"
        )
        step = forecast(parse_plan(text, "scenario.toml")).steps[0]
        assert float(row["t_h"]) == pytest.approx(step.hours_to_target.p50, rel=1e-5, abs=1e-6)


def test_the_example_of_exactness_has_one_draw(reference):
    """With no spread anywhere every percentile is the same number."""
    scenario = scenarios(reference)["3-ramped"]
    step = forecast(parse_plan(plan_text(scenario), "scenario.toml"), n_draws=500).steps[0]

    assert step.extent_at_end.p05 == step.extent_at_end.p95
    assert np.array_equal(step.curve.extent_p05, step.curve.extent_p95)
