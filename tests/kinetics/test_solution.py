"""pK against temperature, pH standards, and mixtures by their charge balance."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.solution import (
    Buffer,
    apparent_pk,
    davies_term,
    ph_of_buffer,
    pk_at,
    protonated_share,
    solve_ph,
    strong_ions,
)

approx = pytest.approx
PUBLISHED = Path(__file__).parents[1] / "reference" / "published"
ROOM = 298.15
GOLDBERG = "Goldberg, Kishore & Lennen 2002, J. Phys. Chem. Ref. Data 31:231"
HANDBOOK = "E1: Acid Dissociation Constants at 25 °C (open chemistry textbook)"


def rows(name):
    with (PUBLISHED / name).open(encoding="utf-8") as lines:
        return list(csv.DictReader(lines))


def buffers():
    return json.loads((PUBLISHED / "buffers.json").read_text(encoding="utf-8"))


def law(name, temperature):
    one = buffers()["goldberg"][name]
    return pk_at(temperature, one["pK_25C"], one["dH_kJ"] * 1000, one["dCp_J_per_K"])


@pytest.mark.source("C", f"{GOLDBERG}: their law, evaluated with mpmath")
@pytest.mark.parametrize("name", list(buffers()["goldberg"]))
def test_pk_law_follows_the_table(name):
    """The pK of eight buffers from 0 to 60 °C."""
    table = rows("buffer_pk.csv")
    kelvin = np.array([float(row["T_C"]) + 273.15 for row in table])
    expected = np.array([float(row[name]) for row in table])
    printed = 1e-6 if expected.max() < 10 else 5e-6  # seven digits are printed
    assert law(name, kelvin) == approx(expected, abs=printed)


@pytest.mark.source("P", f"Bates & Hetzer 1961, as quoted by {GOLDBERG}")
@pytest.mark.parametrize("point", buffers()["measured"]["Tris"], ids=lambda p: f"{p['T_C']} °C")
def test_pk_of_tris_against_temperature(point):
    """The pK of Tris follows the measured values from 0 to 50 °C."""
    # the fitted form misses them by 0.005 at most
    assert law("Tris", point["T_C"] + 273.15) == approx(point["pK"], abs=0.006)


@pytest.mark.source("P", "Bates & Hetzer 1961: equation for Tris, 0 to 50 °C")
def test_pk_of_tris_against_its_equation():
    """The pK of Tris follows 2981.4/T − 3.5888 + 0.005571 T."""
    kelvin = np.arange(0, 51, 5) + 273.15
    assert law("Tris", kelvin) == approx(2981.4 / kelvin - 3.5888 + 0.005571 * kelvin, abs=0.006)


@pytest.mark.source("P", "Vega & Bates 1976, Anal. Chem. 48:1293")
@pytest.mark.parametrize(
    "point", buffers()["measured"]["HEPES pK2"], ids=lambda p: f"{p['T_C']} °C"
)
def test_pk_of_hepes_against_temperature(point):
    """The second pK of HEPES follows the measured values from 5 to 50 °C."""
    assert law("HEPES pK2", point["T_C"] + 273.15) == approx(point["pK"], abs=0.006)


@pytest.mark.source("C", f"{GOLDBERG}, Tris set to 7.5 at 25 °C")
@pytest.mark.parametrize(("celsius", "ph"), [(4, 8.138), (20, 7.642), (37, 7.181), (56, 6.732)])
def test_tris_warmed_and_cooled(celsius, ph):
    """A Tris buffer set at room temperature is more acid when warm, more alkaline when cold."""
    moved = ph_of_buffer(7.5, ROOM, celsius + 273.15, 8.072, 47_450.0, -59.0)
    assert moved == approx(ph, abs=0.002)


@pytest.mark.source("P", "JIS Z 8802: pH of the equimolal phosphate standard, 0 to 60 °C")
@pytest.mark.parametrize(
    "row", [r for r in rows("ph_standards.csv") if float(r["T_C"]) <= 60], ids=lambda r: r["T_C"]
)
def test_phosphate_standard(row):
    """0.025 + 0.025 mol/kg phosphate has the standard's pH, by the pK and by the charge balance."""
    kelvin, expected = float(row["T_C"]) + 273.15, float(row["phosphate_equimolal_JIS"])
    second = law("phosphate pK2", kelvin)
    # what Davies activities are worth
    assert apparent_pk(second, -1, 0.1, kelvin) == approx(expected, abs=0.025)
    phosphate = Buffer(0.05, (2.148, second, 12.35))
    assert solve_ph([phosphate], 0.075, kelvin) == approx(expected, abs=0.03)


