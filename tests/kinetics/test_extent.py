"""Extent laws: tables, inverses, limits."""

import csv

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.extent import LAWS

scaled = st.floats(0.0, 1e6)
extents = st.floats(0.0, 0.999999)
PARAMETERS = {
    "first_order": st.just(()),
    "two_pool": st.tuples(st.floats(0.05, 0.95), st.floats(1e-3, 1.0)),
    "stretched": st.tuples(st.floats(0.3, 3.0)),
    "erosion": st.tuples(st.sampled_from([1.0, 2.0, 3.0])),
    "michaelis_menten": st.tuples(st.floats(0.0, 1e4)),
}
laws = st.sampled_from(sorted(LAWS)).flatmap(
    lambda name: st.tuples(st.just(LAWS[name]), PARAMETERS[name])
)


@pytest.mark.source("C", "Schnell & Mendoza 1997, closed form, by mpmath in 60 digits (K1)")
def test_integrated_michaelis_menten(reference):
    """Extents agree to 1e-14 from S0/Km 1e-6 to 1e5, where exp() overflows too."""
    with (reference / "computed" / "michaelis_menten_progress.csv").open() as file:
        rows = list(csv.DictReader(file))
    u, start, expected = (
        np.array([float(row[name]) for row in rows])
        for name in ("Vmax_t_over_Km", "S0_over_Km", "extent")
    )

    assert len(rows) == 108
    assert expected == pytest.approx(LAWS["michaelis_menten"].extent(u, start), abs=1e-14)


@settings(deadline=None, derandomize=True, max_examples=300)
@given(laws, extents)
def test_the_inverse_undoes_the_law(law_and_parameters, extent):
    """The scaled dose for an extent gives that extent."""
    law, parameters = law_and_parameters
    dose = law.scaled_dose(np.array([extent]), *parameters)

    assert law.extent(dose, *parameters)[0] == pytest.approx(extent, rel=1e-8, abs=1e-9)


@settings(deadline=None, derandomize=True, max_examples=200)
@given(laws, scaled, scaled)
def test_more_dose_is_never_less_extent(law_and_parameters, one, other):
    """Every law rises, and stays between 0 and 1."""
    law, parameters = law_and_parameters
    low, high = (
        law.extent(np.array([min(one, other)]), *parameters),
        law.extent(np.array([max(one, other)]), *parameters),
    )

    assert 0 <= low[0] <= high[0] + 1e-15 <= 1 + 2e-15


@pytest.mark.parametrize("name", sorted(LAWS))
def test_no_dose_no_extent(name):
    """Nothing gives way to nothing."""
    parameters = {"two_pool": (0.6, 0.1), "first_order": ()}.get(name, (2.0,))

    assert LAWS[name].extent(np.zeros(1), *parameters)[0] == 0


def test_complete_extent_is_out_of_reach_or_at_the_end():
    """Only erosion finishes; the others never quite do."""
    for name in ("first_order", "stretched", "michaelis_menten"):
        parameters = () if name == "first_order" else (1.5,)
        assert LAWS[name].scaled_dose(np.ones(1), *parameters)[0] == np.inf
    assert LAWS["erosion"].scaled_dose(np.ones(1), 3.0)[0] == 1.0


@pytest.mark.source("P", "Hixson & Crowell 1931, the cube-root law (from memory)")
def test_erosion_of_a_sphere_is_the_cube_root_law():
    """The cube root of what is left falls in a straight line."""
    u = np.linspace(0, 1, 11)
    left = 1 - LAWS["erosion"].extent(u, 3.0)

    assert np.cbrt(left) == pytest.approx(1 - u, abs=1e-12)


@settings(deadline=None, derandomize=True)
@given(st.floats(0.0, 20.0))
def test_little_substrate_gives_way_in_first_order(u):
    """Far below half saturation the Michaelis-Menten law is first order."""
    first = LAWS["first_order"].extent(u)

    assert LAWS["michaelis_menten"].extent(u, 1e-9) == pytest.approx(first, abs=1e-8)
    assert LAWS["michaelis_menten"].extent(u, 0.0) == pytest.approx(first, abs=1e-14)


def test_a_slow_pool_that_never_gives_way():
    """An extent beyond the fast pool is out of reach where the rest does not react."""
    law = LAWS["two_pool"]

    assert law.scaled_dose(np.array([0.8]), 0.7, 0.0)[0] == np.inf
    assert law.scaled_dose(np.array([0.35]), 0.7, 0.0)[0] == pytest.approx(np.log(2))
