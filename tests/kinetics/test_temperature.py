"""Temperature laws against tables in 30 digits, and their identities."""

import csv

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics import temperature as laws

T0 = 310.15
kelvin = st.floats(250.0, 370.0)
energies = st.floats(0.0, 600e3)


def table(reference):
    with (reference / "computed" / "arrhenius_eyring.csv").open() as file:
        return list(csv.DictReader(file))


@pytest.mark.source("L", "rate constants by mpmath and cantera with the SI of 2019 (T1)")
def test_arrhenius_and_eyring_rates(reference):
    """Relative rates from -20 to 70 °C agree with 30-digit arithmetic to 1e-12."""
    seen = 0
    for row in table(reference):
        t, expected = float(row["T_C"]) + 273.15, float(row["k_over_k37"])
        words = row["case"].replace(",", "").split()
        energies = {
            word: float(words[i + 1]) for i, word in enumerate(words) if word in {"Ea", "dH"}
        }
        if "Ea" in energies:
            found = laws.arrhenius_factor(t, energies["Ea"] * 1e3, T0)
        elif "dH" in energies:
            found = laws.eyring_factor(t, energies["dH"] * 1e3, T0)
        else:
            continue
        seen += 1
        assert expected == pytest.approx(float(found), rel=1e-12)
    assert seen >= 26


@pytest.mark.source("C", "mpmath: the rule of thumb that 10 K double a rate (T2)")
def test_ten_kelvin_about_double_a_rate():
    """With 50 kJ/mol, 25 to 35 °C is a factor of 1.92; a doubling takes 52.9 kJ/mol."""
    assert laws.arrhenius_factor(308.15, 50e3, 298.15) == pytest.approx(1.924264816, rel=1e-8)
    assert laws.arrhenius_factor(308.15, 52948.86217, 298.15) == pytest.approx(2.0, rel=1e-8)


@pytest.mark.source("P", "common practice: one event in ten seconds against 100,000 a second")
def test_what_a_millionfold_acceleration_means_in_energy():
    """A catalysed event 100,000 times a second against one in ten seconds is a factor of 1e6.

    In energy that is what the law itself says: at 25 °C a millionfold rate is RT ln(1e6) less.
    """
    gain = 100_000 / (1 / 10)
    lowered = 8.31446261815324 * 298.15 * np.log(1e6)
    rates = [laws.eyring_rate(298.15, 80e3 - drop, 0.0) for drop in (0.0, lowered)]

    assert gain == pytest.approx(1e6)
    assert rates[1] / rates[0] == pytest.approx(gain, rel=1e-9)


@settings(deadline=None, derandomize=True)
@given(energies, st.floats(1.0, 5.0), st.floats(-8e3, 0.0), st.floats(300.0, 350.0))
def test_every_law_is_one_at_its_reference(energy, q10, capacity, half):
    """Relative to the reference temperature each law is 1 there."""
    at = (T0, energy, T0)
    assert laws.arrhenius_factor(*at) == 1
    assert laws.eyring_factor(*at) == 1
    assert laws.q10_factor(T0, q10, T0) == 1
    assert laws.mmrt_factor(T0, energy, capacity, T0) == pytest.approx(1, rel=1e-12)
    assert laws.equilibrium_factor(T0, energy, half, energy, T0) == pytest.approx(1)
    assert laws.inactive_share_factor(T0, half, energy, T0) == pytest.approx(1)


@settings(deadline=None, derandomize=True)
@given(kelvin, st.floats(280.0, 360.0), st.floats(1e3, 5e6))
def test_active_and_inactive_shares_make_a_whole(temperature, half, enthalpy):
    """K/(1+K) and 1/(1+K) sum to 1, without overflow however steep."""
    active = laws.active_share(temperature, half, enthalpy)
    inactive = laws.active_share(temperature, half, -enthalpy)

    assert np.isfinite(active)
    assert active + inactive == pytest.approx(1.0, abs=1e-12)


def test_half_is_active_at_the_equilibrium_temperature():
    """At Teq half of the enzyme is active, by definition."""
    assert laws.active_share(321.15, 321.15, 210e3) == pytest.approx(0.5)


@settings(deadline=None, derandomize=True)
@given(kelvin, energies)
def test_macromolecular_rate_theory_without_heat_capacity_is_eyring(temperature, enthalpy):
    """With no heat capacity change the bent law is the straight one."""
    bent = laws.mmrt_factor(temperature, enthalpy, 0.0, T0)

    assert bent == pytest.approx(laws.eyring_factor(temperature, enthalpy, T0), rel=1e-12)


@settings(deadline=None, derandomize=True)
@given(st.floats(280.0, 330.0), st.floats(-12e3, -1e3))
def test_macromolecular_rate_theory_bends_by_its_heat_capacity(temperature, capacity):
    """D ln f/dT is (ΔH‡ at T + RT)/RT², ΔH‡ falling by ΔCp‡ a kelvin (finite differences)."""
    enthalpy, step = 60e3, 1e-3
    up, down = (
        np.log(laws.mmrt_factor(temperature + d, enthalpy, capacity, T0)) for d in (step, -step)
    )
    here = enthalpy + capacity * (temperature - T0)
    expected = (here + 8.314462618 * temperature) / (8.314462618 * temperature**2)

    assert (up - down) / (2 * step) == pytest.approx(expected, rel=1e-5, abs=1e-7)


@settings(deadline=None, derandomize=True)
@given(kelvin, energies)
def test_warmer_is_never_slower(temperature, energy):
    """Without inactivation a warmer sample works at least as fast."""
    factors = laws.arrhenius_factor(np.array([temperature, temperature + 1.0]), energy, T0)

    assert factors[1] >= factors[0]


@pytest.mark.source("P", "Weir 1949, native tendon collagen (from memory): 0.1 /h at 56 °C")
def test_native_collagen_melts_at_the_published_rate():
    """Eyring's law with Weir's constants gives about 0.1 /h at 56 °C and nothing at 37 °C."""
    at_56, at_37 = laws.eyring_rate(np.array([329.15, 310.15]), 590e3, 1460.0)

    assert 0.05 < at_56 < 0.2
    assert at_37 < 1e-5
