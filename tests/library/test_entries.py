"""Every entry of the library: value, spread, source, kind; and constants against outside tables."""

import tomllib
from importlib.resources import files

import pytest

from digestplan import library
from digestplan.kinetics import chelation
from digestplan.kinetics.solution import pk_at
from digestplan.kinetics.stoichiometry import (
    ATOMIC_WEIGHTS,
    PHOSPHATE_PKS,
    mineral_by_share,
    molar_mass,
)
from digestplan.library.load import QUANTITY_KINDS, SOURCE_KINDS
from digestplan.quantities import parse_quantity

HANDBOOK = "E1: Acid Dissociation Constants at 25 °C (open chemistry textbook)"
VEGA = "Vega & Bates 1976, Anal. Chem. 48, 1293 (abstract)"
FILES = ("enzymes", "materials", "buffers", "reagents", "solutes", "storage", "known_runs")
# Conditions at which something holds; all else is a constant and needs a spread.
CONDITIONS = {"reference_temperature", "temperature", "ph", "ratio"}


def table(name):
    """One file of the library as it is written."""
    return tomllib.loads((files("digestplan.library") / f"{name}.toml").read_text("utf-8"))


def values_of(record, path=()):
    """Every value below a record: its path and what stands there."""
    if isinstance(record, list):
        for number, part in enumerate(record):
            yield from values_of(part, (*path, str(number)))
    elif isinstance(record, dict):
        if "value" in record:
            yield path, record
        else:
            for name, part in record.items():
                yield from values_of(part, (*path, name))


VALUES = [
    pytest.param(path, record, id=".".join((name, *path)))
    for name in FILES
    for path, record in values_of(table(name))
]


def kind_of(path):
    """The kind of quantity of a value, by its name or, for a diffusivity, by its table's."""
    return QUANTITY_KINDS.get(path[-1]) or QUANTITY_KINDS.get(path[-2], path[-2])


@pytest.mark.parametrize(("path", "record"), VALUES)
def test_a_value_is_complete(path, record):
    """A value has text, source and kind, and a spread unless it is a condition."""
    quantity = parse_quantity(record["value"], kind_of(path))

    assert record["kind"] in SOURCE_KINDS
    assert set(record) <= {"value", "source", "kind", "range", "note"}
    words = [w for w in record["source"].split() if "://" not in w]
    assert len(" ".join(words)) > 5
    assert path[-1] in CONDITIONS or quantity.distribution != "exact"


@pytest.mark.parametrize("key", library.keys("enzyme"))
def test_an_enzyme_is_complete(key):
    """An enzyme says what it is, over which range it was measured, and what stops it."""
    entry = library.enzyme(key)
    low, high = entry.measured_temperature

    assert entry.organism
    assert entry.ec.startswith("3.4.")
    assert low < entry.values["reference_temperature"].quantity.value <= high
    assert entry.ph_range[0] < entry.ph_range[1]
    assert set(entry.stopped_by) <= {"chelate", "acidify", "alkalise", "inhibit", "heat"}
    assert set(entry.reversible) <= set(entry.stopped_by)
    assert entry.inhibitors
    assert set(entry.storage) == {"dry", "solution", "glycerol"}
    for name in ("activation_energy", "inactivation_rate", "inactivation_energy", "size"):
        assert name in entry.values


@pytest.mark.parametrize("key", library.keys("enzyme"))
def test_only_metal_enzymes_are_stopped_by_a_chelator(key):
    """A chelator stops an enzyme if, and only if, it lives by a metal."""
    entry = library.enzyme(key)

    assert ("chelate" in entry.stopped_by) == (entry.metal is not None)


@pytest.mark.parametrize("key", library.keys("enzyme"))
def test_the_optimum_lies_in_the_range_that_is_given(key):
    """Midway between the two pK an enzyme is inside its own pH range."""
    entry = library.enzyme(key)
    low, high = (entry.values[n].quantity.value for n in ("ph_low_pka", "ph_high_pka"))

    assert entry.ph_range[0] < (low + high) / 2 < entry.ph_range[1]


def test_every_pair_named_exists():
    """Laws, diffusivities and known runs name materials and enzymes that the library has."""
    materials = set(library.keys("material"))
    for key in library.keys("enzyme"):
        entry = library.enzyme(key)
        assert set(entry.laws) <= materials
        assert set(entry.diffusivity) <= materials
    runs = table("known_runs")
    assert set(runs) <= set(library.keys("enzyme"))
    assert {material for of_one in runs.values() for material in of_one} <= materials


