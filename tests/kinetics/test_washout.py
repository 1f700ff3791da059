"""Washing out into an endless bath, against Crank's series in other hands."""

import csv
import json
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.special import j0

from digestplan.kinetics.depth import geometry
from digestplan.kinetics.washout import (
    SHORTEST,
    bath_roots,
    electrolyte_diffusivity,
    left_in_tissue,
    local_uptake,
    mode_mean,
    theta_for_uptake,
    uptake,
)

approx = pytest.approx
COMPUTED = Path(__file__).parents[1] / "reference" / "computed"
SHAPES = ("slab", "cylinder", "sphere")
CRANK = "Crank, The Mathematics of Diffusion, 2nd ed. 1975"


def table():
    with (COMPUTED / "crank_uptake.csv").open(encoding="utf-8") as lines:
        rows = list(csv.DictReader(lines))
    return {key: np.array([float(row[key]) for row in rows]) for key in rows[0]}


@pytest.mark.source(
    "C", f"{CRANK}, chapters 4 to 6 (from memory), 40 digits; inverse Laplace agrees"
)
@pytest.mark.parametrize("shape", SHAPES)
def test_uptake_follows_the_table(shape):
    """Share taken up, share left and local concentrations match at all times to 1e-12."""
    rows = table()
    theta = rows["Dt_over_L2"]
    assert uptake(theta, shape) == approx(rows[shape], abs=1e-12)
    assert left_in_tissue(theta, shape) == approx(1 - rows[shape], abs=1e-12)
    assert local_uptake(theta, 0.0, shape) == approx(rows[f"{shape}_centre"], abs=1e-12)
    assert local_uptake(theta, 0.5, shape) == approx(rows[f"{shape}_half"], abs=1e-12)


@pytest.mark.source(
    "P", f"{CRANK}, p. 47-48, as worked in the documentation of a general transport library"
)
def test_worked_example_of_a_sheet():
    """A sheet of half thickness 0.2 mm, D 1e-10 m²/s, after 50 and 100 s."""
    theta = 1e-10 * np.array([50, 100]) / 0.2e-3**2
    assert uptake(theta, "slab") == approx([0.398927989884568, 0.562233541762138], rel=1e-12)
    assert local_uptake(theta[1], 0.0, "slab") == approx(0.314554233109648, rel=1e-12)


@pytest.mark.source("P", f"{CRANK}: half time of a sheet, Dt/l² = 0.0492 (from memory)")
def test_half_time_of_a_sheet():
    """Half of what a sheet of full thickness l holds is gone when Dt/l² is 0.0492."""
    assert theta_for_uptake(0.5, "slab") / 4 == approx(0.0492, rel=0.005)


@pytest.mark.source("C", f"{CRANK}, series solved for the time with mpmath")
def test_clock_for_half_and_ninety_percent():
    """The clock at which half and 90 % are gone is right to nine digits."""
    constants = json.loads((COMPUTED / "constants.json").read_text(encoding="utf-8"))
    for share, key in ((0.5, "half_uptake_Dt_over_L2"), (0.9, "uptake_90_Dt_over_L2")):
        for shape in SHAPES:
            expected = float(constants[key][shape])
            assert theta_for_uptake(share, shape) == approx(expected, rel=1e-9)


@pytest.mark.source("C", f"{CRANK}, first mode")
@pytest.mark.parametrize(
    ("shape", "theta"), [("slab", 1.78129), ("cylinder", 0.73256), ("sphere", 0.41617)]
)
def test_clock_for_one_percent_left(shape, theta):
    """The clock at which 1 % is left."""
    assert theta_for_uptake(0.99, shape) == approx(theta, abs=1e-5)
    assert left_in_tissue(theta, shape) == approx(0.01, rel=1e-4)


@pytest.mark.source(
    "P", "Self-diffusion coefficients of ions at 25 °C (Landolt; Robinson & Stokes)"
)
def test_diffusivity_of_acid_and_salt():
    """H 9.31, Cl 2.03 and Ca 0.793 give HCl 3.33 and CaCl2 1.336 (1e-9 m²/s)."""
    assert electrolyte_diffusivity(9.31, 2.03, 1, 1) == approx(3.33, rel=0.005)
    assert electrolyte_diffusivity(0.793, 2.03, 2, 1) == approx(1.336, rel=0.005)
    # a measured limit is quoted as about 1.5 percent less
    assert electrolyte_diffusivity(0.793, 2.03, 2, 1) == approx(1.316, rel=0.02)


@pytest.mark.parametrize("shape", SHAPES)
def test_modes_of_the_depth_model_are_the_same(shape):
    """The depth model and the washout use the same modes of an endless bath."""
    squares = geometry(shape).squares
    roots = bath_roots(np.zeros(1), shape, len(squares))[:, 0]
    assert roots**2 == approx(squares, rel=1e-13)


@pytest.mark.parametrize("shape", SHAPES)
def test_mean_of_a_mode(shape):
    """The mean of a mode over the volume is what Gauss-Legendre points make of it."""
    x, weights = np.polynomial.legendre.leggauss(40)
    x, d = (x + 1) / 2, SHAPES.index(shape) + 1
    for root in bath_roots(np.array([0.3]), shape, 4)[:, 0]:
        mode = {"slab": np.cos, "cylinder": j0, "sphere": lambda z: np.sinc(z / np.pi)}[shape]
        mean = weights / 2 @ (d * x ** (d - 1) * mode(root * x))
        assert float(mode_mean(root, shape)) == approx(mean, abs=1e-13)


@pytest.mark.parametrize("shape", SHAPES)
def test_short_and_long_forms_meet(shape):
    """Where the forms for short and for long times meet, nothing jumps."""
    for limit in (1e-3, 0.25):
        theta = limit * (1 + np.array([-1e-9, 1e-9]))
        below, above = uptake(theta, shape)
        assert above - below == approx(0, abs=1e-9 * limit**0.5 * 20)
        below, above = left_in_tissue(theta, shape)
        assert below - above == approx(0, abs=1e-9 * limit**0.5 * 20)
    earliest = SHORTEST * (1 + np.array([-1e-9, 1e-9]))
    for place in (0.98, 0.99, 0.995, 0.999):
        assert np.ptp(local_uptake(earliest, place, shape)) < 1e-5


shapes = st.sampled_from(SHAPES)


@settings(deadline=None, derandomize=True)
@given(shapes, st.lists(st.floats(0, 6), min_size=2, max_size=9))
def test_uptake_rises_with_time(shape, times):
    """Uptake rises with time, and rises at depth as well; what is left is the rest."""
    theta = np.sort(times)
    taken = uptake(theta, shape)
    assert (np.diff(taken) >= -1e-15).all()
    assert taken + left_in_tissue(theta, shape) == approx(np.ones(len(theta)), abs=1e-15)
    assert (np.diff(local_uptake(theta, 0.7, shape)) >= -1e-5).all()


@settings(deadline=None, derandomize=True)
@given(shapes, st.floats(1e-9, 1 - 1e-9))
def test_clock_is_the_inverse_of_uptake(shape, share):
    """At the clock for a share, that share is gone."""
    theta = theta_for_uptake(share, shape)
    assert uptake(theta, shape) == approx(share, rel=1e-11)
    assert left_in_tissue(theta, shape) == approx(1 - share, rel=1e-6, abs=1e-15)


def test_all_of_it_takes_for_ever():
    """Nothing takes no time, and the last trace takes for ever."""
    for shape in SHAPES:
        assert theta_for_uptake(np.array([0.0, 1.0]), shape).tolist() == [0.0, np.inf]
        assert uptake(0.0, shape) == 0