@pytest.mark.source("C", f"{GOLDBERG} and Davies, evaluated with mpmath")
def test_phosphate_standard_as_computed():
    """The same sum made elsewhere gives the same pH."""
    table = rows("ph_standards.csv")
    kelvin = np.array([float(row["T_C"]) + 273.15 for row in table])
    expected = np.array([float(row["phosphate_Goldberg_Davies_computed"]) for row in table])
    assert apparent_pk(law("phosphate pK2", kelvin), -1, 0.1, kelvin) == approx(expected, abs=2e-4)


@pytest.mark.source("P", f"{HANDBOOK}: hydrazoic acid 4.6")
@pytest.mark.parametrize(("ph", "share"), [(4.6, 0.5), (3.0, 0.976), (7.0, 0.0040)])
def test_share_of_hydrazoic_acid(ph, share):
    """How much of azide is hydrazoic acid at a pH."""
    assert protonated_share(ph, 4.6) == approx(share, rel=0.01)


@pytest.mark.source("C", "Davies at 0.10 mol/L")
@pytest.mark.parametrize(("charge", "shift"), [(1, 0.11), (0, -0.11), (-1, -0.32), (-2, -0.54)])
def test_shift_of_the_apparent_pk(charge, shift):
    """Tris up by 0.11, acetate down by 0.11, phosphate pK2 by 0.32, citrate pK3 by 0.54."""
    assert apparent_pk(0.0, charge, 0.1, ROOM) == approx(shift, abs=0.006)


@pytest.mark.source("C", "Mass action in 50 mmol/L Tris that holds 10.6 mmol/L base, pK 8.072")
@pytest.mark.parametrize(
    ("acid", "ph"), [(0, 7.50), (1, 7.45), (2, 7.39), (5, 7.17), (8, 6.81), (10, 6.16)]
)
def test_acid_carried_into_tris(acid, ph):
    """1 to 10 mmol/L of strong acid carried over take a Tris digest from 7.5 to 6.2."""
    tris = Buffer(0.050, (8.072,), 1)
    excess = -(0.050 - 0.0106) - acid / 1000
    assert solve_ph([tris], excess, ROOM, 0.0) == approx(ph, abs=0.006)


@pytest.mark.source("P", f"{HANDBOOK}; degree of dissociation of weak acids")
@pytest.mark.parametrize(
    ("concentration", "pk", "ph"), [(1.09, 3.75, 1.86), (2.17, 3.75, 1.71), (1.0, 4.756, 2.38)]
)
def test_fresh_baths_of_weak_acid(concentration, pk, ph):
    """5 and 10 % formic acid and 1 mol/L acetic acid, as c·α² = K(1 − α) gives them."""
    k = 10**-pk
    proton = (-k + np.sqrt(k * k + 4 * k * concentration)) / 2
    assert -np.log10(proton) == approx(ph, abs=0.005)
    assert solve_ph([Buffer(concentration, (pk,))], 0.0, ROOM, 0.0) == approx(ph, abs=0.005)


