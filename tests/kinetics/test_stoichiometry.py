"""Formula masses, the needs of bone, and the gas it gives off."""

import csv
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.solution import Buffer, solve_ph
from digestplan.kinetics.stoichiometry import (
    ATMOSPHERE,
    PHOSPHATE_PKS,
    acid_needed,
    chelator_needed,
    closed_vessel_pressure,
    extent_from_calcium,
    gas_volume,
    mineral_by_analysis,
    mineral_by_share,
    molar_mass,
    molarity,
    phosphate_capacity,
    protons_taken,
    reagent_held,
)

approx = pytest.approx
COMPUTED = Path(__file__).parents[1] / "reference" / "computed"
EDTA = "C10H14N2Na2O8·2H2O"  # disodium salt, dihydrate
BONE = mineral_by_analysis(0.225, 0.103)  # ICRU Report 44
LILLIE = "Decalcification of bone in relation to staining and phosphatase technics, abstract"


def masses():
    with (COMPUTED / "molar_masses.csv").open(encoding="utf-8") as lines:
        return list(csv.DictReader(lines))


@pytest.mark.source(
    "L", "periodictable 2.1.0 and molmass 2026.1.8 on IUPAC standard atomic weights"
)
@pytest.mark.parametrize("row", masses(), ids=lambda row: row["formula"])
def test_molar_masses(row):
    """Molar masses agree with two libraries to 1e-4, and with the bottle's label."""
    mass = molar_mass(row["formula"])
    assert mass == approx(float(row["periodictable_g_mol"]), rel=1e-4)
    assert mass == approx(float(row["molmass_g_mol"]), rel=1e-4)
    if row["usual_label_value_g_mol"]:
        assert mass == approx(float(row["usual_label_value_g_mol"]), rel=2e-4)


def test_hydrates_and_brackets():
    """Water of crystallisation and brackets count as often as they are written."""
    assert molar_mass("C10H14N2Na2O8·2H2O") == approx(molar_mass("C10H14N2Na2O8(H2O)2"), rel=1e-15)
    assert molar_mass("CaHPO4·2H2O") == approx(molar_mass("CaPO6H5"), rel=1e-15)
    assert molar_mass("Ca10(PO4)6(OH)2") == approx(2 * molar_mass("Ca5(PO4)3OH"), rel=1e-15)
    assert molar_mass("((O2)3)2") == approx(12 * molar_mass("O"), rel=1e-15)


@pytest.mark.parametrize("formula", ["Xx2", "Ca(OH", "Ca)2", "", "NaCl·", "Na Cl", "1.5H2O"])
def test_formulas_that_are_none(formula):
    """What is no formula is refused and quoted, not weighed."""
    with pytest.raises(ValueError, match="formula"):
        molar_mass(formula)


@pytest.mark.source("P", "Kiviranta 1980, Histochemistry 68:119: 4, 8 and 15 % EDTA")
def test_edta_percent_and_molarity():
    """4, 8 and 15 % of the disodium dihydrate are 0.11, 0.22 and 0.40 mol/L."""
    expected = np.array([0.11, 0.22, 0.40])
    assert molarity(np.array([4, 8, 15]), molar_mass(EDTA)) == approx(expected, rel=0.03)


@pytest.mark.source("P", "ICRU Report 44: cortical bone, make-up as quoted by a phantom maker")
def test_mineral_share_of_bone():
    """22.5 % calcium and 10.3 % phosphorus make the 58 % of mineral that the report gives."""
    assert BONE.mass == approx(0.58, rel=0.01)


@pytest.mark.source("P", "Practical considerations on decalcification (quotes Bancroft & Gamble)")
def test_calcium_of_the_mineral():
    """Bone mineral is approximately 38 % calcium."""
    pure = mineral_by_share(1.0)
    assert pure.mass == approx(1.0, rel=1e-12)
    assert 0.36 < pure.calcium * molar_mass("Ca") < 0.40
    assert 0.36 < BONE.calcium * molar_mass("Ca") / BONE.mass < 0.40


