"""Properties of water against the international formulations."""

import csv

import numpy as np
import pytest

from digestplan.kinetics import water


def column(reference, name):
    with (reference / "computed" / "water.csv").open() as file:
        rows = list(csv.DictReader(file))
    celsius = np.array([float(row["T_C"]) for row in rows])
    return celsius + 273.15, np.array([float(row[name]) for row in rows])


@pytest.mark.source("L", "IAPWS-95 and IAPWS 2008 by two libraries, 0-70 °C (W1)")
@pytest.mark.parametrize(
    ("name", "function", "scale", "tolerance"),
    [
        ("density_kg_m3", water.density, 1e3, 1e-4),
        ("viscosity_mPa_s", water.viscosity, 1e3, 1e-3),
    ],
)
def test_density_and_viscosity(reference, name, function, scale, tolerance):
    """Density and viscosity follow the formulations."""
    kelvin, expected = column(reference, name)

    assert expected == pytest.approx(scale * function(kelvin), rel=tolerance)


@pytest.mark.source("P", "ISO/TR 3666: 1.0016 mPa s at 20 °C")
def test_viscosity_at_twenty_degrees():
    """The viscosity at 20 °C is the international standard's."""
    assert 1e3 * water.viscosity(293.15) == pytest.approx(1.0016, rel=1e-4)


@pytest.mark.source(
    "P", "International table of water viscosity, seen as 'Water - Density Viscosity'"
)
@pytest.mark.parametrize(
    ("celsius", "tabled"),
    [(10, 1.308), (20, 1.002), (30, 0.7978), (40, 0.6531), (50, 0.5471), (60, 0.4658)],
)
def test_viscosity_of_a_handbook(celsius, tabled):
    """Handbook values are met to 0.5 %."""
    assert tabled == pytest.approx(1e3 * water.viscosity(celsius + 273.15), rel=5e-3)


@pytest.mark.source("L", "IAPWS 1997 permittivity, IAPWS R11-07, CODATA (W3)")
@pytest.mark.parametrize(
    ("name", "function"),
    [
        ("relative_permittivity", water.relative_permittivity),
        ("pKw", water.ionisation_pk),
        ("debye_huckel_A_log10", water.debye_huckel_slope),
    ],
)
def test_electrolyte_properties(reference, name, function):
    """Permittivity, ion product and Debye-Hückel slope follow the formulations to 1e-3."""
    kelvin, expected = column(reference, name)

    assert expected == pytest.approx(function(kelvin), rel=1e-3)


@pytest.mark.source("L", "IAPWS 2008 viscosity, Stokes-Einstein (W2)")
def test_diffusion_scales_by_stokes_einstein(reference):
    """D(T)/D(25 °C) follows T over the viscosity to 1 %."""
    kelvin, expected = column(reference, "stokes_einstein_D_over_D25")

    assert expected == pytest.approx(water.stokes_einstein_factor(kelvin, 298.15), rel=1e-2)


@pytest.mark.source("P", "Holz et al. 2000, measured self-diffusion of water")
@pytest.mark.parametrize(("celsius", "ratio"), [(4, 0.5483), (37, 1.3208), (56, 1.9233)])
def test_stokes_einstein_against_measured_self_diffusion(celsius, ratio):
    """Against measured self-diffusion the scaling is worth 4 %."""
    found = water.stokes_einstein_factor(celsius + 273.15, 298.15)

    assert ratio == pytest.approx(found, rel=4e-2)


@pytest.mark.source("P", "mannitol and serum albumin in water (Gosting & Morris; Monkos 2010)")
@pytest.mark.parametrize(
    ("known", "at", "wanted", "expected", "tolerance"),
    [(7.1e-6, 298.0, 310.0, 9.5e-6, 0.01), (3.5e-11, 278.15, 318.15, 10.2e-11, 0.02)],
)
def test_scaling_of_published_diffusivities(known, at, wanted, expected, tolerance):
    """A published diffusivity at one temperature gives the published one at another."""
    found = known * water.stokes_einstein_factor(wanted, at)

    assert expected == pytest.approx(found, rel=tolerance)


def test_supercooled_and_hot_water_is_defined():
    """From -20 to 110 °C viscosity falls steadily and nothing is not a number."""
    kelvin = np.linspace(253.15, 383.15, 261)

    assert (np.diff(water.viscosity(kelvin)) < 0).all()
    for function in (water.density, water.relative_permittivity, water.ionisation_pk):
        assert np.isfinite(function(kelvin)).all()
