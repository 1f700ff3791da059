"""The shrinking core against the textbook's relations, its worked problems and published bone."""

import csv
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.shrinking_core import (
    dimension,
    extent_after,
    film_extent,
    film_progress,
    film_time,
    layer_extent,
    layer_progress,
    layer_time,
    reaction_extent,
    reaction_progress,
    reaction_time,
)

approx = pytest.approx
COMPUTED = Path(__file__).parents[1] / "reference" / "computed"
SHAPES = ("slab", "cylinder", "sphere")
LEVENSPIEL = "Levenspiel, Chemical Reaction Engineering, 3rd ed., ch. 25"
KIVIRANTA = "Kiviranta 1980, Histochemistry 68:119, abstract and tables as seen on a stored page"
SECOND = 1 / 3600  # [h]


def column(name, key):
    with (COMPUTED / name).open(encoding="utf-8") as lines:
        return np.array([float(row[key]) for row in csv.DictReader(lines)])


@pytest.mark.source("C", f"{LEVENSPIEL} (relations from memory), evaluated with 30 digits")
@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("law", ["layer", "reaction"])
def test_progress_follows_the_table(law, shape):
    """Layer and reaction laws give the time at an extent to 13 digits, small extents included."""
    extent = column("shrinking_core.csv", "X")
    expected = column("shrinking_core.csv", f"{law}_{shape}")
    progress = {"layer": layer_progress, "reaction": reaction_progress}[law](extent, shape)
    assert progress == approx(expected, rel=1e-13, abs=1e-15)


@pytest.mark.source("C", f"{LEVENSPIEL} (relations from memory), inverted by bisection")
@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("law", ["layer", "reaction"])
def test_extent_follows_the_table(law, shape):
    """The inverse laws give the extent at a time to ten digits."""
    progress = column("shrinking_core_inverse.csv", "t_over_tau")
    expected = column("shrinking_core_inverse.csv", f"X_{law}_{shape}")
    extent = {"layer": layer_extent, "reaction": reaction_extent}[law](progress, shape)
    assert extent == approx(expected, rel=1e-10)


@pytest.mark.source("P", f"{LEVENSPIEL}: relations at half conversion (from memory)")
@pytest.mark.parametrize(
    ("shape", "layer", "reaction"),
    [("slab", 0.25, 0.5), ("cylinder", 0.153426, 0.292893), ("sphere", 0.110118, 0.206299)],
)
def test_half_of_the_mineral(shape, layer, reaction):
    """Half of the mineral takes the textbook's share of the whole time under each control."""
    assert layer_progress(0.5, shape) == approx(layer, abs=1e-6)
    assert reaction_progress(0.5, shape) == approx(reaction, abs=1e-6)
    assert film_progress(0.5, shape) == 0.5


@pytest.mark.source("P", f"{LEVENSPIEL}, problem on 4 mm and 2 mm particles (from memory)")
def test_two_particle_sizes_tell_the_controlling_step():
    """58 % of a 4 mm and 87.5 % of a 2 mm sphere in one hour mean reaction control."""
    extents = np.array([0.58, 0.875])
    whole = 1 / reaction_progress(extents, "sphere")
    assert whole == approx([3.98, 2.00], rel=0.01)
    assert whole[0] / whole[1] == approx(2, rel=0.01)  # τ in proportion to the radius
    layer = layer_progress(extents, "sphere")
    assert layer[1] / layer[0] == approx(3.2, rel=0.02)  # it would have to be 4
    assert reaction_extent(1 / (whole[0] / 4), "sphere") == approx(1.0)  # 1 mm in that hour