RUNS = [(e, m) for e, of_one in table("known_runs").items() for m in of_one]


@pytest.mark.parametrize(("enzyme", "material"), RUNS)
def test_a_known_run_is_complete_and_within_its_enzyme(enzyme, material):
    """A known run has its values with spread, at a temperature and pH that suit its enzyme."""
    run, entry = library.known_run(enzyme, material), library.enzyme(enzyme)
    low, high = entry.measured_temperature

    assert run.kind == "common practice"
    assert len(run.source) > 5
    assert {"ratio", "temperature", "duration", "extent", "thickness", "ph"} <= set(run.values)
    for name, value in run.values.items():
        assert name in CONDITIONS or value.quantity.distribution != "exact"
    assert low <= run.values["temperature"].quantity.value <= high
    assert entry.ph_range[0] <= run.values["ph"].quantity.value <= entry.ph_range[1]


@pytest.mark.parametrize("key", library.keys("reagent"))
def test_a_reagent_is_complete(key):
    """Each reagent has what the shrinking core and the rinse need, and only EDTA chelates."""
    entry = library.reagent(key)
    wanted = {"per_calcium", "usable", "layer_diffusivity", "film_velocity", "free_diffusivity"}

    assert wanted | {"energy"} <= set(entry.values)
    assert entry.chelator == (key == "edta")
    assert entry.strong == (key in {"hydrochloric-acid", "nitric-acid"})
    assert entry.values["layer_diffusivity"].quantity.value < (
        0.5 * entry.values["free_diffusivity"].quantity.value
    )


@pytest.mark.parametrize("key", library.keys("material"))
def test_a_material_is_complete(key):
    """Each material has a substrate fraction and a density; a mineralised one its calcium."""
    entry = library.material(key)

    assert {"substrate_fraction", "density"} <= set(entry.values)
    mineralised = "mineral_fraction" in entry.values
    assert mineralised == ("calcium" in entry.values) == ("carbonate_fraction" in entry.values)


@pytest.mark.parametrize("key", ["bone", "antler", "tooth"])
def test_calcium_mineral_and_density_agree(key):
    """Calcium per volume is that of the mineral's share and the density, within the spreads."""
    values = library.material(key).values
    share, density, calcium, carbonate = (
        values[n].quantity.value
        for n in ("mineral_fraction", "density", "calcium", "carbonate_fraction")
    )
    by_share = float(mineral_by_share(share, carbonate).calcium) * density * 1000

    assert by_share == pytest.approx(calcium, rel=0.12)


@pytest.mark.source("P", "ICRU Report 44, cortical bone: 22.5 % calcium, 1.92 g/mL (from memory)")
def test_bone_holds_the_calcium_of_the_standard_tissue():
    """22.5 % of 1.92 g/mL is 10.8 mol/L."""
    calcium = library.material("bone").values["calcium"].quantity.value

    assert calcium == pytest.approx(0.225 * 1.92 / ATOMIC_WEIGHTS["Ca"] * 1000, rel=0.01)


MASSES = [
    ("hydrochloric-acid", 36.46),
    ("nitric-acid", 63.01),
    ("formic-acid", 46.03),
    ("acetic-acid", 60.05),
    ("citric-acid", 192.12),
    ("edta", 372.24),
]


@pytest.mark.source("P", "Molar masses as printed on labels and in handbooks (from memory)")
@pytest.mark.parametrize(("key", "mass"), MASSES)
def test_formulas_of_reagents_weigh_what_handbooks_print(key, mass):
    """The formula of each reagent gives the printed molar mass."""
    assert molar_mass(library.reagent(key).formula) == pytest.approx(mass, abs=0.011)


BUFFERS = [
    ("tris", 121.14),
    ("hepes", 238.31),
    ("mes", 195.24),
    ("tes", 229.25),
    ("phosphate", 97.99),
    ("acetate", 60.05),
    ("formate", 46.03),
    ("citrate", 192.12),
    ("glycine", 75.07),
    ("bicine", 163.17),
    ("tricine", 179.17),
]


