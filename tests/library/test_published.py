"""Enzymes and tissues of the library against what their sources, and others, print.

Where an entry was set to a source, the check only says that it gives it back; the docstring
says which of them were not used.
"""

import csv
import math

import pytest

from digestplan import library
from digestplan.kinetics.stoichiometry import molar_mass, molarity
from digestplan.kinetics.temperature import arrhenius_factor

GAS, BOLTZMANN, PLANCK = 8.314462618, 1.380649e-23, 6.62607015e-34
CALORIE = 4.184
FITZPATRICK = "Fitzpatrick et al. 2026, Sci. Rep., porcine pepsin (abstract)"
MODARES = "The effect of calcium on stability of thermolysin, Modares J. Biotechnol. 4, 85, 2013"
TRYPSINS = "Calorimetric study of the thermal stabilities of alpha- and beta-trypsin (abstract)"
DI_PASQUALE = "Di Pasquale et al. 2019, Int. Wound J., as told by its sponsor"
DENSITIES = "Table 3, mass density of biological tissues, Mech. Mater. 44, 174, 2012"
COMPOSITIONS = "PMC4785597, table 1: compositions of major tissue types"
LISTING = "Goldberg, Kishore & Lennen 2002, as listed in public code that cites it"
IONS = "Self-diffusion coefficients of ions in water at 25 °C (Landolt; Robinson & Stokes), table"
LILLIE = "Decalcification of Bone in Relation to Staining and Phosphatase Technics (abstract)"


def value(key, name):
    """One value of an enzyme, in the core unit."""
    return library.enzyme(key).values[name].quantity.value


def spread(section, key, name):
    """Value and spread of an entry."""
    quantity = getattr(library, section)(key).values[name].quantity
    return quantity.value, quantity.spread


def death(key, celsius):
    """Rate at which an enzyme dies at a temperature. [1/h]"""
    energy, reference = value(key, "inactivation_energy"), value(key, "reference_temperature")
    factor = float(arrhenius_factor(celsius + 273.15, energy, reference))
    return value(key, "inactivation_rate") * factor


def left(key, celsius, hours):
    """Share of an enzyme that a stay leaves active."""
    return math.exp(-death(key, celsius) * hours)


def share(key, ph):
    """Rate at a pH over that at the optimum."""
    low, high = value(key, "ph_low_pka"), value(key, "ph_high_pka")

    def bell(at):
        return 1 / (1 + 10 ** (low - at) + 10 ** (at - high))

    return bell(ph) / bell((low + high) / 2)


# -- what heat does to the enzymes ----------------------------------------------------------------


@pytest.mark.source("P", MODARES)
@pytest.mark.parametrize(("celsius", "minutes"), [(85, 45), (90, 16)])
def test_thermolysin_gives_back_its_half_lives(celsius, minutes):
    """With calcium it has the half-lives to which it was set, as far as three digits tell."""
    assert 60 * math.log(2) / death("thermolysin", celsius) == pytest.approx(minutes, rel=0.1)


@pytest.mark.source("P", MODARES)
def test_thermolysin_lasts_at_80_degrees():
    """Its half-life at 80 °C, which was not used, is above 95 min."""
    assert 60 * math.log(2) / death("thermolysin", 80) > 95


@pytest.mark.source("P", FITZPATRICK)
def test_pepsin_survives_65_and_dies_at_75_degrees():
    """A quarter of an hour at 65 °C leaves some of it, five minutes at 75 °C leave none."""
    assert 0.01 < left("pepsin", 65, 0.25) < 0.3
    assert left("pepsin", 75, 5 / 60) < 0.001


@pytest.mark.source(
    "P", "Makers' data on proteinase K: 65 °C for 10 to 15 min takes under a quarter"
)
def test_proteinase_k_survives_65_degrees_for_minutes():
    """Twelve minutes at 65 °C leave more than three quarters, ten at 95 °C next to nothing."""
    assert left("proteinase-k", 65, 0.2) > 0.75
    assert left("proteinase-k", 95, 1 / 6) < 0.001


@pytest.mark.source("P", TRYPSINS)
def test_trypsin_dies_between_its_two_forms():
    """At 48 °C the rate, which was not set to it, lies between those of its two forms."""
    one_chain, two_chains = 5e-5 * 3600, 5e-3 * 3600

    assert one_chain < death("trypsin", 48) < two_chains


@pytest.mark.source("P", TRYPSINS)
@pytest.mark.parametrize("kilocalories", [69, 38])
def test_the_energy_of_trypsin_covers_both_forms(kilocalories):
    """Both activation energies lie within about one standard deviation."""
    middle, sd = spread("enzyme", "trypsin", "inactivation_energy")

    assert abs(kilocalories * CALORIE * 1000 - middle) < 1.1 * sd


