"""What is written at a bench becomes the value that it means."""

from datetime import date
from math import inf, nan

import pytest

from digestplan.quantities import KINDS, Quantity, QuantityError, parse_quantity

SYSTEME_INTERNATIONAL = "BIPM, SI Brochure, 9th ed., 2019"


def value(written, kind):
    """The value in the core unit."""
    return parse_quantity(written, kind).value


@pytest.mark.parametrize(
    ("written", "kind", "expected"),
    [
        ("3 mL", "volume", 3.0),
        ("0.5 mg/mL", "enzyme_concentration", 0.5e-3),
        ("37 degC", "temperature", 310.15),
        ("90 min", "time", 1.5),
        ("280 CDU/mg", "activity", 280e3),
        ("15 %", "fraction", 0.15),
        ("1:50", "ratio", 20.0),
        ("37 C", "temperature", 310.15),
        ("37 °C", "temperature", 310.15),
        ("37 ºC", "temperature", 310.15),
        ("37 ℃", "temperature", 310.15),
        ("37 deg C", "temperature", 310.15),
        ("310.15 K", "temperature", 310.15),
        ("-20 degC", "temperature", 253.15),
        ("2h", "time", 2.0),
        ("2 h 30 min", "time", 2.5),
        ("2h30min", "time", 2.5),
        ("1 d 12 h", "time", 36.0),
        ("1 d", "time", 24.0),
        ("1 week", "time", 168.0),
        ("45 s", "time", 0.0125),
        ("4.5e1 s", "time", 0.0125),
        ("5 uL", "volume", 5e-3),
        ("5 µL", "volume", 5e-3),
        ("5 μL", "volume", 5e-3),
        ("5 ul", "volume", 5e-3),
        ("1 mg/ml", "mass_concentration", 1e-3),
        ("10%", "fraction", 0.1),
        ("0.30", "fraction", 0.3),
        ("300 mg/g", "fraction", 0.3),
        ("0.2 mM", "molar_concentration", 2e-4),
        ("5 mmol/L", "molar_concentration", 5e-3),
        ("0.5 M", "reagent_concentration", 0.5),
        ("3e-11 m**2/s", "diffusivity", 1.08e-7),
        ("3e-11 m^2/s", "diffusivity", 1.08e-7),
        ("3e-11 m²/s", "diffusivity", 1.08e-7),
        ("3e-11 m2 s-1", "diffusivity", 1.08e-7),
        ("30 µm²/s", "diffusivity", 1.08e-7),
        ("3 1/h", "rate", 3.0),
        ("3 h-1", "rate", 3.0),
        ("3 h⁻¹", "rate", 3.0),
        ("3/h", "rate", 3.0),
        ("3 h**(-1)", "rate", 3.0),
        ("0.05 min-1", "rate", 3.0),
        ("0.05 mL/(mg h)", "autolysis_rate", 50.0),
        ("0.05 mL/(mg*h)", "autolysis_rate", 50.0),
        ("0.05 mL/(mg·h)", "autolysis_rate", 50.0),
        ("0.05 mL/mg/h", "autolysis_rate", 50.0),
        ("0.05 mL mg-1 h-1", "autolysis_rate", 50.0),
        ("52 kJ/mol", "energy", 52e3),
        ("52 kJ.mol-1", "energy", 52e3),
        ("1.46 kJ/(mol K)", "entropy", 1460.0),
        ("-4 kJ/(mol K)", "heat_capacity", -4000.0),
        ("1.92 g/mL", "density", 1.92),
        ("9600 L/(mol cm)", "extinction", 9600.0),
        ("9600 M-1 cm-1", "extinction", 9600.0),
        ("0.53 /(mM cm)", "extinction", 530.0),
        ("23.3 kDa", "molar_mass", 23300.0),
        ("1.5 mm", "length", 1.5e-3),
        ("180 mg", "mass", 0.18),
        ("2 µm/s", "velocity", 7.2e-3),
        (7.5, "ph", 7.5),
        (-1, "ph", -1.0),
        (3, "count", 3.0),
        ("3", "count", 3.0),
        ("60", "positive_number", 60.0),
        ("-0.8", "number", -0.8),
        ("-0.0", "number", 0.0),
        ("１５ ％", "fraction", 0.15),
    ],
)
def test_plain_values(written, kind, expected):
    """A value is turned into the core unit and rounded once, to the nearest float."""
    quantity = parse_quantity(written, kind)

    assert quantity == Quantity(expected, activity=quantity.activity, text=str(written))


