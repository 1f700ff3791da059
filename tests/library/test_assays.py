"""The assays of the library: every value sourced, every unit one that the house knows."""

import pytest

from digestplan import library
from digestplan.lots.assay import WAYS
from digestplan.quantities import ASSAY_UNITS

KEYS = library.keys("assay")


@pytest.mark.parametrize("key", KEYS)
def test_every_value_has_spread_source_and_kind(key):
    """What is measured has a spread, what defines a unit is exact, and all have a source."""
    entry = library.assay(key)
    for name, value in entry.values.items():
        assert value.source
        assert value.kind in library.SOURCE_KINDS
        exact = value.quantity.distribution == "exact"
        assert exact == (name != "extinction"), name


@pytest.mark.parametrize("key", KEYS)
def test_every_assay_gives_a_unit_in_a_way_that_unit_can_be_had(key):
    """Units are among those that the house reads; by absorbance only where that is possible."""
    entry = library.assay(key)
    needed = {
        "extinction": {"extinction"},
        "definition": {"change", "volume", "path"},
        "amount": {"micromoles", "within"},
    }

    assert entry.unit in ASSAY_UNITS
    assert needed[entry.way] <= set(entry.values)
    if entry.way != "amount":
        assert WAYS[entry.unit] == entry.way


def test_one_micromole_a_minute_is_360_units_of_trypsin():
    """Extinction and unit of the ester assay agree with the factor remembered for them."""
    molar = library.assay("baee-molar").values["extinction"].quantity.value
    baee = library.assay("baee").values
    moles = baee["change"].quantity.value / 60 / molar * baee["volume"].quantity.value / 1e3

    assert 1e-6 / moles == pytest.approx(360, rel=0.02)  # from memory


def test_a_label_is_known_to_a_few_percent():
    """What the bottle holds at receipt is its label, with a spread."""
    value = library.label_at_receipt().quantity

    assert value.value == 1
    assert 1.02 < value.spread < 1.3


def test_an_unknown_assay_names_near_ones():
    """A key that is not there is answered with those that may have been meant."""
    with pytest.raises(library.UnknownKey, match="falgpa"):
        library.assay("falgba")