@pytest.mark.source(
    "P", "Park et al. 1979, Korean J. Food Sci. Technol. 11: crude papain, abstract"
)
def test_crude_papain_lies_within_the_spread():
    """Its rate at 60 °C, from enthalpy and entropy of activation, is within 90 % of the spread."""
    kelvin, enthalpy, entropy = 333.15, 91_400.0, -49.6
    per_second = BOLTZMANN * kelvin / PLANCK * math.exp(entropy / GAS - enthalpy / (GAS * kelvin))
    middle, factor = spread("enzyme", "papain", "inactivation_rate")

    assert abs(math.log(per_second * 3600 / middle)) < 1.645 * math.log(factor)


@pytest.mark.source("P", "Johnson and Whateley 1981, Biochem. J. 193, 285 (abstract)")
def test_calcium_and_substrate_slow_the_autolysis_of_trypsin():
    """The rate, held for calcium and substrate, is several times below that without either."""
    without = 13.0 / 23_300 * 3600  # L/(mol s) to mL/(mg h), at 25 °C
    with_both = value("trypsin", "autolysis_rate") / 1000  # mL/(g h) to mL/(mg h), at 37 °C

    assert without == pytest.approx(2.0, rel=0.01)
    assert 3 < without / with_both < 40


# -- pH -------------------------------------------------------------------------------------------


@pytest.mark.source("P", FITZPATRICK)
@pytest.mark.parametrize(("ph", "measured"), [(3, 0.47), (4, 0.13)])
def test_pepsin_falls_off_above_ph_2(ph, measured):
    """Activity at pH 3 and 4 is what was measured, as far as one limb can follow both."""
    assert share("pepsin", ph) == pytest.approx(measured, abs=0.1)


@pytest.mark.source("P", DI_PASQUALE)
@pytest.mark.parametrize(("ph", "measured"), [(5.6, 0.60), (5.0, 0.30), (7.4, 1.0), (8.5, 1.0)])
def test_collagenase_keeps_on_in_weak_acid(ph, measured):
    """Activity between pH 5 and 8.5 is what was measured."""
    assert share("clostridial-collagenase", ph) == pytest.approx(measured, abs=0.1)


@pytest.mark.source("P", "Zhou et al. 2016, Adv. Enzyme Res. 4, 1 (abstract)")
def test_trypsin_is_best_in_weak_alkali():
    """At the measured optimum, pH 8.5 to 8.7, trypsin works at its best within 2 %."""
    assert share("trypsin", 8.5) > 0.98
    assert share("trypsin", 8.7) > 0.98


@pytest.mark.source("P", "Ebeling et al. 1974, Eur. J. Biochem. 47, 91 (abstract)")
@pytest.mark.parametrize("ph", [7.5, 9, 11])
def test_proteinase_k_is_good_over_a_wide_range(ph):
    """Between pH 7.5 and 11 proteinase K keeps three quarters of its best."""
    assert share("proteinase-k", ph) > 0.75


LIMBS = [
    (
        "thermolysin",
        5.4,
        7.8,
        "Inouye, Lee, Nambu & Tonomura 1997, J. Biochem. 122, 358 (abstract)",
    ),
    ("papain", 4.2, 8.5, "Sluyterman & Wijdenes, proton release of papain (abstract)"),
    ("papain", 4.5, 8.8, "Ascenzi et al., papain on Z-glycine nitrophenyl ester (abstract)"),
]


@pytest.mark.parametrize(
    ("key", "low", "high"),
    [pytest.param(*row[:3], marks=pytest.mark.source("P", row[3])) for row in LIMBS],
)
def test_limbs_of_the_ph_profile_are_the_published_ones(key, low, high):
    """Each published pK lies within one and a quarter standard deviations."""
    for name, measured in (("ph_low_pka", low), ("ph_high_pka", high)):
        middle, sd = spread("enzyme", key, name)
        assert abs(measured - middle) <= 1.25 * sd


# -- tissues --------------------------------------------------------------------------------------


@pytest.mark.source("P", "Maitland & Walsh 1997, Lasers Surg. Med. 20, 310 (abstract)")
def test_single_tendons_melt_faster_than_tissue_but_within_the_spread():
    """Rate and energy of rat tail tendon lie within three standard deviations, and not within one.

    The spread is that between two sources thirty times apart.
    """
    kelvin, energy = 333.15, 89 * CALORIE * 1000
    measured = math.exp(130 - energy / (GAS * kelvin)) * 3600
    rate, factor = spread("material", "tendon", "melting_rate")
    middle, sd = spread("material", "tendon", "melting_energy")

    assert 1 < math.log(measured / rate) / math.log(factor) < 3
    assert 1 < (middle - energy) / sd < 3


@pytest.mark.source("P", "Miles et al. 2005, J. Mol. Biol. 346, 551 (abstract): 65.1 °C on heating")
def test_tendon_melts_at_once_at_its_melting_temperature():
    """At 65 °C a heated tendon is gone within the hour, in the body it is not in a month."""
    (rate, _), (energy, _) = (
        spread("material", "tendon", name) for name in ("melting_rate", "melting_energy")
    )
    at = spread("material", "tendon", "melting_temperature")[0]

    assert rate * float(arrhenius_factor(338.25, energy, at)) > 3
    assert rate * float(arrhenius_factor(310.15, energy, at)) * 30 * 24 < 0.01


