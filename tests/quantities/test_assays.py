"""Units of activity: each a quantity of its own, unless a definition or a certificate says more."""

import pytest

from digestplan.quantities import (
    ASSAY_UNITS,
    QuantityError,
    parse_conversion,
    parse_quantity,
)
from digestplan.quantities.units import resolve, spellings


def activity(written):
    """Value and unit of a label activity."""
    quantity = parse_quantity(written, "activity")
    return quantity.value, quantity.activity


@pytest.mark.source(
    "P", "International Union of Biochemistry, 1964: 1 U = 16.67 nkat (from memory)"
)
def test_the_enzyme_unit_in_katals():
    """1 U is 16.67 nkat: one µmol a minute, to the four digits that are usually given."""
    per_nanokatal = parse_quantity("1 nkat", "charge").value

    assert 1 / per_nanokatal == pytest.approx(16.67, abs=0.005)


@pytest.mark.source(
    "P", "United States Pharmacopeia 29, Crystallized Trypsin (its 0.003 a minute from memory)"
)
def test_the_trypsin_unit_of_the_pharmacopoeia_is_three_of_baee():
    """The least that crystallised trypsin must have, 2500 units a mg, is 7500 BAEE units a mg."""
    assert activity("2500 USP_U/mg") == activity("7500 BAEE_U/mg") == (7.5e6, "BAEE_U")


@pytest.mark.source("P", "Worthington Enzyme Manual, trypsin assay: 19.2 USP = 57.5 BAEE units")
def test_the_trypsin_unit_against_a_makers_table():
    """A maker's pair of numbers stands in the same ratio, as far as its three digits go."""
    ratio = activity("57.5 BAEE_U/mg")[0] / activity("19.2 USP_U/mg")[0]

    assert ratio == pytest.approx(1.0, abs=0.05 / 19.2)


@pytest.mark.parametrize("one", ASSAY_UNITS)
def test_one_assay_is_never_converted_into_another(one):
    """A value in a unit of activity keeps it, and no other unit has its dimension."""
    assert activity(f"1 {one}/g") == (1.0, one)
    for other in ASSAY_UNITS.keys() - {one}:
        assert resolve(one).dimensions != resolve(other).dimensions
        with pytest.raises(QuantityError, match="spread in another unit"):
            parse_quantity(f"1 {one}/g ± 1 {other}/g", "activity")


@pytest.mark.parametrize("name", ASSAY_UNITS)
def test_every_unit_of_activity_says_what_defines_it(name):
    """Each has a definition, a source, a word in the table, and its equal is its equal."""
    unit = ASSAY_UNITS[name]

    assert unit.name == name
    assert unit.name in spellings()
    assert len(unit.definition) > 20
    assert len(unit.source) > 10
    assert unit.also is None or resolve(unit.also).assay == name


def test_every_unit_of_activity_in_the_table_is_told():
    """No dimension of the table is a unit of activity that nobody explains."""
    known = {"mass", "length", "time", "substance", "temperature", *ASSAY_UNITS}
    words = spellings() - {"percent_wv"}

    assert {name for word in words for name, _ in resolve(word).dimensions} == known


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("1 CDU = 0.011 FALGPA_U", ("CDU", "FALGPA_U", 0.011)),
        ("1 CDU=0.011 FALGPA_U", ("CDU", "FALGPA_U", 0.011)),
        ("100 CDU = 1.1 FALGPA_U", ("CDU", "FALGPA_U", 1.1 / 100)),
        ("1 kU = 3 CDU", ("U", "CDU", 0.003)),
        ("2 nkat = 6 CDU", ("U", "CDU", 6 / 0.12)),
        ("1 CDU = 2 USP_U", ("CDU", "BAEE_U", 6.0)),
        ("1 mAU = 1 PNA_U", ("AU", "PNA_U", 1000.0)),
    ],
)
def test_factors_of_a_certificate(text, expected):
    """A certificate's equation gives how many of one unit there are in one of the other."""
    one, other, factor = parse_conversion(text)

    assert (one, other) == expected[:2]
    assert factor == pytest.approx(expected[2], rel=1e-15)


@pytest.mark.parametrize(
    ("text", "reason"),
    [
        ("1 U = 16.67 nkat", "between units of one quantity, U"),
        ("1 USP_U = 2.9 BAEE_U", "between units of one quantity, BAEE_U"),
        ("1 mg = 280 CDU", "which is no unit of activity"),
        ("1 CDU/mg = 2 U/mg", "is no equation of two amounts"),
        ("1 CDU = 2 XX", "which is none of U, CDU"),
        ("CDU = 2 U", "is no equation"),
        ("1 CDU = 0 U", "not above zero"),
        ("1 CDU = -2 U", "not above zero"),
        ("1 CDU = 2 U = 3 WU", "is no equation"),
        ("1 CDU = 2 ± 0.1 U", "is no equation"),
        ("1 CDU = 0,011 FALGPA_U", 'write "1 CDU = 0.011 FALGPA_U"'),
        ("1e-300 CDU = 1e300 U", "gives a factor that cannot be"),
        ("", "is empty"),
        (3, "is no text"),
    ],
)
def test_what_is_no_factor_is_refused(text, reason):
    """Anything else is refused, with an example of an equation."""
    with pytest.raises(QuantityError, match="a factor between two activity units is") as refused:
        parse_conversion(text)
    assert reason in refused.value.message