@pytest.mark.source("P", f"{SYSTEME_INTERNATIONAL}, table 8 and section 2.3.1 (from memory)")
@pytest.mark.parametrize(
    ("written", "same", "kind"),
    [
        ("1 min", "60 s", "time"),
        ("1 h", "3600 s", "time"),
        ("1 d", "86400 s", "time"),
        ("1 L", "1000 mL", "volume"),
        ("0 °C", "273.15 K", "temperature"),
        ("1 J/mol", "1e-3 kJ/mol", "energy"),
    ],
)
def test_units_beside_the_international_system(written, same, kind):
    """Units used with the SI have the values of its brochure."""
    assert value(written, kind) == value(same, kind)


@pytest.mark.source(
    "P", "NIST Special Publication 811, 2008, appendix B.8, calorie (th), from memory"
)
def test_the_calorie_is_the_thermochemical_one():
    """One kcal/mol is 4.184 kJ/mol."""
    assert value("1 kcal/mol", "energy") == 4184.0


@pytest.mark.parametrize(
    ("written", "kind", "expected"),
    [
        ("55 kJ/mol ± 5 kJ/mol", "energy", (55e3, 5e3, "normal")),
        ("55 ± 5 kJ/mol", "energy", (55e3, 5e3, "normal")),
        ("55 +/- 5 kJ/mol", "energy", (55e3, 5e3, "normal")),
        ("55 +- 5 kJ/mol", "energy", (55e3, 5e3, "normal")),
        ("(55 ± 5) kJ/mol", "energy", (55e3, 5e3, "normal")),
        ("55 kJ/mol ± 5", "energy", (55e3, 5e3, "normal")),
        ("55 kJ/mol ± 5000 J/mol", "energy", (55e3, 5e3, "normal")),
        ("55 kJ/mol ± 10 %", "energy", (55e3, 5.5e3, "normal")),
        ("0.5 mg/mL ± 10 %", "enzyme_concentration", (5e-4, 5e-5, "normal")),
        ("2 h 30 min ± 10 %", "time", (2.5, 0.25, "normal")),
        ("5 mM ± 10 %", "reagent_concentration", (5e-3, 5e-4, "normal")),
        ("-4 kJ/(mol K) ± 10 %", "heat_capacity", (-4e3, 400.0, "normal")),
        ("0.82 ± 0.06", "active_fraction", (0.82, 0.06, "normal")),
        ("82 ± 6 %", "active_fraction", (0.82, 0.06, "normal")),
        ("82 % ± 6 %", "active_fraction", (0.82, 0.06, "normal")),
        ("7.5 ± 0.1", "ph", (7.5, 0.1, "normal")),
        ("37 ± 0.5 °C", "temperature", (310.15, 0.5, "normal")),
        ("37 degC ± 0.5 degC", "temperature", (310.15, 0.5, "normal")),
        ("37 degC ± 0.5 K", "temperature", (310.15, 0.5, "normal")),
        ("37 C ± 0.5", "temperature", (310.15, 0.5, "normal")),
        ("310 K ± 0.5 °C", "temperature", (310.0, 0.5, "normal")),
        ("2 h 30 min ± 10 min", "time", (2.5, 10 / 60, "normal")),
        ("280 ± 14 CDU/mg", "activity", (280e3, 14e3, "normal")),
        ("0.03 1/h x/ 2", "rate", (0.03, 2.0, "lognormal")),
        ("0.03 1/h ×/ 2", "rate", (0.03, 2.0, "lognormal")),
        ("0.03 1/h x/2", "rate", (0.03, 2.0, "lognormal")),
        ("3e-11 m**2/s x/ 2", "diffusivity", (1.08e-7, 2.0, "lognormal")),
        ("60 x/ 1.5", "positive_number", (60.0, 1.5, "lognormal")),
        ("1:50 x/ 1.5", "ratio", (20.0, 1.5, "lognormal")),
        ("55 ± 0 kJ/mol", "energy", (55e3, 0.0, "exact")),
        ("0.03 1/h x/ 1", "rate", (0.03, 0.0, "exact")),
    ],
)
def test_values_with_a_spread(written, kind, expected):
    """± is a standard deviation, x/ the factor of one geometric standard deviation."""
    quantity = parse_quantity(written, kind)

    assert expected == (quantity.value, quantity.spread, quantity.distribution)