@pytest.mark.source("P", f"{LEVENSPIEL}, zinc blende problem (from memory; part of it seen)")
def test_zinc_blende():
    """A 1 mm sphere of ZnS in 8 % oxygen at 900 °C is roasted in 5434 s."""
    oxygen = 0.08 * 101325 / (8.314462618 * 1173.15) / 1000  # [mol/L]
    given_ = dict(mineral=42.5, per_calcium=1.5, length=1e-3, concentration=oxygen, shape="sphere")
    layer = layer_time(diffusivity=0.08e-4 / SECOND, **given_)
    reaction = reaction_time(surface_rate=0.02 / SECOND, **given_)
    assert layer * 3600 == approx(1598, rel=0.005)
    assert reaction * 3600 == approx(3836, rel=0.005)
    assert layer + reaction == approx(5434 / 3600, rel=0.005)
    assert extent_after(layer + reaction, layer, reaction, 0.0, "sphere") == 1.0


@pytest.mark.source("P", f"{LEVENSPIEL}, reduction of UO3 (from memory)")
def test_uranium_oxide_rejects_the_wrong_law():
    """The reaction law gives one whole time for all readings, the layer law does not."""
    hours = np.array([0.180, 0.347, 0.453, 0.567, 0.733])
    extents = np.array([0.45, 0.68, 0.80, 0.95, 0.98])
    by_reaction = hours / reaction_progress(extents, "sphere")
    by_layer = hours / layer_progress(extents, "sphere")
    assert by_reaction.mean() == approx(1.02, rel=0.02)
    assert by_reaction.std(ddof=1) < 0.1
    assert by_layer[0] / by_layer[-1] > 2


@pytest.mark.source("P", "Ariffin et al. 2019, Cell Tissue Bank 20:527: residual calcium")
def test_femur_rings_follow_the_square_root_of_time():
    """The extent after 24 h in 0.5 M HCl predicts the extent after 40 h (0.62 and 0.81)."""
    whole = 24 / layer_progress(0.62, "slab")
    assert extent_after(40.0, whole, 0.0, 0.0, "slab") == approx(0.81, rel=0.05)


# EDTA at 4 °C in compact bone: 10.8 mol/L calcium, D_e 1.5e-10 m²/s at 25 °C times 0.5279
# (viscosity of water), k_s 9e-8 m/s. These were fitted to the rows below, so that the comparison
# shows what the model can be worth, not that it is right elsewhere.
SLICES = [
    # concentration [mol/L], half thickness [mm], hours observed (low, high), hours computed
    (0.22, 0.15, 24, 24, 24.7),
    (0.22, 0.25, 48, 72, 43.3),
    (0.22, 0.50, 72, 72, 97.3),
    (0.22, 1.00, 120, 120, 237.6),
    (0.40, 0.25, 24, 24, 23.8),
    (0.11, 0.25, 120, 120, 86.5),
]


def slice_hours(concentration, half_mm):
    given_ = (half_mm * 1e-3, concentration, "slab")
    layer = layer_time(10.8, 1.0, 1.5e-10 * 0.5279 / SECOND, *given_)
    return layer + reaction_time(10.8, 1.0, 9e-8 / SECOND, *given_)


@pytest.mark.source("P", f"{KIVIRANTA} (constants fitted to these rows)")
def test_slices_of_bone_in_edta():
    """Six slices are done within ×/÷ 2.5 of the observed time, ×/÷ 1.6 in the root mean square."""
    computed = np.array([slice_hours(c, half) for c, half, *_ in SLICES])
    assert computed == approx(np.array([row[4] for row in SLICES]), rel=0.005)
    observed = np.array([np.sqrt(row[2] * row[3]) for row in SLICES])
    off = np.log(computed / observed)
    assert np.abs(off).max() < np.log(2.5)
    assert np.sqrt((off**2).mean()) < np.log(1.6)


@pytest.mark.source("P", f"{KIVIRANTA}: 0.5 mm slices, 5 days in 0.11 M and 1 day in 0.40 M EDTA")
def test_edta_time_against_concentration():
    """The time goes at least with 1/concentration; the observed ratio is 5, within 1.6."""
    ratio = slice_hours(0.11, 0.25) / slice_hours(0.40, 0.25)
    assert ratio == approx(0.40 / 0.11)
    assert 5 / 1.6 < ratio < 5 * 1.6


