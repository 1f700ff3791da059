"""Free calcium beside chelators: constants, the cliff, and several ligands at once."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.chelation import (
    CITRATE_PKS,
    EDTA_PKS,
    PHOSPHATE_PKS,
    citrate_constant,
    edta_constant,
    edta_share,
    form_share,
    free_metal,
    free_with_ligands,
    phosphate_constant,
    phosphate_pks,
)

approx = pytest.approx
ROOM = 298.15
HANDBOOK = "E1: Acid Dissociation Constants at 25 °C (open chemistry textbook)"
TEXTBOOK = "α(Y⁴⁻) as analytical textbooks print it with pK 1.99, 2.67, 6.16, 10.26 (from memory)"


@pytest.mark.source("P", TEXTBOOK)
@pytest.mark.parametrize(("ph", "share"), [(4, 3.8e-9), (7, 5.0e-4), (10, 0.36)])
def test_share_of_edta_as_printed(ph, share):
    """The share of fully deprotonated EDTA, as printed, within the rounding of the tables."""
    assert edta_share(ph) == approx(share, rel=0.06)


@pytest.mark.source("C", "Mass action with the same pK and log K 10.65")
@pytest.mark.parametrize(
    ("ph", "share", "log_k"),
    [
        (4, 3.61e-9, 2.21),
        (5, 3.54e-7, 4.20),
        (6, 2.25e-5, 6.00),
        (7, 4.80e-4, 7.33),
        (7.4, 1.30e-3, 7.77),
        (8, 5.39e-3, 8.38),
        (9, 5.20e-2, 9.37),
        (10, 0.355, 10.20),
        (11, 0.846, 10.58),
        (12, 0.982, 10.64),
    ],
)
def test_conditional_constant_of_edta(ph, share, log_k):
    """Share and conditional constant from pH 4 to 12."""
    assert edta_share(ph) == approx(share, rel=0.01)
    assert np.log10(edta_constant(ph)) == approx(log_k, abs=0.01)


@pytest.mark.source("P", "Textbook set of six pK: 0.0, 1.5, 2.00, 2.69, 6.13, 10.37")
def test_another_set_of_constants_differs_by_its_spread():
    """Another published set of pK gives 10 to 30 % less, which is the spread we carry."""
    other = (0.0, 1.5, 2.00, 2.69, 6.13, 10.37)
    ratio = form_share(np.array([5.0, 7.0, 8.0]), other, 6) / edta_share(np.array([5.0, 7.0, 8.0]))
    assert ((ratio > 0.7) & (ratio < 0.9)).all()


@pytest.mark.source("C", "Van 't Hoff with −27 kJ/mol for calcium")
def test_edta_constant_against_temperature():
    """Warmth takes 0.18 from log K, cold adds 0.36; the protons make up for most of it."""
    for celsius, change in ((37, -0.18), (4, 0.36)):
        kelvin = celsius + 273.15
        whole = np.log10(edta_constant(13.5, kelvin) / edta_share(13.5, kelvin))
        assert whole - 10.65 == approx(change, abs=0.005)
        assert abs(np.log10(edta_constant(7.4, kelvin)) - 7.77) < 0.1


@pytest.mark.source("C", "Mass action, 5 mmol/L calcium at pH 7.4")
def test_cliff_at_one_to_one():
    """Free calcium falls by four orders of magnitude as EDTA passes the calcium."""
    edta = np.array([0.5, 1, 4, 4.9, 5.1, 6, 10]) / 1000
    expected = np.array([4.5, 4.0, 1.0, 0.10, 8.5e-4, 8.6e-5, 1.7e-5]) / 1000
    assert free_metal(0.005, edta, edta_constant(7.4)) == approx(expected, rel=0.015)


@pytest.mark.source("P", f"{HANDBOOK}: phosphoric and citric acid")
def test_pk_of_phosphate_and_citrate():
    """The constants that are used here agree with the handbook to 0.02."""
    assert np.array(PHOSPHATE_PKS[:2]) == approx(np.array([2.16, 7.21]), abs=0.02)
    assert np.array(CITRATE_PKS) == approx(np.array([3.13, 4.76, 6.40]), abs=0.02)
    assert len(EDTA_PKS) == 4


@pytest.mark.source("C", "Davies and mass action")
def test_citrate_and_phosphate_bind_weakly():
    """At pH 7.4 citrate binds with about 10³, phosphate with about 50 L/mol: far below EDTA."""
    assert np.log10(citrate_constant(7.4)) == approx(3.5, abs=0.03)
    assert citrate_constant(4.0) < citrate_constant(7.4) / 20
    assert 30 < phosphate_constant(7.4, 0.15) < 80
    assert phosphate_constant(5.0, 0.15) < phosphate_constant(7.4, 0.15)
    assert phosphate_pks(0.1)[1] == approx(6.88, abs=0.01)
    assert edta_constant(7.4) > 1e4 * citrate_constant(7.4)


def test_without_ligand_all_is_free():
    """No ligand, no metal, and a ligand that does not bind leave things as they are."""
    assert free_metal(0.005, 0.0, 1e7) == approx(0.005, rel=1e-12)
    assert free_metal(0.0, 0.005, 1e7) == 0
    assert free_with_ligands(0.005, [], []) == approx(0.005, rel=1e-12)
    assert free_with_ligands(0.0, [0.01], [1e7]) == 0
    assert free_with_ligands(0.005, [0.01], [0.0]) == approx(0.005, rel=1e-12)


amounts = st.floats(0, 0.5)
logs = st.floats(0, 14)


@settings(deadline=None, derandomize=True)
@given(st.floats(1e-9, 0.5), amounts, logs)
def test_one_ligand_two_ways(metal, ligand, log_k):
    """The quadratic and the root agree, and what is free and bound is all there is."""
    free = free_metal(metal, ligand, 10**log_k)
    assert 0 < free <= metal * (1 + 1e-12)
    bound = ligand * 10**log_k * free / (1 + 10**log_k * free)
    assert free + bound == approx(metal, rel=1e-6)
    assert free_with_ligands(metal, [ligand], [10**log_k]) == approx(free, rel=1e-6)


@settings(deadline=None, derandomize=True)
@given(st.floats(1e-6, 0.5), st.lists(st.tuples(amounts, logs), min_size=1, max_size=4))
def test_several_ligands_balance(metal, pairs):
    """Free and bound metal add up, and one more ligand never frees any."""
    ligands, constants = [c for c, _ in pairs], [10**k for _, k in pairs]
    free = free_with_ligands(metal, ligands, constants)
    bound = sum(c * k * free / (1 + k * free) for c, k in zip(ligands, constants, strict=True))
    assert free + bound == approx(metal, rel=1e-6)
    fewer = free_with_ligands(metal, ligands[1:], constants[1:])
    assert free <= fewer * (1 + 1e-9)


@settings(deadline=None, derandomize=True)
@given(st.floats(0, 14))
def test_forms_of_an_acid_are_all_of_it(ph):
    """The shares of all forms add up to one at every pH."""
    total = sum(form_share(ph, PHOSPHATE_PKS, lost) for lost in range(4))
    assert total == approx(1, abs=1e-12)


def test_temperature_of_the_constants():
    """At 25 °C the constants are those of the tables, whatever their enthalpies."""
    assert edta_share(9.0, ROOM) == approx(float(form_share(9.0, EDTA_PKS, 4)), rel=1e-12)
