"""The default runs: planned again, each takes as long as it says; keys; what is found by a key."""

import tomllib
from importlib.resources import files

import pytest

from digestplan import library
from digestplan.forecast.run import forecast
from digestplan.library.cautions import cautions
from digestplan.plan.read import parse_plan
from digestplan.quantities import ASSAY_UNITS

RAW = tomllib.loads((files("digestplan.library") / "known_runs.toml").read_text("utf-8"))
PAIRS = [(enzyme, material) for enzyme, runs in RAW.items() for material in runs]
AGAIN = """
digestplan = 1
[sample]
material = "{material}"
wet_mass = "100 mg"
shape = "slab"
thickness = "{thickness}"
target_extent = {extent}
[lot]
enzyme = "{enzyme}"
label_activity = "{label}"
[[steps]]
do = "digest"
ratio = "{ratio}"
volume = "5 mL"
ph = {ph}
ph_at = "{temperature}"
calcium = "5 mM"
cysteine = "{cysteine}"
lag = "0 min"
temperature = "{temperature}"
for = "60 h"
"""


def plain(text):
    """A value without its spread."""
    return str(text).split(" x/")[0].split(" ±")[0]


def hours_again(enzyme, material):
    """Median hours that a plan needs which repeats a default run."""
    entry = library.enzyme(enzyme)
    run = {name: plain(item) for name, item in RAW[enzyme][material].items()}
    label = plain(entry.values["label_activity"].text)
    text = AGAIN.format(
        enzyme=enzyme,
        material=material,
        label=label,
        cysteine="5 mM" if entry.thiol else "0 mM",
        **run,
    )
    return forecast(parse_plan(text, "plan.toml"), n_draws=300).steps[0].hours_to_target.p50


@pytest.mark.parametrize(("enzyme", "material"), PAIRS)
def test_a_default_run_planned_again_takes_as_long_as_it_says(enzyme, material):
    """The median of a plan that repeats the run is the run's duration, to 15 %."""
    duration = library.known_run(enzyme, material).values["duration"].quantity.value

    assert hours_again(enzyme, material) == pytest.approx(duration, rel=0.15)


def test_what_must_penetrate_has_a_diffusivity_for_each_of_its_runs():
    """Trypsin and the like enter every tissue they have a run on, but for thin sections."""
    for enzyme, material in PAIRS:
        entry = library.enzyme(enzyme)
        if entry.values["size"].quantity.value < 50_000 and material != "fixed-section":
            assert material in entry.diffusivity, (enzyme, material)


def test_a_collagenase_does_not_enter_dense_collagen():
    """The large enzyme eats dense collagen from its surface; what enters follows no such law."""
    laws = library.enzyme("clostridial-collagenase").laws

    for material in ("tendon", "skin", "leather", "demineralised-bone"):
        assert laws[material] == "erosion"
    assert not library.enzyme("clostridial-collagenase").diffusivity
    assert not library.enzyme("trypsin").laws


def test_small_enzymes_move_faster_than_large_ones_and_faster_in_looser_tissue():
    """Diffusivity falls from cartilage to tendon to demineralised bone."""
    for key in ("trypsin", "pepsin", "proteinase-k"):
        inside = library.enzyme(key).diffusivity
        loose, dense, bone = (
            inside[name].quantity.value for name in ("cartilage", "tendon", "demineralised-bone")
        )
        assert loose > dense > bone


def test_keys_are_unique_over_all_sections():
    """No key means two things, whatever section it stands in and however it is written."""
    every = [key.lower() for key in library.keys("entry")]

    assert len(every) == len(set(every))


@pytest.mark.parametrize("key", library.keys("entry"))
def test_every_key_is_found_whatever_it_is(key):
    """An entry is found by its key alone, in the section that lists it."""
    section, entry = library.entry(key)

    assert entry.key == key
    assert key in library.keys(section)


def test_an_unknown_key_of_no_section_names_near_ones():
    """A slip of the pen without a section is answered from all of them."""
    with pytest.raises(library.UnknownKey) as caught:
        library.entry("tendn")

    assert "tendon" in caught.value.near


def test_units_are_found_with_their_definitions():
    """Each unit of activity says what one of it does and who defines it; case is told."""
    for key in ASSAY_UNITS:
        assert len(library.unit(key).definition) > 20
        assert len(library.unit(key).source) > 10
    with pytest.raises(library.UnknownKey, match="FALGPA_U"):
        library.unit("falgpa_u")


@pytest.mark.parametrize("key", library.keys("enzyme"))
def test_an_enzyme_brings_cautions_of_the_table_and_a_label_of_its_unit(key):
    """Hazards are codes that exist, all are powders; a usual label is in the unit that it names."""
    entry = library.enzyme(key)

    assert "protease-powder" in entry.hazards
    assert set(entry.hazards) <= set(cautions())
    assert entry.values["label_activity"].text.split(" x/")[0].endswith(entry.label)