@pytest.mark.source(
    "P", "Encyclopaedia article on bone: carbonate is 8 % of the ash of most mammals"
)
def test_carbonate_from_the_charge_balance():
    """The carbonate that closes the charge agrees with that of ash, within 1.3."""
    assert BONE.carbonate == approx(0.626e-3, rel=0.005)
    ash = 0.08 * 0.60 / molar_mass("CO3")
    assert ash / 1.3 < BONE.carbonate < ash


@pytest.mark.source("C", "Charge balance of the composition in ICRU Report 44")
def test_two_ways_to_the_same_mineral():
    """Analysis and share of mineral lead to the same composition."""
    other = mineral_by_share(BONE.mass, 0.0649)
    assert other.calcium == approx(5.61e-3, rel=0.002)
    assert other.phosphate == approx(3.33e-3, rel=0.002)
    assert BONE.carbonate == approx(float(other.carbonate), rel=0.01)


@pytest.mark.source("C", "Mass action with pK 2.15, 7.20, 12.35")
@pytest.mark.parametrize(
    ("ph", "protons", "per_gram", "per_calcium"),
    [
        (1.0, 2.93, 11.0, 1.96),
        (2.0, 2.58, 9.9, 1.75),
        (2.5, 2.31, 8.9, 1.59),
        (3.5, 2.04, 8.0, 1.43),
        (4.5, 2.00, 7.9, 1.41),
    ],
)
def test_acid_that_bone_needs(ph, protons, per_gram, per_calcium):
    """Protons per phosphate, acid per gram and per calcium at the final pH of the bath."""
    assert protons_taken(ph) == approx(protons, abs=0.006)
    assert acid_needed(BONE, ph) * 1e3 == approx(per_gram, abs=0.06)
    assert acid_needed(BONE, ph) / BONE.calcium == approx(per_calcium, abs=0.01)


@pytest.mark.source("C", "Dissolution of hydroxyapatite as it is written in textbooks")
def test_hydroxyapatite_needs_ten_or_seven_protons():
    """Ca5(PO4)3OH takes up 10 H⁺ when it ends as phosphoric acid, 7 as dihydrogen phosphate."""
    assert 3 * protons_taken(-3.0) + 1 == approx(10, abs=1e-4)
    assert 3 * protons_taken(4.67) + 1 == approx(7, abs=0.02)


@pytest.mark.source("C", "Charge balance of a bath with phosphoric acid, no activity coefficients")
@pytest.mark.parametrize(
    ("volume", "acid", "held_over_needed", "ph"),
    [
        (20, 0.5, 0.91, 2.0),
        (20, 0.6, 1.09, 1.2),
        (40, 0.5, 1.8, 0.65),
        (20, 1.0, 1.8, 0.36),
        (10, 0.5, 0.45, None),
        (20, 0.1, 0.18, None),
    ],
)
def test_where_a_bath_ends(volume, acid, held_over_needed, ph):
    """A gram of bone in so much acid: held over needed, and the pH when all is dissolved."""
    held = reagent_held(acid, volume)
    assert held / acid_needed(BONE, 1.0) == approx(held_over_needed, rel=0.02)
    phosphate = Buffer(BONE.phosphate / volume * 1000, PHOSPHATE_PKS)
    end = solve_ph([phosphate], (2 * BONE.calcium / volume * 1000) - acid, 298.15, 0.0)
    if ph is None:
        assert end > 5  # more than the acid can: the mineral cannot be gone
    else:
        assert end == approx(ph, abs=0.06)
        spent = held - 10 ** (-end) * volume / 1000
        assert acid_needed(BONE, end) == approx(float(spent), rel=0.002)


@pytest.mark.source("C", "Mass balance, one EDTA per calcium")
def test_volumes_of_edta():
    """Volume per gram of bone that holds just enough: 42 mL of 5 % down to 10 mL of 20 %."""
    percent = np.array([5, 8, 10, 14, 15, 17, 20])
    volume = chelator_needed(BONE, 0.0) / molarity(percent, molar_mass(EDTA)) * 1000
    assert volume == approx(np.array([42, 26, 21, 15, 14, 12, 10]), abs=0.55)
    twenty_to_one = reagent_held(molarity(10, molar_mass(EDTA)), 20.0)
    assert twenty_to_one / chelator_needed(BONE, 0.0) == approx(0.96, abs=0.005)
    assert chelator_needed(BONE) > chelator_needed(BONE, 0.0)