@pytest.mark.source("P", "Bogoevski et al. 2019, J Histochem Cytochem 67:545, abstract")
@pytest.mark.parametrize("half_mm", [0.35, 0.5, 0.7])
def test_formic_acid_saves_most_of_the_time_of_edta(half_mm):
    """At 4 °C 10 % formic acid saves about 90 % of the time of 10 % EDTA (5 to 20 times)."""
    formic = layer_time(10.8, 1.4, 2.4e-10 * 0.5279 / SECOND, half_mm * 1e-3, 0.35 * 2.17, "slab")
    assert 5 < slice_hours(0.269, half_mm) / formic < 20


def test_whole_times_from_one_balance():
    """A sphere's film brings in what its volume holds: 4πL²·k·C·b·τ = c·4πL³/3, and so on."""
    z, c, length, conc = 1.7, 10.8, 1e-3, 0.5
    film = film_time(c, z, 0.036, length, conc, "sphere")
    assert 4 * np.pi * length**2 * 0.036 * conc / z * film == approx(c * 4 / 3 * np.pi * length**3)
    reaction = reaction_time(c, z, 0.01, length, conc, "cylinder")
    assert reaction * 0.01 * conc / z == approx(c * length)  # the front moves k·C·b/c an hour
    layer = layer_time(c, z, 1e-6, length, conc, "slab")
    assert layer * 1e-6 * conc / z == approx(c * length**2 / 2)
    assert reaction_time(c, z, np.inf, length, conc, "slab") == 0


def test_no_resistance_is_done_at_once():
    """Without any resistance the first dose dissolves all, and no dose dissolves nothing."""
    for shape in SHAPES:
        assert extent_after(np.array([0.0, 1.0]), 0.0, 0.0, 0.0, shape).tolist() == [0.0, 1.0]


def test_unknown_shape_is_named():
    """A shape that is not known is refused with the names that are."""
    with pytest.raises(ValueError, match="slab, cylinder, sphere"):
        dimension("cube")


times = st.floats(0, 100)


@settings(deadline=None, derandomize=True)
@given(
    st.sampled_from(SHAPES),
    times,
    times,
    times,
    st.lists(st.floats(0, 400), min_size=2, max_size=9),
)
def test_series_of_resistances_and_back(shape, layer, reaction, film, doses):
    """The extent rises with the dose, and needs exactly that dose."""
    dose = np.sort(doses)
    extent = extent_after(dose, layer, reaction, film, shape)
    assert (np.diff(extent) >= -1e-14).all()
    assert ((extent >= 0) & (extent <= 1)).all()
    needed = layer * layer_progress(extent, shape)
    needed = needed + reaction * reaction_progress(extent, shape) + film * extent
    done = dose >= layer + reaction + film
    assert needed[~done] == approx(dose[~done], rel=1e-9, abs=1e-12)
    assert (extent[done & (dose > 0)] == 1).all()


@settings(deadline=None, derandomize=True)
@given(st.sampled_from(SHAPES), st.lists(st.floats(0, 1), min_size=1, max_size=9))
def test_each_law_and_its_inverse(shape, extents):
    """The time to an extent, put into the inverse law, gives the extent back."""
    pairs = [
        (layer_extent, layer_progress),
        (reaction_extent, reaction_progress),
        (film_extent, film_progress),
    ]
    for extent, law in pairs:
        back = extent(law(np.array(extents), shape), shape)
        assert back == approx(np.array(extents), rel=1e-10, abs=1e-15)


@settings(deadline=None, derandomize=True)
@given(st.floats(0, 1))
def test_round_pieces_are_faster_than_slabs(extent):
    """At every extent a sphere needs the least share of a slab's time, a cylinder lies between."""
    for law in (layer_progress, reaction_progress):
        slab, cylinder, sphere = (float(law(extent, shape)) for shape in SHAPES)
        assert slab >= cylinder >= sphere