@pytest.mark.parametrize(
    ("written", "kind", "expected"),
    [
        ("6 mg", "charge", (6e-3, None)),
        ("500 CDU", "charge", (500.0, "CDU")),
        ("0.5 kCDU", "charge", (500.0, "CDU")),
        ("2 mg/mL", "enzyme_concentration", (2e-3, None)),
        ("300 U/mL", "enzyme_concentration", (300.0, "U")),
        ("100 CDU/mg", "ratio", (1e5, "CDU")),
        ("20 mg/g", "ratio", (20.0, "mg")),
        ("0.02 g/g", "ratio", (20.0, "mg")),
        ("2 %", "ratio", (20.0, "mg")),
        ("2 % w/w", "ratio", (20.0, "mg")),
        ("1:50", "ratio", (20.0, "mg")),
        ("1 : 50", "ratio", (20.0, "mg")),
        ("1:50 (w/w)", "ratio", (20.0, "mg")),
        ("0.25 % w/v", "enzyme_concentration", (2.5e-3, None)),
        ("0.25 % w/v", "mass_concentration", (2.5e-3, None)),
        ("30 mAU/mg", "activity", (30.0, "AU")),
        ("500 CDU h/g", "dose", (500.0, "CDU")),
        ("500 (CDU h)/g", "dose", (500.0, "CDU")),
        ("40 mg h/g", "dose", (40.0, "mg")),
        ("0.002 g/(CDU h)", "susceptibility", (0.002, "CDU")),
        ("0.002 g/CDU/h", "susceptibility", (0.002, "CDU")),
        ("2 mg/(CDU h)", "susceptibility", (0.002, "CDU")),
        ("0.5 g/(mg h)", "susceptibility", (0.5, "mg")),
        ("10 %", "reagent_concentration", (0.1, "w/v")),
        ("10 % w/v", "reagent_concentration", (0.1, "w/v")),
        ("10% (w/v)", "reagent_concentration", (0.1, "w/v")),
        ("100 g/L", "reagent_concentration", (0.1, "w/v")),
        ("0.5 M", "reagent_concentration", (0.5, None)),
        ("20 mg/mL", "substrate_concentration", (0.02, "w/v")),
    ],
)
def test_what_the_enzyme_or_reagent_is_counted_in(written, kind, expected):
    """The unit in which enzyme or reagent is counted is kept beside the value."""
    quantity = parse_quantity(written, kind)

    assert expected == (quantity.value, quantity.activity)


@pytest.mark.parametrize("kind", KINDS)
def test_every_kind_reads_its_own_example_and_units(kind):
    """Example, core unit and every unit of display of a kind are read as that kind."""
    wanted = KINDS[kind]
    assert parse_quantity(wanted.example, kind).text == wanted.example
    for unit in wanted.display:
        quantity = parse_quantity(f"1 {unit.format('CDU')}", kind)
        assert wanted.allows(quantity.value)
    if not wanted.bare:
        assert value(f"1 {wanted.core_unit.format('CDU')}", kind) == 1.0


@pytest.mark.parametrize("kind", KINDS)
def test_bounds_belong_to_the_kind(kind):
    """A kind allows what lies within its bounds, and the bounds as it says."""
    wanted = KINDS[kind]
    assert wanted.allows(wanted.low) == (wanted.low_inclusive and wanted.low != -inf) or (
        wanted.low == -inf
    )
    assert not wanted.allows(nan)
    assert wanted.low == -inf or not wanted.allows(wanted.low - 1)
    assert wanted.high == inf or not wanted.allows(wanted.high + 1)


@pytest.mark.parametrize("written", [True, False, None, [3], {}, date(2026, 3, 12), b"3 mL"])
def test_other_types_are_refused_in_words(written):
    """Only text and numbers are values; a truth value is neither."""
    with pytest.raises(QuantityError, match="is neither a number nor text; a volume is wanted"):
        parse_quantity(written, "volume")


@pytest.mark.parametrize("written", [nan, inf, -inf, 10**400, -(10**400)])
@pytest.mark.parametrize("kind", ["number", "fraction", "ph", "volume"])
def test_numbers_without_end_are_refused(written, kind):
    """A number that is not finite is no value, whoever parsed it."""
    with pytest.raises(QuantityError, match=r"no finite number|larger than any|has no unit"):
        parse_quantity(written, kind)