@pytest.mark.source("P", f"{LILLIE}: 1 N mineral acids dissolve about 6.5 % of calcium phosphate")
def test_capacity_of_a_mineral_acid():
    """65 g/L of calcium phosphate lie between two and three protons per phosphate."""
    least, most = phosphate_capacity(1.0, 3.0), phosphate_capacity(1.0, 2.0)
    assert least == approx(51.7, rel=1e-3)
    assert most == approx(77.5, rel=1e-3)
    assert least < 65 < most
    assert phosphate_capacity(1.0, protons_taken(2.0)) == approx(65, rel=0.2)


@pytest.mark.source("C", "Ideal gas at 1 atm; carbonate of ICRU bone")
@pytest.mark.parametrize(("celsius", "volume"), [(4, 14.2), (20, 15.1), (25, 15.3), (37, 15.9)])
def test_gas_from_a_gram_of_bone(celsius, volume):
    """A gram of bone gives off about 15 mL of carbon dioxide."""
    assert gas_volume(BONE.carbonate, celsius + 273.15) == approx(volume, abs=0.1)


@pytest.mark.source("P", "Molar volume of an ideal gas at 0 °C and 1 atm: 22.414 L (CODATA)")
def test_molar_volume():
    """A mole of gas at 0 °C and 1 atm takes 22.414 L."""
    assert gas_volume(1.0, 273.15) == approx(22_414.0, rel=1e-5)


@pytest.mark.source("C", "Ideal gas and Henry's law (constant from memory)")
def test_pressure_in_a_closed_tube():
    """A gram beside 5 mL of air, a tenth beside 0.3 mL: several atmospheres, in closed tubes."""
    large = closed_vessel_pressure(0.63e-3, 5.0, np.array([0.0, 45.0]), 298.15) / ATMOSPHERE
    assert large == approx(np.array([3.1, 0.4]), abs=0.06)
    small = closed_vessel_pressure(0.063e-3, 0.3, np.array([0.0, 1.2]), 298.15) / ATMOSPHERE
    assert small == approx(np.array([5.1, 1.2]), abs=0.06)
    cold = closed_vessel_pressure(0.63e-3, 5.0, 45.0, 277.15) / ATMOSPHERE
    assert 0.5 < cold / large[1] < 0.6  # cold water holds nearly twice as much gas


@pytest.mark.source("P", "Ariffin et al. 2019, Cell Tissue Bank 20:527: residual calcium")
def test_extent_from_residual_calcium():
    """21.8 % calcium falling to 13 % and 8 % means extents of 0.62 and 0.81, as √(40 h/24 h)."""
    extents = extent_from_calcium(np.array([0.13, 0.08]), 0.218)
    assert extents == approx(np.array([0.622, 0.808]), abs=0.001)
    assert extents[1] / extents[0] == approx(np.sqrt(40 / 24), rel=0.05)
    assert extent_from_calcium(0.0, 0.218) == 1


@settings(deadline=None, derandomize=True)
@given(st.floats(0.01, 0.36), st.floats(0, 1))
def test_residual_calcium_of_an_extent(fresh, extent):
    """The calcium that a mass balance leaves at an extent leads back to the extent."""
    mineral = fresh / 0.37
    left = fresh * (1 - extent) / (1 - mineral * extent)
    assert extent_from_calcium(left, fresh) == approx(extent, abs=1e-9)


@settings(deadline=None, derandomize=True)
@given(st.floats(0.0, 0.4), st.floats(0.0, 0.25))
def test_charges_of_the_mineral_balance(calcium, phosphorus):
    """Cations and anions balance; with too much phosphate there is no carbonate left to give."""
    mineral = mineral_by_analysis(calcium, phosphorus)
    charge = 2 * mineral.calcium - 3 * mineral.phosphate - 2 * mineral.carbonate
    assert charge <= 1e-15
    assert mineral.carbonate == 0 or charge == approx(0, abs=1e-15)


@settings(deadline=None, derandomize=True)
@given(st.floats(-3, 16), st.floats(-3, 16))
def test_protons_fall_with_the_ph(one, other):
    """The higher the pH, the fewer protons: from 3 to 0."""
    low, high = sorted([one, other])
    assert 0 <= protons_taken(high) <= protons_taken(low) <= 3