@pytest.mark.source("P", "Molar masses as printed on labels and in handbooks (from memory)")
@pytest.mark.parametrize(("key", "mass"), BUFFERS)
def test_formulas_of_buffers_weigh_what_handbooks_print(key, mass):
    """The formula of each buffer's acid gives the printed molar mass."""
    assert molar_mass(library.buffer(key).formula) == pytest.approx(mass, abs=0.02)


PKS = [
    ("acetate", 0, 4.756),
    ("formate", 0, 3.75),
    ("citrate", 0, 3.13),
    ("citrate", 1, 4.76),
    ("citrate", 2, 6.40),
    ("bicarbonate", 0, 6.35),
    ("bicarbonate", 1, 10.33),
    ("phosphate", 0, 2.16),
    ("phosphate", 1, 7.21),
]


@pytest.mark.source("P", HANDBOOK)
@pytest.mark.parametrize(("key", "number", "pk"), PKS)
def test_pk_of_acids_at_25_degrees(key, number, pk):
    """The pK of each acid is the handbook's to 0.02 (V14)."""
    assert library.buffer(key).acids[number].pk == pytest.approx(pk, abs=0.02)


@pytest.mark.source("P", VEGA)
@pytest.mark.parametrize(("key", "pk"), [("tes", 7.550), ("hepes", 7.565), ("mes", 6.270)])
def test_pk_of_zwitterionic_buffers(key, pk):
    """The pK of TES, HEPES and MES are the measured ones to 0.006 (V15)."""
    assert library.buffer(key).acids[0].pk == pytest.approx(pk, abs=0.006)


@pytest.mark.source("P", "Bates & Acree 1943, J. Res. NBS 30, 129: pK2 of phosphoric acid (memory)")
@pytest.mark.parametrize(("celsius", "pk"), [(20, 7.213), (25, 7.198), (30, 7.189), (40, 7.181)])
def test_pk_of_phosphate_against_temperature(celsius, pk):
    """The second pK of phosphoric acid follows the measured values to 0.003."""
    acid = library.buffer("phosphate").acids[1]
    found = pk_at(celsius + 273.15, acid.pk, acid.enthalpy, acid.heat_capacity)

    assert float(found) == pytest.approx(pk, abs=0.003)


def test_the_library_and_the_kernels_use_the_same_constants():
    """Calcium is reckoned with the very pK and enthalpies of citrate and phosphate."""
    for key, pks, enthalpies in (
        ("citrate", chelation.CITRATE_PKS, chelation.CITRATE_ENTHALPIES),
        ("phosphate", chelation.PHOSPHATE_PKS, chelation.PHOSPHATE_ENTHALPIES),
    ):
        acids = library.buffer(key).acids
        assert [acid.pk for acid in acids] == pytest.approx(list(pks), abs=0.005)
        assert [acid.enthalpy for acid in acids] == pytest.approx(list(enthalpies), abs=1)
    acids = library.buffer("phosphate").acids
    assert [acid.pk for acid in acids] == pytest.approx(list(PHOSPHATE_PKS), abs=0.005)


@pytest.mark.parametrize(("acid", "buffer"), [("formic", "formate"), ("acetic", "acetate")])
def test_an_acid_is_the_acid_of_its_buffer(acid, buffer):
    """The pK of an acid as a reagent is that of the buffer of the same name."""
    reagent = library.reagent(f"{acid}-acid")

    assert reagent.values["pk"].quantity.value == library.buffer(buffer).acids[0].pk
    assert reagent.formula == library.buffer(buffer).formula


def test_a_reagent_is_found_as_people_write_it():
    """Name or key, in any case and with a space."""
    for written in ("hydrochloric acid", "Hydrochloric Acid", "hydrochloric-acid", " EDTA "):
        assert library.reagent(written).formula


def test_an_unknown_key_names_near_ones():
    """A slip of the pen is answered with what it is near to."""
    for find, written, near in (
        (library.enzyme, "tripsin", "trypsin"),
        (library.buffer, "triss", "tris"),
        (library.material, "tendom", "tendon"),
        (library.reagent, "hydrochlorid acid", "hydrochloric-acid"),
        (library.solute, "azid", "azide"),
    ):
        with pytest.raises(library.UnknownKey) as caught:
            find(written)
        assert near in caught.value.near
        assert written.split()[0] in str(caught.value)


def test_no_known_run_of_a_pair_is_none():
    """A pair that nobody has a common practice for has no run."""
    assert library.known_run("papain", "leather") is None
    assert library.known_run("nothing", "at-all") is None