@pytest.mark.source("P", DENSITIES)
@pytest.mark.parametrize(
    ("key", "low", "high"),
    [
        ("tendon", 1.13, 1.13),
        ("skin", 1.09, 1.09),
        ("muscle", 1.05, 1.05),
        ("bone", 1.8, 2.2),
        ("tooth", 2.0, 2.2),
    ],
)
def test_densities_are_those_of_the_table(key, low, high):
    """Each density is the table's, or within its range, to 2 %."""
    density = spread("material", key, "density")[0]

    assert 0.98 * low <= density <= 1.02 * high


@pytest.mark.source("P", COMPOSITIONS)
@pytest.mark.parametrize(("key", "matrix"), [("tendon", 0.30), ("cartilage", 0.15 + 0.06)])
def test_the_matrix_of_a_tissue_is_that_of_the_table(key, matrix):
    """Collagen and what goes with it, a gram of wet tissue."""
    assert spread("material", key, "substrate_fraction")[0] == pytest.approx(matrix, abs=0.02)


# -- buffers and reagents -------------------------------------------------------------------------


IONISATIONS = [
    ("tris", 0, 47.45, -59),
    ("hepes", 0, 20.4, 47),
    ("mes", 0, 14.8, 5),
    ("tes", 0, 32.13, 0),
    ("tricine", 0, 31.37, -53),
    ("bicine", 0, 26.34, 0),
    ("acetate", 0, -0.41, -142),
    ("phosphate", 0, -8.0, -141),
    ("citrate", 0, 4.07, -131),
    ("citrate", 1, 2.23, -178),
    ("citrate", 2, -3.38, -254),
]


@pytest.mark.source("P", LISTING)
@pytest.mark.parametrize(("key", "number", "enthalpy", "heat_capacity"), IONISATIONS)
def test_heats_of_ionisation_are_those_of_the_review(key, number, enthalpy, heat_capacity):
    """Enthalpy and heat capacity of each ionisation are the review's, to its last digit but one."""
    acid = library.buffer(key).acids[number]

    assert acid.enthalpy == pytest.approx(enthalpy * 1000, abs=50)
    assert acid.heat_capacity == pytest.approx(heat_capacity, abs=1)


ROWS = {
    "hydrogen chloride": "hydrochloric-acid",
    "nitric acid": "nitric-acid",
    "formic acid": "formic-acid",
    "acetic acid": "acetic-acid",
    "EDTA disodium dihydrate": "edta",
    "Tris": "tris",
    "HEPES": "hepes",
}


@pytest.mark.source("L", "periodictable and molmass, formula masses (molar_masses.csv)")
@pytest.mark.parametrize("substance", ROWS)
def test_formulas_weigh_what_other_libraries_say(reference, substance):
    """The formula in an entry gives the mass that two general libraries give, to 0.01 g/mol."""
    with (reference / "computed" / "molar_masses.csv").open(encoding="utf-8") as file:
        row = next(r for r in csv.DictReader(file) if r["substance"] == substance)
    mass = molar_mass(library.entry(ROWS[substance])[1].formula)

    assert mass == pytest.approx(float(row["periodictable_g_mol"]), abs=0.01)
    assert mass == pytest.approx(float(row["molmass_g_mol"]), abs=0.01)


@pytest.mark.source("P", "Kiviranta 1980, Histochemistry 68, 119: strengths of EDTA (abstract)")
@pytest.mark.parametrize(("percent", "molar"), [(4, 0.11), (8, 0.22), (15, 0.40)])
def test_strengths_of_edta_are_those_of_the_paper(percent, molar):
    """Per cent and molar strengths of EDTA go together as printed (V17)."""
    mass = molar_mass(library.reagent("edta").formula)

    assert float(molarity(percent, mass)) == pytest.approx(molar, rel=0.03)


@pytest.mark.source("P", IONS)
@pytest.mark.parametrize(
    ("section", "key", "cation", "charge", "anion"),
    [
        ("reagent", "hydrochloric-acid", 9.31, 1, 2.03),
        ("reagent", "nitric-acid", 9.31, 1, 1.90),
        ("solute", "salt", 1.33, 1, 2.03),
        ("solute", "calcium", 0.79, 2, 2.03),
    ],
)
def test_salts_diffuse_as_their_ions_do(section, key, cation, charge, anion):
    """Free diffusivities follow from those of the ions (Nernst and Haskell), to 2 %."""
    ideal = (charge + 1) * cation * anion / (charge * cation + anion) * 1e-9
    free = spread(section, key, "free_diffusivity")[0] / 3600

    assert free == pytest.approx(ideal, rel=0.02)


@pytest.mark.source("P", LILLIE)
@pytest.mark.parametrize(("key", "dissolved"), [("formic-acid", 2.5), ("acetic-acid", 0.3)])
def test_weak_acids_dissolve_as_little_as_was_found(key, dissolved):
    """What can be used of an acid is what it dissolves over what mineral acid does (6.5 %)."""
    middle, factor = spread("reagent", key, "usable")

    assert abs(math.log(dissolved / 6.5 / middle)) < 1.645 * math.log(factor)
