"""The liquid in which the enzyme really works: pH in the warm, acid carried over, free calcium."""

from math import log10

import numpy as np
import pytest

from digestplan.forecast.chemistry import calcium_left, shifted_ph
from digestplan.forecast.mixture import acids_of, buffer_pk
from digestplan.kinetics.solution import davies_term
from tests.forecast.treatment import bath, codes, digest, forecast_of, plan, rinse

GOLDBERG = "Goldberg, Kishore & Lennen 2002, J. Phys. Chem. Ref. Data 31, 231 (as quoted elsewhere)"
ROOM = 298.15


def soft(*steps, **sample):
    """The forecast of the last of these steps on tendon."""
    return forecast_of(plan(*steps, material="tendon", **sample), 200).steps[-1]


@pytest.mark.source("P", GOLDBERG)
@pytest.mark.parametrize(("celsius", "ph"), [(37, 7.18), (4, 8.14), (25, 7.5)])
def test_tris_moves_with_temperature(celsius, ph):
    """Tris of pH 7.5 at 25 °C reads 7.18 at 37 and 8.14 at 4 °C (V16)."""
    assert soft(digest(celsius)).ph_at_temperature == pytest.approx(ph, abs=0.01)


def test_tris_is_about_a_third_lower_in_the_incubator():
    """Common practice: set at 25 °C, Tris reads about 0.3 lower at 37 °C; set there it does not."""
    warm = soft(digest(37))
    assert soft(digest(25)).ph_at_temperature - warm.ph_at_temperature == pytest.approx(
        0.3, abs=0.05
    )
    assert soft(digest(37, ph_at="37 degC")).ph_at_temperature == pytest.approx(7.5, abs=1e-9)


@pytest.mark.source("P", GOLDBERG)
@pytest.mark.parametrize(
    ("buffer", "ph", "most", "least"),
    [("hepes", 7.5, 0.014, 0.011), ("phosphate", 7.4, 0.0028, 0.001)],
)
def test_other_buffers_move_less(buffer, ph, most, least):
    """Per degree HEPES falls by 0.012 to 0.014 and phosphate by 0.001 to 0.003."""
    moved = soft(digest(37, buffer=buffer, ph=ph, calcium=None)).ph_at_temperature - ph

    assert -12 * most <= moved <= -12 * least


@pytest.mark.source("C", "Henderson and Hasselbalch, with the activity term of Davies")
@pytest.mark.parametrize("acid", [0.001, 0.002, 0.005, 0.008])
def test_acid_uses_up_the_base_of_a_buffer(acid):
    """Strong acid in 50 mM Tris of pH 7.5 turns base into acid, amount for amount."""
    pk = float(buffer_pk("tris", 7.5, ROOM)) + float(davies_term(0.1, ROOM))
    base = 0.05 / (1 + 10 ** (pk - 7.5))
    expected = pk + log10((base - acid) / (0.05 - base + acid))
    tris = acids_of("tris", np.array([0.05]), ROOM)
    moved = shifted_ph(tris, np.array([7.5]), {"hydrochloric-acid": np.array([acid])})

    assert 7.5 + float(moved[0]) == pytest.approx(expected, abs=0.002)


@pytest.mark.source("C", "The same without activities: 1, 2, 5 mM give 7.45, 7.39, 7.17")
@pytest.mark.parametrize(("acid", "ph"), [(0.001, 7.45), (0.002, 7.39), (0.005, 7.17)])
def test_a_few_millimolar_acid_in_tris(acid, ph):
    """Hand arithmetic without activity terms comes out within 0.12."""
    tris = acids_of("tris", np.array([0.05]), ROOM)
    moved = shifted_ph(tris, np.array([7.5]), {"hydrochloric-acid": np.array([acid])})

    assert 7.5 + float(moved[0]) == pytest.approx(ph, abs=0.12)


ML = {"wet": "1.92 g", "sample": 'density = "1.92 g/mL"', "thickness": "1 mm"}


def test_a_millilitre_of_acid_kills_ten_of_buffer():
    """A piece of 1 mL full of 0.5 M acid makes 10 mL of 50 mM Tris sour: told, and nothing runs."""
    text = plan(
        bath("hydrochloric acid", "0.5 M", 20, 300),
        digest(volume="10 mL", buffer_concentration="50 mM", ratio="300 CDU/mg"),
        **ML,
    )
    result = forecast_of(text).steps[1]

    assert result.ph_at_temperature < 3
    assert result.extent_at_end.p95 < 0.05
    assert {"no-rinse", "acid-spoils-buffer", "ph-outside-range"} <= codes(text)