@pytest.mark.source("P", "Neutral point of water: pKw 13.995 at 25 °C, 13.617 at 37 °C (IAPWS)")
def test_water_and_strong_solutions():
    """Pure water is neutral at half of pKw; acid and alkali have the pH of their activity."""
    assert solve_ph([], 0.0, np.array([298.15, 310.15])) == approx([6.997, 6.810], abs=0.003)
    term = davies_term(0.1, ROOM)
    assert solve_ph([], np.array([-0.1]), ROOM) == approx([1 + term], abs=1e-6)
    assert solve_ph([], np.array([-0.1]), ROOM, 0.0) == approx([1.0], abs=1e-9)
    alkali = solve_ph([], np.array([0.1]), ROOM)
    assert alkali == approx([12.994 - term], abs=0.003)


def test_ionic_strength_is_found():
    """The ionic strength that the mixture finds for itself, given from outside, changes nothing."""
    phosphate, tris = Buffer(0.05, (2.148, 7.198, 12.35)), Buffer(0.02, (8.072,), 1)
    found = solve_ph([phosphate, tris], 0.07, ROOM, background=0.01)
    charges = [b.charges(np.asarray(found), davies_term(0.0, ROOM)) for b in (phosphate, tris)]
    strength = 0.1
    for _ in range(50):
        term = davies_term(strength, ROOM)
        charges = [b.charges(np.asarray(found), term) for b in (phosphate, tris)]
        strength = 0.01 + (0.07 + 0.05 * charges[0][1] + 0.02 * charges[1][1]) / 2
    assert solve_ph([phosphate, tris], 0.07, ROOM, strength) == approx(float(found), abs=1e-5)


def test_concentrated_buffer_moves_with_its_pk():
    """In a strong buffer the charge balance moves with temperature as the pK does."""
    warm, one = 310.15, (8.072, 47_450.0, -59.0)
    excess = strong_ions([Buffer(0.1, (pk_at(ROOM, *one),), 1)], 7.8, ROOM)
    moved = solve_ph([Buffer(0.1, (pk_at(warm, *one),), 1)], excess, warm, 0.0)
    assert moved == approx(float(ph_of_buffer(7.8, ROOM, warm, *one)), abs=1e-3)


totals = st.floats(1e-4, 0.5)
two_buffers = st.tuples(totals, st.floats(2, 12), totals, st.floats(2, 12))


@settings(deadline=None, derandomize=True)
@given(two_buffers, st.floats(1, 13), st.floats(0, 0.5), st.floats(273.15, 343.15))
def test_charge_balance_and_back(mixture, ph, strength, temperature):
    """The strong ions that give a mixture its pH lead back to that pH."""
    one, pk, other, pks = mixture
    both = [Buffer(one, (pk,), 1), Buffer(other, (pks, pks + 2), 0)]
    excess = strong_ions(both, ph, temperature, strength)
    assert solve_ph(both, excess, temperature, strength) == approx(ph, abs=1e-6)


@settings(deadline=None, derandomize=True)
@given(two_buffers, st.lists(st.floats(-0.4, 0.4), min_size=2, max_size=6))
def test_more_acid_never_raises_the_ph(mixture, excesses):
    """The pH rises with the excess of strong cations."""
    one, pk, other, pks = mixture
    both = [Buffer(one, (pk,), 1), Buffer(other, (pks, pks + 2), 0)]
    excess = np.sort(excesses)
    assert (np.diff(solve_ph(both, excess, ROOM, 0.1)) >= -1e-9).all()
    settled = solve_ph(both, excess, ROOM)
    assert np.isfinite(settled).all()


def test_draws_are_solved_together():
    """Many draws at once give what each gives alone."""
    total, excess = np.array([0.02, 0.05, 0.1]), np.array([-0.01, -0.02, -0.03])
    together = solve_ph([Buffer(total, (8.072,), 1)], excess, ROOM)
    alone = [
        solve_ph([Buffer(t, (8.072,), 1)], e, ROOM) for t, e in zip(total, excess, strict=True)
    ]
    assert together == approx(np.array(alone), abs=1e-9)
