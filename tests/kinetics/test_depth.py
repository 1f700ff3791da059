"""Penetration: local dose against published tables, and its limits."""

import csv
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.depth import geometry
from digestplan.kinetics.dose import Course
from digestplan.kinetics.programme import Leg, compile_programme
from digestplan.kinetics.state import Rates, nothing

COMPUTED = Path(__file__).parents[1] / "reference" / "computed"
SHAPES = ("slab", "cylinder", "sphere")


def table(name):
    with (COMPUTED / name).open() as file:
        return list(csv.DictReader(file))


def course(shape, hours, rate, pace=1.0, graded=False, breaks=()):
    """Enzyme of unit ratio that dies and diffuses at constant temperature."""
    form = geometry(shape)
    cells = compile_programme(
        [Leg(hours, ramp=False)], np.full(2, 300.0), graded=graded, breaks=breaks
    )
    full = np.ones((len(cells.weights), 1))
    rates = Rates(full, rate * full, penetration=pace * full)
    return Course(cells, rates, nothing(1, form), {0: np.ones(1)}, geometry=form)


@pytest.mark.source("C", "Danckwerts 1951, by inverse Laplace transform (depth_dose.csv)")
@pytest.mark.parametrize("graded", [False, True])
@pytest.mark.parametrize("shape", SHAPES)
def test_local_dose_follows_danckwerts(shape, graded):
    """Mean and centre dose agree with the closed solution to 1e-8 of the unit L²/D."""
    for row in table("depth_dose.csv"):
        run = course(shape, float(row["Dt_over_L2"]), float(row["kd_L2_over_D"]), graded=graded)
        local = run.at_end().local

        assert float(row[f"{shape}_mean"]) == pytest.approx(
            geometry(shape).mean(local)[0], abs=1e-8
        )
        assert float(row[f"{shape}_centre"]) == pytest.approx(local[0, 0], abs=2e-8)


@pytest.mark.source(
    "P", "Crank 1975, The Mathematics of Diffusion, chapters 4-6 (crank_uptake.csv)"
)
@pytest.mark.parametrize("shape", SHAPES)
def test_modes_give_cranks_uptake(shape):
    """Without death, the modes' mean concentration is Crank's uptake from Dt/L² 0.05 on."""
    form = geometry(shape)
    for row in table("crank_uptake.csv"):
        theta = float(row["Dt_over_L2"])
        if theta < 0.05:
            continue  # the modes that are left out are lumped for the dose, not for the profile
        local = 1 - form.lack @ np.exp(-form.squares * theta)

        assert float(row[shape]) == pytest.approx(float(form.mean(local[:, None])[0]), abs=1e-8)
        assert float(row[f"{shape}_centre"]) == pytest.approx(local[0], abs=1e-8)


@pytest.mark.parametrize("shape", SHAPES)
def test_depth_shares_make_a_whole(shape):
    """The depth points' shares of the volume sum to 1."""
    assert geometry(shape).shares.sum() == pytest.approx(1.0, abs=1e-14)


@pytest.mark.parametrize("shape", SHAPES)
def test_fast_diffusion_forgets_the_depth(shape):
    """Where diffusion is very fast, every depth gets the dose of the surface."""
    end = course(shape, 3.0, 0.4, pace=1e6).at_end()

    assert end.local[:, 0] == pytest.approx(end.dose[0], rel=1e-5)


@pytest.mark.parametrize("shape", SHAPES)
def test_no_time_no_dose(shape):
    """At the very start nothing has got in, and nothing is negative or not a number."""
    run = course(shape, 1.0, 0.4)
    for time in (0.0, 1e-12, 1e-7, 1e-4):
        local = run.at(time).local
        assert np.isfinite(local).all()
        assert (local >= 0).all()
        assert local[0, 0] < 1e-6


@settings(deadline=None, derandomize=True, max_examples=30)
@given(st.sampled_from(SHAPES), st.floats(0.05, 5), st.floats(0.0, 20.0), st.floats(0.1, 0.9))
def test_splitting_changes_no_depth(shape, hours, rate, share):
    """A stretch cut in two gives the same dose at every depth."""
    whole = course(shape, hours, rate).at_end().local
    cut = course(shape, hours, rate, breaks=[share * hours]).at_end().local

    assert cut == pytest.approx(whole, rel=1e-9, abs=1e-12)


def test_the_core_waits_for_the_rim():
    """The dose falls from the surface to the centre."""
    local = course("slab", 0.3, 0.5).at_end().local[:, 0]
    points = geometry("slab").points

    assert (np.diff(local[np.argsort(points)]) > 0).all()
