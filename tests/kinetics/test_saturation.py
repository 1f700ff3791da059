"""When calcium phosphate comes out, and what weak acids can hold."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from digestplan.kinetics.chelation import (
    DIHYDROGEN_PHOSPHATE_CALCIUM,
    PHOSPHATE_PKS,
    form_share,
    free_metal,
    phosphate_constant,
    phosphate_pks,
)
from digestplan.kinetics.saturation import STRONG, brushite_index, calcium_at_saturation
from digestplan.kinetics.solution import Buffer, davies_term
from digestplan.kinetics.stoichiometry import molar_mass

approx = pytest.approx
LILLIE = "Decalcification of bone in relation to staining and phosphatase technics, abstract"


def grams(calcium):
    """Ca3(PO4)2 in g/L."""
    return calcium / 3 * molar_mass("Ca3(PO4)2")


@pytest.mark.source("C", "Brushite −6.59 (from memory), Davies activities, no ion pairs")
def test_brushite_in_phosphate_buffer():
    """10 mmol/L phosphate at pH 7.4 is supersaturated from about 0.3 mmol/L calcium."""
    calcium = np.array([0.1, 0.5, 1, 2, 5]) / 1000
    index = brushite_index(calcium, 0.010, 7.4, 0.16)
    assert index == approx(np.array([-0.48, 0.21, 0.52, 0.82, 1.21]), abs=0.01)
    assert brushite_index(0.3e-3, 0.010, 7.4, 0.16) == approx(0, abs=0.02)
    assert brushite_index(0.0, 0.010, 7.4, 0.16) == -np.inf


@pytest.mark.source("P", f"{LILLIE}: 1 N mineral acids dissolve about 6.5 % calcium phosphate")
def test_mineral_acid_is_used_up():
    """A mineral acid is used up before it is saturated."""
    calcium, ph = calcium_at_saturation(1.0, STRONG)
    assert grams(calcium) == approx(65, rel=0.2)
    assert ph == approx(2.5, abs=0.3)


@pytest.mark.source("P", f"{LILLIE}: formic acid about 2.5 %, acetic acid about 0.3 %")
@pytest.mark.parametrize(
    ("pk", "pair", "published", "factor"), [(3.75, 1.4, 25, 1.5), (4.756, 1.2, 3, 5)]
)
def test_weak_acid_is_saturated_early(pk, pair, published, factor):
    """1 N formic acid holds 25 g/L within 1.5, acetic acid 3 g/L within 5."""
    calcium, _ = calcium_at_saturation(1.0, pk, pair)
    assert published / factor < grams(calcium) < published * factor
    usable = calcium * 1.4  # acid per calcium
    assert usable < 0.5


@pytest.mark.source("C", "Brushite, Davies activities and ion pairs, summed elsewhere")
def test_saturation_as_summed_elsewhere():
    """The same sum gives 3.2 and 1.2 %, and pH 3.3 and 3.8 at the end."""
    for pk, pair, percent, end in ((3.75, 1.4, 3.2, 3.3), (4.756, 1.2, 1.2, 3.8)):
        calcium, ph = calcium_at_saturation(1.0, pk, pair)
        assert grams(calcium) / 10 == approx(percent, abs=0.05)
        assert ph == approx(end, abs=0.05)


@pytest.mark.parametrize("acid", [0.2, 1.0])
def test_saturated_bath_is_in_equilibrium(acid):
    """Put together from its totals by the other formulas, the bath is saturated and neutral."""
    calcium, ph = calcium_at_saturation(acid, STRONG)
    phosphate, strength = calcium / 1.5, 0.3
    for _ in range(100):
        free = float(free_metal(calcium, phosphate, phosphate_constant(ph, strength)))
        unbound, term = phosphate - (calcium - free), davies_term(strength, 298.15)
        once = form_share(ph, phosphate_pks(strength), 1)
        pair = free * unbound * once * 10 ** (DIHYDROGEN_PHOSPHATE_CALCIUM - 4 * term)
        charge, square = Buffer(unbound, PHOSPHATE_PKS).charges(np.asarray(ph), term)
        proton = 10 ** (term - ph)
        strength = float(4 * free + pair + acid + proton + unbound * square) / 2
    assert brushite_index(free, unbound, ph, strength) == approx(0, abs=1e-5)
    assert 2 * free + pair + proton + unbound * charge == approx(acid, rel=1e-5)


@settings(deadline=None, derandomize=True, max_examples=6)
@given(st.floats(0.1, 2), st.floats(2, 5))
def test_a_weaker_acid_holds_less(concentration, pk):
    """More acid holds more, a weaker one less, and none more than its protons allow."""
    calcium, ph = calcium_at_saturation(concentration, pk)
    assert calcium_at_saturation(concentration, pk + 0.3)[0] < calcium
    assert calcium_at_saturation(concentration * 1.2, pk)[0] > calcium
    assert calcium * 2 / 1.5 <= concentration * 1.01
    assert 1 < ph < 7