def test_one_more_dilution_makes_it_good():
    """Diluted 25 times by one long rinse (0.02 M left) the same digest keeps its pH to 0.15."""
    steps = (
        bath("hydrochloric acid", "0.5 M", 20, 300),
        rinse(1, "100 h", "24 mL"),
        digest(volume="10 mL", buffer_concentration="50 mM", ratio="300 CDU/mg"),
    )
    rinsed = forecast_of(plan(*steps, **ML)).steps

    assert rinsed[1].carry_over["hydrochloric-acid"] == pytest.approx(0.02, rel=0.05)
    clean = soft(digest(volume="10 mL")).ph_at_temperature
    assert rinsed[2].ph_at_temperature == pytest.approx(clean, abs=0.15)
    assert "acid-spoils-buffer" not in codes(plan(*steps, **ML))


def test_a_stronger_buffer_bears_more():
    """The same acid moves a stronger buffer less."""
    shifts = [
        forecast_of(
            plan(
                bath("hydrochloric acid", "0.5 M", 20, 300),
                rinse(1, "10 min", "5 mL"),
                digest(volume="3 mL", buffer_concentration=f"{mm} mM"),
            )
        )
        .steps[2]
        .ph_at_temperature
        for mm in (10, 50, 200)
    ]

    assert shifts[0] < shifts[1] < shifts[2] < soft(digest()).ph_at_temperature + 1e-9


def test_dissolved_mineral_blunts_the_acid():
    """A nearly spent bath leaves less acid in the piece than a fresh one, but some: phosphoric."""
    fresh, spent = (
        forecast_of(plan(bath("hydrochloric acid", "0.5 M", 20, 500, volume=v), rinse(1, "1 s")), 1)
        .steps[1]
        .carry_over["hydrochloric-acid"]
        for v in ("1 L", "2.4 mL")
    )

    assert 0.01 < spent < 0.5 * fresh


# 5 mM calcium at pH 7.4 and 25 °C beside EDTA: worked out with one set of constants.
CLIFF = [(0.5, 4.5), (1, 4.0), (4, 1.0), (4.9, 0.10), (5.1, 8.5e-4), (6, 8.6e-5), (10, 1.7e-5)]


@pytest.mark.source("C", "Conditional constants of EDTA at pH 7.4 (log K' 7.77), as for V19")
@pytest.mark.parametrize(("edta", "free"), CLIFF)
def test_free_calcium_falls_off_a_cliff_at_one_to_one(edta, free):
    """Free calcium is what EDTA leaves below 1 : 1, and next to nothing above (within 1.5)."""
    result = soft(digest(25, buffer="hepes", ph=7.4, edta=f"{edta} mM"))

    assert 1e3 * result.free_calcium == pytest.approx(free, rel=0.02 if edta < 4.5 else 0.5)


def test_past_the_cliff_collagenase_stands_still():
    """With more EDTA than calcium the enzyme does nothing, and the plan says why."""
    good, bad = (digest(ratio="300 CDU/mg", edta=f"{mm} mM") for mm in (1, 6))

    assert soft(bad).extent_at_end.p95 < 0.05 < soft(good).extent_at_end.p50
    assert "calcium-low" in codes(plan(bad, material="tendon"))
    assert "calcium-low" not in codes(plan(good, material="tendon"))


def test_citrate_and_phosphate_bind_calcium_weakly():
    """Ten millimolar of either takes some of 5 mM calcium, far less than EDTA takes."""
    free = {
        name: soft(digest(25, buffer="hepes", ph=7.4, **{name: "10 mM"})).free_calcium
        for name in ("citrate", "phosphate", "edta")
    }

    assert free["edta"] < free["citrate"] < free["phosphate"] < 5e-3
    assert free["citrate"] > 1e-5


def test_a_phosphate_buffer_counts_as_phosphate():
    """The buffer itself binds calcium, and the precipitate is told."""
    text = plan(digest(buffer="phosphate", ph=7.4, buffer_concentration="50 mM"), material="tendon")

    assert soft(digest(buffer="phosphate", ph=7.4)).free_calcium < 4.9e-3
    assert "phosphate-with-calcium" in codes(text)


def test_what_a_plan_does_not_state_counts_as_one():
    """Without calcium in plan or piece nothing is said of it; a chelator alone leaves none."""
    stated = np.array([0.005])
    nothing = calcium_left(None, {}, {}, 7.4, ROOM)
    traces = calcium_left(None, {}, {"edta": np.array([1e-9])}, 7.4, ROOM)
    chelated = calcium_left(None, {}, {"edta": np.array([1e-3])}, 7.4, ROOM)

    assert nothing is None
    assert traces is None
    assert float(chelated[0]) == 0
    assert float(calcium_left(stated, {}, {}, 7.4, ROOM)[0]) == 0.005


def test_papain_without_a_thiol_is_told():
    """Papain rests until its thiol is reduced; cysteine in the plan settles it."""
    bare = digest(60, ratio="1:100", buffer="mes", ph=6.3, calcium=None)
    with_cysteine = digest(60, ratio="1:100", buffer="mes", ph=6.3, calcium=None, cysteine="5 mM")
    sample = {"enzyme": "papain", "material": "cartilage"}

    assert "thiol-missing" in codes(plan(bare, **sample))
    assert "thiol-missing" not in codes(plan(with_cysteine, **sample))
